//! Rule sets and protocols as tables and lines, for `rules list`, `rules show` and the Rules place.

use std::fmt::Write;

use crate::domain::outcome::{Basis, Source};
use crate::rules::explain::{act_words, basis_words, criterion_words, source_words};
use crate::rules::grading::{Grading, Level, Taken};
use crate::rules::{Applies, FirstFail, Kind, Measure, Protocol, RuleSet, threshold};

/// A rule set as a table: bands across, findings down.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RuleSheet {
    /// Id.
    pub id: String,
    /// Title.
    pub title: String,
    /// Edition, region and status in words.
    pub edition: String,
    /// Names of the bands, in order.
    pub columns: Vec<String>,
    /// A finding in words, and its threshold in each band (empty where there is none).
    pub rows: Vec<(String, Vec<String>)>,
    /// When a line counts as read; empty where lines are not read.
    pub line_credit: String,
    /// Sources with their basis in words.
    pub sources: Vec<String>,
    /// Notes.
    pub notes: Vec<String>,
    /// "local, approved by … on …"; empty for what is shipped.
    pub approval: String,
}

fn basis_note(sources: &[std::sync::Arc<Source>]) -> &'static str {
    match sources.iter().map(|s| s.basis).max() {
        None | Some(Basis::Primary) => "read in the source",
        Some(Basis::Secondary) => "in part as quoted elsewhere",
        Some(Basis::Memory) => "in part from memory: check before use",
        Some(Basis::Practice) if sources.iter().any(|s| s.basis == Basis::Memory) => {
            "in part from memory and common practice: check before use"
        }
        Some(Basis::Practice) => "in part common practice",
    }
}

/// Returns the line of a rule set in the list: id, title, basis.
pub fn list_line(set: &RuleSet) -> String {
    let place = set.approval_words().unwrap_or_else(|| set.region.clone());
    format!(
        "{:<22} {}; {}; {}; {}",
        set.id,
        set.title,
        place,
        if set.status.is_empty() {
            "current"
        } else {
            &set.status
        },
        basis_note(&set.sources)
    )
}

/// Returns a rule set as a table.
pub fn sheet(set: &RuleSet) -> RuleSheet {
    let mut columns: Vec<String> = Vec::new();
    for criterion in &set.criteria {
        let name = column(&criterion.applies, set.span);
        if criterion.applies != Applies::Everyone && !columns.contains(&name) {
            columns.push(name);
        }
    }
    if columns.is_empty() {
        columns.push(column(&Applies::Everyone, set.span));
    }
    let mut rows: Vec<(String, Vec<String>)> = Vec::new();
    for criterion in &set.criteria {
        let finding = match criterion.measure {
            Measure::DistanceEachEye | Measure::NearEachEye => {
                let ask = match (criterion.then.is_again(), criterion.high_priority) {
                    (true, _) => "screen again if",
                    (false, true) => "high priority if",
                    (false, false) => "refer if",
                };
                format!("{}, {ask}", criterion.measure.title())
            }
            _ => criterion_words(threshold::split_band(&criterion.id).0),
        };
        let mut cell = criterion.threshold.to_string();
        if let Some(beyond) = criterion.axis_beyond {
            let _ = write!(cell, ", axis more than {beyond}° from 90 and 180");
        }
        if criterion.then.is_again() {
            let _ = write!(cell, ": {}", criterion.then.in_words());
        }
        if criterion.high_priority {
            cell.push_str(": high priority");
        }
        if cell == "present" {
            criterion.urgency.title().clone_into(&mut cell);
            if let Some(days) = criterion.act_within_days {
                let _ = write!(cell, ", {}", act_words(days));
            }
        }
        let row = rows
            .iter()
            .position(|(name, _)| *name == finding)
            .unwrap_or_else(|| {
                rows.push((finding, vec![String::new(); columns.len()]));
                rows.len() - 1
            });
        let name = column(&criterion.applies, set.span);
        for (i, column) in columns.iter().enumerate() {
            if criterion.applies == Applies::Everyone || *column == name {
                rows[row].1[i].clone_from(&cell);
            }
        }
    }
    let mut notes: Vec<String> = Vec::new();
    if !set.note.is_empty() {
        notes.push(set.note.clone());
    }
    for criterion in set.criteria.iter().filter(|c| !c.note.is_empty()) {
        let note = format!(
            "{}: {}",
            criterion_words(threshold::split_band(&criterion.id).0),
            criterion.note
        );
        if !notes.contains(&note) {
            notes.push(note);
        }
    }
    RuleSheet {
        id: set.id.to_string(),
        title: set.title.clone(),
        edition: [&*set.edition, &set.region, &set.status]
            .into_iter()
            .filter(|s| !s.is_empty())
            .collect::<Vec<_>>()
            .join(" · "),
        columns,
        rows,
        line_credit: if set.kind == Kind::Acuity {
            format!("{} ({})", set.credit_text, basis_words(&set.credit_source))
        } else {
            String::new()
        },
        sources: all_cited(&set.sources),
        notes,
        approval: set.approval_words().unwrap_or_default(),
    }
}

fn column(applies: &Applies, span: Option<(u32, Option<u32>)>) -> String {
    match (applies, span) {
        (Applies::Everyone, Some((from, to))) => Applies::Ages { from, to }.to_string(),
        (applies, _) => applies.to_string(),
    }
}

fn cited(source: &Source) -> String {
    format!("{}. Basis: {}", place(source), basis_words(source))
}

fn place(source: &Source) -> String {
    match source.locator.as_str() {
        "" => source.citation.clone(),
        locator => format!("{}, {locator}", source.citation),
    }
}

/// Cites each publication once, with every basis on which it is taken.
fn all_cited(sources: &[std::sync::Arc<Source>]) -> Vec<String> {
    let mut out: Vec<(String, Vec<String>)> = Vec::new();
    for source in sources {
        let (place, basis) = (place(source), basis_words(source));
        match out.iter_mut().find(|(known, _)| *known == place) {
            Some((_, also)) if also.contains(&basis) => {}
            Some((_, also)) => also.push(basis),
            None => out.push((place, vec![basis])),
        }
    }
    out.into_iter()
        .map(|(place, also)| format!("{place}. Basis: {}", also.join("; in part ")))
        .collect()
}

/// Returns the line of a severity or triage table in the list.
pub fn grading_line(grading: &Grading) -> String {
    let place = match &grading.local {
        Some(approval) => format!("local, approved by {} on {}", approval.by, approval.on),
        None => grading.region.clone(),
    };
    format!(
        "{:<22} {}; {place}; {}; {}",
        grading.id,
        grading.title,
        grading.status,
        basis_note(&grading.sources)
    )
}

/// Returns a severity or triage table: groups or bands across, findings down.
pub fn grading_sheet(grading: &Grading) -> RuleSheet {
    let mut levels: Vec<Level> = grading.entries.iter().map(|e| e.level).collect();
    levels.sort_unstable();
    levels.dedup();
    let title = |level: &Level| {
        let named = grading.titles.iter().find(|(l, _)| l == level);
        named.map_or_else(|| level.in_words(), |(_, title)| title.to_string())
    };
    let mut rows: Vec<(String, Vec<String>)> = Vec::new();
    let mut notes = vec![grading.note.clone()];
    for entry in &grading.entries {
        let row = rows
            .iter()
            .position(|(name, _)| *name == *entry.finding)
            .unwrap_or_else(|| {
                rows.push((entry.finding.to_string(), vec![String::new(); levels.len()]));
                rows.len() - 1
            });
        let Some(column) = levels.iter().position(|l| *l == entry.level) else {
            continue;
        };
        let cell = &mut rows[row].1[column];
        if !cell.is_empty() {
            cell.push_str("; or ");
        }
        if entry.applies != Applies::Everyone {
            let _ = write!(cell, "{}: ", entry.applies);
        }
        cell.push_str(&entry.conditions());
        if !entry.note.is_empty() {
            notes.push(format!("{}: {}", entry.finding, entry.note));
        }
    }
    notes.extend(grading.taken.iter().map(Taken::in_words));
    for window in &grading.windows {
        notes.push(format!(
            "order inside a band: {} ({})",
            window.words,
            source_words(&window.source)
        ));
    }
    notes.retain(|note| !note.is_empty());
    notes.dedup();
    RuleSheet {
        id: grading.id.to_string(),
        title: grading.title.clone(),
        edition: [&*grading.edition, &grading.region, &grading.status]
            .into_iter()
            .filter(|s| !s.is_empty())
            .collect::<Vec<_>>()
            .join(" · "),
        columns: levels.iter().map(title).collect(),
        rows,
        line_credit: String::new(),
        sources: all_cited(&grading.sources),
        notes,
        approval: grading.local.as_ref().map_or_else(String::new, |a| {
            format!("local, approved by {} on {}", a.by, a.on)
        }),
    }
}

/// Returns a protocol as plain lines.
#[allow(clippy::too_many_lines)] // one entry after the other
pub fn protocol_lines(protocol: &Protocol) -> Vec<String> {
    let list =
        |ids: &[std::sync::Arc<str>]| ids.iter().map(|i| &**i).collect::<Vec<_>>().join(", ");
    let mut out = vec![
        format!(
            "{}  {}  edition {}",
            protocol.id, protocol.title, protocol.edition
        ),
        format!("Rule sets        {}", list(&protocol.rule_sets)),
    ];
    if !protocol.when_done.is_empty() {
        out.push(format!("When done        {}", list(&protocol.when_done)));
    }
    if let Some(id) = &protocol.instrument {
        let mut text = format!("Instrument       {id}");
        if let Some(months) = protocol.instrument_below_months {
            let _ = write!(text, ", the test below {months} months");
        }
        if protocol.instrument_stands_in {
            text.push_str(", stands in for a chart that is not testable when both eyes were read");
        }
        out.push(text);
    }
    for tests in protocol.required.iter().filter(|r| !r.measures.is_empty()) {
        let names: Vec<&str> = tests.measures.iter().map(|m| m.title()).collect();
        let whom = match &tests.applies {
            Applies::Everyone => String::new(),
            applies => format!(" ({applies})"),
        };
        out.push(format!("Required         {}{whom}", names.join("; ")));
    }
    let then = match protocol.first_fail {
        FirstFail::Refer => "",
        _ => ", then refer",
    };
    out.push(format!(
        "First fail       {}{then} ({})",
        protocol.first_fail,
        source_words(&protocol.first_fail_source)
    ));
    for criterion in &protocol.at_once.criteria {
        out.push(format!(
            "Never waits      {}: {} ({})",
            criterion.measure.title(),
            criterion.threshold,
            basis_words(&criterion.source)
        ));
    }
    for id in &protocol.refer_at_once {
        out.push(format!("Never waits      {id}"));
    }
    for policy in &protocol.not_testable {
        let when = policy.rescreen_months.map_or_else(
            || "once more, when the service says".to_owned(),
            |months| match months {
                1 => "again within 1 month".to_owned(),
                months => format!("again within {months} months"),
            },
        );
        out.push(format!(
            "Not testable     {}: {when}, then refer ({})",
            policy.applies,
            cited(&policy.source)
        ));
    }
    out.push(format!(
        "Glasses          back within {} days; after {} such visits refer; broken or lost: {}",
        protocol.glasses_return_days,
        protocol.glasses_visits,
        if protocol.broken_glasses_refer {
            "refer"
        } else {
            "as not worn"
        }
    ));
    let exempt: Vec<&str> = protocol.exempt.iter().map(|e| e.title()).collect();
    out.push(format!(
        "Exempt           {}, when nothing was tested",
        exempt.join("; ")
    ));
    for id in &protocol.leave_out {
        out.push(format!("Left out         {id}: shown, not acted on"));
    }
    out.push(format!(
        "Consent          {}",
        if protocol.consent_opt_in {
            "opt-in"
        } else {
            "opt-out"
        }
    ));
    out.push(format!(
        "Settings         {}",
        cited(&protocol.settings_source)
    ));
    if !protocol.note.is_empty() {
        out.push(format!("Note             {}", protocol.note));
    }
    if let Some(approval) = &protocol.local {
        out.push(format!(
            "Local            approved by {} on {}",
            approval.by, approval.on
        ));
    }
    out
}
