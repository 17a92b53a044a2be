//! Golden vectors of the ledger, and a second, short implementation of it.

use std::fmt::Write;

use rusqlite::types::ValueRef;
use sha2::{Digest, Sha256};
use twoline::domain::screening_test::ScreeningTest;
use twoline::store::ledger::{self, Head, TxHeader, TxRows};
use twoline::store::row::TABLES;
use twoline::store::{Row, row};
use uuid::Uuid;

use super::support::*;

const ID: [u8; 16] = [0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15];

fn row_hash(row: &row::Child) -> ledger::Hash {
    let mut bytes = Vec::new();
    ledger::begin_row(&mut bytes, "child", 1, &ID, &[0xA0; 16]);
    row.each(|cell| cell.write(&mut bytes));
    ledger::hash(&bytes)
}

/// The literals were computed by a few lines of Python (hashlib, struct) from the description in
/// `ledger`, not by this program.
#[test]
fn golden_vectors() {
    let mut bao = child("Q-1", "Trần", "Bảo");
    let first = row_hash(&bao);
    assert_eq!(
        ledger::hex(&first),
        "0c3f9b376e6a5ddd2795e2cd4d0ff92ba8d328f771ccfeed299f7cec8613a8b5"
    );
    bao.dob = None;
    bao.provisional = true;
    assert_eq!(
        ledger::hex(&row_hash(&bao)),
        "fdc24076183bb068e382b9245c167e153cbc732b00dbca9bdd87c7b1476fdff5"
    );

    let mut rows = TxRows::default();
    rows.add("child", &ID, &first);
    let mut header = TxHeader {
        chain: Uuid::from_bytes([0xC0; 16]),
        seq: 1,
        lamport: 1,
        recorded_at_ms: 1_792_000_000_000,
        offset_minutes: -300,
        screener: None,
        program_version: "0.1.0".to_owned(),
        prev: None,
    };
    let one = rows.tx_hash(&header);
    assert_eq!(
        ledger::hex(&one),
        "5d504072705145c8d598cda1ad03d6e98b47f43083b993faab60e447fbb91f6f"
    );
    header.seq = 2;
    header.lamport = 5;
    header.recorded_at_ms += 1;
    header.screener = Some(Uuid::from_bytes([0x5C; 16]));
    header.prev = Some(one.to_vec());
    let two = rows.tx_hash(&header);
    assert_eq!(
        ledger::hex(&two),
        "5ab711de5d757736242f820f06bc840b9bc151c680fdb0772c9df665699aff10"
    );
    let head = Head::of([(&header.chain, 2, &two[..])], 2);
    assert_eq!(
        head.whole(),
        "e4c5e2024e9c59c3db2a7c33d9e9493ad794cda289c425c8555619183a7db8c1"
    );
    assert_eq!(head.to_string(), "e4c5e2024e9c59c3 (2 entries)");
}

fn put(out: &mut Vec<u8>, value: ValueRef<'_>) {
    let (tag, bytes) = match value {
        ValueRef::Null => return out.push(0),
        ValueRef::Integer(n) => {
            out.push(1);
            return out.extend(n.to_be_bytes());
        }
        ValueRef::Text(b) => (3, b),
        ValueRef::Blob(b) => (4, b),
        ValueRef::Real(_) => unreachable!(),
    };
    out.push(tag);
    out.extend((bytes.len() as u32).to_be_bytes());
    out.extend(bytes);
}

/// Recomputes every transaction and the head of a filled store from its bare tables.
#[test]
fn a_second_implementation_agrees() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let conn = raw(store.dir());
    let mut prev: Option<Vec<u8>> = None;
    let mut last = (0, Vec::new(), Vec::new());
    let mut entries = 0;
    let mut statement = conn.prepare("SELECT * FROM tx ORDER BY tx").unwrap();
    let mut txs = statement.query([]).unwrap();
    while let Some(tx) = txs.next().unwrap() {
        let number: i64 = tx.get("tx").unwrap();
        let mut found: Vec<(i64, Vec<u8>)> = Vec::new();
        for table in TABLES {
            let sql = format!(
                "SELECT ord, id, v, salt, {} FROM {} WHERE tx = {number}",
                table.columns.join(", "),
                table.name
            );
            let mut statement = conn.prepare(&sql).unwrap();
            let mut rows = statement.query([]).unwrap();
            while let Some(row) = rows.next().unwrap() {
                let mut bytes = b"twoline-row\0".to_vec();
                put(&mut bytes, ValueRef::Text(table.name.as_bytes()));
                put(&mut bytes, row.get_ref("v").unwrap());
                put(&mut bytes, row.get_ref("id").unwrap());
                put(&mut bytes, row.get_ref("salt").unwrap());
                for column in table.columns {
                    put(&mut bytes, row.get_ref(*column).unwrap());
                }
                let mut line = Vec::new();
                put(&mut line, ValueRef::Text(table.name.as_bytes()));
                put(&mut line, row.get_ref("id").unwrap());
                put(&mut line, ValueRef::Blob(&Sha256::digest(&bytes)));
                found.push((row.get("ord").unwrap(), line));
            }
        }
        found.sort();
        entries += found.len() as u64;
        let mut bytes = b"twoline-tx\0".to_vec();
        for column in [
            "chain",
            "seq",
            "lamport",
            "recorded_at_ms",
            "offset_minutes",
            "screener",
            "program_version",
        ] {
            put(&mut bytes, tx.get_ref(column).unwrap());
        }
        put(
            &mut bytes,
            prev.as_deref().map_or(ValueRef::Null, ValueRef::Blob),
        );
        put(&mut bytes, ValueRef::Integer(found.len() as i64));
        for (_, line) in found {
            bytes.extend(line);
        }
        let hash = Sha256::digest(&bytes).to_vec();
        assert_eq!(
            tx.get::<_, Vec<u8>>("tx_hash").unwrap(),
            hash,
            "transaction {number}"
        );
        last = (
            tx.get("seq").unwrap(),
            tx.get("chain").unwrap(),
            hash.clone(),
        );
        prev = Some(hash);
    }
    let mut bytes = Vec::new();
    put(&mut bytes, ValueRef::Blob(&last.1));
    put(&mut bytes, ValueRef::Integer(last.0));
    put(&mut bytes, ValueRef::Blob(&last.2));
    let head = store.head().unwrap();
    assert_eq!(head.hash.to_vec(), Sha256::digest(&bytes).to_vec());
    assert_eq!(head.entries, entries);
    assert!(last.0 > 4);
}

/// Returns the fields of each row version up to `newest` of the tables for which `wanted` holds.
fn fields(newest: usize, wanted: impl Fn(&str) -> bool) -> String {
    let mut text = String::new();
    for t in TABLES.iter().filter(|t| wanted(t.name)) {
        for (version, count) in (1..=newest).zip(t.versions) {
            let fields = t.columns[..*count].join(" ");
            writeln!(text, "{} {version}: {fields}", t.name).unwrap();
        }
    }
    text
}

/// A field may be added at the end, with a new version; nothing else may ever change.
#[test]
fn field_order_is_frozen() {
    let schema_1 = fields(1, |table| {
        ![
            "school_calendar",
            "same_child",
            "referral",
            "step",
            "exam_report",
            "exam_value",
            "disclosure",
        ]
        .contains(&table)
    });
    assert_eq!(
        ledger::hex(&ledger::hash(schema_1.as_bytes())),
        "deb9a6ebfb49b103082a99f2fcbf76a8a969c8792279825dfc10a161827bbe34",
        "the fields of an entry of schema version 1 changed:\n{schema_1}"
    );
    let all = fields(usize::MAX, |_| true);
    assert_eq!(
        ledger::hex(&ledger::hash(all.as_bytes())),
        "d57b6e31d8fe8e6707ca25b1f4d2b40ca84f6cc173cd442c53ddef8078a8d6b4",
        "the fields of an entry changed:\n{all}"
    );
}

fn hashed(row: &impl Row, version: i64) -> String {
    let mut bytes = Vec::new();
    let table = table_of(row);
    ledger::begin_row(&mut bytes, table.name, version, &ID, &[0xA0; 16]);
    let mut left = table.versions[version as usize - 1];
    row.each(|cell| {
        if left > 0 {
            cell.write(&mut bytes);
            left -= 1;
        }
    });
    ledger::hex(&ledger::hash(&bytes))
}

fn table_of<R: Row>(_: &R) -> &'static row::Table {
    R::TABLE
}

/// Schema version 2: a station row of version 1 keeps its hash, one of version 2 has two fields more.
/// The literals come from the same lines of Python as those above.
#[test]
fn golden_vectors_of_schema_2() {
    let mut station = row::Station {
        id: Uuid::from_bytes(ID),
        station_id: Uuid::from_bytes([0x57; 16]),
        name: "east".to_owned(),
        chart_id: None,
        task: None,
        masked: None,
    };
    assert_eq!(
        hashed(&station, 1),
        "44fc9348272c47560aef8b7de44113899d4ae8f6d02f3f1b700912af3e4d5816"
    );
    assert_eq!(
        hashed(&station, 2),
        "28122910458a60b943a5c2822dacd5e20726179d1b7b5f8d3cfece1a921c0a78"
    );
    station.task = Some(ScreeningTest::Distance);
    station.masked = Some(true);
    assert_eq!(
        hashed(&station, 2),
        "970d55a0128c443c5f18e288f9730972a64ec65d7c228bc19863ba7400725867"
    );
    let calendar = row::Calendar {
        id: Uuid::from_bytes(ID),
        site: "QE".to_owned(),
        days_held: "mon,tue,wed,thu,fri".to_owned(),
        holidays: "2026-11-26..2026-11-27;2026-12-25".to_owned(),
    };
    assert_eq!(
        hashed(&calendar, 1),
        "142753999f92bda4fa44e29b0ce0562119aae7be7a28b9caee2537f91cc824ee"
    );
    let same = row::SameChild {
        id: Uuid::from_bytes(ID),
        a: "Q-1".to_owned(),
        b: "P-7".to_owned(),
    };
    assert_eq!(
        hashed(&same, 1),
        "f32f96938127c0c4943eb06b217ddeffb1c51bc577fb9e791266add75a6f32fe"
    );
}

/// Schema version 4, from the same lines of Python.
#[test]
fn golden_vectors_of_schema_4() {
    let rows =
        super::support::follow_up(Uuid::from_bytes([0x52; 16]), Uuid::from_bytes([0x54; 16]));
    let hashes = [
        hashed(&rows.referral, 1),
        hashed(&rows.step, 1),
        hashed(&rows.report, 1),
        hashed(&rows.value, 1),
        hashed(&rows.disclosure, 1),
    ];
    assert_eq!(
        hashes,
        [
            "416faf591f57096ba48a16dfd3261f5c8d691249b10ea959b32833a45997d175",
            "e05dcdbb774017ffc44b2180e6b0eea2de69e3fecdbb523c684e75f8da607a25",
            "4196c06c103cee51373c4f06b455549194099c172410c18827d645237d782245",
            "d6deb09eba3c380923da3123bcdd97cfeee3ac5b8dc89062f19beb641d1ea057",
            "db49bd78e2206a76d15a4ae524dbd92d16bfbeb579ec607766780c46069d8be1",
        ]
    );
}
