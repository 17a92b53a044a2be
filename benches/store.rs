//! Figures of the store, each with its baseline in the same run: `cargo bench --bench store [N]`.
//!
//! A roster of N children (100,000 without an argument) goes from CSV into an encrypted store. The
//! baseline puts the same rows into the same tables and indexes of an encrypted database by bare
//! prepared INSERTs: no parsing, no triggers, no hashes.
#![allow(clippy::unwrap_used, clippy::print_stdout, clippy::expect_used)]

use std::fmt::Write as _;
use std::path::Path;
use std::time::{Duration, Instant};

use chrono::NaiveDate;
use rusqlite::Connection;
use rusqlite::types::Value;
use twoline::actions::{
    Desk, DeskOptions, Kdf, NewDay, NewStore, Secret, SignRequest, init, new_visit_id,
};
use twoline::domain::acuity::Notation;
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::store::{Access, Store, key, ledger, row};

fn main() {
    let n: usize = std::env::args()
        .skip(1)
        .find_map(|a| a.parse().ok())
        .unwrap_or(100_000);
    let folder = tempfile::TempDir::new_in(".").expect("a folder on this disk");
    let dir = folder.path().join("store");
    let mut desk = desk(&dir);

    let csv = roster(n);
    let start = Instant::now();
    let plan = desk
        .plan_roster("roster.csv", csv.as_bytes(), None, None)
        .expect("a plan");
    let planned = start.elapsed();
    desk.add_roster(&plan).expect("written");
    let ours = start.elapsed();
    println!(
        "roster of {n} children from CSV: {ours:.2?} (of which reading and comparing {planned:.2?})"
    );
    let base = bare_inserts(&dir, &folder.path().join("bare.db"), n);
    println!(
        "bare INSERTs of the same rows:    {base:.2?}; ratio {:.2}",
        ours.as_secs_f64() / base.as_secs_f64()
    );

    let index = timed("search index", || desk.search_index().expect("an index"));
    for typed in ["a", "oka", "okafor 12", "q-000", "bao okafr"] {
        let start = Instant::now();
        let hits = index.find(typed, 12).len();
        println!("  find {typed:10} {hits:3} hits {:.2?}", start.elapsed());
    }

    let day = desk
        .open_day(NewDay {
            site: "QE".into(),
            date: date("2026-10-14"),
            protocol: "us-school".into(),
            method: AcuityMethod::Threshold,
        })
        .expect("a day");
    timed("queue of the day", || {
        desk.day_children(&day).expect("children").len()
    });

    let mut readings = Readings::default();
    for (field, text) in [
        (Field::CorrectionWorn, "none"),
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/25"),
        (Field::Signs, "none"),
    ] {
        readings
            .set(field, text, ReadingContext::default())
            .expect("a value");
    }
    let mut each = Vec::new();
    for i in 0..300 {
        let request = SignRequest {
            day: day.id,
            child_id: format!("Q-{i:07}"),
            attempt: twoline::domain::codes::Attempt::First,
            visit: new_visit_id(),
            readings: readings.clone(),
            remarks: Vec::new(),
        };
        let start = Instant::now();
        desk.sign(request).expect("signed");
        each.push(start.elapsed());
    }
    each.sort();
    println!(
        "one signed child, durable: median {:.2?}, 99% {:.2?}",
        each[150], each[297]
    );

    drop(desk);
    let store = Store::open(&dir, &Secret::None, Access::ReadOnly).expect("a store");
    let entries = store.read().head().expect("a head").entries;
    let start = Instant::now();
    store
        .verify(None, |_, _| {})
        .expect("a store without damage");
    let took = start.elapsed();
    println!(
        "verify of {entries} entries: {took:.2?}; at this pace 1,000,000 in {:.1} s",
        took.as_secs_f64() * 1e6 / entries as f64
    );
}

fn timed<T>(what: &str, work: impl FnOnce() -> T) -> T {
    let start = Instant::now();
    let value = work();
    println!("{what}: {:.2?}", start.elapsed());
    value
}

fn date(text: &str) -> NaiveDate {
    text.parse().expect("a date")
}

fn desk(dir: &Path) -> Desk {
    let new = NewStore {
        programme: "Quillmere".into(),
        station: "east".into(),
        notation: Notation::Feet,
        secret: Secret::None,
        kdf: Kdf::test(),
    };
    let options = DeskOptions {
        today: Some(date("2026-10-14")),
        ..DeskOptions::default()
    };
    let (mut desk, _) = init(dir, new, &options).expect("a store");
    desk.add_screener("JI", "J. Imani").expect("a screener");
    desk.add_site("QE", "Quillmere East").expect("a site");
    desk.add_term(
        "2026-autumn",
        "Autumn 2026",
        date("2026-08-01"),
        date("2026-12-31"),
    )
    .expect("a term");
    desk
}

fn roster(n: usize) -> String {
    let mut csv = String::from(
        "child_id,family_name,given_name,dob,grade,site,class,language,guardian_name,guardian_phone,consent,wears_glasses\n",
    );
    for i in 0..n {
        let _ = writeln!(
            csv,
            "Q-{i:07},Okafor{},Ada {},2020-{:02}-{:02},1,QE,1{},en,Ngozi Okafor,555-01{:02},yes,no",
            i % 977,
            i % 353,
            i % 12 + 1,
            i % 28 + 1,
            i % 30,
            i % 100
        );
    }
    csv
}

/// Copies the rows of a store, child by child as the store does, into a database of the same tables
/// and indexes without triggers.
fn bare_inserts(dir: &Path, to: &Path, n: usize) -> Duration {
    let key = ledger::hex(&key::unlock(dir, &Secret::None).expect("the key")[..]);
    let open = |path: &Path| {
        let conn = Connection::open(path).expect("a database");
        conn.execute_batch(&format!(
            "PRAGMA key = \"x'{key}'\"; PRAGMA foreign_keys=ON; PRAGMA journal_mode=WAL; \
             PRAGMA synchronous=FULL; PRAGMA cache_size=-65536;"
        ))
        .expect("opened");
        conn
    };
    let source = open(&dir.join("store.db"));
    let mut bare = open(to);
    for sql in [
        include_str!("../migrations/0001_entries.sql"),
        include_str!("../migrations/0002_stations.sql"),
        include_str!("../migrations/0003_packets.sql"),
        include_str!("../migrations/0004_referrals.sql"),
    ] {
        bare.execute_batch(sql).expect("tables");
    }
    let triggers: Vec<String> = bare
        .prepare("SELECT name FROM sqlite_schema WHERE type = 'trigger'")
        .and_then(|mut s| s.query_map([], |r| r.get(0))?.collect())
        .expect("triggers");
    for trigger in triggers {
        bare.execute_batch(&format!("DROP TRIGGER \"{trigger}\""))
            .expect("dropped");
    }
    let tables = row::TABLES
        .iter()
        .map(|t| t.name)
        .chain(["tx", "child_current", "chain_current"]);
    let mut data: Vec<(&str, usize, Vec<Vec<Value>>)> = Vec::new();
    for table in tables {
        let mut select = source
            .prepare(&format!("SELECT * FROM {table}"))
            .expect("a table");
        let width = select.column_count();
        let rows: Vec<Vec<Value>> = select
            .query_map([], |r| (0..width).map(|i| r.get(i)).collect())
            .and_then(Iterator::collect)
            .expect("rows");
        data.push((table, width, rows));
    }
    let start = Instant::now();
    let tx = bare.transaction().expect("a transaction");
    {
        let mut inserts: Vec<_> = data
            .iter()
            .map(|(table, width, _)| {
                tx.prepare(&format!(
                    "INSERT INTO {table} VALUES (?{})",
                    ", ?".repeat(width - 1)
                ))
                .expect("a statement")
            })
            .collect();
        for i in 0..n {
            for (insert, (_, _, rows)) in inserts.iter_mut().zip(&data) {
                if let Some(row) = rows.get(i) {
                    insert
                        .execute(rusqlite::params_from_iter(row))
                        .expect("a row");
                }
            }
        }
    }
    tx.commit().expect("committed");
    start.elapsed()
}
