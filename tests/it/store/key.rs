//! Who can open a store.

use std::path::Path;

use tempfile::TempDir;
use twoline::store::{Access, ErrorKind, Kdf, Secret, Store};
use zeroize::Zeroizing;

use super::support::*;

fn made(dir: &Path) -> Secret {
    let (_store, recovery) = Store::create(dir, new(secret())).unwrap();
    Secret::typed(&recovery.unwrap().grouped())
}

fn passphrase(text: &str) -> Secret {
    Secret::Passphrase(Zeroizing::new(text.to_owned()))
}

#[test]
fn the_passphrase_opens_and_a_wrong_one_does_not() {
    let temp = TempDir::new().unwrap();
    made(temp.path());
    Store::open(temp.path(), &secret(), WRITE).unwrap();
    Store::open(
        temp.path(),
        &Secret::from_file(&format!("{PASSPHRASE}\n")),
        WRITE,
    )
    .unwrap();
    for wrong in [
        "nine green kettles sinG",
        "nine green kettles sing ",
        "nine green kettles sing\n",
        "",
    ] {
        let error = Store::open(temp.path(), &passphrase(wrong), WRITE).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::WrongSecret);
        assert_eq!(error.to_string(), "the passphrase does not open this store");
        assert_eq!(
            error.hint().unwrap(),
            "check the keyboard layout and caps lock; the recovery key printed when the store was made opens it too"
        );
    }
    let error = Store::open(temp.path(), &Secret::None, Access::ReadOnly).unwrap_err();
    assert_eq!(error.to_string(), "this store needs its passphrase");
}

#[test]
fn composed_and_decomposed_letters_are_one_passphrase() {
    let temp = TempDir::new().unwrap();
    let mut new = new(passphrase("caf\u{e9} au lait matin"));
    new.kdf = Kdf::test();
    drop(Store::create(temp.path(), new).unwrap());
    Store::open(temp.path(), &passphrase("cafe\u{301} au lait matin"), WRITE).unwrap();
}

#[test]
fn the_recovery_key_opens_it_and_survives_a_new_passphrase() {
    let temp = TempDir::new().unwrap();
    let recovery = made(temp.path());
    assert!(matches!(recovery, Secret::Recovery(_)));
    Store::open(temp.path(), &recovery, WRITE).unwrap();

    let db = std::fs::read(temp.path().join("store.db")).unwrap();
    Store::change_passphrase(
        temp.path(),
        &recovery,
        "seven quiet herons wade",
        Kdf::test(),
    )
    .unwrap();
    assert_eq!(
        std::fs::read(temp.path().join("store.db")).unwrap(),
        db,
        "one file changes"
    );
    Store::open(temp.path(), &passphrase("seven quiet herons wade"), WRITE).unwrap();
    Store::open(temp.path(), &recovery, WRITE).unwrap();
    assert!(Store::open(temp.path(), &secret(), WRITE).is_err());
    // A weak one leaves the file alone.
    let before = std::fs::read(temp.path().join("store.key")).unwrap();
    let weak = Store::change_passphrase(temp.path(), &recovery, "short", Kdf::test()).unwrap_err();
    assert_eq!(weak.kind(), ErrorKind::WeakPassphrase);
    assert_eq!(
        std::fs::read(temp.path().join("store.key")).unwrap(),
        before
    );
}

#[test]
fn a_recovery_key_of_another_store_does_not_open_it() {
    let (one, two) = (TempDir::new().unwrap(), TempDir::new().unwrap());
    made(one.path());
    let other = made(two.path());
    let error = Store::open(one.path(), &other, WRITE).unwrap_err();
    assert_eq!(
        error.to_string(),
        "the recovery key does not open this store"
    );
}

#[test]
fn a_passphrase_that_looks_like_a_recovery_key_still_opens() {
    let (one, two) = (TempDir::new().unwrap(), TempDir::new().unwrap());
    let (_store, recovery) = Store::create(one.path(), new(secret())).unwrap();
    let text = recovery.unwrap().grouped();
    drop(Store::create(two.path(), new(passphrase(&text))).unwrap());
    let typed = Secret::typed(&text);
    assert!(matches!(typed, Secret::Recovery(_)));
    Store::open(two.path(), &typed, WRITE).unwrap();
}

#[test]
fn a_weak_passphrase_makes_nothing() {
    let temp = TempDir::new().unwrap();
    let dir = temp.path().join("store");
    for weak in ["short", "passwordpassword", "Quillmere Vision"] {
        let error = Store::create(&dir, new(passphrase(weak))).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::WeakPassphrase, "{weak}");
        assert!(!dir.exists());
    }
}

#[test]
fn the_readable_part_is_readable_and_bound_to_the_key() {
    let temp = TempDir::new().unwrap();
    made(temp.path());
    let info = Store::info(temp.path()).unwrap();
    assert_eq!(info.programme, "Quillmere vision");
    assert!(info.protected);
    let path = temp.path().join("store.key");
    let text = std::fs::read_to_string(&path).unwrap();
    let other = twoline::store::new_id().to_string();
    std::fs::write(&path, text.replace(&info.store_id.to_string(), &other)).unwrap();
    assert_eq!(
        Store::open(temp.path(), &secret(), WRITE)
            .unwrap_err()
            .kind(),
        ErrorKind::WrongSecret
    );
    std::fs::write(&path, text.replace("version = 1", "version = 2")).unwrap();
    let newer = Store::open(temp.path(), &secret(), WRITE).unwrap_err();
    assert_eq!(newer.kind(), ErrorKind::Newer);
    for broken in [
        "",
        "format = 1",
        "\u{0}",
        &text.replace("memory_kib = 8", "memory_kib = 4000000000"),
    ] {
        std::fs::write(&path, broken).unwrap();
        let error = Store::open(temp.path(), &secret(), WRITE).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::Damaged, "{broken:?}");
    }
}

#[test]
fn the_key_never_lies_in_the_file_unless_nothing_protects_it() {
    let temp = TempDir::new().unwrap();
    made(temp.path());
    let key = twoline::store::key::unlock(temp.path(), &secret()).unwrap();
    let hex = twoline::store::ledger::hex(&key[..]);
    let text = std::fs::read_to_string(temp.path().join("store.key")).unwrap();
    assert!(!text.contains(&hex));
    let db = std::fs::read(temp.path().join("store.db")).unwrap();
    assert!(!db.starts_with(b"SQLite format 3"));
    assert!(!db.windows(9).any(|w| w == b"Quillmere"));
}

/// What `init` uses, once: 64 MiB or more. Basis of the figure: the project's own decision.
#[test]
fn calibrated_parameters_are_dear() {
    let temp = TempDir::new().unwrap();
    let mut new = new(secret());
    new.kdf = Kdf::Calibrated;
    drop(Store::create(temp.path(), new).unwrap());
    let text = std::fs::read_to_string(temp.path().join("store.key")).unwrap();
    assert_eq!(text.matches("memory_kib = 65536").count(), 2);
    assert!(!text.contains("passes = 0"));
}
