//! What stands in a field, in words.

use ratatui::style::Style;

use crate::domain::age::spoken;
use crate::domain::codes::{Correction, History};
use crate::domain::field::Field;
use crate::domain::readings::Readings;
use crate::tui::day::bench::{Bench, State};
use crate::tui::day::kind::{self, AcuityOf, Kind};
use crate::tui::text::safe;
use crate::tui::theme::Theme;

/// Returns what stands in a field.
pub fn cell(field: Field, bench: &Bench, here: bool, theme: Theme) -> (String, Style) {
    let raw = bench.raw(field);
    let plain = Style::new();
    if here && matches!(kind::kind(field), Kind::Acuity | Kind::Text) && !raw.starts_with("NT:") {
        let rest = if raw.is_empty() { "____" } else { "" };
        return (format!("{}{rest}", safe(bench.typed(field))), theme.focus());
    }
    let focus = |style| if here { theme.focus() } else { style };
    if let Some(differing) = bench.unsettled(field) {
        let words: Vec<String> = differing.values.iter().map(|v| safe(v)).collect();
        return (
            format!("{} ?", words.join(" or ")),
            focus(theme.attention()),
        );
    }
    match bench.state(field) {
        State::Invalid { .. } => (format!("{} ?", safe(raw)), theme.error()),
        State::Empty if bench.signed_elsewhere(field).is_some() => {
            let words = bench.signed_elsewhere(field).unwrap_or_default();
            (format!("{words}, signed"), focus(theme.muted()))
        }
        State::Empty => match field {
            Field::CorrectionWorn => match (bench.roster_correction(), bench.child.wears_glasses) {
                (Some(Correction::None), _) => ("owns no glasses (roster)".into(), focus(plain)),
                (_, Some(true)) => (
                    "owns glasses (roster): worn today?".into(),
                    focus(theme.attention()),
                ),
                _ => ("not known: ask".into(), focus(theme.attention())),
            },
            Field::Signs if bench.will_state_no_signs() => {
                ("none seen, said on signing".into(), focus(theme.muted()))
            }
            Field::Signs if bench.earlier.iter().any(|t| t.signs.is_some()) => {
                ("as in the try before".into(), focus(theme.muted()))
            }
            Field::Signs => ("not looked for".into(), focus(theme.muted())),
            _ if bench.carried(field).is_some() && !here => {
                let carried = bench.carried(field);
                let words = carried.map_or(String::new(), |(text, on)| {
                    format!("{} on {}", safe(&text), spoken(on))
                });
                (words, theme.muted())
            }
            _ if here => ("____".into(), theme.focus()),
            _ => ("·".into(), theme.muted()),
        },
        State::Valid { .. } if bench.shows_as_typed(field) => {
            (safe(bench.typed(field)), focus(theme.strong()))
        }
        State::Valid { .. } => (
            value_words(&bench.readings, field, raw),
            focus(theme.strong()),
        ),
    }
}

/// Returns a recorded value in words.
pub fn value_words(readings: &Readings, field: Field, raw: &str) -> String {
    if let Some(result) = readings.acuity_of(field) {
        return result.in_words();
    }
    match kind::kind(field) {
        Kind::Choice(choices) => choices
            .iter()
            .find(|(_, word, _)| *word == raw)
            .map_or_else(|| safe(raw), |(_, _, title)| (*title).to_owned()),
        Kind::List if raw == "none" => if field == Field::Signs {
            "none seen"
        } else {
            "none"
        }
        .into(),
        Kind::List if field == Field::Signs => readings
            .signs
            .iter()
            .flatten()
            .map(|s| sign_words(*s))
            .collect::<Vec<_>>()
            .join("; "),
        Kind::List => readings
            .history
            .iter()
            .flatten()
            .map(|h: &History| h.title())
            .collect::<Vec<_>>()
            .join("; "),
        _ => safe(raw),
    }
}

/// Returns a sign in words (`white pupil, left eye`).
pub fn sign_words(sign: crate::domain::readings::Sign) -> String {
    match sign.side {
        Some(side) => format!("{}, {}", sign.kind.title(), side.title()),
        None => sign.kind.title().to_owned(),
    }
}
