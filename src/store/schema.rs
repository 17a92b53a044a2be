//! The schema and its versions.
//!
//! A migration only adds. It runs in one transaction that is kept only when the whole store verifies
//! after it; that is why it is not left to a crate, which would commit first.

use rusqlite::{Connection, TransactionBehavior};

use super::error::{Error, ErrorKind, Result};
use super::project;

const ALL: &[&str] = &[
    include_str!("../../migrations/0001_entries.sql"),
    include_str!("../../migrations/0002_stations.sql"),
    include_str!("../../migrations/0003_packets.sql"),
    include_str!("../../migrations/0004_referrals.sql"),
];

/// `TwoL` in ASCII: what `file` and other programs know a store by.
pub(super) const APPLICATION_ID: i32 = 0x5477_6F4C;

/// The newest schema version this program knows.
pub(super) const NEWEST: usize = ALL.len();

/// Returns the schema version of a store, refusing a newer one.
pub(super) fn version(conn: &Connection) -> Result<usize> {
    let found: i64 = conn.query_row("PRAGMA user_version", [], |r| r.get(0))?;
    match usize::try_from(found) {
        Ok(version) if version <= NEWEST => Ok(version),
        _ => Err(Error::newer(found, NEWEST)),
    }
}

/// Brings a store to the newest version, rebuilds its projections and keeps that only if `check`
/// finds nothing wrong.
pub(super) fn migrate(
    conn: &mut Connection,
    check: impl FnOnce(&Connection) -> Result<()>,
) -> Result<()> {
    to(conn, NEWEST, check)
}

fn to(
    conn: &mut Connection,
    newest: usize,
    check: impl FnOnce(&Connection) -> Result<()>,
) -> Result<()> {
    let tx = conn.transaction_with_behavior(TransactionBehavior::Immediate)?;
    let from = version(&tx)?;
    for sql in ALL.iter().take(newest).skip(from) {
        tx.execute_batch(sql).map_err(|e| not_migrated(&e))?;
    }
    if newest == NEWEST {
        project::rebuild(&tx)?;
    }
    tx.execute_batch(&format!("PRAGMA user_version = {newest}"))
        .map_err(|e| not_migrated(&e))?;
    check(&tx)?;
    tx.commit().map_err(|e| not_migrated(&e))
}

fn not_migrated(error: &rusqlite::Error) -> Error {
    let full = error.sqlite_error_code() == Some(rusqlite::ErrorCode::DiskFull);
    let kind = if full {
        ErrorKind::DiskFull
    } else {
        ErrorKind::Engine
    };
    Error::new(
        kind,
        format!("the store could not be brought up to date: {error}"),
    )
    .with_hint("nothing was changed; make room on the disk and open it again")
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::store::row::TABLES;

    /// From every earlier version the same tables come out.
    #[test]
    fn every_earlier_version_comes_up_to_date() {
        let schema = |conn: &Connection| -> Vec<String> {
            conn.prepare("SELECT sql FROM sqlite_schema WHERE sql IS NOT NULL ORDER BY name")
                .unwrap()
                .query_map([], |r| r.get(0))
                .unwrap()
                .map(std::result::Result::unwrap)
                .collect()
        };
        let mut newest = Connection::open_in_memory().unwrap();
        project::functions(&newest).unwrap();
        migrate(&mut newest, |_| Ok(())).unwrap();
        assert_eq!(version(&newest).unwrap(), NEWEST);
        for from in 0..=NEWEST {
            let mut conn = Connection::open_in_memory().unwrap();
            project::functions(&conn).unwrap();
            to(&mut conn, from, |_| Ok(())).unwrap();
            assert_eq!(version(&conn).unwrap(), from);
            migrate(&mut conn, |_| Ok(())).unwrap();
            assert_eq!(schema(&conn), schema(&newest), "from version {from}");
        }
    }

    /// The declaration in `row` and the migrations say the same, column by column.
    #[test]
    fn tables_match_their_declaration() {
        let mut conn = Connection::open_in_memory().unwrap();
        project::functions(&conn).unwrap();
        migrate(&mut conn, |_| Ok(())).unwrap();
        for table in TABLES {
            let columns: Vec<String> = conn
                .prepare(&format!(
                    "SELECT name FROM pragma_table_info('{}')",
                    table.name
                ))
                .unwrap()
                .query_map([], |r| r.get(0))
                .unwrap()
                .map(std::result::Result::unwrap)
                .collect();
            let mut expected = vec!["id", "v", "salt", "tx", "ord"];
            expected.extend(table.columns);
            assert_eq!(columns, expected, "{}", table.name);
            let strict: bool = conn
                .query_row(
                    "SELECT strict FROM pragma_table_list WHERE name = ?1",
                    [table.name],
                    |r| r.get(0),
                )
                .unwrap();
            assert!(strict, "{}", table.name);
            let triggers: i64 = conn
                .query_row(
                    "SELECT count(*) FROM sqlite_schema WHERE type = 'trigger' AND tbl_name = ?1",
                    [table.name],
                    |r| r.get(0),
                )
                .unwrap();
            assert_eq!(triggers, 2, "{}", table.name);
        }
    }

    #[test]
    fn what_does_not_verify_is_not_kept() {
        let mut conn = Connection::open_in_memory().unwrap();
        project::functions(&conn).unwrap();
        to(&mut conn, 1, |_| Ok(())).unwrap();
        let error = migrate(&mut conn, |_| Err(Error::damaged("site", None, "odd"))).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::Damaged);
        assert_eq!(version(&conn).unwrap(), 1);
        conn.prepare("SELECT * FROM same_child").unwrap_err();
    }
}
