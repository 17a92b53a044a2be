//! Reading a results file into a screening day: planned and shown first, then written whole.

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::views::{DayChild, DayInfo};
use super::visit_rows::{VisitRows, judged};
use crate::domain::codes::Attempt;
use crate::domain::field::Field;
use crate::domain::readings::Readings;
use crate::intake::results::{Options, ResultRow, read_results};
use crate::intake::{Problem, Problems};
use crate::rules::pass_line;
use crate::store::new_id;
use uuid::Uuid;

/// What a results file would change, before anything is written.
#[derive(Debug)]
pub struct ResultsPlan {
    /// The day it is for.
    pub day: DayInfo,
    /// Visits to sign.
    pub new: Vec<PlannedVisit>,
    /// How many visits have the same values already.
    pub unchanged: usize,
    /// How many rows have nothing entered, as on a class list that is partly filled in.
    pub empty: usize,
    /// Visits signed with other values: refused unless they are corrected with a reason.
    pub different: Vec<Different>,
}

/// A visit that will be signed.
#[derive(Debug)]
pub struct PlannedVisit {
    /// The child.
    pub child: DayChild,
    /// The readings.
    pub readings: Readings,
}

/// A visit whose signed values differ from the file's.
#[derive(Debug)]
pub struct Different {
    /// Where it stands in the file.
    pub place: crate::intake::Place,
    /// The child.
    pub child: DayChild,
    /// The visit.
    pub visit: Uuid,
    /// Field, signed value, value of the file.
    pub fields: Vec<(Field, String, String)>,
}

impl Desk {
    /// Reads a results file and compares it with what is signed on a day.
    ///
    /// # Errors
    /// Everything that is wrong with the file: nothing is written.
    pub fn plan_results(&self, file: &str, bytes: &[u8], day: &DayInfo) -> Result<ResultsPlan> {
        let library = self.library();
        let protocol = library.protocol(&day.protocol);
        let line = |age, grade| {
            protocol
                .and_then(|p| pass_line(&library, p, age, grade))
                .map(|p| p.line)
        };
        let options = Options {
            needs_child: true,
            takes_names: true,
            day: Some(day.date),
            bare: Some(self.notation()),
            method: Some(day.method),
            ..Options::default()
        };
        let rows = read_results(file, bytes, options, Some(&line))?;
        let mut plan = ResultsPlan {
            day: day.clone(),
            new: Vec::new(),
            unchanged: 0,
            empty: 0,
            different: Vec::new(),
        };
        let mut problems = Problems::default();
        for row in rows {
            if let Err(problem) = self.plan_row(file, row, &mut plan)? {
                problems.push(problem);
            }
        }
        Ok(problems.or(plan)?)
    }

    fn plan_row(
        &self,
        file: &str,
        row: ResultRow,
        plan: &mut ResultsPlan,
    ) -> Result<std::result::Result<(), Problem>> {
        let day = &plan.day;
        let wrong = |column: &str, found: &str, expected: String| {
            Ok(Err(Problem::of_cell(
                file, row.place, column, found, expected,
            )))
        };
        if let Some(on) = row.screened_on.filter(|on| *on != day.date) {
            return wrong(
                "screened_on",
                &on.to_string(),
                format!("the screening day {}", day.date),
            );
        }
        let Some(known) = self.read().child(&row.child_id)? else {
            return wrong(
                "child_id",
                &row.child_id,
                "a child of the roster; read the roster first".to_owned(),
            );
        };
        if let (Some(found), Some(born)) = (row.dob, known.dob)
            && found != born
        {
            return wrong(
                "dob",
                &found.to_string(),
                format!("{born}, as the roster says"),
            );
        }
        let recorded = row.readings.recorded();
        // The method is the day's, whatever else a row says.
        if recorded.iter().all(|(f, _)| *f == Field::AcuityMethod) {
            plan.empty += 1;
            return Ok(Ok(()));
        }
        let child = self.day_child(day, &row.child_id)?;
        // A row that does not say which visit it is means the one that is due.
        let attempt = row.attempt.unwrap_or(child.attempt);
        let child = DayChild { attempt, ..child };
        let readings = match self.by_method(day, &child, row.readings) {
            Ok(readings) => readings,
            Err(e) => return wrong(e.field.word(), &e.found, e.expected),
        };
        let Some(visit) = self.read().visit_on(&row.child_id, &key_of(day), attempt)? else {
            let planned =
                |p: &PlannedVisit| p.child.attempt == attempt && p.child.child_id == row.child_id;
            if attempt == Attempt::Rescreen && plan.new.iter().any(planned) {
                return wrong(
                    "child_id",
                    &row.child_id,
                    "each child, day and visit once".to_owned(),
                );
            }
            plan.new.push(PlannedVisit { child, readings });
            return Ok(Ok(()));
        };
        let signed = judged(&self.tries(visit.visit_id)?);
        let fields = differences(&signed, &readings);
        if fields.is_empty() {
            plan.unchanged += 1;
        } else {
            plan.different.push(Different {
                place: row.place,
                child,
                visit: visit.visit_id,
                fields,
            });
        }
        Ok(Ok(()))
    }

    /// Writes a planned results file, whole or not at all; signed values that differ are corrected
    /// only with a reason.
    pub fn add_results(&mut self, plan: &ResultsPlan, correct: Option<&str>) -> Result<()> {
        if correct.is_none() && !plan.different.is_empty() {
            return Err(ActionError::bad(format!(
                "{} visits are signed with other values",
                plan.different.len()
            ))
            .hint("correct them with a reason: --correct REASON"));
        }
        let mut writes: Vec<VisitRows> = Vec::new();
        for planned in &plan.new {
            writes.push(self.new_visit(
                &plan.day,
                &planned.child,
                new_id(),
                std::slice::from_ref(&planned.readings),
            )?);
        }
        for different in &plan.different {
            let changes: Vec<(Field, String)> = different
                .fields
                .iter()
                .map(|(f, _, new)| (*f, new.clone()))
                .collect();
            writes.push(self.corrected_visit(
                different.visit,
                &changes,
                correct.unwrap_or_default(),
            )?);
        }
        self.write_visits(writes)
    }
}

/// Returns the fields whose values differ; a column that the file does not have says nothing.
fn differences(signed: &Readings, file: &Readings) -> Vec<(Field, String, String)> {
    file.recorded()
        .into_iter()
        .filter_map(|(field, new)| {
            let old = signed.get(field).unwrap_or_default();
            (old != new).then_some((field, old, new))
        })
        .collect()
}
