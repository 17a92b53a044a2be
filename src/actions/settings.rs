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
const KNOWN: [(&str, &str); 3] = [
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
