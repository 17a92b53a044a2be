//! Recomputing everything the ledger says, and every projection.

mod walk;

use std::fmt;

use rusqlite::{Connection, OptionalExtension};
use uuid::Uuid;

use super::cell::Value;
use super::error::Error;
use super::ledger::{ExpectedHead, Head};
use super::{Store, project};
use walk::Walk;

/// What a store that verified holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Verified {
    /// The head.
    pub head: Head,
    /// Transactions.
    pub transactions: u64,
    /// Chains.
    pub chains: u64,
}

/// The first thing found that is not as the ledger says.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Damage {
    /// The table, or `file`.
    pub table: String,
    /// The entry, where it is one.
    pub entry: Option<Uuid>,
    /// What is wrong with it.
    pub what: String,
}

impl Damage {
    fn at(table: &str, entry: Option<Uuid>, what: impl Into<String>) -> Damage {
        Damage {
            table: table.to_owned(),
            entry,
            what: what.into(),
        }
    }

    /// Returns what can be done about it.
    pub fn hint(&self) -> Option<String> {
        Error::from(self.clone()).hint()
    }
}

impl fmt::Display for Damage {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        Error::from(self.clone()).fmt(f)
    }
}

impl std::error::Error for Damage {}

impl From<Damage> for Error {
    fn from(damage: Damage) -> Error {
        Error::damaged(&damage.table, damage.entry, &damage.what)
    }
}

impl From<rusqlite::Error> for Damage {
    fn from(error: rusqlite::Error) -> Damage {
        Damage::at("file", None, error.to_string())
    }
}

type Result<T> = std::result::Result<T, Damage>;

impl Store {
    /// Recomputes every hash, link, count and projection; `progress` gets entries done and in all.
    ///
    /// With the head that was printed on a report, also finds entries cut off the end since.
    pub fn verify(
        &self,
        expected: Option<&ExpectedHead>,
        progress: impl FnMut(u64, u64),
    ) -> Result<Verified> {
        let snapshot = self.conn.unchecked_transaction()?;
        file_is_sound(&snapshot, &["cipher_integrity_check", "integrity_check"])?;
        let verified = Walk::new(&snapshot, expected, progress)?.run()?;
        projections(&snapshot)?;
        here(&snapshot)?;
        Ok(verified)
    }
}

/// Recomputes the ledger of a database of any known version; its projections are not looked at.
pub(super) fn ledger(conn: &Connection) -> Result<Verified> {
    file_is_sound(conn, &["cipher_integrity_check", "integrity_check"])?;
    Walk::new(conn, None, |_, _| {})?.run()
}

/// Checks everything while a transaction is open that may still be rolled back.
pub(super) fn uncommitted(conn: &Connection) -> Result<Verified> {
    file_is_sound(conn, &["integrity_check"])?;
    let verified = Walk::new(conn, None, |_, _| {})?.run()?;
    projections(conn)?;
    here(conn)?;
    Ok(verified)
}

fn file_is_sound(conn: &Connection, checks: &[&str]) -> Result<()> {
    for check in checks {
        let mut statement = conn.prepare(&format!("PRAGMA {check}"))?;
        let mut rows = statement.query([])?;
        while let Some(row) = rows.next()? {
            let text: String = row.get(0)?;
            if text != "ok" {
                return Err(Damage::at("file", None, text));
            }
        }
    }
    Ok(())
}

/// Rebuilds the projections aside and compares.
fn projections(conn: &Connection) -> Result<()> {
    superseded(conn)?;
    for (table, rebuilt, key) in [
        ("child_current", project::CHILDREN, "child_id"),
        ("visit_part", project::PARTS, "hex(visit_id)"),
        ("visit_current", project::VISITS, "hex(visit_id)"),
    ] {
        let stored = format!("SELECT * FROM {table}");
        for (less, more, what) in [
            (stored.as_str(), rebuilt, "does not agree with the entries"),
            (rebuilt, stored.as_str(), "is missing or out of date"),
        ] {
            // The column names come from the first part of a compound; the table's are wanted.
            let sql = format!(
                "SELECT {key} FROM (SELECT * FROM {table} WHERE 0 UNION ALL SELECT * FROM ({less} EXCEPT {more})) LIMIT 1"
            );
            let found: Option<String> = conn.query_row(&sql, [], |r| r.get(0)).optional()?;
            if let Some(key) = found {
                return Err(Damage::at(table, key.parse().ok(), format!("{key} {what}")));
            }
        }
    }
    Ok(())
}

fn superseded(conn: &Connection) -> Result<()> {
    let mut expected = std::collections::BTreeSet::new();
    let mut statement = conn.prepare("SELECT supersedes FROM correction")?;
    let mut rows = statement.query([])?;
    while let Some(row) = rows.next()? {
        if let Some(ids) = super::Ids::from_stored(row.get_ref(0)?) {
            expected.extend(ids.0);
        }
    }
    let mut statement = conn.prepare("SELECT id FROM superseded")?;
    let mut rows = statement.query([])?;
    while let Some(row) = rows.next()? {
        let id = Uuid::from_stored(row.get_ref(0)?);
        if !id.is_some_and(|id| expected.remove(&id)) {
            return Err(Damage::at("superseded", id, "no correction says so"));
        }
    }
    match expected.first() {
        None => Ok(()),
        Some(id) => Err(Damage::at("superseded", Some(*id), "is missing")),
    }
}

fn here(conn: &Connection) -> Result<()> {
    for (column, table, field) in [
        ("chain", "chain", "chain_id"),
        ("programme", "programme", "programme_id"),
        ("station", "station", "station_id"),
    ] {
        let sql =
            format!("SELECT count(*) FROM here WHERE {column} IN (SELECT {field} FROM {table})");
        let known: i64 = conn.query_row(&sql, [], |r| r.get(0))?;
        if known != 1 {
            return Err(Damage::at(
                "here",
                None,
                format!("its {column} is not in this store"),
            ));
        }
    }
    Ok(())
}
