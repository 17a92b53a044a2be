//! Opening: modes, the lock, newer stores, backups.

use std::os::unix::fs::PermissionsExt;
use std::path::Path;
use std::time::Duration;

use tempfile::TempDir;
use twoline::store::{Access, ErrorKind, Kdf, New, Secret, Store};

use super::support::*;

fn mode(path: &Path) -> u32 {
    std::fs::metadata(path).unwrap().permissions().mode() & 0o777
}

#[test]
fn only_the_owner_reads_any_file_while_open_too() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let drafts = store.drafts().unwrap();
    drafts.save(super::drafts::draft("Q-1", "20/40")).unwrap();
    drafts.flush().unwrap();
    assert_eq!(mode(store.dir()), 0o700);
    let mut names: Vec<String> = Vec::new();
    for entry in std::fs::read_dir(store.dir()).unwrap() {
        let entry = entry.unwrap();
        assert_eq!(mode(&entry.path()), 0o600, "{}", entry.path().display());
        names.push(entry.file_name().into_string().unwrap());
    }
    names.sort();
    assert_eq!(
        names,
        [
            "drafts.db",
            "drafts.db-shm",
            "drafts.db-wal",
            "lock",
            "store.db",
            "store.db-shm",
            "store.db-wal",
            "store.key"
        ]
    );
}

#[test]
fn a_writer_takes_loose_modes_back() {
    let (_temp, store) = fresh();
    let dir = store.dir().to_owned();
    drop(store);
    let loosen = |path: &Path, mode| {
        std::fs::set_permissions(path, std::fs::Permissions::from_mode(mode)).unwrap();
    };
    loosen(&dir, 0o777);
    for name in ["store.key", "store.db", "lock"] {
        loosen(&dir.join(name), 0o666);
    }
    let _store = open(&dir);
    assert_eq!(mode(&dir), 0o700);
    for name in ["store.key", "store.db", "lock"] {
        assert_eq!(mode(&dir.join(name)), 0o600, "{name}");
    }
}

#[test]
fn pragmas_hold() {
    let (_temp, store) = fresh();
    let dir = store.dir().to_owned();
    let conn = raw(&dir);
    let mode: String = conn
        .query_row("PRAGMA journal_mode", [], |r| r.get(0))
        .unwrap();
    assert_eq!(mode, "wal");
    let id: i64 = conn
        .query_row("PRAGMA application_id", [], |r| r.get(0))
        .unwrap();
    assert_eq!(id, i64::from(u32::from_be_bytes(*b"TwoL")));
}

#[test]
fn a_second_writer_waits_then_hears_who_writes_and_may_read() {
    let (_temp, mut store) = fresh();
    let error = Store::open(
        store.dir(),
        &Secret::None,
        Access::Write {
            wait: Duration::from_millis(120),
        },
    )
    .unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Locked);
    let words = error.to_string();
    let pid = std::process::id();
    assert!(
        words.starts_with(&format!(
            "the store is in use: process {pid} is writing since 20"
        )),
        "{words}"
    );
    assert_eq!(
        error.hint().unwrap(),
        "close the other window, or try again when it is done; reading works meanwhile"
    );

    let reader = Store::open_or_read(store.dir(), &Secret::None, Duration::ZERO).unwrap();
    assert!(!reader.is_writable());
    assert_eq!(reader.holder().unwrap().pid, pid);
    // It sees what the writer commits meanwhile.
    store
        .append(&author(), |tx| tx.add(&child("Q-1", "Okafor", "Ada")))
        .unwrap();
    assert!(reader.read().child("Q-1").unwrap().is_some());
    assert_eq!(reader.head().unwrap(), store.head().unwrap());
    reader.verify(None, |_, _| {}).unwrap();

    let dir = store.dir().to_owned();
    drop(store);
    let writer = open(&dir);
    assert!(writer.is_writable() && writer.holder().is_none());
}

#[test]
fn a_newer_store_is_refused_and_left_alone() {
    let (_temp, store) = fresh();
    let dir = store.dir().to_owned();
    drop(store);
    raw(&dir).execute_batch("PRAGMA user_version = 99").unwrap();
    let error = Store::open(&dir, &Secret::None, WRITE).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Newer);
    assert_eq!(
        error.to_string(),
        format!(
            "this store has schema version 99; this program, twoline {}, knows up to 4",
            env!("CARGO_PKG_VERSION")
        )
    );
    assert_eq!(
        error.hint().unwrap(),
        "open it with the newer twoline that wrote it, or a later one; nothing was changed"
    );
}

#[test]
fn a_folder_without_a_store_says_so() {
    let temp = TempDir::new().unwrap();
    let error = Store::open(temp.path(), &Secret::None, WRITE).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::NotAStore);
    assert!(error.to_string().starts_with("there is no store in "));
    assert_eq!(
        std::fs::read_dir(temp.path()).unwrap().count(),
        0,
        "nothing was made"
    );

    let (_temp, store) = fresh();
    let error = Store::create(store.dir(), new(Secret::None)).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Exists);
}

#[test]
fn an_interrupted_init_is_told_apart_from_a_store() {
    let temp = TempDir::new().unwrap();
    std::fs::write(temp.path().join("store.db"), "left over").unwrap();
    let error = Store::create(temp.path(), new(Secret::None)).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Exists);
    assert!(
        error
            .to_string()
            .ends_with("holds a store.db without its key file")
    );
    assert_eq!(
        std::fs::read(temp.path().join("store.db")).unwrap(),
        b"left over"
    );
}

#[test]
fn a_failed_init_leaves_nothing() {
    let temp = TempDir::new().unwrap();
    // A folder stands where the log of the database would be.
    std::fs::create_dir(temp.path().join("store.db-wal")).unwrap();
    Store::create(temp.path(), new(Secret::None)).unwrap_err();
    let left: Vec<_> = std::fs::read_dir(temp.path())
        .unwrap()
        .map(|e| e.unwrap().file_name())
        .collect();
    assert_eq!(left, ["store.db-wal"], "only what was there before");
}

#[test]
fn an_init_that_loses_a_race_removes_nothing_of_the_winner() {
    let temp = TempDir::new().unwrap();
    let dir = temp.path().join("store");
    let start = std::sync::Barrier::new(4);
    let made: Vec<bool> = std::thread::scope(|scope| {
        let begun: Vec<_> = (0..4)
            .map(|_| {
                scope.spawn(|| {
                    // The key takes a while to derive, so that all find the folder free before.
                    let kdf = Kdf::Fixed {
                        memory_kib: 8192,
                        passes: 2,
                    };
                    start.wait();
                    Store::create(
                        &dir,
                        New {
                            kdf,
                            ..new(secret())
                        },
                    )
                    .is_ok()
                })
            })
            .collect();
        begun.into_iter().map(|one| one.join().unwrap()).collect()
    });
    assert_eq!(made.iter().filter(|made| **made).count(), 1, "{made:?}");
    let store = Store::open(&dir, &secret(), WRITE).unwrap();
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_held_lock_stays_when_an_init_meets_it() {
    let temp = TempDir::new().unwrap();
    let lock = std::fs::File::create(temp.path().join("lock")).unwrap();
    lock.lock().unwrap();
    let error = Store::create(temp.path(), new(Secret::None)).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Locked);
    assert!(temp.path().join("lock").exists());
}

#[test]
fn a_broken_database_says_so_to_readers_and_writers() {
    let whole = |dir: &Path| std::fs::read(dir.join("store.db")).unwrap();
    for (name, kept) in [("empty", 0), ("noise", usize::MAX)] {
        let (_temp, store) = fresh();
        let dir = store.dir().to_owned();
        drop(store);
        let noise = whole(&dir).into_iter().map(|b| b ^ 0x5A);
        let bytes: Vec<u8> = noise.take(kept).collect();
        std::fs::write(dir.join("store.db"), &bytes).unwrap();
        for access in [WRITE, Access::ReadOnly] {
            let error = Store::open(&dir, &Secret::None, access).unwrap_err();
            assert_eq!(error.kind(), ErrorKind::Damaged, "{name}: {error}");
            assert!(error.to_string().contains("store.db"), "{name}: {error}");
            assert!(error.hint().is_some_and(|h| h.contains("backup")), "{name}");
        }
        assert_eq!(whole(&dir), bytes, "{name}: left as it was");
    }
}

#[test]
fn a_page_that_cannot_be_read_is_damage_to_a_backup_too() {
    let (temp, mut store) = fresh();
    fill(&mut store);
    let dir = store.dir().to_owned();
    drop(store);
    let whole = std::fs::read(dir.join("store.db")).unwrap();
    // A page that opening has no need of.
    let store = (1..whole.len() / 4096)
        .find_map(|page| {
            let mut bytes = whole.clone();
            bytes[page * 4096 + 2000] ^= 1;
            std::fs::write(dir.join("store.db"), bytes).unwrap();
            Store::open(&dir, &Secret::None, WRITE).ok()
        })
        .unwrap();
    let error = store.backup(&temp.path().join("copy")).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Damaged, "{error}");
    assert!(error.hint().is_some());
    assert!(!temp.path().join("copy").exists());
}

#[test]
fn a_database_and_a_key_of_two_stores_do_not_fit() {
    let (_a, one) = fresh();
    let (_b, two) = fresh();
    let (store, two) = (one, two.dir().to_owned());
    let one = store.dir().to_owned();
    drop(store);
    std::fs::copy(two.join("store.key"), one.join("store.key")).unwrap();
    let error = Store::open(&one, &Secret::None, WRITE).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Damaged);
    assert!(
        error
            .to_string()
            .ends_with("store.db does not fit its key file")
    );
}

/// A kill leaves the files as they are: what was saved is in the log and is found there.
#[test]
fn what_was_saved_is_there_after_a_kill() {
    let (temp, mut store) = fresh();
    for i in 0..20 {
        store
            .append(&author(), |tx| {
                tx.add(&child(&format!("Q-{i}"), "Okafor", "Ada"))
            })
            .unwrap();
        let left = temp.path().join(format!("left-{i}"));
        std::fs::create_dir(&left).unwrap();
        for entry in std::fs::read_dir(store.dir()).unwrap() {
            let entry = entry.unwrap();
            std::fs::copy(entry.path(), left.join(entry.file_name())).unwrap();
        }
        let after = open(&left);
        assert_eq!(after.head().unwrap(), store.head().unwrap());
        assert!(after.read().child(&format!("Q-{i}")).unwrap().is_some());
        after.verify(None, |_, _| {}).unwrap();
    }
}

#[test]
fn a_backup_reopens_with_the_same_head_and_never_overwrites() {
    let temp = TempDir::new().unwrap();
    let dir = temp.path().join("store");
    let (mut store, _) = Store::create(&dir, new(secret())).unwrap();
    fill(&mut store);
    let drafts = store.drafts().unwrap();
    drafts.save(super::drafts::draft("Q-1", "20/40")).unwrap();
    drafts.flush().unwrap();
    let to = temp.path().join("copy");
    let head = store.backup(&to).unwrap();
    assert_eq!(head, store.head().unwrap());
    let mut names: Vec<_> = std::fs::read_dir(&to)
        .unwrap()
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    assert_eq!(
        names,
        ["store.db", "store.key"],
        "no drafts, nothing left aside"
    );
    assert_eq!(std::fs::read_dir(temp.path()).unwrap().count(), 2);
    assert_eq!(mode(&to), 0o700);
    for name in names {
        assert_eq!(mode(&to.join(name)), 0o600);
    }
    let again = store.backup(&to).unwrap_err();
    assert_eq!(again.kind(), ErrorKind::Exists);

    let copy = Store::open(&to, &secret(), WRITE).unwrap();
    assert_eq!(copy.head().unwrap(), head);
    assert_eq!(copy.verify(None, |_, _| {}).unwrap().head, head);
}

#[test]
fn a_backup_of_a_damaged_store_gets_no_name() {
    let (temp, mut store) = fresh();
    fill(&mut store);
    {
        let conn = raw(store.dir());
        drop_triggers(&conn);
        conn.execute_batch("UPDATE site SET name = 'x'").unwrap();
    }
    let to = temp.path().join("copy");
    let error = store.backup(&to).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Damaged);
    assert!(
        error.to_string().starts_with("damaged: site entry "),
        "{error}"
    );
    assert!(
        error.to_string().ends_with(": is not as it was recorded"),
        "{error}"
    );
    assert_eq!(
        error.hint().unwrap(),
        "run `twoline verify` and restore the newest backup that verifies"
    );
    assert!(!to.exists());
    assert_eq!(std::fs::read_dir(temp.path()).unwrap().count(), 1);
}
