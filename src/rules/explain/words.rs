//! Small words: criteria, margins, sources.

use crate::domain::codes::{History, SignKind};
use crate::domain::outcome::{Basis, Margin, Reason, Source};
use crate::domain::readings::Hundredths;
use crate::domain::refraction::Diopters;
use crate::rules::threshold::split_band;

/// Returns a criterion's id in words: `line.60+` is "line, 60 months and over".
pub fn criterion_words(id: &str) -> String {
    let (finding, band) = split_band(id);
    let finding = match finding {
        "between-eyes" => "between the eyes".to_owned(),
        "near" => "near line".to_owned(),
        "media-opacity" => "media opacity".to_owned(),
        other => SignKind::from_word(other)
            .map(SignKind::title)
            .or_else(|| History::from_word(other).map(History::title))
            .map_or_else(|| other.replace(['_', '.', '-'], " "), str::to_owned),
    };
    match band {
        None => finding,
        Some(band) if band.ends_with('+') => {
            format!("{finding}, {} months and over", band.trim_end_matches('+'))
        }
        Some(band)
            if band.starts_with(|c: char| c.is_ascii_alphabetic())
                || band.starts_with('0') && band.len() == 5 =>
        {
            format!("{finding}, grade {band}")
        }
        Some(band) => format!("{finding}, {} months", band.replace('-', " to ")),
    }
}

/// Returns how well a number is known, in words, and who approved it where it is local.
pub fn basis_words(source: &Source) -> String {
    let words = match source.basis {
        Basis::Secondary => format!("as quoted in {}", source.quoted_in),
        basis => basis.title().to_owned(),
    };
    if source.approval.is_empty() {
        words
    } else {
        format!("{words}; {}", source.approval)
    }
}

/// Returns a source with its basis: citation, how it was read.
pub fn source_words(source: &Source) -> String {
    if source.basis == Basis::Practice {
        return if source.approval.is_empty() {
            source.citation.clone()
        } else {
            format!("{} ({})", source.citation, source.approval)
        };
    }
    let locator = if source.locator.is_empty() {
        String::new()
    } else {
        format!(", {}", source.locator)
    };
    format!("{}{locator} ({})", source.citation, basis_words(source))
}

/// Returns the distance to the threshold in words; empty where there is none.
pub fn margin_words(reason: &Reason) -> String {
    let (size, unit) = match reason.margin {
        Margin::None => return String::new(),
        Margin::Steps(n) if reason.criterion.starts_with("between-eyes") => (
            n,
            format!("{} step{}", n.abs(), if n.abs() == 1 { "" } else { "s" }),
        ),
        Margin::Steps(n) => (
            n,
            format!("{} line{}", n.abs(), if n.abs() == 1 { "" } else { "s" }),
        ),
        Margin::Diopters(n) => (n, diopters_past(n)),
        Margin::Millimetres(n) => (n, format!("{} mm", Hundredths(n.abs()))),
        Margin::PrismDiopters(n) => (
            n,
            format!(
                "{} prism dioptre{}",
                Hundredths(n.abs()),
                if n.abs() == 100 { "" } else { "s" }
            ),
        ),
        Margin::Count(n) => (
            n,
            format!("{} answer{}", n.abs(), if n.abs() == 1 { "" } else { "s" }),
        ),
        Margin::LogMar(n) => (
            n,
            format!("{} logMAR", crate::domain::acuity::LogMar(n.abs())),
        ),
    };
    let line =
        matches!(reason.margin, Margin::Steps(_)) && !reason.criterion.starts_with("between-eyes");
    let counted = matches!(reason.margin, Margin::Count(_));
    match size {
        0 if line => "at the line".to_owned(),
        0 => "at the limit".to_owned(),
        n if n < 0 && (line || counted) => format!("{unit} short"),
        n if n < 0 => format!("{unit} over"),
        _ => format!("{unit} to spare"),
    }
}

/// Returns a distance in dioptres. Readings are hundredths, so that one thousandth past one is all that
/// lies above it.
fn diopters_past(margin: i32) -> String {
    let size = margin.abs();
    if size % 10 == 1 {
        format!("more than {} D", Diopters(size - 1).unsigned().trim())
    } else {
        format!("{} D", Diopters(size).unsigned().trim())
    }
}

/// Returns how soon to act, in words.
pub(in crate::rules) fn act_words(days: u32) -> String {
    match days {
        0 => "act today".to_owned(),
        1 => "act within 1 day".to_owned(),
        days => format!("act within {days} days"),
    }
}

/// Returns a rule set's id as words: `iapb-school-6-9` is "IAPB school 6/9".
pub(super) fn set_words(id: &str) -> String {
    let mut out = String::new();
    let mut before = "";
    for word in id.split('-') {
        let number = |w: &str| w.len() <= 2 && w.bytes().all(|b| b.is_ascii_digit());
        if !out.is_empty() {
            out.push(if number(before) && number(word) {
                '/'
            } else {
                ' '
            });
        }
        match word {
            "us" | "uk" | "iapb" | "nsw" => out.push_str(&word.to_uppercase()),
            _ => out.push_str(word),
        }
        before = word;
    }
    out
}
