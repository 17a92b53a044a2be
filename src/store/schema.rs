//! The schema and its versions.

use rusqlite::Connection;
use rusqlite_migration::{M, Migrations};

use super::error::{Error, ErrorKind, Result};

const ALL: &[M<'static>] = &[M::up(include_str!("../../migrations/0001_entries.sql"))];

const MIGRATIONS: Migrations<'static> = Migrations::from_slice(ALL);

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

/// Brings a store to a schema version.
pub(super) fn migrate(conn: &mut Connection) -> Result<()> {
    MIGRATIONS.to_latest(conn).map_err(|e| {
        Error::new(
            ErrorKind::Engine,
            format!("the store could not be brought up to date: {e}"),
        )
    })
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::store::row::TABLES;

    #[test]
    fn migrations_are_sound() {
        MIGRATIONS.validate().unwrap();
    }

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
        migrate(&mut newest).unwrap();
        assert_eq!(version(&newest).unwrap(), NEWEST);
        for from in 0..=NEWEST {
            let mut conn = Connection::open_in_memory().unwrap();
            MIGRATIONS.to_version(&mut conn, from).unwrap();
            assert_eq!(version(&conn).unwrap(), from);
            migrate(&mut conn).unwrap();
            assert_eq!(schema(&conn), schema(&newest), "from version {from}");
        }
    }

    /// The declaration in `row` and the migrations say the same, column by column.
    #[test]
    fn tables_match_their_declaration() {
        let mut conn = Connection::open_in_memory().unwrap();
        MIGRATIONS.to_latest(&mut conn).unwrap();
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
}
