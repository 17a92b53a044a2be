//! Reports and tables: typed rows out of the store.

use std::collections::BTreeSet;

use chrono::{DateTime, FixedOffset};

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::views::DayInfo;
use super::visit_rows::{judged, stored_outcome, tries_of};
use crate::clock::Moment;
use crate::domain::age::{AgeMonths, spoken};
use crate::reports::csv::Form;
use crate::reports::day::{self, About, DayReportRow, RuleSetUsed, StoreState};
use crate::rules::CAUTIONS;

/// A report as bytes, and the text that goes beside it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Report {
    /// The file.
    pub bytes: Vec<u8>,
    /// `OUT.about.txt`: the rule sets used and the cautions.
    pub about: String,
    /// How many rows it has.
    pub rows: usize,
    /// What it is, as the disclosure log names it.
    pub title: String,
    /// The ids of the children in it.
    pub children: Vec<String>,
}

impl Desk {
    /// Returns the report of a screening day in CSV: one row per child.
    ///
    /// With `exact`, text is as it is and there is no byte order mark.
    pub fn day_report(&self, day: &DayInfo, exact: bool) -> Result<Report> {
        let screeners = self.screener_names()?;
        let stations = self.stations()?;
        let mut rows = Vec::new();
        let mut signed_with = BTreeSet::new();
        for stored in self.read().day_report(&key_of(day))? {
            let child = stored.child;
            let mut row = DayReportRow {
                child_id: child.child_id,
                family_name: child.family_name,
                given_name: child.given_name,
                dob: child.dob,
                age: child
                    .dob
                    .and_then(|born| AgeMonths::between(born, day.date)),
                site: day.site.clone(),
                class: child.class.unwrap_or_default(),
                grade: child.grade,
                screened_on: Some(day.date),
                ..DayReportRow::default()
            };
            if let Some(visit) = &stored.visit {
                if let Some(together) = self.together(visit)? {
                    row.outcome_now = Some(together.now.kind);
                    row.in_conflict = together.unsettled.iter().map(|u| u.field).collect();
                    row.in_conflict.dedup();
                }
                row.attempt = Some(visit.attempt);
                row.readings = judged(&tries_of(&stored.readings)?);
            }
            if let Some(signed) = &stored.outcome {
                let outcome = stored_outcome(signed);
                signed_with.insert((
                    signed.rule_set.clone(),
                    signed.edition.clone(),
                    signed.content_hash.clone(),
                ));
                row.outcome = Some(outcome.kind);
                row.qualifiers = outcome.qualifiers;
                row.urgency = outcome.urgency;
                row.act_by = outcome.act_by;
                row.rescreen_by = outcome.due_on;
                row.risks = outcome.risks;
                row.criteria = outcome.criteria;
                row.unknown = outcome.unknown;
                row.reasons = outcome.reasons;
                row.rule_set = outcome.rule_set;
                row.edition = outcome.edition;
                // Age and grade as they were judged: the roster may say otherwise by now.
                row.age = signed
                    .age_months
                    .and_then(|months| u32::try_from(months).ok())
                    .map(AgeMonths)
                    .or(row.age);
                row.grade = signed.grade.or(row.grade);
                row.tested_on = Some(signed.tested_on);
                row.entered_late = signed.late;
                row.screener = signed
                    .screener_id
                    .and_then(|id| screeners.get(&id).cloned())
                    .unwrap_or_default();
                row.station = signed
                    .station_id
                    .and_then(|id| stations.get(&id).map(|s| s.name.clone()))
                    .unwrap_or_default();
            }
            row.entered_at = stored.entered.map(instant).unwrap_or_default();
            rows.push(row);
        }
        let head = self.head()?;
        let state = StoreState {
            head: head.whole(),
            entries: head.entries,
        };
        let count = rows.len();
        let children = rows.iter().map(|row| row.child_id.clone()).collect();
        let bytes = day::write(Vec::new(), Form::exact(exact), rows, &state)
            .map_err(|e| ActionError::failed(e.to_string()))?;
        let title = format!("Day report, {}, {}", day.site_name, spoken(day.date));
        let used = self.rule_sets_of(day, signed_with);
        let about = day::about(&About {
            title: &title,
            state: Some(&state),
            rule_sets: &used,
            cautions: &CAUTIONS,
            guarded: !exact,
        });
        Ok(Report {
            bytes,
            about,
            rows: count,
            title,
            children,
        })
    }

    /// Returns the protocol of a day with its rule sets, and what else outcomes of the day were
    /// signed with: an edition that has been replaced since.
    pub(super) fn rule_sets_of(
        &self,
        day: &DayInfo,
        signed_with: BTreeSet<(String, String, String)>,
    ) -> Vec<RuleSetUsed> {
        let mut out = Vec::new();
        if let Some(protocol) = self.library.protocol(&day.protocol) {
            out.push(RuleSetUsed {
                id: protocol.id.to_string(),
                title: protocol.title.clone(),
                edition: protocol.edition.to_string(),
                content_hash: protocol.content_hash.to_string(),
                sources: protocol.sources.iter().map(|s| (**s).clone()).collect(),
            });
            let sets = protocol
                .rule_sets
                .iter()
                .chain(&protocol.when_done)
                .chain(&protocol.instrument);
            for set in sets.filter_map(|id| self.library.rule_set(id)) {
                if out.iter().all(|known| known.id != *set.id) {
                    out.push(RuleSetUsed {
                        id: set.id.to_string(),
                        title: set.title.clone(),
                        edition: set.edition.to_string(),
                        content_hash: set.content_hash.to_string(),
                        sources: set.sources.iter().map(|s| (**s).clone()).collect(),
                    });
                }
            }
        }
        for (id, edition, content_hash) in signed_with {
            if out.iter().all(|known| known.content_hash != content_hash) {
                out.push(RuleSetUsed {
                    title: "outcomes signed before the rules changed; the text is in the store"
                        .to_owned(),
                    id,
                    edition,
                    content_hash,
                    sources: Vec::new(),
                });
            }
        }
        out
    }

    /// Returns the counts of the present term by site as a table with its header. The latest signed
    /// visit of each child counts.
    pub fn term_table(&self) -> Result<Vec<Vec<String>>> {
        let mut table = vec![row([
            "site",
            "enrolled",
            "visited",
            "pass",
            "rescreen",
            "refer",
            "incomplete",
            "exempt",
        ])];
        let Ok(term) = self.term_on(self.today) else {
            return Ok(table);
        };
        let sites = self.sites()?;
        let places = sites
            .iter()
            .map(|(code, name)| (Some(code.as_str()), name.as_str()));
        for (code, name) in places.chain([(None, "all sites")]) {
            let c = self
                .read()
                .term_counts(&term.code, term.starts_on, term.ends_on, code)?;
            let counts = [
                c.enrolled,
                c.visited,
                c.passed,
                c.rescreen,
                c.referred,
                c.incomplete,
                c.exempt,
            ];
            table.push(
                std::iter::once(name.to_owned())
                    .chain(counts.iter().map(ToString::to_string))
                    .collect(),
            );
        }
        Ok(table)
    }
}

fn row<const N: usize>(cells: [&str; N]) -> Vec<String> {
    cells.iter().map(|c| (*c).to_owned()).collect()
}

/// Writes a moment as an ISO instant with its offset.
pub(super) fn instant(at: Moment) -> String {
    let offset = FixedOffset::east_opt(at.offset_minutes * 60);
    match (DateTime::from_timestamp_millis(at.utc_ms), offset) {
        (Some(utc), Some(offset)) => utc
            .with_timezone(&offset)
            .format("%Y-%m-%dT%H:%M:%S%:z")
            .to_string(),
        _ => String::new(),
    }
}
