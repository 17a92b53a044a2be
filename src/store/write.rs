//! Appending entries.

use std::collections::BTreeSet;

use rusqlite::{Connection, OptionalExtension, TransactionBehavior, params};
use uuid::Uuid;

use super::cell::{Ids, Value};
use super::error::{Error, ErrorKind, Result};
use super::ledger::{self, TxHeader, TxRows};
use super::row::{Correction, Row, Table, Touched, key_bytes};
use super::{Reads, Store, new_id, project};
use crate::clock::Moment;

/// Who appends, and when by the wall clock.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Author {
    /// The screener, where one is known.
    pub screener: Option<Uuid>,
    /// The moment of entry.
    pub at: Moment,
}

/// What [`Tx::put`] did.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Put {
    /// There was nothing of this key: an entry was added.
    New,
    /// There was something else: it was superseded.
    Changed,
    /// The same values are there already: no entry.
    Unchanged,
}

/// A transaction being written.
#[derive(Debug)]
pub struct Tx<'a> {
    conn: &'a Connection,
    author: Author,
    number: i64,
    rows: TxRows,
    salts: Salts,
    bytes: Vec<u8>,
    children: BTreeSet<String>,
    visits: BTreeSet<Uuid>,
}

/// Random bytes, fetched for many rows at once.
#[derive(Debug)]
struct Salts {
    pool: Vec<u8>,
    used: usize,
}

impl Salts {
    fn next(&mut self) -> Result<[u8; 16]> {
        if self.used + 16 > self.pool.len() {
            self.pool.resize(4096, 0);
            getrandom::fill(&mut self.pool)
                .map_err(|e| Error::new(ErrorKind::Engine, format!("no random bytes: {e}")))?;
            self.used = 0;
        }
        let mut salt = [0; 16];
        salt.copy_from_slice(&self.pool[self.used..self.used + 16]);
        self.used += 16;
        Ok(salt)
    }
}

impl Store {
    /// Appends entries in one transaction that is durable when this returns.
    ///
    /// Nothing is written when the closure fails or adds nothing.
    pub fn append<T>(
        &mut self,
        author: &Author,
        write: impl FnOnce(&mut Tx<'_>) -> Result<T>,
    ) -> Result<T> {
        if !self.is_writable() {
            return Err(Error::read_only(&self.dir));
        }
        let chain = self.chain;
        append(&mut self.conn, chain, author, write)
    }
}

pub(super) fn append<T>(
    conn: &mut Connection,
    chain: Uuid,
    author: &Author,
    write: impl FnOnce(&mut Tx<'_>) -> Result<T>,
) -> Result<T> {
    let sql = conn.transaction_with_behavior(TransactionBehavior::Immediate)?;
    let (value, sealed) = written(&sql, chain, author, write)?;
    let Some((seq, tx_hash)) = sealed else {
        return Ok(value);
    };
    let committed = sql.commit();
    confirmed(conn, committed, chain, seq, &tx_hash)?;
    Ok(value)
}

/// Writes a transaction of a chain without committing it; returns its number and hash, unless nothing
/// was added.
pub(super) fn written<T>(
    sql: &Connection,
    chain: Uuid,
    author: &Author,
    write: impl FnOnce(&mut Tx<'_>) -> Result<T>,
) -> Result<(T, Option<(i64, ledger::Hash)>)> {
    let mut tx = Tx {
        number: sql
            .prepare_cached("SELECT coalesce(max(tx), 0) + 1 FROM tx")?
            .query_one([], |r| r.get(0))?,
        conn: sql,
        author: *author,
        rows: TxRows::default(),
        salts: Salts {
            pool: Vec::new(),
            used: 0,
        },
        bytes: Vec::new(),
        children: BTreeSet::new(),
        visits: BTreeSet::new(),
    };
    let value = write(&mut tx)?;
    if tx.rows.count() == 0 {
        return Ok((value, None));
    }
    let sealed = tx.seal(chain)?;
    Ok((value, Some(sealed)))
}

/// Says whether a commit was kept: the engine may or may not have, so look, never assume.
pub(super) fn confirmed(
    conn: &Connection,
    committed: rusqlite::Result<()>,
    chain: Uuid,
    seq: i64,
    tx_hash: &[u8],
) -> Result<()> {
    let Err(error) = committed else {
        return Ok(());
    };
    if found(conn, chain, seq, tx_hash) {
        return Ok(());
    }
    Err(match error.sqlite_error_code() {
        Some(rusqlite::ErrorCode::DiskFull) => Error::not_saved_disk_full(),
        _ => Error::not_confirmed(error),
    })
}

fn found(conn: &Connection, chain: Uuid, seq: i64, tx_hash: &[u8]) -> bool {
    if !conn.is_autocommit() {
        let _ = conn.execute_batch("ROLLBACK");
    }
    conn.is_autocommit()
        && conn
            .query_row(
                "SELECT tx_hash = ?3 FROM tx WHERE chain = ?1 AND seq = ?2",
                params![chain.cell(), seq, tx_hash],
                |r| r.get(0),
            )
            .unwrap_or(false)
}

impl Tx<'_> {
    /// Returns the typed reads, which see what was added so far; projections follow at the end.
    pub fn read(&self) -> Reads<'_> {
        Reads::new(self.conn)
    }

    pub(super) fn conn(&self) -> &Connection {
        self.conn
    }

    /// Returns who appends.
    pub fn author(&self) -> &Author {
        &self.author
    }

    /// Adds an entry.
    pub fn add<R: Row>(&mut self, row: &R) -> Result<()> {
        let table = R::TABLE;
        let version = table.versions.len() as i64;
        let salt = self.salts.next()?;
        let id = row.id();
        ledger::begin_row(&mut self.bytes, table.name, version, id.as_bytes(), &salt);
        let ord = self.rows.count();
        {
            let mut insert = self.conn.prepare_cached(insert_sql(table))?;
            insert.raw_bind_parameter(1, id.cell())?;
            insert.raw_bind_parameter(2, version)?;
            insert.raw_bind_parameter(3, &salt[..])?;
            insert.raw_bind_parameter(4, self.number)?;
            insert.raw_bind_parameter(5, ord)?;
            let (mut at, mut bound) = (6, Ok(()));
            let bytes = &mut self.bytes;
            row.each(|cell| {
                cell.write(bytes);
                if bound.is_ok() {
                    bound = insert.raw_bind_parameter(at, &cell);
                }
                at += 1;
            });
            bound?;
            insert
                .raw_execute()
                .map_err(|e| there_already(e, table, id))?;
        }
        self.rows
            .add(table.name, id.as_bytes(), &ledger::hash(&self.bytes));
        match row.touched() {
            Touched::Nothing => {}
            Touched::Child(child) => {
                if !self.children.contains(child) {
                    self.children.insert(child.to_owned());
                }
            }
            Touched::Visit(visit) => {
                self.visits.insert(visit);
            }
        }
        Ok(())
    }

    /// Makes these values the present ones of their key: adds, supersedes or leaves alone.
    pub fn put<R: Row>(&mut self, row: R, reason: &str) -> Result<Put> {
        let current = self.read().current_of(&row)?;
        if current.is_empty() {
            self.add(&row)?;
            return Ok(Put::New);
        }
        let old: Vec<Uuid> = current.iter().map(Row::id).collect();
        self.supersede(&old, Some(row), reason)
    }

    /// Replaces entries by one with the same key, or, without a replacement, takes them back.
    ///
    /// The same values again are no entry.
    pub fn supersede<R: Row>(
        &mut self,
        old: &[Uuid],
        replacement: Option<R>,
        reason: &str,
    ) -> Result<Put> {
        let mut before = Vec::new();
        for id in old {
            before.push(self.present::<R>(*id)?);
        }
        let replaced_by = replacement.as_ref().map(Row::id);
        if let Some(new) = replacement {
            let key = key_bytes(&new);
            if before.iter().any(|row| key_bytes(row) != key) {
                return Err(Error::new(
                    ErrorKind::Refused,
                    format!(
                        "a correction of {} must be about the same thing",
                        R::TABLE.name
                    ),
                )
                .with_hint("take the entry back and record it where it belongs"));
            }
            if !before.is_empty()
                && before
                    .iter()
                    .all(|row| row.clone().with_id(new.id()) == new)
            {
                return Ok(Put::Unchanged);
            }
            self.add(&new)?;
        }
        self.add(&Correction {
            id: new_id(),
            table_name: R::TABLE.name.to_owned(),
            supersedes: Ids(old.to_vec()),
            replacement: replaced_by,
            reason: reason.to_owned(),
            screener_id: self.author.screener,
        })?;
        for row in &before {
            self.conn
                .prepare_cached("INSERT OR IGNORE INTO superseded (id) VALUES (?1)")?
                .execute([row.id().cell()])?;
            match row.touched() {
                Touched::Nothing => {}
                Touched::Child(child) => {
                    self.children.insert(child.to_owned());
                }
                Touched::Visit(visit) => {
                    self.visits.insert(visit);
                }
            }
        }
        Ok(Put::Changed)
    }

    /// Returns an entry that is present, that is: there, and not superseded.
    fn present<R: Row>(&self, id: Uuid) -> Result<R> {
        let reads = self.read();
        let row = reads.entry::<R>(id)?.ok_or_else(|| {
            Error::new(
                ErrorKind::Missing,
                format!("there is no {} entry {id}", R::TABLE.name),
            )
        })?;
        if reads.is_superseded(id)? {
            return Err(Error::new(
                ErrorKind::Refused,
                format!("{} entry {id} was corrected already", R::TABLE.name),
            )
            .with_hint("correct the entry that replaced it"));
        }
        Ok(row)
    }

    /// Writes the transaction's own row and the projections.
    fn seal(&mut self, chain: Uuid) -> Result<(i64, ledger::Hash)> {
        let last: Option<(i64, Vec<u8>)> = self
            .conn
            .prepare_cached("SELECT seq, tx_hash FROM chain_current WHERE chain = ?1")?
            .query_row([chain.cell()], |r| Ok((r.get(0)?, r.get(1)?)))
            .optional()?;
        let (seq, prev) = match last {
            Some((seq, hash)) => (seq + 1, Some(hash)),
            None => (1, None),
        };
        let lamport = self
            .conn
            .prepare_cached("SELECT coalesce(max(lamport), 0) + 1 FROM tx")?
            .query_one([], |r| r.get(0))?;
        let header = TxHeader {
            chain,
            seq,
            lamport,
            recorded_at_ms: self.author.at.utc_ms,
            offset_minutes: i64::from(self.author.at.offset_minutes),
            screener: self.author.screener,
            program_version: env!("CARGO_PKG_VERSION").to_owned(),
            prev,
        };
        let tx_hash = self.rows.tx_hash(&header);
        self.conn
            .prepare_cached(
                "INSERT INTO tx (tx, chain, seq, lamport, recorded_at_ms, offset_minutes, screener, \
                 program_version, prev, n, tx_hash, entries) VALUES (?1,?2,?3,?4,?5,?6,?7,?8,?9,?10,?11,?12)",
            )?
            .execute(params![
                self.number,
                header.chain.cell(),
                header.seq,
                header.lamport,
                header.recorded_at_ms,
                header.offset_minutes,
                header.screener.cell(),
                header.program_version,
                header.prev,
                self.rows.count(),
                &tx_hash[..],
                self.rows.bytes(),
            ])?;
        project::chain(
            self.conn,
            chain,
            header.prev.as_deref(),
            (seq, &tx_hash[..]),
            self.rows.count(),
        )?;
        project::children(self.conn, &self.children)?;
        project::visits(self.conn, &self.visits)?;
        Ok((seq, tx_hash))
    }
}

/// An id is written once: a second try of the same entry is told so.
fn there_already(error: rusqlite::Error, table: &Table, id: Uuid) -> Error {
    if error.sqlite_error_code() == Some(rusqlite::ErrorCode::ConstraintViolation) {
        Error::new(
            ErrorKind::Exists,
            format!("{} entry {id} is in the store already", table.name),
        )
    } else {
        error.into()
    }
}

/// Returns the INSERT of a table, built once.
pub(super) fn insert_sql(table: &'static Table) -> &'static str {
    use std::collections::HashMap;
    use std::sync::OnceLock;
    static ALL: OnceLock<HashMap<&'static str, String>> = OnceLock::new();
    ALL.get_or_init(|| {
        super::row::TABLES
            .iter()
            .map(|t| {
                let sql = format!(
                    "INSERT INTO {} (id, v, salt, tx, ord, {}) VALUES (?, ?, ?, ?, ?{})",
                    t.name,
                    t.columns.join(", "),
                    ", ?".repeat(t.columns.len())
                );
                (t.name, sql)
            })
            .collect()
    })
    .get(table.name)
    .map_or("", String::as_str)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::store::row::Site;
    use crate::store::{Kdf, New, Secret};

    fn store(dir: &std::path::Path) -> Store {
        let new = New {
            programme: "Quillmere".to_owned(),
            programme_id: None,
            station: "east".to_owned(),
            notation: "feet".to_owned(),
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        Store::create(dir, new).unwrap().0
    }

    fn site(name: &str) -> Site {
        Site {
            id: new_id(),
            code: "QE".to_owned(),
            name: name.to_owned(),
        }
    }

    fn now() -> Author {
        Author {
            screener: None,
            at: crate::clock::now(),
        }
    }

    /// A COMMIT that fails is looked up, and what is not there is said not to be.
    #[test]
    fn a_failed_commit_is_not_confirmed_and_can_be_tried_again() {
        let temp = tempfile::TempDir::new().unwrap();
        let mut store = store(temp.path());
        let head = store.head().unwrap();
        store.conn.commit_hook(Some(|| true)).unwrap();
        let site = site("Quillmere East");
        let error = store.append(&now(), |tx| tx.add(&site)).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::NotConfirmed);
        assert!(
            error
                .to_string()
                .starts_with("not confirmed: the entry was not found after saving failed ("),
            "{error}"
        );
        assert_eq!(
            error.hint().unwrap(),
            "check the disk, then do the same again: a draft is kept until it is signed, and nothing is saved twice"
        );
        store.conn.commit_hook(None::<fn() -> bool>).unwrap();
        assert_eq!(store.head().unwrap(), head);
        store.append(&now(), |tx| tx.add(&site)).unwrap();
        assert_eq!(store.read().sites().unwrap(), [site]);
        store.verify(None, |_, _| {}).unwrap();
    }

    #[test]
    fn a_full_disk_saves_nothing_and_says_so() {
        let temp = tempfile::TempDir::new().unwrap();
        let mut store = store(temp.path());
        let head = store.head().unwrap();
        let pages: i64 = store
            .conn
            .query_row("PRAGMA page_count", [], |r| r.get(0))
            .unwrap();
        store
            .conn
            .query_row(
                &format!("PRAGMA max_page_count = {}", pages + 2),
                [],
                |_| Ok(()),
            )
            .unwrap();
        let error = store
            .append(&now(), |tx| tx.add(&site(&"x".repeat(100_000))))
            .unwrap_err();
        assert_eq!(error.kind(), ErrorKind::DiskFull);
        assert_eq!(error.to_string(), "not saved: the disk is full");
        assert_eq!(
            error.hint().unwrap(),
            "make room on the disk, then save again; everything saved before is safe"
        );
        assert_eq!(store.head().unwrap(), head);
        store.append(&now(), |tx| tx.add(&site("small"))).unwrap();
        store.verify(None, |_, _| {}).unwrap();
    }

    /// The engine reports a failure although the transaction is in the file: it is found.
    #[test]
    fn what_was_kept_in_spite_of_an_error_is_found() {
        let temp = tempfile::TempDir::new().unwrap();
        let mut store = store(temp.path());
        let (chain, seq) = (store.chain, 1);
        let hash: Vec<u8> = store
            .conn
            .query_row("SELECT tx_hash FROM tx WHERE seq = 1", [], |r| r.get(0))
            .unwrap();
        let mut hash: ledger::Hash = hash.try_into().unwrap();
        assert!(found(&store.conn, chain, seq, &hash));
        hash[0] ^= 1;
        assert!(
            !found(&store.conn, chain, seq, &hash),
            "another's entry is not ours"
        );
        assert!(!found(&store.conn, chain, 2, &hash));
        store
            .append(&now(), |tx| tx.add(&site("still usable")))
            .unwrap();
    }
}
