//! Packets of stores: whole or nothing, and what is said when it is nothing.

use std::fs;
use std::path::{Path, PathBuf};

use tempfile::TempDir;
use twoline::store::{
    ErrorKind, ExpectedHead, ForJoin, Fork, Joining, Kdf, Secret, Store, packet_info,
};
use zeroize::Zeroizing;

use super::support::*;

const JOIN: &str = "three paper boats drift";

fn join_secret() -> Secret {
    Secret::Passphrase(Zeroizing::new(JOIN.to_owned()))
}

/// A protected store of the programme.
fn first() -> (TempDir, Store) {
    let temp = TempDir::new().unwrap();
    let (mut store, _) = Store::create(&temp.path().join("east"), new(secret())).unwrap();
    fill(&mut store);
    (temp, store)
}

fn packet(store: &Store, to: &Path) -> PathBuf {
    store.write_packet(to, &ForJoin::No, false).unwrap();
    to.to_owned()
}

fn joined(temp: &TempDir, store: &Store, name: &str) -> Store {
    let file = temp.path().join(format!("for-{name}"));
    let how = ForJoin::With(join_secret(), Kdf::test());
    store.write_packet(&file, &how, false).unwrap();
    let new = Joining {
        packet: &file,
        packet_secret: &join_secret(),
        station: name.to_owned(),
        secret: secret(),
        kdf: Kdf::test(),
    };
    let (store, key, _) = Store::join(&temp.path().join(name), new).unwrap();
    assert!(key.is_some(), "each store has a recovery key of its own");
    store
}

fn read(store: &mut Store, packet: &Path) -> twoline::store::Merged {
    store.read_packet(packet, &author(), |_, _| {}).unwrap()
}

fn refused(store: &mut Store, packet: &Path) -> twoline::store::Error {
    let before = (store.head().unwrap(), names(store.dir()));
    let error = store
        .read_packet(packet, &author(), |_, _| {})
        .expect_err("not to be taken");
    assert_eq!(
        (store.head().unwrap(), names(store.dir())),
        before,
        "{error}"
    );
    assert!(error.hint().unwrap().contains("nothing was"), "{error}");
    error
}

fn names(dir: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(dir)
        .unwrap()
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    names
}

#[test]
fn a_store_joins_and_exchanges() {
    let (temp, mut east) = first();
    let mut west = joined(&temp, &east, "west");
    assert_eq!(west.programme_id(), east.programme_id());
    assert_ne!(west.station_id(), east.station_id());
    assert_ne!(west.chain(), east.chain());
    assert_eq!(
        west.read().setting("notation").unwrap().as_deref(),
        Some("feet")
    );
    west.verify(None, |_, _| {}).unwrap();
    for (store, id) in [(&mut east, "Q-8"), (&mut west, "Q-9")] {
        store
            .append(&author(), |tx| tx.add(&child(id, "Moss", "Tobin")))
            .unwrap();
    }
    let from_east = packet(&east, &temp.path().join("east.packet"));
    let from_west = packet(&west, &temp.path().join("west.packet"));
    let merged = read(&mut west, &from_east);
    assert_eq!(
        (merged.transactions, merged.entries, merged.children),
        (1, 1, 1)
    );
    let before = east.head().unwrap();
    // The first transaction of west, and the child.
    let merged = read(&mut east, &from_west);
    assert_eq!((merged.transactions, merged.entries), (2, 3));
    assert_eq!(east.head().unwrap(), west.head().unwrap());
    assert_eq!(merged.head, east.head().unwrap());
    // A head printed before the merge is still found in this store's own past.
    let printed = ExpectedHead::parse(&before.to_string()).unwrap();
    east.verify(Some(&printed), |_, _| {}).unwrap();
    for store in [&east, &west] {
        store.verify(None, |_, _| {}).unwrap();
        assert!(store.read().child("Q-8").unwrap().is_some());
        assert!(store.read().child("Q-9").unwrap().is_some());
    }
    let again = read(&mut east, &from_west);
    assert_eq!((again.transactions, again.entries), (0, 0));
    assert_eq!(names(temp.path()).len(), 5, "two stores, three packets");

    // Both go on, each in its own chain.
    let dir = west.dir().to_owned();
    drop(west);
    let mut west = Store::open(&dir, &secret(), WRITE).unwrap();
    west.append(&author(), |tx| tx.add(&child("Q-10", "Moss", "Ada")))
        .unwrap();
    west.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_packet_is_private_and_never_in_the_clear() {
    let (temp, east) = first();
    let file = packet(&east, &temp.path().join("p"));
    let bytes = fs::read(&file).unwrap();
    for secret in ["Okafor", "20/32", "555-0101"] {
        let found = bytes.windows(secret.len()).any(|w| w == secret.as_bytes());
        assert!(!found, "{secret} can be read in the packet");
    }
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        let mode = fs::metadata(&file).unwrap().permissions().mode();
        assert_eq!(mode & 0o777, 0o600);
    }
    let info = packet_info(&file).unwrap();
    assert_eq!(
        (info.programme.as_str(), info.station.as_str()),
        ("Quillmere vision", "east")
    );
    assert!(!info.joinable && info.protected);
}

#[test]
fn joining_needs_a_packet_for_it_and_its_passphrase() {
    let (temp, east) = first();
    let plain = packet(&east, &temp.path().join("plain"));
    let for_join = temp.path().join("for-join");
    let weak = ForJoin::With(
        Secret::Passphrase(Zeroizing::new("short".to_owned())),
        Kdf::test(),
    );
    let error = east.write_packet(&for_join, &weak, false).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::WeakPassphrase);
    assert!(!for_join.exists());
    let how = ForJoin::With(join_secret(), Kdf::test());
    east.write_packet(&for_join, &how, false).unwrap();
    let dir = temp.path().join("west");
    let tried = |packet: &Path, packet_secret: &Secret| {
        let error = Store::join(
            &dir,
            Joining {
                packet,
                packet_secret,
                station: "west".to_owned(),
                secret: secret(),
                kdf: Kdf::test(),
            },
        )
        .unwrap_err();
        assert!(!dir.exists(), "{error}");
        error
    };
    let error = tried(&plain, &join_secret());
    assert!(error.hint().unwrap().contains("--for-join"), "{error}");
    let error = tried(&for_join, &secret());
    assert_eq!(error.kind(), ErrorKind::WrongSecret);
    assert!(error.to_string().contains("this packet"), "{error}");
    let error = tried(&temp.path().join("nothing"), &join_secret());
    assert_eq!(error.kind(), ErrorKind::File);
}

#[test]
fn what_is_no_packet_of_this_programme_is_refused() {
    let (temp, mut east) = first();
    let (other_temp, other) = first();
    let foreign = packet(&other, &other_temp.path().join("foreign"));
    let error = refused(&mut east, &foreign);
    assert_eq!(error.kind(), ErrorKind::Refused);
    assert!(error.to_string().contains("another programme"), "{error}");

    let text = temp.path().join("text");
    fs::write(&text, "child_id,family_name\n").unwrap();
    assert_eq!(refused(&mut east, &text).kind(), ErrorKind::NotAPacket);
    fs::write(&text, "").unwrap();
    assert_eq!(refused(&mut east, &text).kind(), ErrorKind::NotAPacket);
    let database = east.dir().join("store.db");
    assert_eq!(refused(&mut east, &database).kind(), ErrorKind::NotAPacket);
    let error = east
        .read_packet(&temp.path().join("nothing"), &author(), |_, _| {})
        .unwrap_err();
    assert_eq!(error.kind(), ErrorKind::File);
}

/// A byte changed anywhere, and the file cut anywhere, changes nothing and says so.
#[test]
fn every_region_of_a_packet_is_guarded() {
    let (temp, east) = first();
    let mut west = joined(&temp, &east, "west");
    let whole = fs::read(temp.path().join("for-west")).unwrap();
    let header = 19 + u32::from_be_bytes(whole[15..19].try_into().unwrap()) as usize;
    let file = temp.path().join("tried");
    let mut tried = |bytes: &[u8]| {
        fs::write(&file, bytes).unwrap();
        refused(&mut west, &file)
    };
    let mut places: Vec<usize> = vec![0, 14, 15, 17, 18, 19, 40, header - 1, header, header + 31];
    places.extend([
        header + 32,
        header + 60,
        header + 32 + 4095,
        header + 32 + 4096,
    ]);
    places.extend((0..12).map(|i| header + 32 + i * (whole.len() - header - 33) / 12));
    places.push(whole.len() - 1);
    for at in &places {
        let mut bytes = whole.clone();
        bytes[*at] ^= 1;
        let error = tried(&bytes);
        let kind = if *at < 15 {
            ErrorKind::NotAPacket
        } else {
            ErrorKind::Damaged
        };
        assert_eq!(error.kind(), kind, "byte {at}: {error}");
    }
    for length in [
        3,
        15,
        17,
        19,
        40,
        header,
        header + 31,
        header + 32,
        whole.len() - 1,
    ] {
        let error = tried(&whole[..length]);
        let kind = if length < 15 {
            ErrorKind::NotAPacket
        } else {
            assert!(
                error.to_string().contains("is cut off"),
                "{length}: {error}"
            );
            ErrorKind::Damaged
        };
        assert_eq!(error.kind(), kind, "{length}: {error}");
    }
    let mut longer = whole.clone();
    longer.push(0);
    assert!(tried(&longer).to_string().contains("something follows"));
    fs::write(&file, &whole).unwrap();
    read(&mut west, &file);
}

/// A header that was made anew for other bytes does not help: the database answers for itself.
#[test]
fn a_forged_packet_is_refused() {
    use sha2::{Digest, Sha256};
    let (temp, east) = first();
    let mut west = joined(&temp, &east, "west");
    let whole = fs::read(packet(&east, &temp.path().join("p"))).unwrap();
    let length = u32::from_be_bytes(whole[15..19].try_into().unwrap()) as usize;
    let header = String::from_utf8(whole[19..19 + length].to_vec()).unwrap();
    let database = &whole[19 + length + 32..];
    let file = temp.path().join("forged");
    let forge = |header: &str, database: &[u8]| {
        let mut out = whole[..15].to_vec();
        out.extend((header.len() as u32).to_be_bytes());
        out.extend(header.as_bytes());
        let sum = Sha256::digest(&out);
        out.extend(sum);
        out.extend(database);
        fs::write(&file, out).unwrap();
    };
    forge(&header, database);
    read(&mut west, &file);

    let hash = |bytes: &[u8]| twoline::store::ledger::hex(&Sha256::digest(bytes));
    let mut changed = database.to_vec();
    changed[9000] ^= 1;
    forge(&header.replace(&hash(database), &hash(&changed)), &changed);
    assert_eq!(refused(&mut west, &file).kind(), ErrorKind::Damaged);

    forge(
        &header.replace("version = 1\nstation", "version = 2\nstation"),
        database,
    );
    let error = refused(&mut west, &file);
    assert_eq!(error.kind(), ErrorKind::Newer);
    assert!(error.hint().unwrap().contains("newer twoline"));
    let schema = header
        .lines()
        .find(|line| line.starts_with("schema = "))
        .unwrap();
    forge(&header.replace(schema, "schema = 99"), database);
    assert_eq!(refused(&mut west, &file).kind(), ErrorKind::Newer);

    // Another programme's database under this programme's header.
    let (other_temp, other) = first();
    let foreign = fs::read(packet(&other, &other_temp.path().join("p"))).unwrap();
    let skip = 19 + u32::from_be_bytes(foreign[15..19].try_into().unwrap()) as usize + 32;
    let foreign = &foreign[skip..];
    let said = header.replace(&hash(database), &hash(foreign)).replace(
        &format!("bytes = {}", database.len()),
        &format!("bytes = {}", foreign.len()),
    );
    forge(&said, foreign);
    let error = refused(&mut west, &file);
    assert!(
        error.to_string().contains("packet key of this programme"),
        "{error}"
    );
}

/// What the ledger of a packet does not vouch for is not taken, whoever has the key.
#[test]
fn a_packet_of_a_damaged_store_is_not_written_and_nothing_is_left() {
    let (temp, store) = fresh();
    let mut store = store;
    fill(&mut store);
    {
        let conn = raw(store.dir());
        drop_triggers(&conn);
        conn.execute_batch("UPDATE site SET name = 'x'").unwrap();
    }
    let before = names(store.dir());
    let to = temp.path().join("p");
    let error = store.write_packet(&to, &ForJoin::No, false).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Damaged);
    assert_eq!(names(store.dir()), before);
    assert_eq!(names(temp.path()), ["store"]);
}

#[test]
fn a_packet_replaces_only_a_packet_and_only_when_told_to() {
    let (temp, mut east) = first();
    let to = packet(&east, &temp.path().join("p"));
    let old = fs::read(&to).unwrap();
    let error = east.write_packet(&to, &ForJoin::No, false).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Exists);
    assert_eq!(fs::read(&to).unwrap(), old);
    east.append(&author(), |tx| tx.add(&child("Q-8", "Moss", "Tobin")))
        .unwrap();
    let head = east.write_packet(&to, &ForJoin::No, true).unwrap();
    assert_eq!(head, east.head().unwrap());
    assert_ne!(fs::read(&to).unwrap(), old);
    let text = temp.path().join("notes.txt");
    fs::write(&text, "mine").unwrap();
    let error = east.write_packet(&text, &ForJoin::No, true).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Exists);
    assert_eq!(fs::read(&text).unwrap(), b"mine");
    let error = east
        .write_packet(&temp.path().join("no/such/folder"), &ForJoin::No, false)
        .unwrap_err();
    assert_eq!(error.kind(), ErrorKind::File);
    assert_eq!(names(temp.path()), ["east", "notes.txt", "p"]);
}

/// A copied laptop that writes on: both ways are kept and named, and each goes on in a new chain.
#[test]
fn a_cloned_store_is_a_fork_that_the_merge_names() {
    let (temp, mut east) = first();
    let mut third = joined(&temp, &east, "third");
    let clone = temp.path().join("clone");
    east.backup(&clone).unwrap();
    let mut clone = Store::open(&clone, &secret(), WRITE).unwrap();
    let chain = east.chain();
    assert_eq!(clone.chain(), chain, "a copied folder is no restore");
    for (store, id) in [(&mut east, "Q-8"), (&mut clone, "Q-9")] {
        store
            .append(&author(), |tx| tx.add(&child(id, "Moss", "Tobin")))
            .unwrap();
    }
    let from_clone = packet(&clone, &temp.path().join("clone.packet"));
    let from_east = packet(&east, &temp.path().join("east.packet"));
    // A third station keeps both, and nothing of its own forked.
    read(&mut third, &from_east);
    let merged = read(&mut third, &from_clone);
    let [Fork { chain: named, seq }] = merged.forks[..] else {
        panic!("{merged:?}");
    };
    assert_eq!(named, chain);
    assert!(seq > 4);
    assert!(!merged.own_fork);
    third.verify(None, |_, _| {}).unwrap();
    for id in ["Q-8", "Q-9"] {
        assert!(third.read().child(id).unwrap().is_some());
    }

    let merged = read(&mut east, &from_clone);
    assert_eq!(merged.forks, [Fork { chain, seq }]);
    assert!(merged.own_fork);
    assert_ne!(east.chain(), chain);
    east.append(&author(), |tx| tx.add(&child("Q-10", "Moss", "Ada")))
        .unwrap();
    east.verify(None, |_, _| {}).unwrap();
    assert!(read(&mut clone, &from_east).own_fork);
    clone.verify(None, |_, _| {}).unwrap();

    // In the end all hold the same.
    for round in 0..2 {
        let packets = [
            packet(&east, &temp.path().join(format!("e{round}"))),
            packet(&clone, &temp.path().join(format!("c{round}"))),
            packet(&third, &temp.path().join(format!("t{round}"))),
        ];
        for store in [&mut east, &mut clone, &mut third] {
            for packet in &packets {
                read(store, packet);
            }
        }
    }
    let head = east.head().unwrap();
    for store in [&east, &clone, &third] {
        assert_eq!(store.head().unwrap(), head);
        store.verify(None, |_, _| {}).unwrap();
        let dir = store.dir();
        assert!(!names(dir).iter().any(|n| n.contains("partial")), "{dir:?}");
    }
}

#[test]
fn a_backup_becomes_a_store_again_with_a_chain_of_its_own() {
    let (temp, mut east) = first();
    let backup = temp.path().join("backup");
    let head = east.backup(&backup).unwrap();
    east.append(&author(), |tx| tx.add(&child("Q-8", "Moss", "Tobin")))
        .unwrap();
    let dir = temp.path().join("again");
    let wrong = Secret::Passphrase(Zeroizing::new("nine green kettles sink".to_owned()));
    let error = Store::restore(&backup, &dir, &wrong, &author()).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::WrongSecret);
    assert!(!dir.exists());
    let (mut again, found) = Store::restore(&backup, &dir, &secret(), &author()).unwrap();
    assert_eq!(found, head);
    assert_eq!(names(&backup), ["store.db", "store.key"], "as it was");
    assert_ne!(again.chain(), east.chain());
    let chains: Vec<twoline::store::row::Chain> = again.read().all().unwrap();
    let last = chains.last().unwrap();
    assert_eq!(
        (last.why.as_str(), last.follows_chain),
        ("restore", Some(east.chain()))
    );
    again
        .append(&author(), |tx| tx.add(&child("Q-9", "Moss", "Ada")))
        .unwrap();
    again.verify(None, |_, _| {}).unwrap();
    let error = Store::restore(&backup, &dir, &secret(), &author()).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Exists);

    // What the lost laptop wrote after the backup comes back by a packet, without a fork.
    let late = packet(&east, &temp.path().join("late"));
    let merged = read(&mut again, &late);
    assert_eq!((merged.transactions, merged.forks.len()), (1, 0));
    again.verify(None, |_, _| {}).unwrap();
    assert!(again.read().child("Q-8").unwrap().is_some());
}

/// The sample of version 1 takes part like any other store.
#[test]
fn an_older_store_is_joined_and_merged() {
    let temp = TempDir::new().unwrap();
    let dir = temp.path().join("old");
    fs::create_dir(&dir).unwrap();
    for name in ["store.db", "store.key"] {
        let data = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/store_v1");
        fs::copy(data.join(name), dir.join(name)).unwrap();
    }
    let mut old = Store::open(&dir, &secret(), WRITE).unwrap();
    let mut west = joined(&temp, &old, "west");
    west.append(&author(), |tx| tx.add(&child("Q-9", "Moss", "Ada")))
        .unwrap();
    let from_west = packet(&west, &temp.path().join("w"));
    assert_eq!(read(&mut old, &from_west).children, 1);
    assert_eq!(old.head().unwrap(), west.head().unwrap());
    old.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_reader_reads_no_packet() {
    let (temp, east) = first();
    let file = packet(&east, &temp.path().join("p"));
    let dir = east.dir().to_owned();
    drop(east);
    let mut reader = Store::open(&dir, &secret(), twoline::store::Access::ReadOnly).unwrap();
    let error = reader.read_packet(&file, &author(), |_, _| {}).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::ReadOnly);
    // Writing one changes nothing, so a reader may.
    reader
        .write_packet(&temp.path().join("q"), &ForJoin::No, false)
        .unwrap();
}
