//! A comparison in words and tables.

use std::fmt::Write;

use super::{Comparison, Counts, Side, Subject, Tally, Verdict};
use crate::stats::intervals::wilson;

/// How sure the intervals are.
const CONFIDENCE: f64 = 0.95;

/// Writes `12/347 3.5% (2.0–5.9)`: the share with Wilson's 95% interval.
pub fn share(k: u64, n: u64) -> String {
    match wilson(k, n, CONFIDENCE) {
        Some(interval) => format!(
            "{k}/{n} {:.1}% ({:.1}–{:.1})",
            100.0 * k as f64 / n as f64,
            100.0 * interval.low,
            100.0 * interval.high
        ),
        None => format!("{k}/{n}"),
    }
}

/// Returns a comparison as lines: who is referred by which, who flips, by age and site, and what it
/// means in examinations.
pub fn report(comparison: &Comparison, subjects: &[Subject], on: &str) -> Vec<String> {
    let [a, b] = comparison.ids();
    let tally = comparison.tally();
    let n = tally.all.children();
    let mut out = vec![
        format!("{a} and {b} on {n} children of {on}"),
        "Shares are n/N with Wilson's 95% interval; a pass is no examination.".to_owned(),
        String::new(),
    ];
    if n == 0 {
        out.push("There is no child to compare them on.".to_owned());
        return out;
    }
    out.extend(whole(&tally, [&a, &b]));
    out.push(String::new());
    for (title, groups) in [("By age", &tally.by_age), ("By site", &tally.by_site)] {
        if title == "By site" && groups.iter().all(|(name, _)| name.is_empty()) {
            continue;
        }
        out.extend(grouped(title, groups, [&a, &b]));
        out.push(String::new());
    }
    let flips = comparison.flips();
    out.push(format!("Children who flip: {}", flips.len()));
    for flip in flips {
        let subject = &subjects[flip.place];
        out.push(format!(
            "{}  {}  {a} {}, {b} {}  {}",
            who(subject, flip.place),
            subject
                .age
                .map_or_else(|| "age not known".to_owned(), |a| a.to_string()),
            flip.a.word(),
            flip.b.word(),
            readings(subject)
        ));
    }
    out
}

fn who(subject: &Subject, place: usize) -> String {
    match (subject.child_id.is_empty(), subject.name.is_empty()) {
        (true, _) => format!("row {}", place + 1),
        (false, true) => subject.child_id.clone(),
        (false, false) => format!("{} {}", subject.child_id, subject.name),
    }
}

/// Returns what was read of a child, as fields.
pub(super) fn readings(subject: &Subject) -> String {
    subject
        .readings
        .recorded()
        .into_iter()
        .map(|(field, value)| format!("{}={value}", field.word()))
        .collect::<Vec<_>>()
        .join(" ")
}

fn whole(tally: &Tally, ids: [&str; 2]) -> Vec<String> {
    let n = tally.all.children();
    let width = ids.iter().map(|i| i.len()).max().unwrap_or(0);
    let mut out = Vec::new();
    for (side, id) in Side::BOTH.into_iter().zip(ids) {
        let of = |verdict| share(tally.all.of(side, verdict), n);
        let mut line = format!("{id:width$}  refers {}", of(Verdict::Refer));
        if tally.all.of(side, Verdict::Rescreen) > 0 {
            line.push_str("; screens again ");
            line.push_str(&of(Verdict::Rescreen));
        }
        if tally.all.of(side, Verdict::Incomplete) > 0 {
            line.push_str("; cannot say ");
            line.push_str(&of(Verdict::Incomplete));
        }
        out.push(line);
    }
    for (side, id) in Side::BOTH.into_iter().zip(ids) {
        out.push(only(&tally.all, side, id));
    }
    out.push(examinations(&tally.all, ids));
    for (count, id) in tally.meridional.into_iter().zip(ids) {
        if let Some(count) = count {
            out.push(format!(
                "{id}: {} differ by more than its limit along one meridian while the spherical \
                 equivalents agree; that is noted and does not refer",
                share(count, n)
            ));
        }
    }
    out
}

fn only(counts: &Counts, side: Side, id: &str) -> String {
    let mut line = format!(
        "only {id} refers {}",
        share(counts.only(side), counts.children())
    );
    let open = counts.only_unanswered(side);
    if open > 0 {
        let _ = write!(
            line,
            "; for {open} of them the other cannot say, which is no pass"
        );
    }
    line
}

/// Says what taking the second set instead of the first means in examinations.
fn examinations(counts: &Counts, [a, b]: [&str; 2]) -> String {
    let n = counts.children();
    let words = match counts.more() {
        0 => "as many examinations".to_owned(),
        more => format!(
            "{} {} examination{} for {n} children, {:.1} for each 1,000",
            more.unsigned_abs(),
            if more > 0 { "more" } else { "fewer" },
            if more.unsigned_abs() == 1 { "" } else { "s" },
            1_000.0 * more.unsigned_abs() as f64 / n as f64
        ),
    };
    format!("{b} instead of {a}: {words}")
}

fn grouped(title: &str, groups: &[(String, Counts)], [a, b]: [&str; 2]) -> Vec<String> {
    let mut rows = vec![[
        title.to_owned(),
        format!("{a} refers"),
        format!("{b} refers"),
        format!("only {a}"),
        format!("only {b}"),
    ]];
    for (name, counts) in groups {
        let n = counts.children();
        rows.push([
            if name.is_empty() {
                "not known".to_owned()
            } else {
                crate::domain::text::shown(name, 40)
            },
            share(counts.of(Side::A, Verdict::Refer), n),
            share(counts.of(Side::B, Verdict::Refer), n),
            share(counts.only(Side::A), n),
            share(counts.only(Side::B), n),
        ]);
    }
    let widths: Vec<usize> = (0..5)
        .map(|i| {
            use unicode_width::UnicodeWidthStr;
            rows.iter().map(|r| r[i].width()).max().unwrap_or(0)
        })
        .collect();
    rows.iter()
        .map(|row| {
            use unicode_width::UnicodeWidthStr;
            let mut line = String::new();
            for (cell, width) in row.iter().zip(&widths) {
                line.push_str(cell);
                line.push_str(&" ".repeat(width - cell.width() + 2));
            }
            line.trim_end().to_owned()
        })
        .collect()
}

/// Returns the few lines that stand on a screen while a threshold is moved.
pub fn step_lines(comparison: &Comparison) -> Vec<String> {
    let [a, b] = comparison.ids();
    whole(&comparison.tally(), [&a, &b])
}
