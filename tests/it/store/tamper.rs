//! Whoever holds the key and drops the triggers is still found out.

use rusqlite::{Connection, types::Value};
use twoline::store::row::TABLES;
use twoline::store::{Damage, ExpectedHead, Store};
use uuid::Uuid;

use super::support::*;

fn copy(from: &std::path::Path, to: &std::path::Path) {
    std::fs::create_dir_all(to).unwrap();
    for name in ["store.db", "store.key"] {
        std::fs::copy(from.join(name), to.join(name)).unwrap();
    }
}

/// A filled store, closed, so that its one file can be copied.
fn filled() -> (tempfile::TempDir, std::path::PathBuf) {
    let (temp, mut store) = fresh();
    fill(&mut store);
    let dir = store.dir().to_owned();
    drop(store);
    assert!(!dir.join("store.db-wal").exists());
    (temp, dir)
}

/// Does something to a copy of the store behind its back and returns what verify says.
fn after(dir: &std::path::Path, harm: impl FnOnce(&Connection)) -> Result<(), Damage> {
    let copied = tempfile::TempDir::new().unwrap();
    copy(dir, copied.path());
    {
        let conn = raw(copied.path());
        drop_triggers(&conn);
        conn.execute_batch("PRAGMA foreign_keys = OFF; PRAGMA ignore_check_constraints = ON")
            .unwrap();
        harm(&conn);
    }
    let store = match Store::open(copied.path(), &twoline::store::Secret::None, WRITE) {
        Ok(store) => store,
        Err(error) => {
            assert_eq!(error.kind(), twoline::store::ErrorKind::Damaged, "{error}");
            return Err(Damage {
                table: "here".to_owned(),
                entry: None,
                what: error.to_string(),
            });
        }
    };
    store.verify(None, |_, _| {}).map(|_| ())
}

fn columns(conn: &Connection, table: &str) -> Vec<String> {
    conn.prepare(&format!("SELECT name FROM pragma_table_info('{table}')"))
        .unwrap()
        .query_map([], |r| r.get(0))
        .unwrap()
        .map(Result::unwrap)
        .collect()
}

/// Another value of the same kind, as close as can be.
fn another(value: &Value, kind: &str) -> Value {
    match value {
        Value::Null if kind == "BLOB" => Value::Blob(vec![7; 16]),
        Value::Null if kind == "INTEGER" => Value::Integer(0),
        Value::Null => Value::Text(String::new()),
        Value::Integer(n) => Value::Integer(n + 1),
        Value::Real(_) => unreachable!("no table holds reals"),
        Value::Text(text) => Value::Text(format!("{text} ")),
        Value::Blob(bytes) => {
            let mut bytes = bytes.clone();
            match bytes.last_mut() {
                Some(last) => *last ^= 1,
                None => bytes.push(0),
            }
            Value::Blob(bytes)
        }
    }
}

#[test]
fn an_untouched_copy_verifies() {
    let (_temp, dir) = filled();
    after(&dir, |_| {}).unwrap();
}

#[test]
fn every_column_of_every_table_of_entries() {
    let (_temp, dir) = filled();
    let mut tried = 0;
    for table in TABLES {
        for column in columns(&raw(&dir), table.name) {
            let mut id = Vec::new();
            let damage = after(&dir, |conn| {
                // The last row: the first of a table may be the store's own beginning.
                let (tx, ord, value, kind): (i64, i64, Value, String);
                (tx, ord, id, value) = conn
                    .query_row(
                        &format!("SELECT tx, ord, id, {column} FROM {} ORDER BY tx DESC, ord DESC LIMIT 1", table.name),
                        [],
                        |r| Ok((r.get(0)?, r.get(1)?, r.get(2)?, r.get(3)?)),
                    )
                    .unwrap();
                kind = conn
                    .query_row(
                        "SELECT type FROM pragma_table_info(?1) WHERE name = ?2",
                        [table.name, &column],
                        |r| r.get(0),
                    )
                    .unwrap();
                let changed = conn
                    .execute(
                        &format!("UPDATE {} SET {column} = ?1 WHERE tx = ?2 AND ord = ?3", table.name),
                        rusqlite::params![another(&value, &kind), tx, ord],
                    )
                    .unwrap();
                assert_eq!(changed, 1);
            })
            .expect_err(&format!("{}.{column} was changed and not found", table.name));
            assert_eq!(damage.table, table.name, "{column}: {damage}");
            assert_eq!(
                damage.entry,
                Some(Uuid::from_slice(&id).unwrap()),
                "{}.{column}: {damage}",
                table.name
            );
            tried += 1;
        }
    }
    assert!(tried > 200, "{tried}");
}

#[test]
fn every_column_of_transactions_and_projections() {
    let (_temp, dir) = filled();
    for table in [
        "tx",
        "superseded",
        "chain_current",
        "child_current",
        "visit_part",
        "visit_current",
        "here",
    ] {
        for column in columns(&raw(&dir), table) {
            // A secret and no entry: another one shows when a packet is read.
            if column == "packet_key" {
                continue;
            }
            let damage = after(&dir, |conn| {
                let value: Value = conn
                    .query_row(&format!("SELECT {column} FROM {table} ORDER BY 1 DESC LIMIT 1"), [], |r| r.get(0))
                    .unwrap();
                let kind: String = conn
                    .query_row(
                        "SELECT type FROM pragma_table_info(?1) WHERE name = ?2",
                        [table, &column],
                        |r| r.get(0),
                    )
                    .unwrap();
                let changed = conn
                    .execute(
                        &format!(
                            "UPDATE {table} SET {column} = ?1 WHERE {column} IS ?2 AND ({column}) IN (SELECT {column} FROM {table}) OR ?2 IS NULL AND {column} IS NULL"
                        ),
                        rusqlite::params![another(&value, &kind), value],
                    )
                    .unwrap();
                assert!(changed > 0);
            })
            .expect_err(&format!("{table}.{column} was changed and not found"));
            if table != "tx" {
                assert!(
                    damage.table == table || damage.table == "file",
                    "{table}.{column}: {damage}"
                );
            }
        }
    }
}

#[test]
fn a_removed_row_is_named() {
    let (_temp, dir) = filled();
    for table in TABLES {
        let mut id = Vec::new();
        let damage = after(&dir, |conn| {
            id = conn
                .query_row(&format!("SELECT id FROM {} LIMIT 1", table.name), [], |r| {
                    r.get(0)
                })
                .unwrap();
            conn.execute(&format!("DELETE FROM {} WHERE id = ?1", table.name), [&id])
                .unwrap();
        })
        .unwrap_err();
        let id = Uuid::from_slice(&id).unwrap();
        assert_eq!(
            damage.to_string(),
            format!("damaged: {} entry {id}: is missing", table.name)
        );
    }
}

#[test]
fn two_swapped_rows_are_named() {
    let (_temp, dir) = filled();
    let damage = after(&dir, |conn| {
        conn.execute_batch(
            "CREATE TEMP TABLE two AS SELECT tx, ord FROM reading ORDER BY tx, ord LIMIT 2;
             UPDATE reading SET ord = ord + 1000 WHERE (tx, ord) = (SELECT tx, ord FROM two LIMIT 1);
             UPDATE reading SET ord = (SELECT ord FROM two LIMIT 1)
                 WHERE (tx, ord) = (SELECT tx, ord FROM two LIMIT 1 OFFSET 1);
             UPDATE reading SET ord = (SELECT ord FROM two LIMIT 1 OFFSET 1) WHERE ord >= 1000;",
        )
        .unwrap();
    })
    .unwrap_err();
    assert_eq!(damage.table, "reading");
    assert!(damage.entry.is_some());
    assert_eq!(damage.what, "another entry stands in its place");
}

#[test]
fn a_row_put_in_is_named() {
    let (_temp, dir) = filled();
    let damage = after(&dir, |conn| {
        conn.execute_batch(
            "INSERT INTO site (id, v, salt, tx, ord, code, name)
             VALUES (x'00112233445566778899aabbccddeeff', 1, zeroblob(16), 2, 99, 'X', 'X')",
        )
        .unwrap();
    })
    .unwrap_err();
    assert_eq!(damage.table, "site");
    assert_eq!(
        damage.entry.unwrap().to_string(),
        "00112233-4455-6677-8899-aabbccddeeff"
    );
}

/// The last transaction removed without a trace: only a head printed elsewhere shows it.
fn cut(conn: &Connection) {
    for table in TABLES {
        conn.execute(
            &format!(
                "DELETE FROM {} WHERE tx = (SELECT max(tx) FROM tx)",
                table.name
            ),
            [],
        )
        .unwrap();
    }
    conn.execute_batch(
        "DELETE FROM superseded;
         DELETE FROM tx WHERE tx = (SELECT max(tx) FROM tx);
         UPDATE chain_current SET seq = (SELECT max(seq) FROM tx),
             tx_hash = (SELECT tx_hash FROM tx ORDER BY tx DESC LIMIT 1),
             entries = (SELECT sum(n) FROM tx);
         UPDATE visit_current SET corrected = 0;",
    )
    .unwrap();
}

#[test]
fn a_cut_tail_shows_against_a_printed_head() {
    let (_temp, dir) = filled();
    let store = open(&dir);
    let printed = store.head().unwrap();
    let expected = ExpectedHead::parse(&printed.to_string()).unwrap();
    assert_eq!(expected.entries, Some(printed.entries));
    store.verify(Some(&expected), |_, _| {}).unwrap();
    drop(store);

    // Half done, it shows without a head.
    let damage = after(&dir, |conn| {
        conn.execute_batch(
            "DELETE FROM correction; DELETE FROM tx WHERE tx = (SELECT max(tx) FROM tx);",
        )
        .unwrap();
    })
    .unwrap_err();
    assert_eq!(
        damage.table, "reading",
        "the replacement is left over: {damage}"
    );

    // Done whole, it verifies on its own, which the help says; the printed head shows it.
    let conn = raw(&dir);
    drop_triggers(&conn);
    cut(&conn);
    drop(conn);
    let store = open(&dir);
    store.verify(None, |_, _| {}).unwrap();
    let damage = store.verify(Some(&expected), |_, _| {}).unwrap_err();
    assert!(
        damage.what.starts_with(&format!(
            "the head {} ({} entries) was never that of this store",
            printed.short(),
            printed.entries
        )),
        "{damage}"
    );
}

#[test]
fn an_older_printed_head_is_found_inside() {
    let (_temp, mut store) = fresh();
    let first = ExpectedHead::parse(&store.head().unwrap().short()).unwrap();
    fill(&mut store);
    store.verify(Some(&first), |_, _| {}).unwrap();
    assert_ne!(store.head().unwrap().short(), first.prefix);
    for bad in ["", "12", "0123456789abcdeg", "0123456789abcdef (x entries)"] {
        assert_eq!(ExpectedHead::parse(bad), None, "{bad}");
    }
}

#[test]
fn a_flipped_byte_in_the_file_is_found() {
    let (_temp, dir) = filled();
    let path = dir.join("store.db");
    let mut bytes = std::fs::read(&path).unwrap();
    let at = bytes.len() - 2000;
    bytes[at] ^= 1;
    std::fs::write(&path, bytes).unwrap();
    let found = match Store::open(&dir, &twoline::store::Secret::None, WRITE) {
        Err(error) => error.to_string(),
        Ok(store) => store.verify(None, |_, _| {}).unwrap_err().to_string(),
    };
    assert!(
        found.contains("damaged") || found.contains("does not fit"),
        "{found}"
    );
}

#[test]
fn progress_reaches_the_end() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let mut last = (0, 0);
    let verified = store.verify(None, |done, all| last = (done, all)).unwrap();
    assert_eq!(last, (verified.head.entries, verified.head.entries));
}
