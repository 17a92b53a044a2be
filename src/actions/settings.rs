//! What a programme chooses for the whole store.

use super::desk::Desk;
use super::error::{ActionError, Result};
use super::triage::triage_set;
use crate::domain::text::{is_unsafe, nearest, shown};
use crate::rules::grading::GradingKind;
use crate::store::row::Setting;
use crate::store::{Put, new_id};

/// The word for a setting that is not made.
const NONE: &str = "none";

/// A setting by its name, with what it is for.
const KNOWN: [(&str, &str); 14] = [
    (
        "notation",
        "what a bare acuity stands under: feet or metres",
    ),
    (
        "scan_prefix",
        "what a barcode reader types before an id, or none",
    ),
    (
        "triage",
        "triage sets whose bands are shown, separated by commas, or none",
    ),
    (
        "notice_days",
        "days within which a family is told of a referral (10: Colorado's rule, secondary)",
    ),
    (
        "second_letter_days",
        "days from the first letter to the second (28: common practice)",
    ),
    (
        "call_again_days",
        "days between attempts after that (7: common practice)",
    ),
    (
        "contact_attempts",
        "documented attempts before a referral may be closed (3: common practice)",
    ),
    (
        "report_days",
        "days from an appointment to asking for the report (14: common practice)",
    ),
    (
        "wear_days",
        "days after which wear of glasses is looked at (42: common practice)",
    ),
    (
        "wear_months",
        "months after which it is looked at again (6: IAPB, secondary)",
    ),
    ("letters_from", "who answers questions, as letters print it"),
    ("letters_phone", "telephone that letters print"),
    ("letters_help", "where families find help with the cost"),
    (
        "letters_approved",
        "translations somebody has approved: es by A. Solano on 2026-09-01; ar by ...",
    ),
];

/// One setting, for people.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SettingView {
    /// Its name.
    pub name: &'static str,
    /// Its value; `none` where it is not made.
    pub value: String,
    /// What it is for.
    pub what: &'static str,
}

impl Desk {
    /// Returns every setting with its value.
    pub fn settings(&self) -> Result<Vec<SettingView>> {
        KNOWN
            .into_iter()
            .map(|(name, what)| {
                let value = self.read().setting(name)?.filter(|v| !v.is_empty());
                Ok(SettingView {
                    name,
                    value: value.unwrap_or_else(|| NONE.to_owned()),
                    what,
                })
            })
            .collect()
    }

    /// Makes a setting; `none` takes it back. What it was before stays in the ledger.
    ///
    /// # Errors
    /// Bad input for a name or a value that is none.
    pub fn set(&mut self, name: &str, value: &str) -> Result<Put> {
        let Some((name, _)) = KNOWN.into_iter().find(|(known, _)| *known == name) else {
            let known = KNOWN.map(|(name, _)| name);
            let hint = match nearest(name, known) {
                Some(near) => format!("did you mean {near}?"),
                None => format!("known: {}", known.join(", ")),
            };
            let found = shown(name, 60);
            return Err(ActionError::bad(format!("there is no setting {found:?}")).hint(hint));
        };
        let value = value.trim();
        let value = if value == NONE {
            String::new()
        } else {
            self.checked(name, value)?
        };
        let row = Setting {
            id: new_id(),
            name: name.to_owned(),
            value,
        };
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| tx.put(row, "setting changed"))?)
    }

    fn checked(&self, name: &str, value: &str) -> Result<String> {
        match name {
            "notation" if !matches!(value, "feet" | "metres") => Err(ActionError::bad(format!(
                "found {:?}, expected feet or metres",
                shown(value, 60)
            ))),
            "triage" => self.checked_triage(value),
            _ if is_count(name) && value.parse().is_ok_and(|n: u32| (1..=3650).contains(&n)) => {
                Ok(value.to_owned())
            }
            _ if is_count(name) => Err(ActionError::bad(format!(
                "found {:?}, expected a whole number from 1 to 3650",
                shown(value, 60)
            ))),
            _ if value.is_empty() || value.chars().any(is_unsafe) => {
                Err(ActionError::bad("the value needs ordinary characters")
                    .hint("none takes a setting back"))
            }
            _ => Ok(value.to_owned()),
        }
    }

    fn checked_triage(&self, value: &str) -> Result<String> {
        let mut chosen: Vec<&str> = Vec::new();
        for id in value.split(',').map(str::trim) {
            if triage_set(&self.library, id).is_none() {
                let known: Vec<&str> = self
                    .library
                    .gradings()
                    .filter(|g| g.kind == GradingKind::Triage)
                    .map(|g| &*g.id)
                    .collect();
                let found = shown(id, 60);
                return Err(
                    ActionError::bad(format!("there is no triage set {found:?}")).hint(format!(
                        "known: {}; several with commas, or none",
                        known.join(", ")
                    )),
                );
            }
            if !chosen.contains(&id) {
                chosen.push(id);
            }
        }
        Ok(chosen.join(","))
    }

    /// Returns the triage sets that the programme has chosen.
    pub fn triage_sets(&self) -> Vec<String> {
        self.read()
            .setting("triage")
            .ok()
            .flatten()
            .unwrap_or_default()
            .split(',')
            .filter(|id| !id.is_empty())
            .map(str::to_owned)
            .collect()
    }
}

/// Says whether a setting is a number of days, months or attempts.
fn is_count(name: &str) -> bool {
    ["_days", "_months", "_attempts"]
        .iter()
        .any(|end| name.ends_with(end))
}
