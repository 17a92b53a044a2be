//! Taking over the transactions of a packet: whole ones, oldest first in each chain, or nothing.

use std::collections::{BTreeSet, HashMap};

use rusqlite::types::{ToSqlOutput, ValueRef};
use rusqlite::{Connection, TransactionBehavior, params};
use uuid::Uuid;

use crate::store::cell::{Ids, Value};
use crate::store::error::{Error, ErrorKind, Result};
use crate::store::ledger::{Head, hex};
use crate::store::row::{Chain, TABLES, Table, Touch};
use crate::store::write::{confirmed, insert_sql, written};
use crate::store::{Author, Reads, chain, new_id, project};

/// What reading a packet brought.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Merged {
    /// Transactions that were not here before.
    pub transactions: u64,
    /// Entries that were not here before.
    pub entries: u64,
    /// Stations of which visits came, with how many.
    pub visits: Vec<(String, u64)>,
    /// Children that were not here before.
    pub children: u64,
    /// Chains that go on in two ways: a copied store was written to.
    pub forks: Vec<Fork>,
    /// Whether one of them was this store's own, so that it goes on in a new one.
    pub own_fork: bool,
    /// Readings with values that differ, in all.
    pub conflicts: u64,
    /// Other facts that stations say differently, in all; the latest stands.
    pub said_otherwise: u64,
    /// The head of the store now.
    pub head: Head,
}

/// A place where a chain goes on in two ways.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub struct Fork {
    /// The chain.
    pub chain: Uuid,
    /// The number that is there twice.
    pub seq: i64,
}

/// Who merges: what a store needs to begin a new chain where its own forked.
pub(in crate::store) struct Own {
    pub(in crate::store) chain: Uuid,
    pub(in crate::store) author: Author,
}

/// Takes over what `packet` holds and `conn` does not. Returns also the new chain, where this store's
/// own one forked and it must go on in another.
pub(in crate::store) fn merge(
    conn: &mut Connection,
    packet: &Connection,
    own: Option<&Own>,
    progress: impl FnMut(u64, u64),
) -> Result<(Merged, Option<Uuid>)> {
    let sql = conn.transaction_with_behavior(TransactionBehavior::Immediate)?;
    let mut merging = Merging {
        to: &sql,
        packet,
        numbers: HashMap::new(),
        first: i64::MAX,
        forks: Vec::new(),
        entries: 0,
        last: None,
        children: BTreeSet::new(),
        visits: BTreeSet::new(),
        progress,
    };
    let tip = own.map(|own| chain::tip(&sql, own.chain)).transpose()?;
    let before = merging.counts()?;
    merging.transactions()?;
    merging.rows()?;
    merging.corrections()?;
    project::children(&sql, &merging.children)?;
    project::visits(&sql, &merging.visits)?;
    let Merging {
        numbers,
        forks,
        entries,
        mut last,
        ..
    } = merging;
    let mut new_chain = None;
    if let (Some(own), Some(tip)) = (own, tip)
        && forks.iter().any(|fork| fork.chain == own.chain)
    {
        let chain = new_id();
        let ((), wrote) = written(&sql, chain, &own.author, |tx| {
            tx.add(&Chain {
                id: new_id(),
                chain_id: chain,
                why: "fork".to_owned(),
                follows_chain: Some(own.chain),
                follows_seq: Some(tip.0),
                follows_hash: Some(tip.1),
            })?;
            tx.write_here(chain)
        })?;
        last = wrote
            .map(|(seq, hash)| (chain, seq, hash.to_vec()))
            .or(last);
        new_chain = Some(chain);
    }
    let reads = Reads::new(&sql);
    let (readings, others): (Vec<_>, Vec<_>) = reads
        .conflicts()?
        .into_iter()
        .partition(|conflict| conflict.table == "reading");
    let merged = Merged {
        transactions: numbers.len() as u64,
        entries: entries.unsigned_abs(),
        visits: visits_by_station(&sql, before.first_tx)?,
        children: (count(&sql, "child_current")? - before.children).unsigned_abs(),
        own_fork: new_chain.is_some(),
        forks,
        conflicts: readings.len() as u64,
        said_otherwise: others.len() as u64,
        head: reads.head()?,
    };
    match last {
        None => sql.rollback()?,
        Some((chain, seq, hash)) => {
            let committed = sql.commit();
            confirmed(conn, committed, chain, seq, &hash)?;
        }
    }
    Ok((merged, new_chain))
}

struct Before {
    children: i64,
    first_tx: i64,
}

struct Merging<'a, P> {
    to: &'a Connection,
    packet: &'a Connection,
    /// Number of a transaction in the packet → its number here, for those that are new.
    numbers: HashMap<i64, i64>,
    /// The lowest of those numbers in the packet.
    first: i64,
    forks: Vec<Fork>,
    /// How many entries they have.
    entries: i64,
    /// The last one: found again, the commit happened.
    last: Option<(Uuid, i64, Vec<u8>)>,
    children: BTreeSet<String>,
    visits: BTreeSet<Uuid>,
    progress: P,
}

impl<P: FnMut(u64, u64)> Merging<'_, P> {
    fn counts(&self) -> Result<Before> {
        Ok(Before {
            children: count(self.to, "child_current")?,
            first_tx: self
                .to
                .query_row("SELECT coalesce(max(tx), 0) + 1 FROM tx", [], |r| r.get(0))?,
        })
    }

    /// Takes over the transactions themselves.
    fn transactions(&mut self) -> Result<()> {
        let mut next = self.counts()?.first_tx;
        let mut known = self.to.prepare_cached(
            "SELECT EXISTS (SELECT 1 FROM tx WHERE chain = ?1 AND seq = ?2 AND tx_hash = ?3)",
        )?;
        let mut add = self.to.prepare_cached(
            "INSERT INTO tx (tx, chain, seq, tx_hash, prev, n, lamport, recorded_at_ms, \
             offset_minutes, screener, program_version, entries) \
             VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12)",
        )?;
        // A place in the merge order is higher than that of the one before in the chain.
        let mut found = self.packet.prepare(
            "SELECT tx, chain, seq, tx_hash, prev, n, lamport, recorded_at_ms, offset_minutes, \
             screener, program_version, entries FROM tx ORDER BY lamport, chain, seq, tx_hash",
        )?;
        let mut rows = found.query([])?;
        while let Some(row) = rows.next()? {
            let chain = Uuid::from_stored(row.get_ref(1)?)
                .ok_or_else(|| refused("a chain of this packet has no id"))?;
            let (number, seq): (i64, i64) = (row.get(0)?, row.get(2)?);
            let (hash, prev): (Vec<u8>, Option<Vec<u8>>) = (row.get(3)?, row.get(4)?);
            let is_known = |seq: i64, hash: &[u8], known: &mut rusqlite::CachedStatement<'_>| {
                known.query_row(params![chain.cell(), seq, hash], |r| r.get::<_, bool>(0))
            };
            if is_known(seq, &hash, &mut known)? {
                continue;
            }
            match &prev {
                Some(prev) if !is_known(seq - 1, prev, &mut known)? => {
                    return Err(gap(chain, seq, prev));
                }
                None if seq != 1 => return Err(gap(chain, seq, &[])),
                _ => {}
            }
            let n: i64 = row.get(5)?;
            add.raw_bind_parameter(1, next)?;
            for at in 1..12 {
                add.raw_bind_parameter(at + 1, ToSqlOutput::Borrowed(row.get_ref(at)?))?;
            }
            add.raw_execute()?;
            if project::chain(self.to, chain, prev.as_deref(), (seq, &hash), n)? {
                self.forks.push(Fork { chain, seq });
            }
            self.numbers.insert(number, next);
            self.first = self.first.min(number);
            self.entries += n;
            self.last = Some((chain, seq, hash));
            next += 1;
        }
        Ok(())
    }

    /// Takes over their rows, as they are.
    fn rows(&mut self) -> Result<()> {
        let mut done = 0;
        for table in TABLES {
            let mut add = self.to.prepare_cached(insert_sql(table))?;
            let mut found = self.packet.prepare(&format!(
                "SELECT id, v, salt, tx, ord, {} FROM {} WHERE tx >= ?1 ORDER BY tx, ord",
                table.columns.join(", "),
                table.name
            ))?;
            let touched = touched_column(table);
            let mut rows = found.query([self.first])?;
            while let Some(row) = rows.next()? {
                let Some(number) = self.numbers.get(&row.get(3)?) else {
                    continue;
                };
                for at in 0..table.columns.len() + 5 {
                    let value = if at == 3 {
                        ValueRef::Integer(*number)
                    } else {
                        row.get_ref(at)?
                    };
                    add.raw_bind_parameter(at + 1, ToSqlOutput::Borrowed(value))?;
                }
                add.raw_execute().map_err(|e| elsewhere(e, table, row))?;
                self.touch(table, row.get_ref(touched)?);
                done += 1;
                if done % 1024 == 0 {
                    (self.progress)(done, self.entries.unsigned_abs());
                }
            }
        }
        (self.progress)(done, self.entries.unsigned_abs());
        Ok(())
    }

    fn touch(&mut self, table: &Table, key: ValueRef<'_>) {
        match table.touch {
            Touch::None => {}
            Touch::Child => self.children.extend(String::from_stored(key)),
            Touch::Visit => self.visits.extend(Uuid::from_stored(key)),
        }
    }

    /// Notes what the new corrections supersede, wherever that came from.
    fn corrections(&mut self) -> Result<()> {
        let first_here = self.numbers.values().min().copied().unwrap_or(i64::MAX);
        let to = self.to;
        let mut note = to.prepare_cached("INSERT OR IGNORE INTO superseded (id) VALUES (?1)")?;
        let mut found =
            to.prepare_cached("SELECT table_name, supersedes FROM correction WHERE tx >= ?1")?;
        let mut rows = found.query([first_here])?;
        while let Some(row) = rows.next()? {
            let name: String = row.get(0)?;
            let table = TABLES
                .iter()
                .find(|t| t.name == name)
                .ok_or_else(|| refused("a correction of this packet names an unknown table"))?;
            let ids = Ids::from_stored(row.get_ref(1)?)
                .ok_or_else(|| refused("a correction of this packet names no entries"))?;
            for id in ids.0 {
                note.execute([id.cell()])?;
                if table.touch != Touch::None {
                    let column = table.columns[touched_column(table) - 5];
                    let sql = format!("SELECT {column} FROM {name} WHERE id = ?1");
                    let mut of = to.prepare_cached(&sql)?;
                    let mut keys = of.query([id.cell()])?;
                    while let Some(key) = keys.next()? {
                        self.touch(table, key.get_ref(0)?);
                    }
                }
            }
        }
        Ok(())
    }
}

/// Returns where the key of the projection stands among id, v, salt, tx, ord and the fields.
fn touched_column(table: &Table) -> usize {
    let name = match table.touch {
        Touch::Visit => "visit_id",
        Touch::Child | Touch::None => "child_id",
    };
    5 + table.columns.iter().position(|c| *c == name).unwrap_or(0)
}

fn count(conn: &Connection, table: &str) -> Result<i64> {
    Ok(conn.query_row(&format!("SELECT count(*) FROM {table}"), [], |r| r.get(0))?)
}

/// Counts the new visits by the station that signed them.
fn visits_by_station(conn: &Connection, first_tx: i64) -> Result<Vec<(String, u64)>> {
    let mut found = conn.prepare_cached(
        "SELECT coalesce((SELECT s.name FROM station s WHERE s.station_id = o.station_id \
         ORDER BY s.tx DESC, s.ord DESC LIMIT 1), '?') AS station, count(DISTINCT v.visit_id) \
         FROM visit v LEFT JOIN outcome o ON o.visit_id = v.visit_id AND o.tx = v.tx \
         WHERE v.tx >= ?1 GROUP BY station ORDER BY station",
    )?;
    let rows = found.query_map([first_tx], |r| {
        Ok((r.get(0)?, r.get::<_, i64>(1)?.unsigned_abs()))
    })?;
    Ok(rows.collect::<rusqlite::Result<_>>()?)
}

fn refused(what: &str) -> Error {
    Error::new(ErrorKind::Refused, what).with_hint("nothing was taken")
}

fn gap(chain: Uuid, seq: i64, before: &[u8]) -> Error {
    let hash = hex(&before[..before.len().min(8)]);
    refused(&format!(
        "this packet has a gap: of chain {chain}, number {} ({hash}) is missing before number {seq}",
        seq - 1
    ))
    .with_hint("nothing was taken; read first the packet of the station that chain belongs to")
}

fn elsewhere(error: rusqlite::Error, table: &Table, row: &rusqlite::Row<'_>) -> Error {
    if error.sqlite_error_code() == Some(rusqlite::ErrorCode::ConstraintViolation) {
        let id = row.get_ref(0).ok().and_then(Uuid::from_stored);
        return refused(&format!(
            "{} entry {} of this packet is in the store already, in another transaction",
            table.name,
            id.unwrap_or_default()
        ));
    }
    error.into()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::store::row::Site;
    use crate::store::{ForJoin, Joining, Kdf, New, Secret, Store};

    fn author() -> Author {
        Author {
            screener: None,
            at: crate::clock::now(),
        }
    }

    /// A large packet comes to a store whose disk has no room for it, and to one that has a gap.
    #[test]
    fn without_room_nothing_is_taken() {
        let temp = tempfile::TempDir::new().unwrap();
        let new = New {
            programme: "Quillmere".to_owned(),
            programme_id: None,
            station: "east".to_owned(),
            notation: "feet".to_owned(),
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        let (mut east, _) = Store::create(&temp.path().join("east"), new).unwrap();
        let small = temp.path().join("small");
        east.write_packet(&small, &ForJoin::No, false).unwrap();
        let joining = Joining {
            packet: &small,
            packet_secret: &Secret::None,
            station: "west".to_owned(),
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        let (mut west, _, _) = Store::join(&temp.path().join("west"), joining).unwrap();
        for n in 0..2 {
            let site = Site {
                id: new_id(),
                code: format!("Q{n}"),
                name: "x".repeat(100_000),
            };
            east.append(&author(), |tx| tx.add(&site)).unwrap();
        }
        let large = temp.path().join("large");
        east.write_packet(&large, &ForJoin::No, false).unwrap();

        let head = west.head().unwrap();
        let pages = |store: &Store, most: i64| {
            store
                .conn
                .query_row(&format!("PRAGMA max_page_count = {most}"), [], |_| Ok(()))
                .unwrap();
        };
        let now: i64 = west
            .conn
            .query_row("PRAGMA page_count", [], |r| r.get(0))
            .unwrap();
        pages(&west, now + 10);
        let error = west.read_packet(&large, &author(), |_, _| {}).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::DiskFull);
        assert_eq!(west.head().unwrap(), head);
        west.verify(None, |_, _| {}).unwrap();
        pages(&west, 1_000_000);
        let merged = west.read_packet(&large, &author(), |_, _| {}).unwrap();
        assert_eq!(merged.entries, 2);
        west.verify(None, |_, _| {}).unwrap();

        // A commit that fails is looked up, as everywhere.
        let site = Site {
            id: new_id(),
            code: "Q9".to_owned(),
            name: "late".to_owned(),
        };
        east.append(&author(), |tx| tx.add(&site)).unwrap();
        let late = temp.path().join("late");
        east.write_packet(&late, &ForJoin::No, false).unwrap();
        west.conn.commit_hook(Some(|| true)).unwrap();
        let error = west.read_packet(&late, &author(), |_, _| {}).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::NotConfirmed);
        west.conn.commit_hook(None::<fn() -> bool>).unwrap();
        assert_eq!(
            west.read_packet(&late, &author(), |_, _| {})
                .unwrap()
                .entries,
            1
        );
    }

    /// The ledger of a packet is checked before; even so a transaction without the one before it is
    /// not taken.
    #[test]
    fn a_gap_is_refused_and_named() {
        let temp = tempfile::TempDir::new().unwrap();
        let new = |station: &str| New {
            programme: "Quillmere".to_owned(),
            programme_id: None,
            station: station.to_owned(),
            notation: "feet".to_owned(),
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        let (mut east, _) = Store::create(&temp.path().join("east"), new("east")).unwrap();
        let (mut other, _) = Store::create(&temp.path().join("other"), new("other")).unwrap();
        for code in ["Q1", "Q2"] {
            let site = Site {
                id: new_id(),
                code: code.to_owned(),
                name: code.to_owned(),
            };
            east.append(&author(), |tx| tx.add(&site)).unwrap();
        }
        east.conn
            .execute_batch(
                "DROP TRIGGER tx_no_delete; DROP TRIGGER site_no_delete;
                 DELETE FROM site WHERE code = 'Q1'; DELETE FROM tx WHERE seq = 2;",
            )
            .unwrap();
        let head = other.head().unwrap();
        let error = merge(&mut other.conn, &east.conn, None, |_, _| {}).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::Refused);
        let chain = east.chain();
        let words = error.to_string();
        assert!(
            words.starts_with(&format!(
                "this packet has a gap: of chain {chain}, number 2 ("
            )),
            "{words}"
        );
        assert!(words.ends_with("is missing before number 3"), "{words}");
        assert_eq!(other.head().unwrap(), head);
    }
}
