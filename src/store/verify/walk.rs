//! The walk over transactions, and beside them the rows of every table.

use std::collections::BTreeMap;

use rusqlite::fallible_streaming_iterator::FallibleStreamingIterator;
use rusqlite::{Connection, OptionalExtension, Rows, params};
use uuid::Uuid;

use super::{Damage, Result, Verified};
use crate::store::cell::{Cell, Value};
use crate::store::ledger::{self, ExpectedHead, Head, Named, TxHeader, TxRows};
use crate::store::row::{TABLES, Table};

/// The rows of one table, in the order of transactions.
struct Cursor<'s> {
    table: &'static Table,
    rows: Rows<'s>,
    at: Option<(i64, i64)>,
}

impl Cursor<'_> {
    fn step(&mut self) -> Result<()> {
        self.at = match self.rows.next()? {
            Some(row) => Some((row.get(0)?, row.get(1)?)),
            None => None,
        };
        Ok(())
    }

    fn id(&self) -> Option<Uuid> {
        let row = self.rows.get()?;
        Uuid::from_stored(row.get_ref(2).ok()?)
    }

    /// Hashes the row it stands at.
    fn hash(&self, bytes: &mut Vec<u8>) -> std::result::Result<ledger::Hash, &'static str> {
        const BROKEN: &str = "a value is of no kind that is ever written";
        let row = self.rows.get().ok_or(BROKEN)?;
        let version: i64 = row.get(3).map_err(|_| BROKEN)?;
        let fields = usize::try_from(version - 1)
            .ok()
            .and_then(|i| self.table.versions.get(i))
            .ok_or("its version is not known")?;
        let cell = |at| {
            row.get_ref(at)
                .ok()
                .and_then(Cell::from_stored)
                .ok_or(BROKEN)
        };
        let (Cell::Blob(id), Cell::Blob(salt)) = (cell(2)?, cell(4)?) else {
            return Err(BROKEN);
        };
        ledger::begin_row(bytes, self.table.name, version, &id, &salt);
        for field in 0..self.table.columns.len() {
            let cell = cell(5 + field)?;
            if field < *fields {
                cell.write(bytes);
            } else if cell != Cell::Null {
                return Err("a field is filled that its version does not have");
            }
        }
        Ok(ledger::hash(bytes))
    }
}

/// Walks the transactions, and beside them the rows of every table.
pub(super) struct Walk<'c, 'e, P> {
    conn: &'c Connection,
    expected: Option<&'e ExpectedHead>,
    seen: bool,
    progress: P,
    total: u64,
    done: u64,
    /// Of each chain: its ends, more than one where it forked.
    chains: BTreeMap<Uuid, Vec<Tip>>,
}

struct Tip {
    seq: i64,
    hash: Vec<u8>,
    lamport: i64,
    entries: i64,
}

impl<'c, 'e, P: FnMut(u64, u64)> Walk<'c, 'e, P> {
    pub(super) fn new(
        conn: &'c Connection,
        expected: Option<&'e ExpectedHead>,
        progress: P,
    ) -> Result<Self> {
        let total: i64 = conn.query_row("SELECT coalesce(sum(n), 0) FROM tx", [], |r| r.get(0))?;
        Ok(Walk {
            conn,
            expected,
            seen: expected.is_none(),
            progress,
            total: total.unsigned_abs(),
            done: 0,
            chains: BTreeMap::new(),
        })
    }

    pub(super) fn run(mut self) -> Result<Verified> {
        let conn = self.conn;
        let mut statements = Vec::new();
        for table in TABLES {
            if let Some(columns) = columns_of(conn, table)? {
                let sql = format!(
                    "SELECT tx, ord, id, v, salt, {columns} FROM {} ORDER BY tx, ord",
                    table.name
                );
                statements.push((table, conn.prepare(&sql)?));
            }
        }
        let mut cursors = Vec::new();
        for (table, statement) in &mut statements {
            let mut cursor = Cursor {
                table,
                rows: statement.query([])?,
                at: None,
            };
            cursor.step()?;
            cursors.push(cursor);
        }
        let mut transactions = 0;
        let mut statement = conn.prepare(
            "SELECT tx, chain, seq, lamport, recorded_at_ms, offset_minutes, screener, \
             program_version, prev, n, tx_hash, entries FROM tx ORDER BY tx",
        )?;
        let mut rows = statement.query([])?;
        while let Some(row) = rows.next()? {
            self.transaction(row, &mut cursors)?;
            transactions += 1;
        }
        for cursor in &cursors {
            if cursor.at.is_some() {
                return Err(not_named(cursor));
            }
        }
        (self.progress)(self.done, self.total);
        self.finish(transactions)
    }

    fn transaction(&mut self, row: &rusqlite::Row<'_>, cursors: &mut [Cursor<'_>]) -> Result<()> {
        let tx: i64 = row.get(0)?;
        let id = |at| row.get_ref(at).map(Uuid::from_stored);
        let seq: i64 = row.get(2)?;
        let chain = id(1)?.ok_or_else(|| damaged_tx(tx, "its chain is not an id"))?;
        let header = TxHeader {
            chain,
            seq,
            lamport: row.get(3)?,
            recorded_at_ms: row.get(4)?,
            offset_minutes: row.get(5)?,
            screener: Option::<Uuid>::from_stored(row.get_ref(6)?)
                .ok_or_else(|| damaged_tx(tx, "its screener is not an id"))?,
            program_version: row.get(7)?,
            prev: row.get(8)?,
        };
        let (n, tx_hash): (i64, Vec<u8>) = (row.get(9)?, row.get(10)?);
        let entries = row.get_ref(11)?.as_blob().unwrap_or_default();
        // The rows first: a damaged one is named before the transaction it breaks.
        let count = self.entries(tx, entries, cursors)?;
        if count != n {
            return Err(damaged_tx(
                tx,
                &format!("it says {n} entries and names {count}"),
            ));
        }
        if TxRows::from_stored(entries, n).tx_hash(&header)[..] != tx_hash[..] {
            return Err(damaged_tx(
                tx,
                &format!("number {seq} of chain {chain} is not as it was hashed"),
            ));
        }
        self.link(tx, &header, tx_hash, n)
    }

    /// Compares the rows a transaction names with those that are there.
    fn entries(&mut self, tx: i64, mut named: &[u8], cursors: &mut [Cursor<'_>]) -> Result<i64> {
        let mut bytes = Vec::new();
        let mut ord = 0;
        while !named.is_empty() {
            let entry = ledger::next_named(&mut named)
                .ok_or_else(|| damaged_tx(tx, "its list of entries is not well formed"))?;
            let cursor = cursors
                .iter_mut()
                .find(|c| c.table.name == entry.table)
                .ok_or_else(|| damaged_tx(tx, "it names a table that is not there"))?;
            compare(&entry, (tx, ord), cursor, &mut bytes)?;
            cursor.step()?;
            ord += 1;
            self.done += 1;
            if self.done.is_multiple_of(8192) {
                (self.progress)(self.done, self.total);
            }
        }
        Ok(ord)
    }

    /// Links a transaction to the one before in its chain.
    fn link(&mut self, tx: i64, header: &TxHeader, hash: Vec<u8>, n: i64) -> Result<()> {
        let ends = self.chains.entry(header.chain).or_default();
        let follows = |tip: &Tip| {
            tip.seq + 1 == header.seq && Some(tip.hash.as_slice()) == header.prev.as_deref()
        };
        let before = ends.iter().position(follows);
        let lamport = match before {
            Some(at) => Some(ends[at].lamport),
            None if header.seq == 1 && header.prev.is_none() => None,
            // Where the one before has been followed already, the chain forked there.
            None => match forked_at(self.conn, tx, header)? {
                Some(lamport) => Some(lamport),
                None => return Err(unlinked(tx, header, ends)),
            },
        };
        if lamport.is_some_and(|before| before >= header.lamport) {
            return Err(damaged_tx(tx, "its place in the merge order goes back"));
        }
        let tip = Tip {
            seq: header.seq,
            hash,
            lamport: header.lamport,
            entries: before.map_or(0, |at| ends[at].entries) + n,
        };
        match before {
            Some(at) => ends[at] = tip,
            None => ends.push(tip),
        }
        if let Some(expected) = self.expected
            && !self.seen
        {
            self.seen = expected.matches(&self.head());
        }
        Ok(())
    }

    fn head(&self) -> Head {
        let mut ends: Vec<(&Uuid, i64, &[u8])> = self
            .chains
            .iter()
            .flat_map(|(chain, tips)| tips.iter().map(move |t| (chain, t.seq, t.hash.as_slice())))
            .collect();
        ends.sort_unstable();
        Head::of(ends, self.done)
    }

    fn finish(self, transactions: u64) -> Result<Verified> {
        let mut statement = self
            .conn
            .prepare("SELECT chain, seq, tx_hash, entries FROM chain_current")?;
        let mut rows = statement.query([])?;
        let mut known = 0;
        while let Some(row) = rows.next()? {
            let chain = Uuid::from_stored(row.get_ref(0)?);
            let ends = chain.and_then(|chain| self.chains.get(&chain));
            let same = ends.into_iter().flatten().any(|tip| {
                row.get(1) == Ok(tip.seq)
                    && row.get::<_, Vec<u8>>(2).as_ref() == Ok(&tip.hash)
                    && row.get(3) == Ok(tip.entries)
            });
            if !same {
                return Err(Damage::at(
                    "chain_current",
                    chain,
                    "does not agree with the transactions: the end was cut off or changed",
                ));
            }
            known += 1;
        }
        if known != self.chains.values().map(Vec::len).sum::<usize>() {
            return Err(Damage::at("chain_current", None, "a chain is missing"));
        }
        let head = self.head();
        if let Some(expected) = self.expected
            && !self.seen
        {
            let of = expected
                .entries
                .map_or_else(String::new, |n| format!(" ({n} entries)"));
            return Err(Damage::at(
                "tx",
                None,
                format!(
                    "the head {}{of} was never that of this store, which is now {head}: the end was cut off, or this is another store",
                    expected.prefix
                ),
            ));
        }
        Ok(Verified {
            head,
            transactions,
            chains: self.chains.len() as u64,
        })
    }
}

/// Returns the place in the merge order of the transaction that one follows, when it was not the end
/// of its chain any more.
fn forked_at(conn: &Connection, tx: i64, header: &TxHeader) -> Result<Option<i64>> {
    Ok(conn
        .prepare_cached(
            "SELECT lamport FROM tx WHERE chain = ?1 AND seq = ?2 AND tx_hash = ?3 AND tx < ?4",
        )?
        .query_row(
            params![header.chain.cell(), header.seq - 1, header.prev, tx],
            |r| r.get(0),
        )
        .optional()?)
}

fn unlinked(tx: i64, header: &TxHeader, ends: &[Tip]) -> Damage {
    let expected = ends.iter().map(|tip| tip.seq + 1).max().unwrap_or(1);
    if header.seq == expected {
        return damaged_tx(tx, "it does not follow the one before it in its chain");
    }
    damaged_tx(
        tx,
        &format!(
            "number {} of chain {} follows where {expected} should",
            header.seq, header.chain
        ),
    )
}

/// Returns what to select for the fields of a table, `NULL` for those that an older schema does not
/// have yet; nothing where it does not have the table.
fn columns_of(
    conn: &Connection,
    table: &Table,
) -> std::result::Result<Option<String>, rusqlite::Error> {
    let mut statement = conn.prepare_cached("SELECT name FROM pragma_table_info(?1)")?;
    let there: Vec<String> = statement
        .query_map([table.name], |r| r.get(0))?
        .collect::<std::result::Result<_, _>>()?;
    let columns: Vec<&str> = table
        .columns
        .iter()
        .map(|column| {
            if there.iter().any(|name| name == column) {
                column
            } else {
                "NULL"
            }
        })
        .collect();
    Ok((!there.is_empty()).then(|| columns.join(", ")))
}

fn damaged_tx(tx: i64, what: &str) -> Damage {
    Damage::at("tx", None, format!("transaction {tx}: {what}"))
}

fn not_named(cursor: &Cursor<'_>) -> Damage {
    Damage::at(
        cursor.table.name,
        cursor.id(),
        "no transaction names it here: it was put in, or moved",
    )
}

fn compare(
    entry: &Named<'_>,
    place: (i64, i64),
    cursor: &Cursor<'_>,
    bytes: &mut Vec<u8>,
) -> Result<()> {
    let id = Uuid::from_slice(entry.id).ok();
    match cursor.at {
        Some(at) if at < place => return Err(not_named(cursor)),
        Some(at) if at == place => {}
        _ => return Err(Damage::at(entry.table, id, "is missing")),
    }
    if cursor.id() != id {
        return Err(Damage::at(
            entry.table,
            id,
            "another entry stands in its place",
        ));
    }
    match cursor.hash(bytes) {
        Err(what) => Err(Damage::at(entry.table, id, what)),
        Ok(hash) if hash[..] != *entry.row_hash => {
            Err(Damage::at(entry.table, id, "is not as it was recorded"))
        }
        Ok(_) => Ok(()),
    }
}
