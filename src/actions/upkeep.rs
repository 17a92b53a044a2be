//! Looking after a store: who may open it, whether it is whole, a copy of it.

use std::path::Path;

use chrono::NaiveDate;

use super::desk::{Desk, DeskOptions};
use super::error::{ActionError, Kind, Result};
use super::views::{DayInfo, StoredOutcome};
use crate::domain::outcome::{DecidedBy, Outcome};
use crate::rules::explain;
use crate::store::{
    Access, Damage, DraftDay, ErrorKind, ExpectedHead, Head, Info, Store, Verified,
};

/// Returns the readable part of a store's key file, or nothing where there is no store.
pub fn store_info(dir: &Path) -> Result<Option<Info>> {
    match Store::info(dir) {
        Ok(info) => Ok(Some(info)),
        Err(error) if error.kind() == ErrorKind::NotAStore => Ok(None),
        Err(error) => Err(error.into()),
    }
}

/// Returns who writes the store in a folder just now.
pub fn writer(dir: &Path) -> Result<Option<String>> {
    Ok(Store::writer(dir)?.map(|holder| holder.to_string()))
}

/// Removes a demo store, which nothing protects; any other store is refused. What else lies in the
/// folder stays.
pub fn remove_demo(dir: &Path) -> Result<()> {
    let Some(info) = store_info(dir)? else {
        return Ok(());
    };
    if info.protected {
        return Err(protected(dir));
    }
    if let Some(who) = writer(dir)? {
        return Err(ActionError::failed(format!("the demo is in use: {who}"))
            .hint("close the other window"));
    }
    // The key file first: a folder without one is no store, whatever else is left.
    for name in ["store.key", "store.db", "drafts.db"] {
        for ending in ["", "-wal", "-shm"] {
            match std::fs::remove_file(dir.join(format!("{name}{ending}"))) {
                Err(e) if e.kind() != std::io::ErrorKind::NotFound => {
                    return Err(ActionError {
                        kind: Kind::Failed,
                        message: format!("cannot remove {name}{ending}: {e}"),
                        hint: None,
                    });
                }
                _ => {}
            }
        }
    }
    Ok(())
}

/// Says that a store is nobody's demo.
pub fn protected(dir: &Path) -> ActionError {
    ActionError::bad(format!(
        "{} holds a store that is protected by a passphrase: it is not the demo",
        dir.display()
    ))
    .hint("name another folder with --store")
}

impl Desk {
    /// Opens the store for reading only, whoever writes it meanwhile.
    pub fn open_to_read(
        dir: &Path,
        secret: &crate::store::Secret,
        options: &DeskOptions,
    ) -> Result<Desk> {
        Desk::around(Store::open(dir, secret, Access::ReadOnly)?, options)
    }

    /// Goes on at another civil date.
    pub fn set_today(&mut self, today: NaiveDate) {
        self.today = today;
    }

    /// Recomputes the ledger and every projection; `progress` gets entries done and in all.
    pub fn verify(
        &self,
        expected: Option<&ExpectedHead>,
        progress: impl FnMut(u64, u64),
    ) -> std::result::Result<Verified, Damage> {
        self.store.verify(expected, progress)
    }

    /// Copies the store to a new folder and proves the copy.
    pub fn backup(&self, to: &Path) -> Result<Head> {
        Ok(self.store.backup(to)?)
    }
}

impl DayInfo {
    /// Returns what drafts of this day are kept under.
    pub fn draft_day(&self) -> DraftDay {
        super::days::key_of(self)
    }
}

impl StoredOutcome {
    /// Returns the outcome with its date, in the words of a fresh one: `RESCREEN by 28 Oct 2026`.
    pub fn headline(&self) -> String {
        explain::headline(&Outcome {
            kind: self.kind,
            decided_by: DecidedBy::Nothing,
            urgency: self.urgency,
            act_within_days: None,
            act_by: self.act_by,
            due_on: self.due_on,
            risks: self.risks.clone(),
            criteria: self.criteria.clone(),
            unknown: self.unknown.clone(),
            reasons: Vec::new(),
            qualifiers: self.qualifiers.clone(),
            protocol_notes: Vec::new(),
            rule_set: self.rule_set.as_str().into(),
            edition: self.edition.as_str().into(),
            content_hash: "".into(),
        })
    }
}
