//! What is typed and not signed.

use twoline::domain::codes::Attempt;
use twoline::store::{Draft, new_id};

use super::support::*;

pub fn draft(child_id: &str, value: &str) -> Draft {
    Draft {
        day: day(),
        child_id: child_id.to_owned(),
        visit_id: new_id(),
        attempt: Attempt::First,
        fields: vec![("distance_right".to_owned(), value.to_owned())],
        cursor: "distance_left".to_owned(),
        updated_at_ms: 1_792_000_000_000,
    }
}

#[test]
fn drafts_survive_reopening() {
    let (_temp, store) = fresh();
    let dir = store.dir().to_owned();
    let drafts = store.drafts().unwrap();
    let (ada, bao) = (draft("Q-1", "20/4"), draft("Q-2", "NT:sh"));
    let earlier = Draft {
        fields: Vec::new(),
        ..ada.clone()
    };
    drafts.save(earlier).unwrap();
    drafts.save(ada.clone()).unwrap();
    drafts.save(bao.clone()).unwrap();
    // Dropped without a flush: the thread writes what it holds before it ends.
    drop(drafts);
    drop(store);
    let store = open(&dir);
    let drafts = store.drafts().unwrap();
    assert_eq!(drafts.load_all(&day()).unwrap(), [ada.clone(), bao]);
    drafts.delete(&day(), "Q-2").unwrap();
    assert_eq!(drafts.load_all(&day()).unwrap(), std::slice::from_ref(&ada));
    let mut other = day();
    other.protocol = "us-preschool".to_owned();
    assert!(drafts.load_all(&other).unwrap().is_empty());
    assert_eq!(drafts.load_every().unwrap(), [ada]);
}

#[test]
fn flush_makes_them_visible_to_another_connection() {
    let (_temp, store) = fresh();
    let drafts = store.drafts().unwrap();
    let mut typed = draft("Q-1", "");
    for text in ["2", "20", "20/", "20/4", "20/40"] {
        typed.fields[0].1 = text.to_owned();
        drafts.save(typed.clone()).unwrap();
    }
    drafts.flush().unwrap();
    let copied = tempfile::TempDir::new().unwrap();
    // What a kill would leave: the files as they are now.
    for entry in std::fs::read_dir(store.dir()).unwrap() {
        let entry = entry.unwrap();
        std::fs::copy(entry.path(), copied.path().join(entry.file_name())).unwrap();
    }
    let after = open(copied.path());
    assert_eq!(after.drafts().unwrap().load_all(&day()).unwrap(), [typed]);
}

#[test]
fn drafts_are_in_no_ledger() {
    let (_temp, store) = fresh();
    let head = store.head().unwrap();
    let drafts = store.drafts().unwrap();
    drafts.save(draft("Q-1", "20/40")).unwrap();
    drafts.flush().unwrap();
    assert_eq!(store.head().unwrap(), head);
    let file = std::fs::read(store.dir().join("drafts.db")).unwrap();
    assert!(!file.starts_with(b"SQLite format 3"), "under the same key");
}

#[test]
fn drafts_that_cannot_be_read_are_set_aside_and_typing_goes_on() {
    let (_temp, store) = fresh();
    drop(store.drafts().unwrap());
    let noise = vec![0x5A_u8; 8192];
    for n in 1..=2 {
        std::fs::write(store.dir().join("drafts.db"), &noise).unwrap();
        let drafts = store.drafts().unwrap();
        let typed = draft("Q-1", "20/40");
        drafts.save(typed.clone()).unwrap();
        assert_eq!(drafts.load_every().unwrap(), [typed]);
        drop(drafts);
        let aside = store.dir().join(format!("drafts.db.damaged-{n}"));
        assert_eq!(
            std::fs::read(aside).unwrap(),
            noise,
            "nothing is thrown away"
        );
    }
}
