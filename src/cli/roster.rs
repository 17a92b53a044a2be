//! `twoline roster`: the children expected.

use std::path::{Path, PathBuf};

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::output::{busy, clean, confirmed, print_clean, print_lines};
use super::{Failure, Global, open};
use crate::actions::RosterPlan;
use crate::domain::age::AgeMonths;
use crate::domain::roster::RosterChild;

/// How many of a kind are listed one by one; the others are counted.
const LISTED: usize = 20;

/// Read rosters
#[derive(Debug, Args)]
pub(super) struct Roster {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read a roster: what is new, changed, unchanged and gone is shown before anything is written
    Add {
        /// Roster file in CSV
        file: PathBuf,
        /// Site of the children; without it every site of the file
        #[arg(long, value_name = "CODE")]
        site: Option<String>,
        /// Term of the enrolment; today's without it
        #[arg(long, value_name = "CODE")]
        term: Option<String>,
        /// Show what would change and write nothing
        #[arg(long)]
        dry_run: bool,
        /// Write without asking
        #[arg(long)]
        yes: bool,
    },
}

impl Roster {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add {
            file,
            site,
            term,
            dry_run,
            yes,
        } = &self.command;
        let (name, bytes) = read(file)?;
        let mut desk = if *dry_run {
            open::to_read(global)?
        } else {
            open::to_write(global)?
        };
        let plan = desk.plan_roster(&name, &bytes, site.as_deref(), term.as_deref())?;
        print_clean(&plan_lines(&plan))?;
        let update = &plan.update;
        let changes = update.new.len() + update.changed.len() + update.gone.len();
        if *dry_run || changes == 0 {
            return print_lines(&["nothing was written".to_owned()]);
        }
        if !*yes && !confirmed("Write this?")? {
            return print_lines(&["nothing was written".to_owned()]);
        }
        busy("writing", || desk.add_roster(&plan))?;
        let head = desk.head()?;
        print_lines(&[format!(
            "saved; store head {} ({} entries)",
            head.short(),
            head.entries
        )])
    }
}

/// Reads a whole file; returns its name as messages show it.
pub(super) fn read(file: &Path) -> Result<(String, Vec<u8>), Failure> {
    let name = clean(&file.to_string_lossy());
    let bytes = std::fs::read(file)
        .map_err(|e| Failure::bad_input(format!("{name} cannot be read: {e}")))?;
    Ok((name, bytes))
}

/// Older than this a birth year is asked about, not refused (common practice: a mistyped year).
const GROWN_MONTHS: u32 = 25 * 12;

fn is_grown(child: &RosterChild, today: NaiveDate) -> bool {
    child
        .dob
        .and_then(|born| AgeMonths::between(born, today))
        .is_some_and(|age| age.0 > GROWN_MONTHS)
}

/// Returns what a roster would change, and who is to be looked at.
fn plan_lines(plan: &RosterPlan) -> Vec<String> {
    let RosterPlan {
        roster,
        known,
        update,
        ..
    } = plan;
    let children = &roster.children;
    let mut lines = vec![format!(
        "term {}: {} new, {} changed, {} unchanged, {} gone",
        plan.term,
        update.new.len(),
        update.changed.len(),
        update.unchanged.len(),
        update.gone.len()
    )];
    listed(&mut lines, "changed", &update.changed, |changed| {
        let fields: Vec<String> = changed
            .fields
            .iter()
            .map(|(column, old, new)| format!("{column} from {old:?} to {new:?}"))
            .collect();
        format!("{}: {}", named(&children[changed.new]), fields.join(", "))
    });
    listed(&mut lines, "gone", &update.gone, |at| named(&known[*at]));
    listed(
        &mut lines,
        "birth date unknown",
        &roster.without_dob,
        |at| named(&children[*at]),
    );
    let today = plan.today;
    let grown: Vec<usize> = (0..children.len())
        .filter(|at| is_grown(&children[*at], today))
        .collect();
    listed(
        &mut lines,
        "older than 25 years, is the birth year right?",
        &grown,
        |at| {
            let born = children[*at].dob.map(|d| d.to_string());
            format!(
                "{}, born {}",
                named(&children[*at]),
                born.unwrap_or_default()
            )
        },
    );
    listed(&mut lines, "grade unknown", &roster.without_grade, |at| {
        named(&children[*at])
    });
    listed(&mut lines, "alike, to look at", &roster.alike, |alike| {
        format!(
            "{}: {} and {}",
            alike.kind.title(),
            named(&children[alike.first]),
            named(&children[alike.second])
        )
    });
    lines
}

/// Adds a heading with a count and the first of a list.
pub(super) fn listed<T>(
    lines: &mut Vec<String>,
    heading: &str,
    items: &[T],
    line: impl Fn(&T) -> String,
) {
    if items.is_empty() {
        return;
    }
    lines.push(format!("{heading} ({}):", items.len()));
    lines.extend(
        items
            .iter()
            .take(LISTED)
            .map(|item| format!("  {}", line(item))),
    );
    if items.len() > LISTED {
        lines.push(format!("  … and {} more", items.len() - LISTED));
    }
}

fn named(child: &RosterChild) -> String {
    format!(
        "{} {}, {}",
        child.child_id, child.family_name, child.given_name
    )
}
