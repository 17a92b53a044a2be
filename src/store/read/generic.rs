//! Reads that hold for every table of entries.

use std::collections::HashMap;
use std::collections::hash_map::Entry;

use rusqlite::{OptionalExtension, params_from_iter};
use uuid::Uuid;

use super::Reads;
use crate::clock::Moment;
use crate::store::cell::{Cell, Value};
use crate::store::error::{Error, Result};
use crate::store::ledger::Head;
use crate::store::row::{
    Calendar, Chart, Child, ColumnMapping, Correction, Import, Programme, Row, RuleSetUsed,
    SameChild, Screener, ScreeningDay, Setting, Site, Station, TABLES, Term, key_bytes,
};

/// An entry with who recorded it and when, and what superseded it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Recorded<R> {
    /// The entry.
    pub row: R,
    /// When it was recorded.
    pub at: Moment,
    /// By whom.
    pub screener: Option<Uuid>,
    /// Whether a correction superseded it.
    pub superseded: bool,
}

/// A key with two present entries, until a person settles it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Conflict {
    /// The table.
    pub table: &'static str,
    /// The present entries.
    pub entries: Vec<Uuid>,
}

/// The merge order, latest first, of a table named `x` joined with its transaction `t`.
pub(in crate::store) const LATEST_FIRST: &str =
    "t.lamport IS NOT NULL, t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC";

/// The merge order; what is being written comes last.
pub(in crate::store) const OLDEST_FIRST: &str =
    "t.lamport IS NULL, t.lamport, t.chain, t.seq, t.tx_hash, x.ord";

/// The merge order, oldest first.
pub(in crate::store) const IN_ORDER: &str = "t.lamport, t.chain, t.seq, t.tx_hash, x.ord";

impl Reads<'_> {
    /// Returns the entry of an id.
    pub fn entry<R: Row>(&self, id: Uuid) -> Result<Option<R>> {
        Ok(self.rows("x.id = ?1", OLDEST_FIRST, &[id.cell()])?.pop())
    }

    /// Says whether a correction superseded an entry.
    pub fn is_superseded(&self, id: Uuid) -> Result<bool> {
        Ok(self
            .conn
            .prepare_cached("SELECT EXISTS (SELECT 1 FROM superseded WHERE id = ?1)")?
            .query_one([id.cell()], |r| r.get(0))?)
    }

    /// Returns the present entries with the key of `row`, latest first: more than one is a conflict.
    pub fn current_of<R: Row>(&self, row: &R) -> Result<Vec<R>> {
        let mut cells: Vec<Cell<'static>> = Vec::new();
        row.each_key(|cell| cells.push(owned(&cell)));
        let keys: Vec<String> = R::TABLE
            .key
            .iter()
            .enumerate()
            .map(|(i, column)| format!("x.{column} IS ?{}", i + 1))
            .collect();
        self.rows(
            &format!("{} AND {LIVE}", keys.join(" AND ")),
            LATEST_FIRST,
            &cells,
        )
    }

    /// Returns what is present in a table, in the merge order: one entry for each key, the latest
    /// where there are several.
    pub fn all<R: Row>(&self) -> Result<Vec<R>> {
        Ok(one_of_each_key(self.rows(LIVE, OLDEST_FIRST, &[])?))
    }

    /// Returns every entry of a table for which a condition on `x` holds, with its history.
    pub(super) fn recorded<R: Row>(
        self,
        condition: &str,
        cells: &[Cell<'_>],
    ) -> Result<Vec<Recorded<R>>> {
        let columns = columns_of::<R>();
        let sql = format!(
            "SELECT x.id, {columns}, t.recorded_at_ms, t.offset_minutes, t.screener, \
             EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) \
             FROM {} x JOIN tx t ON t.tx = x.tx WHERE {condition} \
             ORDER BY t.lamport, t.chain, t.seq, t.tx_hash, x.ord",
            R::TABLE.name
        );
        let n = R::TABLE.columns.len() + 1;
        let mut found = self.conn.prepare_cached(&sql)?;
        let mut rows = found.query(params_from_iter(cells))?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            out.push(Recorded {
                row: typed(row)?,
                at: Moment {
                    utc_ms: row.get(n)?,
                    offset_minutes: row.get(n + 1)?,
                },
                screener: Option::<Uuid>::from_stored(row.get_ref(n + 2)?).unwrap_or(None),
                superseded: row.get(n + 3)?,
            });
        }
        Ok(out)
    }

    pub(super) fn rows<R: Row>(
        self,
        condition: &str,
        order: &str,
        cells: &[Cell<'_>],
    ) -> Result<Vec<R>> {
        let sql = format!(
            "SELECT x.id, {} FROM {} x JOIN tx t ON t.tx = x.tx WHERE {condition} ORDER BY {order}",
            columns_of::<R>(),
            R::TABLE.name
        );
        // Inside a transaction its own row in `tx` is still to come.
        let sql = sql.replace("JOIN tx t", "LEFT JOIN tx t");
        let mut found = self.conn.prepare_cached(&sql)?;
        let mut rows = found.query(params_from_iter(cells))?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            out.push(typed(row)?);
        }
        Ok(out)
    }

    /// Returns every key that has two present entries which do not say the same.
    ///
    /// Two signed outcomes of a visit are none: the latest stands, and what the readings say now is
    /// shown beside it.
    pub fn conflicts(&self) -> Result<Vec<Conflict>> {
        let mut out = Vec::new();
        for table in TABLES {
            let said: Vec<String> = table
                .columns
                .iter()
                .filter(|c| !table.key.contains(c) && **c != "visit_id")
                .map(|c| format!("quote(x.{c})"))
                .collect();
            if said.is_empty() || matches!(table.name, "correction" | "outcome" | "import") {
                continue;
            }
            let (key, from) = if table.name == "reading" {
                (
                    "q.lead, x.try_no, x.field".to_owned(),
                    "reading x JOIN visit_part q ON q.visit_id = x.visit_id".to_owned(),
                )
            } else {
                (table.key.join(", "), format!("{} x", table.name))
            };
            // That two stations raised one emergency is nothing to settle.
            let once = match table.name {
                "urgent_action" => "AND x.step <> 'raised'",
                _ => "",
            };
            let sql = format!(
                "SELECT group_concat(hex(x.id)) FROM {from} WHERE {LIVE} {once} GROUP BY {key} \
                 HAVING count(DISTINCT {}) > 1",
                said.join(" || ',' || ")
            );
            let mut found = self.conn.prepare_cached(&sql)?;
            let lists = found.query_map([], |r| r.get::<_, String>(0))?;
            for list in lists {
                out.push(Conflict {
                    table: table.name,
                    entries: list?.split(',').filter_map(|id| id.parse().ok()).collect(),
                });
            }
        }
        Ok(out)
    }

    /// Returns how many entries each table holds.
    pub fn entry_counts(&self) -> Result<Vec<(&'static str, u64)>> {
        TABLES
            .iter()
            .map(|table| {
                let sql = format!("SELECT count(*) FROM {}", table.name);
                let n: i64 = self.conn.query_row(&sql, [], |r| r.get(0))?;
                Ok((table.name, n.unsigned_abs()))
            })
            .collect()
    }

    /// Returns the head of the ledger.
    pub fn head(&self) -> Result<Head> {
        let mut found = self.conn.prepare_cached(
            "SELECT chain, seq, tx_hash, entries FROM chain_current ORDER BY chain, seq, tx_hash",
        )?;
        let mut rows = found.query([])?;
        let mut chains: Vec<(Uuid, i64, Vec<u8>)> = Vec::new();
        let mut entries = 0;
        while let Some(row) = rows.next()? {
            let chain = Uuid::from_stored(row.get_ref(0)?)
                .ok_or_else(|| Error::damaged("chain_current", None, "chain is not an id"))?;
            chains.push((chain, row.get(1)?, row.get(2)?));
            entries += row.get::<_, i64>(3)?.unsigned_abs();
        }
        Ok(Head::of(
            chains.iter().map(|(c, s, h)| (c, *s, h.as_slice())),
            entries,
        ))
    }

    /// Returns the time of the newest entry, to hold the clock against.
    pub fn newest_entry_ms(&self) -> Result<Option<i64>> {
        Ok(self
            .conn
            .query_row("SELECT max(recorded_at_ms) FROM tx", [], |r| r.get(0))
            .optional()?
            .flatten())
    }

    /// Returns the programme.
    pub fn programme(&self) -> Result<Option<Programme>> {
        Ok(self.all()?.pop())
    }

    /// Returns the stations.
    pub fn stations(&self) -> Result<Vec<Station>> {
        self.all()
    }

    /// Returns the screeners.
    pub fn screeners(&self) -> Result<Vec<Screener>> {
        self.all()
    }

    /// Returns the sites.
    pub fn sites(&self) -> Result<Vec<Site>> {
        self.all()
    }

    /// Returns the terms.
    pub fn terms(&self) -> Result<Vec<Term>> {
        self.all()
    }

    /// Returns the charts.
    pub fn charts(&self) -> Result<Vec<Chart>> {
        self.all()
    }

    /// Returns the screening days, latest first.
    pub fn days(&self) -> Result<Vec<ScreeningDay>> {
        let mut days: Vec<ScreeningDay> = self.all()?;
        days.sort_by(|a, b| {
            (b.screened_on, &a.site, &a.protocol).cmp(&(a.screened_on, &b.site, &b.protocol))
        });
        Ok(days)
    }

    /// Returns a station as it is now.
    pub fn station(&self, station_id: Uuid) -> Result<Option<Station>> {
        Ok(self
            .rows(
                &format!("x.station_id = ?1 AND {LIVE}"),
                LATEST_FIRST,
                &[station_id.cell()],
            )?
            .into_iter()
            .next())
    }

    /// Returns the school days of a site: its own row, else the row for every site.
    pub fn school_calendar(&self, site: &str) -> Result<Option<Calendar>> {
        let site = site.to_owned();
        Ok(self
            .rows(
                &format!("x.site IN (?1, '') AND {LIVE}"),
                &format!("x.site = '', {LATEST_FIRST}"),
                &[site.cell()],
            )?
            .into_iter()
            .next())
    }

    /// Returns the school days of every site that has a row of its own, and of all others (site '').
    pub fn school_calendars(&self) -> Result<Vec<Calendar>> {
        self.all()
    }

    /// Returns the pairs of ids that a person found to be one child.
    pub fn same_children(&self) -> Result<Vec<SameChild>> {
        self.all()
    }

    /// Returns the settings.
    pub fn settings(&self) -> Result<Vec<Setting>> {
        self.all()
    }

    /// Returns the value of a setting.
    pub fn setting(&self, name: &str) -> Result<Option<String>> {
        let cells = [name.to_owned()];
        let mut found: Vec<Setting> = self.rows(
            &format!("x.name = ?1 AND {LIVE}"),
            LATEST_FIRST,
            &[cells[0].cell()],
        )?;
        Ok((!found.is_empty()).then(|| found.swap_remove(0).value))
    }

    /// Returns what the headers of a kind of file were taken to mean.
    pub fn column_mappings(&self, kind: &str) -> Result<Vec<ColumnMapping>> {
        let kind = kind.to_owned();
        self.rows(
            &format!("x.kind = ?1 AND {LIVE}"),
            OLDEST_FIRST,
            &[kind.cell()],
        )
    }

    /// Returns the imports.
    pub fn imports(&self) -> Result<Vec<Import>> {
        self.all()
    }

    /// Returns the text of a rule set that signed outcomes were made with.
    pub fn rule_set_used(&self, content_hash: &str) -> Result<Option<RuleSetUsed>> {
        let hash = content_hash.to_owned();
        Ok(self
            .rows(
                &format!("x.content_hash = ?1 AND {LIVE}"),
                LATEST_FIRST,
                &[hash.cell()],
            )?
            .into_iter()
            .next())
    }

    /// Returns the corrections that superseded an entry.
    pub fn corrections_of(&self, id: Uuid) -> Result<Vec<Recorded<Correction>>> {
        let id = id.cell();
        self.recorded("instr(x.supersedes, ?1) > 0", &[id])
    }

    /// Returns the present entry of a child.
    pub fn child_entry(&self, child_id: &str) -> Result<Option<Child>> {
        let id = child_id.to_owned();
        Ok(self
            .rows(
                &format!("x.child_id = ?1 AND {LIVE}"),
                LATEST_FIRST,
                &[id.cell()],
            )?
            .into_iter()
            .next())
    }
}

/// Holds for an entry `x` that no correction superseded.
pub(in crate::store) const LIVE: &str = "NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id)";

/// Keeps the latest of each key, where the first of it stood.
fn one_of_each_key<R: Row>(rows: Vec<R>) -> Vec<R> {
    let mut places: HashMap<Vec<u8>, usize> = HashMap::new();
    let mut out: Vec<R> = Vec::with_capacity(rows.len());
    for row in rows {
        match places.entry(key_bytes(&row)) {
            Entry::Occupied(place) => out[*place.get()] = row,
            Entry::Vacant(place) => {
                place.insert(out.len());
                out.push(row);
            }
        }
    }
    out
}

fn columns_of<R: Row>() -> String {
    let columns: Vec<String> = R::TABLE.columns.iter().map(|c| format!("x.{c}")).collect();
    columns.join(", ")
}

fn typed<R: Row>(row: &rusqlite::Row<'_>) -> Result<R> {
    R::from_stored(row, 0).map_err(|column| {
        let id = row.get_ref(0).ok().and_then(Uuid::from_stored);
        Error::damaged(
            R::TABLE.name,
            id,
            &format!("{column} is not a value of its kind"),
        )
    })
}

fn owned(cell: &Cell<'_>) -> Cell<'static> {
    match cell {
        Cell::Null => Cell::Null,
        Cell::Int(n) => Cell::Int(*n),
        Cell::Text(text) => Cell::Text(text.clone().into_owned().into()),
        Cell::Blob(bytes) => Cell::Blob(bytes.clone().into_owned().into()),
    }
}
