//! Stores of earlier versions: the sample of each still opens, verifies and reports the same.

use std::fs;
use std::path::{Path, PathBuf};

use tempfile::TempDir;
use twoline::actions::{Desk, DeskOptions};
use twoline::domain::screening_test::ScreeningTest;
use twoline::store::{Access, ErrorKind, Store, row};

use super::support::*;

/// The head of the sample, as the program that made it printed it.
const HEAD: &str = "bfd83ca9fd817bd005947b71230331632e6b1deaaa82ba2fde52a96eb6dfd2a6";

fn data() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/store_v1")
}

/// A copy of the sample of version 1.
fn sample() -> (TempDir, PathBuf) {
    let temp = TempDir::new().unwrap();
    let dir = temp.path().join("store");
    fs::create_dir(&dir).unwrap();
    for name in ["store.db", "store.key"] {
        fs::copy(data().join(name), dir.join(name)).unwrap();
    }
    (temp, dir)
}

fn columns(csv: &str) -> Vec<Vec<(String, String)>> {
    let mut reader = csv::Reader::from_reader(csv.as_bytes());
    let headers = reader.headers().unwrap().clone();
    reader
        .records()
        .map(|record| {
            let record = record.unwrap();
            headers
                .iter()
                .zip(record.iter())
                .map(|(h, v)| (h.to_owned(), v.to_owned()))
                .collect()
        })
        .collect()
}

#[test]
fn version_1_opens_verifies_and_prints_the_same_day() {
    let (_temp, dir) = sample();
    let store = Store::open(&dir, &secret(), WRITE).unwrap();
    let verified = store.verify(None, |_, _| {}).unwrap();
    assert_eq!(verified.head.whole(), HEAD);
    assert_eq!(verified.head.entries, 64);
    let station = store.read().station(store.station_id()).unwrap().unwrap();
    assert_eq!((station.name.as_str(), station.task), ("east", None));

    let options = DeskOptions {
        today: Some(date("2026-10-14")),
        ..DeskOptions::default()
    };
    let desk = Desk::around(store, &options).unwrap();
    let report = desk.day_report(&desk.days().unwrap()[0], true).unwrap();
    let now = columns(&String::from_utf8(report.bytes).unwrap());
    let then = columns(&fs::read_to_string(data().join("day_report.csv")).unwrap());
    assert_eq!(now.len(), then.len());
    for (now, then) in now.iter().zip(&then) {
        for cell in then {
            assert!(now.contains(cell), "{cell:?} is not in {now:?}");
        }
    }
}

#[test]
fn version_1_goes_on_with_rows_of_the_new_version() {
    let (_temp, dir) = sample();
    let mut store = Store::open(&dir, &secret(), WRITE).unwrap();
    let old = store.read().station(store.station_id()).unwrap().unwrap();
    let new = row::Station {
        id: twoline::store::new_id(),
        task: Some(ScreeningTest::Distance),
        masked: Some(true),
        ..old
    };
    store
        .append(&author(), |tx| {
            tx.put(new.clone(), "one test at this table")
        })
        .unwrap();
    drop(store);
    let store = Store::open(&dir, &secret(), WRITE).unwrap();
    store.verify(None, |_, _| {}).unwrap();
    assert_eq!(store.read().station(new.station_id).unwrap(), Some(new));
}

#[test]
fn the_copy_made_first_is_the_old_store() {
    let (_temp, dir) = sample();
    let before = fs::read(dir.join("store.db")).unwrap();
    drop(Store::open(&dir, &secret(), WRITE).unwrap());
    let copy = dir.join("copy-of-version-1");
    let error = Store::open(&copy, &secret(), Access::ReadOnly).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Older);
    let error = error.to_string();
    assert!(error.contains("schema version 1"), "{error}");
    assert_ne!(fs::read(dir.join("store.db")).unwrap(), before);
    // Opened for writing it is brought up to date as the first one was.
    let again = Store::open(&copy, &secret(), WRITE).unwrap();
    assert_eq!(again.head().unwrap().whole(), HEAD);
}

/// A try that failed after the copy leaves it: the next one uses it again. A copy that is not whole,
/// or that somebody brought up to date, is left alone.
#[test]
fn a_proved_copy_is_used_again() {
    let (_temp, dir) = sample();
    let old = fs::read(dir.join("store.db")).unwrap();
    let back = || {
        for name in ["store.db", "store.db-wal", "store.db-shm"] {
            let _ = fs::remove_file(dir.join(name));
        }
        fs::write(dir.join("store.db"), &old).unwrap();
    };
    let copies = || {
        let names = fs::read_dir(&dir).unwrap().map(|e| e.unwrap().file_name());
        let mut copies: Vec<String> = names
            .map(|name| name.into_string().unwrap())
            .filter(|name| name.starts_with("copy-of"))
            .collect();
        copies.sort();
        copies
    };
    for _ in 0..3 {
        drop(Store::open(&dir, &secret(), WRITE).unwrap());
        assert_eq!(copies(), ["copy-of-version-1"]);
        back();
    }
    fs::write(dir.join("copy-of-version-1/store.db"), b"cut short").unwrap();
    drop(Store::open(&dir, &secret(), WRITE).unwrap());
    assert_eq!(copies(), ["copy-of-version-1", "copy-of-version-1-2"]);
    back();
    drop(Store::open(&dir.join("copy-of-version-1-2"), &secret(), WRITE).unwrap());
    drop(Store::open(&dir, &secret(), WRITE).unwrap());
    assert_eq!(copies().len(), 3, "the second one is of this version now");
    let third = dir.join("copy-of-version-1-3");
    let error = Store::open(&third, &secret(), Access::ReadOnly).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Older);
}

#[test]
fn reading_only_says_what_to_do_and_changes_nothing() {
    let (_temp, dir) = sample();
    let before = fs::read(dir.join("store.db")).unwrap();
    let error = Store::open(&dir, &secret(), Access::ReadOnly).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Older);
    assert!(error.hint().unwrap().contains("any command that writes"));
    assert_eq!(fs::read(dir.join("store.db")).unwrap(), before);
    assert!(!dir.join("copy-of-version-1").exists());
}

/// What is wrong before a migration is found before it, and nothing is touched.
#[test]
fn a_damaged_old_store_is_left_as_it_is() {
    let (_temp, dir) = sample();
    {
        let key = twoline::store::key::unlock(&dir, &secret()).unwrap();
        let conn = rusqlite::Connection::open(dir.join("store.db")).unwrap();
        conn.execute_batch(&format!(
            "PRAGMA key = \"x'{}'\"; DROP TRIGGER site_no_update; UPDATE site SET name = 'x';",
            twoline::store::ledger::hex(&key[..])
        ))
        .unwrap();
    }
    for _ in 0..2 {
        let error = Store::open(&dir, &secret(), WRITE).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::Damaged);
        assert!(error.to_string().starts_with("damaged: site"), "{error}");
        assert!(!dir.join("copy-of-version-1").exists());
    }
    let error = Store::open(&dir, &secret(), Access::ReadOnly).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Older, "still the old version");
}

/// A folder that cannot hold the copy: nothing is changed.
#[test]
fn without_room_for_the_copy_nothing_is_changed() {
    let (_temp, dir) = sample();
    let key_file = dir.join("store.key");
    let key = fs::read(&key_file).unwrap();
    // A file stands where each copy would have its folder.
    fs::write(dir.join("copy-of-version-1"), b"in the way").unwrap();
    drop(Store::open(&dir, &secret(), WRITE).unwrap());
    assert_eq!(
        fs::read(dir.join("copy-of-version-1")).unwrap(),
        b"in the way"
    );
    assert!(dir.join("copy-of-version-1-2").join("store.db").exists());
    assert_eq!(fs::read(&key_file).unwrap(), key);
}
