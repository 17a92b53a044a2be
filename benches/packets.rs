//! Figures of packets, each with its baseline in the same run: `cargo bench --bench packets [N]`.
//!
//! A day of N children (1,000 without an argument) is recorded by four stations, a quarter each, all
//! with the whole roster. Three of them write packets and the first reads them. The baselines: a plain
//! copy of the packet's file with a sync, and bare prepared INSERTs of the same rows into an encrypted
//! database with the same tables and no triggers.
#![allow(clippy::unwrap_used, clippy::print_stdout, clippy::expect_used)]

use std::fmt::Write as _;
use std::path::Path;
use std::time::{Duration, Instant};

use rusqlite::Connection;
use rusqlite::types::Value;
use twoline::actions::{
    Desk, DeskOptions, ForJoin, Kdf, NewDay, NewStore, Secret, SignRequest, init, join,
    new_visit_id,
};
use twoline::domain::acuity::Notation;
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::store::{key, ledger, row};

const NAMES: [&str; 4] = ["east", "west", "south", "north"];

fn main() {
    let n: usize = std::env::args()
        .skip(1)
        .find_map(|a| a.parse().ok())
        .unwrap_or(1_000);
    let folder = tempfile::TempDir::new_in(".").expect("a folder on this disk");
    let at = |name: &str| folder.path().join(name);
    let mut desks = stations(folder.path(), n);
    for (i, desk) in desks.iter_mut().enumerate() {
        sign(desk, i * n / 4..(i + 1) * n / 4);
    }
    let mut joined = Vec::new();
    for i in 1..4 {
        let file = at(&format!("{}.packet", NAMES[i]));
        let start = Instant::now();
        desks[i]
            .write_packet(&file, &ForJoin::No, false)
            .expect("written");
        let wrote = start.elapsed();
        let start = Instant::now();
        let (merged, _) = desks[0].read_packet(&file, |_, _| {}).expect("read");
        let read = start.elapsed();
        let bytes = std::fs::metadata(&file).expect("a file").len();
        let copy = copied(&file, &at("copy"));
        println!(
            "{}: {} new visits, {} entries, {:.1} MB: written {wrote:.2?}, read {read:.2?}; plain copy {copy:.2?}, ratio {:.1}",
            NAMES[i],
            merged.visits.iter().map(|(_, n)| n).sum::<u64>(),
            merged.entries,
            bytes as f64 / 1e6,
            read.as_secs_f64() / copy.as_secs_f64()
        );
        joined.push(read);
        assert_eq!(merged.conflicts, 0);
    }
    let all: Duration = joined.iter().sum();
    let base = bare_inserts(&at("east"), &at("bare.db"));
    println!(
        "all three read: {all:.2?}; bare INSERTs of all rows of the joined store {base:.2?}, ratio {:.2}",
        all.as_secs_f64() / base.as_secs_f64()
    );
    let start = Instant::now();
    let packet = at("west.packet");
    desks[0].read_packet(&packet, |_, _| {}).expect("read");
    println!("the same packet again: {:.2?}", start.elapsed());
    let day = desks[0].days().expect("days").remove(0);
    let start = Instant::now();
    let seen = desks[0].day_children(&day).expect("children");
    println!(
        "queue of the day: {} children, {:.2?}",
        seen.len(),
        start.elapsed()
    );
    // The instrument at another table: every child of west gets a second part.
    let file = at("again.packet");
    sign_more(&mut desks[2], n / 4..n / 2);
    desks[2]
        .write_packet(&file, &ForJoin::No, false)
        .expect("written");
    let start = Instant::now();
    let (merged, _) = desks[0].read_packet(&file, |_, _| {}).expect("read");
    println!(
        "a second part of {} visits: {:.2?}",
        merged.visits.iter().map(|(_, n)| n).sum::<u64>(),
        start.elapsed()
    );
    let start = Instant::now();
    desks[0].day_children(&day).expect("children");
    println!("queue with visits of two parts: {:.2?}", start.elapsed());
    let start = Instant::now();
    desks[0].verify(None, |_, _| {}).expect("whole");
    println!("verify: {:.2?}", start.elapsed());
    if let Some(peak) = peak_kib() {
        println!(
            "peak memory of this whole process, four stores open: {:.0} MB",
            peak as f64 / 1024.0
        );
    }
}

fn stations(folder: &Path, n: usize) -> Vec<Desk> {
    let options = DeskOptions {
        today: "2026-10-14".parse().ok(),
        ..DeskOptions::default()
    };
    let new = NewStore {
        programme: "Quillmere".into(),
        station: NAMES[0].into(),
        notation: Notation::Feet,
        secret: Secret::None,
        kdf: Kdf::test(),
    };
    let (mut east, _) = init(&folder.join(NAMES[0]), new, &options).expect("a store");
    let date = |text: &str| text.parse().expect("a date");
    east.add_screener("JI", "J. Imani").expect("a screener");
    east.add_site("QE", "Quillmere East").expect("a site");
    east.add_term(
        "2026-autumn",
        "Autumn",
        date("2026-08-01"),
        date("2026-12-31"),
    )
    .expect("a term");
    let mut csv = String::from(
        "child_id,family_name,given_name,dob,grade,site,class,consent,wears_glasses\n",
    );
    for i in 0..n {
        let _ = writeln!(csv, "Q-{i:07},Okafor{i},Ada,2020-09-01,1,QE,1B,yes,no");
    }
    let plan = east
        .plan_roster("roster.csv", csv.as_bytes(), None, None)
        .expect("a plan");
    east.add_roster(&plan).expect("written");
    east.open_day(NewDay {
        site: "QE".into(),
        date: date("2026-10-14"),
        protocol: "us-school".into(),
        method: AcuityMethod::Threshold,
    })
    .expect("a day");
    let packet = folder.join("start.packet");
    east.write_packet(&packet, &ForJoin::No, false)
        .expect("written");
    let mut desks = vec![east];
    for name in &NAMES[1..] {
        let how = (*name, Secret::None, Kdf::test());
        let start = Instant::now();
        let (desk, _, merged) =
            join(&folder.join(name), &packet, &Secret::None, how, &options).expect("joined");
        println!(
            "{name} joins with {} entries: {:.2?}",
            merged.entries,
            start.elapsed()
        );
        desks.push(desk);
    }
    desks
}

fn readings(values: &[(Field, &str)]) -> Readings {
    let mut readings = Readings::default();
    for (field, text) in values {
        readings
            .set(*field, text, ReadingContext::default())
            .expect("a value");
    }
    readings
}

fn sign(desk: &mut Desk, children: std::ops::Range<usize>) {
    let values = readings(&[
        (Field::CorrectionWorn, "none"),
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/25"),
        (Field::Signs, "none"),
    ]);
    signed(desk, children, &values);
}

fn sign_more(desk: &mut Desk, children: std::ops::Range<usize>) {
    signed(desk, children, &readings(&[(Field::PlusLens, "blurred")]));
}

fn signed(desk: &mut Desk, children: std::ops::Range<usize>, readings: &Readings) {
    let day = desk.days().expect("days").remove(0);
    for i in children {
        let request = SignRequest {
            day: day.id,
            child_id: format!("Q-{i:07}"),
            attempt: Attempt::First,
            visit: new_visit_id(),
            readings: readings.clone(),
            remarks: Vec::new(),
        };
        desk.sign(request).expect("signed");
    }
}

fn copied(from: &Path, to: &Path) -> Duration {
    let start = Instant::now();
    std::fs::copy(from, to).expect("copied");
    std::fs::File::open(to)
        .expect("a file")
        .sync_all()
        .expect("synced");
    start.elapsed()
}

/// Puts every row of every table of entries into an encrypted database by bare INSERTs.
fn bare_inserts(dir: &Path, to: &Path) -> Duration {
    let raw = key::unlock(dir, &Secret::None).expect("a key");
    let open = |path: &Path| {
        let conn = Connection::open(path).expect("a database");
        conn.execute_batch(&format!("PRAGMA key = \"x'{}'\";", ledger::hex(&raw[..])))
            .expect("keyed");
        conn
    };
    let source = open(&dir.join("store.db"));
    let mut target = open(to);
    target
        .execute_batch("PRAGMA journal_mode = WAL; PRAGMA synchronous = FULL;")
        .expect("set");
    let schema: Vec<String> = source
        .prepare("SELECT sql FROM sqlite_schema WHERE type IN ('table', 'index') AND sql IS NOT NULL ORDER BY type DESC")
        .expect("a schema")
        .query_map([], |r| r.get(0))
        .expect("a schema")
        .map(Result::unwrap)
        .collect();
    for sql in schema {
        target.execute_batch(&sql).expect("made");
    }
    let mut rows: Vec<(String, Vec<Vec<Value>>)> = Vec::new();
    for table in row::TABLES.iter().map(|t| t.name).chain(["tx"]) {
        let mut all = source
            .prepare(&format!("SELECT * FROM {table}"))
            .expect("a table");
        let columns = all.column_count();
        let found = all
            .query_map([], |r| (0..columns).map(|i| r.get(i)).collect())
            .expect("rows")
            .map(Result::unwrap)
            .collect();
        rows.push((
            format!(
                "INSERT INTO {table} VALUES (?{})",
                ", ?".repeat(columns - 1)
            ),
            found,
        ));
    }
    let start = Instant::now();
    let tx = target.transaction().expect("begun");
    for (sql, rows) in &rows {
        let mut insert = tx.prepare(sql).expect("prepared");
        for row in rows {
            insert
                .execute(rusqlite::params_from_iter(row))
                .expect("inserted");
        }
    }
    tx.commit().expect("committed");
    start.elapsed()
}

/// Returns the most memory this process ever had, where the system says it.
fn peak_kib() -> Option<u64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find_map(|l| l.strip_prefix("VmHWM:"))?;
    line.trim().trim_end_matches("kB").trim().parse().ok()
}
