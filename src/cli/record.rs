//! `twoline record`: readings of one child.

use clap::Args;

use super::output::{clean, print_clean, say};
use super::values::{WhichDay, fields};
use super::{Failure, Global, open};
use crate::actions::{
    ActionError, DayChild, DayInfo, Desk, Draft, Drafts, SignRequest, Signed, explain,
    new_visit_id, pass_line_for, preview,
};
use crate::clock;
use crate::domain::codes::AcuityMethod;
use crate::domain::field::Field;
use crate::domain::outcome::Urgency;
use crate::domain::readings::{ReadingContext, Readings};

/// Record readings of a child on an open screening day
///
/// Without --sign the values are kept as a draft and the outcome as it stands is shown. With it they
/// are put on top of the draft and signed.
#[derive(Debug, Args)]
pub(super) struct Record {
    /// Child id
    child: String,
    /// Readings, such as `distance_right=20/40`; an empty value takes one back from the draft
    #[arg(value_name = "FIELD=VALUE")]
    values: Vec<String>,
    #[command(flatten)]
    day: WhichDay,
    /// Sign the visit: its outcome is written
    #[arg(long)]
    sign: bool,
}

impl Record {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let values = fields(&self.values)?;
        let mut desk = if self.sign {
            open::to_sign(global)?
        } else {
            open::to_write(global)?
        };
        let day = self.day.of(&desk)?;
        let child = desk.day_child(&day, &self.child)?;
        let drafts = desk.drafts()?;
        let draft = merged(&drafts, &day, &child, &values)?;
        let readings = read(&desk, &day, &child, &draft.fields)?;
        if !self.sign {
            return keep(&desk, &drafts, draft, &day, &child, readings);
        }
        if draft.fields.is_empty() {
            return Err(Failure::bad_input("there is nothing to sign")
                .hint("give FIELD=VALUE, such as distance_right=20/40 or status=absent"));
        }
        let key = day.draft_day();
        let signed = desk.sign(SignRequest {
            day: day.id,
            child_id: child.child_id.clone(),
            attempt: child.attempt,
            visit: draft.visit_id,
            readings,
            remarks: Vec::new(),
        })?;
        // The store has it; now the draft may go. Where it cannot, the child is signed all the same.
        if let Err(error) = drafts
            .delete(&key, &child.child_id)
            .and_then(|()| drafts.flush())
        {
            say(&format!(
                "note: it is saved, but its draft could not be removed: {}",
                clean(&error.to_string())
            ));
        }
        print_clean(&signed_lines(&desk, &signed)?)
    }
}

/// Returns the draft of the child with new values on top.
fn merged(
    drafts: &Drafts,
    day: &DayInfo,
    child: &DayChild,
    values: &[(Field, String)],
) -> Result<Draft, Failure> {
    let key = day.draft_day();
    let all = drafts.load_all(&key).map_err(ActionError::from)?;
    let mut draft = all
        .into_iter()
        .find(|d| d.child_id == child.child_id)
        .unwrap_or_else(|| Draft {
            day: key,
            child_id: child.child_id.clone(),
            visit_id: new_visit_id(),
            attempt: child.attempt,
            fields: Vec::new(),
            cursor: String::new(),
            updated_at_ms: 0,
        });
    draft.updated_at_ms = clock::now().utc_ms;
    for (field, value) in values {
        draft.fields.retain(|(word, _)| word != field.word());
        if !value.is_empty() {
            draft.fields.push((field.word().to_owned(), value.clone()));
        }
    }
    Ok(draft)
}

/// Reads the raw text of a draft in the order in which fields decide each other's meaning.
fn read(
    desk: &Desk,
    day: &DayInfo,
    child: &DayChild,
    raw: &[(String, String)],
) -> Result<Readings, Failure> {
    let mut values: Vec<(Field, &String)> = raw
        .iter()
        .filter_map(|(word, text)| Field::from_word(word).map(|field| (field, text)))
        .collect();
    values.sort_by_key(|(field, _)| *field);
    let context = ReadingContext {
        bare: Some(desk.notation()),
        critical_line: pass_line_for(&desk.library(), day, child)
            .filter(|_| day.method == AcuityMethod::CriticalLine)
            .map(|line| line.line),
    };
    let mut readings = Readings::default();
    for (field, text) in values {
        let remark = readings
            .set(field, text, context)
            .map_err(|e| Failure::bad_input(e.to_string()).hint("nothing was written"))?;
        if let Some(remark) = remark {
            say(&format!("note: {}: {}", field.word(), clean(&remark)));
        }
    }
    Ok(readings)
}

/// Keeps the draft and shows the outcome as it stands.
fn keep(
    desk: &Desk,
    drafts: &Drafts,
    draft: Draft,
    day: &DayInfo,
    child: &DayChild,
    readings: Readings,
) -> Result<(), Failure> {
    if let Some(visit) = desk.visit(day, &child.child_id)?
        && !visit.readings.any_eye_not_testable()
    {
        return Err(Failure::bad_input(format!(
            "{} is signed already on this day",
            clean(&named(child))
        ))
        .hint(format!(
            "twoline correct {} FIELD=VALUE --reason TEXT",
            clean(&child.child_id)
        )));
    }
    let readings = desk
        .by_method(day, child, readings)
        .map_err(|e| Failure::bad_input(e.to_string()).hint("nothing was written"))?;
    let outcome = preview(&desk.library(), day, child, &readings).ok_or_else(|| {
        Failure::failed(format!(
            "the protocol {} is not among the rule files",
            day.protocol
        ))
    })?;
    if draft.fields.is_empty() {
        drafts.delete(&draft.day, &draft.child_id)
    } else {
        drafts.save(draft)
    }
    .and_then(|()| drafts.flush())
    .map_err(ActionError::from)?;
    let mut lines = vec![format!("{}: draft kept, not signed", named(child))];
    lines.extend(recorded_lines(&readings));
    lines.push(format!("as it stands: {}", explain::headline(&outcome)));
    let mut reasons = String::new();
    explain::reasons_text(&outcome, &mut reasons);
    lines.extend(reason_lines(&reasons));
    print_clean(&lines)?;
    if outcome.urgency == Some(Urgency::Emergency) {
        say("EMERGENCY, not signed yet: sign it now with --sign");
    }
    Ok(())
}

/// Returns what was signed, as read back from the store.
pub(super) fn signed_lines(desk: &Desk, signed: &Signed) -> Result<Vec<String>, Failure> {
    let mut lines = vec![
        format!("{}: saved", named(&signed.child)),
        signed.outcome.headline(),
    ];
    lines.extend(outcome_lines(&signed.outcome));
    lines.push(format!("visit {}", signed.visit));
    let head = desk.head()?;
    lines.push(format!(
        "store head {} ({} entries)",
        head.short(),
        head.entries
    ));
    Ok(lines)
}

/// Returns what stands below a headline: risk, what is unknown, the reasons.
pub(super) fn outcome_lines(outcome: &crate::actions::StoredOutcome) -> Vec<String> {
    let mut lines = Vec::new();
    if !outcome.risks.is_empty() {
        let risks: Vec<&str> = outcome.risks.iter().map(|r| r.title()).collect();
        lines.push(format!("  amblyopia risk: {}", risks.join(", ")));
    }
    if !outcome.unknown.is_empty() {
        lines.push(format!("  unknown: {}", outcome.unknown.join(", ")));
    }
    lines.extend(reason_lines(&outcome.reasons));
    lines.push(format!("  by {}, {}", outcome.rule_set, outcome.edition));
    lines
}

/// Returns the reasons as a paragraph: a citation holds full stops of its own, so that they cannot be
/// told apart here.
fn reason_lines(reasons: &str) -> Vec<String> {
    super::output::wrapped(reasons, "  ")
}

/// Returns the readings, a line each.
pub(super) fn recorded_lines(readings: &Readings) -> Vec<String> {
    let rows: Vec<Vec<String>> = readings
        .recorded()
        .into_iter()
        .map(|(field, value)| vec![format!("  {}", field.title()), value])
        .collect();
    super::output::aligned(&rows)
}

fn named(child: &DayChild) -> String {
    format!(
        "{}, {} ({})",
        child.family_name, child.given_name, child.child_id
    )
}
