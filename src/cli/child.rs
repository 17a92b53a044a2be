//! `twoline child`: find and show.

use clap::{Args, Subcommand};

use super::output::{aligned, clean, print_clean};
use super::record::{outcome_lines, recorded_lines};
use super::{Failure, Global, open};
use crate::actions::{ChildHistory, CorrectionView, FoundChild, VisitView};
use crate::clock::Moment;

/// How many hits are listed.
const LISTED: usize = 50;

/// Find and show children
#[derive(Debug, Args)]
pub(super) struct Child {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Find children by any part of a name, id, class or the end of a telephone number
    Find {
        /// Parts of names, an id, a class, or the last digits of the guardian's telephone number
        text: String,
    },
    /// Show the whole history of a child with every correction
    Show {
        /// Child id
        id: String,
    },
    /// Say that two ids are one child; without ids, list who is probably one
    ///
    /// A child who was added at two tables has two ids. The visits of both stay where they were
    /// recorded.
    Same {
        /// The id to go on with
        #[arg(requires = "same")]
        stays: Option<String>,
        /// The other id of the same child
        same: Option<String>,
    },
}

impl Child {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        if let Command::Same {
            stays: Some(stays),
            same: Some(same),
        } = &self.command
        {
            open::to_sign(global)?.same_child(stays, same)?;
            return print_clean(&[format!("{same} is the same child as {stays}")]);
        }
        let desk = match &self.command {
            Command::Find { .. } => open::to_read_without_rules(global)?,
            Command::Show { .. } | Command::Same { .. } => open::to_read(global)?,
        };
        match &self.command {
            Command::Same { .. } => {
                let pairs = desk.probably_same()?;
                if pairs.is_empty() {
                    return print_clean(&["nobody seems to be here under two ids".to_owned()]);
                }
                let one = |c: &FoundChild| format!("{} ({})", c.child_id, born(c.dob));
                let rows: Vec<Vec<String>> = pairs
                    .iter()
                    .map(|(a, b)| {
                        vec![
                            clean(&format!("{}, {}", a.family_name, a.given_name)),
                            clean(&one(a)),
                            clean(&one(b)),
                        ]
                    })
                    .collect();
                let mut lines = aligned(&rows);
                lines.push("if two are one child: twoline child same ID OTHER-ID".to_owned());
                print_clean(&lines)
            }
            Command::Find { text } => {
                let mut found = desk.search_index()?.find(text, LISTED + 1);
                if found.is_empty() {
                    return Err(Failure::failed(format!(
                        "nobody is found by {:?}",
                        clean(text)
                    )));
                }
                let more = found.len() > LISTED;
                found.truncate(LISTED);
                let rows: Vec<Vec<String>> = found
                    .into_iter()
                    .map(|c| {
                        vec![
                            clean(&c.child_id),
                            clean(&format!("{}, {}", c.family_name, c.given_name)),
                            born(c.dob),
                            clean(&c.site),
                            clean(&c.class),
                            clean(&c.why),
                        ]
                    })
                    .collect();
                let mut lines = aligned(&rows);
                if more {
                    lines.push(format!("… the first {LISTED}; type more of the name"));
                }
                print_clean(&lines)
            }
            Command::Show { id } => {
                let history = desk.history(id)?.ok_or_else(|| {
                    Failure::bad_input(format!("no child has the id {:?}", clean(id)))
                        .hint("twoline child find TEXT")
                })?;
                print_clean(&history_lines(&history))
            }
        }
    }
}

fn born(dob: Option<chrono::NaiveDate>) -> String {
    dob.map_or_else(
        || "birth date unknown".to_owned(),
        |dob| format!("born {dob}"),
    )
}

fn history_lines(history: &ChildHistory) -> Vec<String> {
    let mut lines = vec![
        format!(
            "{}, {} ({})",
            history.family_name, history.given_name, history.child_id
        ),
        [
            born(history.dob),
            format!("site {}", history.site),
            history
                .grade
                .map_or_else(|| "grade unknown".to_owned(), |g| format!("grade {g}")),
            format!("class {}", history.class),
        ]
        .into_iter()
        .filter(|part| !part.ends_with(' '))
        .collect::<Vec<_>>()
        .join(", "),
    ];
    let facts: Vec<Vec<String>> = history
        .facts
        .iter()
        .map(|(what, value)| vec![format!("  {}", clean(what)), clean(value)])
        .collect();
    lines.extend(aligned(&facts));
    if history.visits.is_empty() {
        lines.push("no signed visit".to_owned());
    }
    for visit in &history.visits {
        lines.push(String::new());
        lines.extend(visit_lines(visit));
    }
    lines
}

fn visit_lines(visit: &VisitView) -> Vec<String> {
    let mut lines = vec![
        format!(
            "{}, {}, site {}",
            visit.date,
            visit.attempt.title(),
            visit.site
        ),
        format!("  visit {}", visit.id),
    ];
    for (n, earlier) in visit.earlier_tries.iter().enumerate() {
        lines.push(format!("  try {}:", n + 1));
        lines.extend(recorded_lines(earlier));
    }
    if !visit.earlier_tries.is_empty() {
        lines.push("  judged:".to_owned());
    }
    lines.extend(recorded_lines(&visit.readings));
    for differs in &visit.unsettled {
        lines.push(format!(
            "  in conflict: {} is {}; settle it: twoline correct {} {}=VALUE --reason TEXT",
            differs.field.title(),
            differs.values.join(" or "),
            visit.id,
            differs.field.word()
        ));
    }
    if let Some(signed) = &visit.outcome {
        match &visit.now {
            Some(now) => lines.push(format!("  signed as {}, now {now}", signed.headline())),
            None => lines.push(format!("  {}", signed.headline())),
        }
        lines.extend(outcome_lines(signed));
        let standing = visit.standing.lines_for(signed.kind);
        lines.extend(standing.iter().map(|line| format!("  {line}")));
    }
    let who = if visit.screener.is_empty() {
        "screener not named"
    } else {
        &visit.screener
    };
    if visit.signatures.len() > 1 {
        for signature in &visit.signatures {
            lines.push(format!(
                "  signed as {} {} by {}, station {}",
                signature.kind.title(),
                at(signature.at),
                signature.screener,
                signature.station
            ));
        }
    }
    lines.push(format!(
        "  entered {} by {who}, station {}{}",
        at(visit.entered),
        visit.station,
        if visit.late { ", late" } else { "" }
    ));
    lines.extend(visit.corrections.iter().map(correction_line));
    lines
}

fn correction_line(correction: &CorrectionView) -> String {
    let said = |value: &str| {
        if value.is_empty() {
            "nothing".to_owned()
        } else {
            value.to_owned()
        }
    };
    let who = if correction.screener.is_empty() {
        String::new()
    } else {
        format!(" by {}", correction.screener)
    };
    format!(
        "  corrected {}{who}: {} from {} to {}, because: {}",
        at(correction.at),
        correction.what,
        said(&correction.before),
        said(&correction.after),
        correction.reason
    )
}

/// Writes a moment as the clock on the wall showed it.
fn at(moment: Moment) -> String {
    let wall_ms = moment.utc_ms + i64::from(moment.offset_minutes) * 60_000;
    chrono::DateTime::from_timestamp_millis(wall_ms)
        .map_or_else(String::new, |t| t.format("%Y-%m-%d %H:%M").to_string())
}
