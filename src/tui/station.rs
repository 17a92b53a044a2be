//! What this station is set to, and the history of one value.

use crate::actions::{StationRole, Unsettled, ValueEntry};
use crate::domain::age::spoken;
use crate::domain::field::Field;
use crate::domain::screening_test::ScreeningTest;
use crate::tui::app::{App, Effect, Request, Tone};
use crate::tui::prompt::{Ask, Form, Prompt, listed};
use crate::tui::text::{name, safe};

impl App {
    /// Takes the new setting of this station; the day is read again with its chart.
    pub(crate) fn station_set(&mut self, role: StationRole) -> Vec<Effect> {
        let masked = if role.masked { ", masked" } else { "" };
        let chart = role
            .chart
            .as_ref()
            .map_or(String::new(), |c| format!(", chart {}", safe(&c.name)));
        self.say(
            Tone::Quiet,
            format!(
                "station {}: {}{masked}{chart}",
                safe(&role.name),
                role.task
                    .map_or("the whole screening", ScreeningTest::title)
            ),
        );
        self.session.role = role;
        match &mut self.day {
            Ok(day) => {
                let mut effects = day.keep_draft();
                effects.push(Effect::FlushDrafts);
                effects.push(Effect::ask(Request::LoadDay((*day.info).clone())));
                effects
            }
            Err(_) => Vec::new(),
        }
    }

    /// Asks for the history of the value under the cursor.
    pub(crate) fn ask_value_history(&mut self) -> Vec<Effect> {
        let bench = self.day.as_ref().ok().and_then(|d| d.bench.as_ref());
        let words = match bench {
            None => "no child is on the bench",
            Some(bench) => match (&bench.signed, bench.field()) {
                (Some(visit), Some(field)) => {
                    return vec![Effect::ask(Request::ValueHistory(visit.id, field))];
                }
                (Some(_), None) => "go to a value first, with the arrows",
                (None, _) => {
                    "a value has a history from its signature on; Ctrl-Z undoes until then"
                }
            },
        };
        self.say(Tone::Attention, words);
        Vec::new()
    }

    /// Asks which of the values that differ between stations stands; says whether there are any.
    pub(crate) fn ask_settle(&mut self) -> bool {
        let bench = self.day.as_ref().ok().and_then(|d| d.bench.as_ref());
        let differing = bench.and_then(|b| b.unsettled(b.field()?));
        let Some(Unsettled { field, values, .. }) = differing.cloned() else {
            return false;
        };
        let choices = listed(values.into_iter().zip('1'..='9').map(|(value, key)| {
            let label = format!("use this one: {}", safe(&value));
            (key, label, value)
        }));
        self.prompt = Some(Prompt::choices(
            Ask::Settle(field),
            format!("{}: the stations differ, which stands?", field.title()),
            choices,
        ));
        true
    }

    /// Asks for the reason of a choice between stations.
    pub(crate) fn ask_settle_why(&mut self, field: Field, value: &str) {
        self.prompt = Some(Prompt::form(
            Ask::SettleWhy(field, value.to_owned()),
            format!("{}: {} stands", field.title(), safe(value)),
            Form::new(&[("reason", "asked at the other station", false)]),
        ));
    }

    /// Shows every value that a field had.
    pub(crate) fn show_value_history(&mut self, field: Field, entries: &[ValueEntry]) {
        let Some(bench) = self.day.as_ref().ok().and_then(|d| d.bench.as_ref()) else {
            return;
        };
        let who = name(&bench.child.family_name, &bench.child.given_name);
        let mut lines: Vec<String> = entries.iter().flat_map(entry_lines).collect();
        if lines.is_empty() {
            lines.push("Nothing was ever recorded here.".into());
        }
        self.prompt = Some(Prompt::page(format!("{who}: {}", field.title()), lines));
    }
}

fn entry_lines(entry: &ValueEntry) -> Vec<String> {
    let at = |moment: crate::clock::Moment| {
        format!(
            "{} {}",
            moment.date().map(spoken).unwrap_or_default(),
            crate::tui::view::wall_clock(moment.utc_ms, moment.offset_minutes)
        )
    };
    let by = |who: &str| {
        if who.is_empty() {
            "nobody named".to_owned()
        } else {
            safe(who)
        }
    };
    let mut lines = vec![format!(
        "{}{}   try {} · {} · {}",
        safe(&entry.value),
        if entry.ended.is_none() { "  holds" } else { "" },
        entry.try_no,
        at(entry.at),
        by(&entry.screener)
    )];
    if let Some((reason, who, when)) = &entry.ended {
        lines.push(format!(
            "   corrected {} by {}: {}",
            at(*when),
            by(who),
            safe(reason)
        ));
    }
    lines
}
