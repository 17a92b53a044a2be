//! Appending, correcting, taking back, undoing; and nothing else.

use rusqlite::Connection;
use twoline::domain::codes::Attempt;
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::store::row::{TABLES, Touch};
use twoline::store::{ErrorKind, Put, new_id, row};

use super::support::*;

/// A guarded connection, as the store opens its own.
fn guarded(dir: &std::path::Path) -> Connection {
    let conn = raw(dir);
    conn.execute_batch("PRAGMA foreign_keys = ON; PRAGMA recursive_triggers = ON;")
        .unwrap();
    conn
}

#[test]
fn every_table_refuses_update_delete_replace_and_upsert() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let conn = guarded(store.dir());
    let mut tables: Vec<(&str, Vec<&str>)> = TABLES
        .iter()
        .map(|t| {
            let mut columns = vec!["id", "v", "salt", "tx", "ord"];
            columns.extend(t.columns);
            (t.name, columns)
        })
        .collect();
    tables.push((
        "tx",
        vec![
            "tx",
            "chain",
            "seq",
            "lamport",
            "recorded_at_ms",
            "offset_minutes",
            "screener",
            "program_version",
            "prev",
            "n",
            "tx_hash",
            "entries",
        ],
    ));
    for (table, columns) in tables {
        let count = || -> i64 {
            conn.query_row(&format!("SELECT count(*) FROM {table}"), [], |r| r.get(0))
                .unwrap()
        };
        let before = count();
        assert!(before > 0, "{table} holds nothing to try");
        let first = columns[0];
        let all = columns.join(", ");
        for sql in [
            format!("UPDATE {table} SET {first} = {first}"),
            format!("DELETE FROM {table}"),
            format!("INSERT OR REPLACE INTO {table} ({all}) SELECT {all} FROM {table}"),
            format!("REPLACE INTO {table} ({all}) SELECT {all} FROM {table}"),
            format!(
                "INSERT INTO {table} ({all}) SELECT {all} FROM {table} WHERE true ON CONFLICT DO UPDATE SET {first} = excluded.{first}"
            ),
        ] {
            let error = conn.execute(&sql, []).unwrap_err().to_string();
            assert!(error.contains("append-only"), "{table}: {sql}: {error}");
            assert_eq!(count(), before, "{sql}");
        }
    }
    drop(conn);
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn an_error_in_the_closure_leaves_nothing() {
    let (_temp, mut store) = fresh();
    let head = store.head().unwrap();
    let failed = store.append(&author(), |tx| {
        tx.add(&child("Q-1", "Okafor", "Ada"))?;
        Err::<(), _>(twoline::store::Error::new(
            ErrorKind::Refused,
            "changed my mind",
        ))
    });
    assert_eq!(failed.unwrap_err().to_string(), "changed my mind");
    assert_eq!(store.head().unwrap(), head);
    assert_eq!(store.read().child("Q-1").unwrap(), None);
    // And a closure that adds nothing is no transaction.
    store.append(&author(), |_| Ok(())).unwrap();
    assert_eq!(store.head().unwrap(), head);
    store
        .append(&author(), |tx| tx.add(&child("Q-1", "Okafor", "Ada")))
        .unwrap();
    assert_ne!(store.head().unwrap(), head);
    assert_eq!(store.head().unwrap().entries, head.entries + 1);
}

#[test]
fn an_entry_is_written_once() {
    let (_temp, mut store) = fresh();
    let ada = child("Q-1", "Okafor", "Ada");
    store.append(&author(), |tx| tx.add(&ada)).unwrap();
    let again = store.append(&author(), |tx| tx.add(&ada)).unwrap_err();
    assert_eq!(again.kind(), ErrorKind::Exists);
    assert_eq!(
        again.to_string(),
        format!("child entry {} is in the store already", ada.id)
    );
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn put_adds_supersedes_or_leaves_alone() {
    let (_temp, mut store) = fresh();
    let mut put = |row: row::Child| store.append(&author(), |tx| tx.put(row, "roster")).unwrap();
    assert_eq!(put(child("Q-1", "Okafor", "Ada")), Put::New);
    assert_eq!(put(child("Q-1", "Okafor", "Ada")), Put::Unchanged);
    assert_eq!(put(child("Q-1", "Okafor", "Ade")), Put::Changed);
    assert_eq!(put(child("Q-1", "Okafor", "Ade")), Put::Unchanged);
    let now = store.read().child("Q-1").unwrap().unwrap();
    assert_eq!(now.given_name, "Ade");
    assert_eq!(now.search, "okafor ade");
    let history = store.read().child_history("Q-1").unwrap().unwrap();
    assert_eq!(history.names.len(), 2);
    assert!(history.names[0].superseded && !history.names[1].superseded);
    assert_eq!(history.corrections.len(), 1);
    assert_eq!(history.corrections[0].row.reason, "roster");
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn corrections_chain_and_undo_is_one() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    let left = |store: &twoline::store::Store| {
        let mut found: Vec<_> = store
            .read()
            .readings(visit_id)
            .unwrap()
            .into_iter()
            .filter(|r| r.field == Field::DistanceLeft)
            .collect();
        assert_eq!(found.len(), 1);
        found.remove(0)
    };
    let corrected = left(&store);
    assert_eq!(corrected.value, "20/32");
    assert!(store.read().visit(visit_id).unwrap().unwrap().corrected);

    // Undo: a replacement that copies the older value.
    let undone = reading(visit_id, Field::DistanceLeft, "20/40");
    store
        .append(&author(), |tx| {
            tx.supersede(&[corrected.id], Some(undone.clone()), "undo")
        })
        .unwrap();
    assert_eq!(left(&store).value, "20/40");

    // What was corrected already is not corrected a second time.
    let twice = store
        .append(&author(), |tx| {
            tx.supersede(
                &[corrected.id],
                Some(reading(visit_id, Field::DistanceLeft, "20/25")),
                "",
            )
        })
        .unwrap_err();
    assert_eq!(twice.kind(), ErrorKind::Refused);

    // A correction is about the same thing.
    let other = store
        .append(&author(), |tx| {
            tx.supersede(
                &[undone.id],
                Some(reading(visit_id, Field::DistanceRight, "20/25")),
                "",
            )
        })
        .unwrap_err();
    assert_eq!(
        other.to_string(),
        "a correction of reading must be about the same thing"
    );

    // The same value again is no entry.
    let entries = store.head().unwrap().entries;
    let same = store
        .append(&author(), |tx| {
            tx.supersede(
                &[undone.id],
                Some(reading(visit_id, Field::DistanceLeft, "20/40")),
                "",
            )
        })
        .unwrap();
    assert_eq!(same, Put::Unchanged);
    assert_eq!(store.head().unwrap().entries, entries);

    // Everything is still there to be seen.
    let record = store.read().visits_of("Q-1").unwrap().remove(0);
    let values: Vec<(String, bool)> = record
        .readings
        .iter()
        .filter(|r| r.row.field == Field::DistanceLeft)
        .map(|r| (r.row.value.clone(), r.superseded))
        .collect();
    assert_eq!(
        values,
        [
            ("20/40".to_owned(), true),
            ("20/32".to_owned(), true),
            ("20/40".to_owned(), false)
        ]
    );
    let history = store.read().child_history("Q-1").unwrap().unwrap();
    assert_eq!(history.corrections.len(), 2);
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_reading_moves_to_another_child_in_one_transaction() {
    let (_temp, mut store) = fresh();
    let from = fill(&mut store);
    let right = store
        .read()
        .readings(from)
        .unwrap()
        .into_iter()
        .find(|r| r.field == Field::DistanceRight)
        .unwrap();
    let to = visit("Q-2");
    store
        .append(&author(), |tx| {
            tx.supersede::<row::Reading>(&[right.id], None, "entered for the wrong child")?;
            tx.add(&to)?;
            tx.add(&reading(to.visit_id, Field::DistanceRight, &right.value))
        })
        .unwrap();
    assert!(
        store
            .read()
            .readings(from)
            .unwrap()
            .iter()
            .all(|r| r.field != Field::DistanceRight)
    );
    assert_eq!(
        store.read().readings(to.visit_id).unwrap()[0].value,
        "20/20"
    );
    assert_eq!(store.read().visit(from).unwrap().unwrap().readings, 2);
    assert_eq!(
        store.read().visit(to.visit_id).unwrap().unwrap().readings,
        1
    );
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_visit_taken_back_leaves_the_day_and_stays_in_the_history() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    let entry = store.read().visits_of("Q-1").unwrap()[0].visit[0].row.id;
    store
        .append(&author(), |tx| {
            tx.supersede::<row::Visit>(&[entry], None, "never here")
        })
        .unwrap();
    assert_eq!(store.read().visit(visit_id).unwrap(), None);
    assert_eq!(
        store
            .read()
            .visit_on("Q-1", &day(), Attempt::First)
            .unwrap(),
        None
    );
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn two_present_values_are_a_conflict_until_settled() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    assert!(store.read().conflicts().unwrap().is_empty());
    let second = reading(visit_id, Field::DistanceRight, "20/63");
    store.append(&author(), |tx| tx.add(&second)).unwrap();
    assert!(store.read().visit(visit_id).unwrap().unwrap().conflict);
    let both: Vec<_> = store
        .read()
        .readings(visit_id)
        .unwrap()
        .into_iter()
        .filter(|r| r.field == Field::DistanceRight)
        .collect();
    assert_eq!(both.len(), 2);
    assert!(both.iter().all(|r| r.conflict));
    let conflicts = store.read().conflicts().unwrap();
    assert_eq!(conflicts.len(), 1);
    assert_eq!(conflicts[0].table, "reading");
    assert_eq!(conflicts[0].entries.len(), 2);
    store.verify(None, |_, _| {}).unwrap();

    let ids: Vec<_> = both.iter().map(|r| r.id).collect();
    store
        .append(&author(), |tx| {
            tx.supersede(
                &ids,
                Some(reading(visit_id, Field::DistanceRight, "20/20")),
                "asked the screener",
            )
        })
        .unwrap();
    assert!(store.read().conflicts().unwrap().is_empty());
    assert!(!store.read().visit(visit_id).unwrap().unwrap().conflict);
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn two_visits_of_one_key_are_parts_of_one() {
    let (_temp, mut store) = fresh();
    let one = fill(&mut store);
    let two = visit("Q-1");
    store
        .append(&author(), |tx| {
            tx.add(&two)?;
            tx.add(&reading(two.visit_id, Field::Status, "present"))?;
            tx.add(&reading(two.visit_id, Field::StereoCorrect, "6"))?;
            tx.add(&reading(two.visit_id, Field::DistanceRight, "20/63"))?;
            tx.add(&outcome(two.visit_id, OutcomeKind::Refer))
        })
        .unwrap();
    store.verify(None, |_, _| {}).unwrap();
    let now = store.read().visit(one).unwrap().unwrap();
    assert_eq!(store.read().visit(two.visit_id).unwrap(), Some(now.clone()));
    assert_eq!(
        store.read().visits_now("Q-1").unwrap(),
        std::slice::from_ref(&now)
    );
    assert_eq!(
        (now.visit_id, now.parts, now.signatures),
        (one, 2, 2),
        "the first stands for both"
    );
    assert_eq!(now.kind, Some(OutcomeKind::Refer), "signed last");
    assert_eq!(now.readings, 4, "each field once");
    assert!(now.conflict && now.is_several());
    for id in [one, two.visit_id] {
        let readings = store.read().readings(id).unwrap();
        assert_eq!(readings.len(), 6);
        for r in readings {
            assert_eq!(r.conflict, r.field == Field::DistanceRight, "{r:?}");
        }
        assert_eq!(store.read().outcomes(id).unwrap().len(), 2);
    }
    let conflicts = store.read().conflicts().unwrap();
    assert_eq!(conflicts.len(), 1, "two signatures are none: {conflicts:?}");
    assert_eq!(conflicts[0].table, "reading");

    store
        .append(&author(), |tx| {
            tx.supersede::<row::Visit>(&[two.id], None, "entered twice")
        })
        .unwrap();
    let now = store.read().visit(one).unwrap().unwrap();
    assert_eq!((now.parts, now.signatures, now.conflict), (1, 1, false));
    assert_eq!(store.read().visit(two.visit_id).unwrap(), None);
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn the_same_values_twice_are_no_conflict() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    for _ in 0..2 {
        store
            .append(&author(), |tx| tx.add(&child("Q-9", "Moss", "Tobin")))
            .unwrap();
    }
    assert!(store.read().conflicts().unwrap().is_empty());
    let put = store
        .append(&author(), |tx| tx.put(child("Q-9", "Moss", "Tobin"), ""))
        .unwrap();
    assert_eq!(put, Put::Unchanged);
    store
        .append(&author(), |tx| tx.add(&child("Q-9", "Moss", "Tobias")))
        .unwrap();
    assert_eq!(store.read().conflicts().unwrap().len(), 1);
    assert_eq!(
        store.read().child("Q-9").unwrap().unwrap().given_name,
        "Tobias",
        "the latest stands"
    );
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_second_outcome_stands_beside_the_first_until_one_is_superseded() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    let first = store.read().outcomes(visit_id).unwrap().remove(0);
    let mut newer = outcome(visit_id, OutcomeKind::Refer);
    newer.edition = "2".to_owned();
    store.append(&author(), |tx| tx.add(&newer)).unwrap();
    let outcomes = store.read().outcomes(visit_id).unwrap();
    assert_eq!(outcomes.len(), 2, "an old outcome never changes");
    assert_eq!(outcomes[0], newer);
    assert_eq!(outcomes[1], first);
    let now = store.read().visit(visit_id).unwrap().unwrap();
    assert_eq!(now.kind, Some(OutcomeKind::Refer));
    assert_eq!(now.act_by, Some(date("2026-10-28")));
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn a_new_chain_names_what_it_follows() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let old = store.chain();
    let before = store.head().unwrap();
    let new = store
        .begin_chain(twoline::store::ChainStart::Restore, &author())
        .unwrap();
    assert_ne!(new, old);
    store
        .append(&author(), |tx| tx.add(&child("Q-9", "Vega", "Luz")))
        .unwrap();
    let verified = store.verify(None, |_, _| {}).unwrap();
    assert_eq!(verified.chains, 2);
    assert_eq!(verified.head.entries, before.entries + 2);
    let chains = store.read().all::<row::Chain>().unwrap();
    assert_eq!(chains[1].follows_chain, Some(old));
    assert_eq!(chains[1].why, "restore");
    // The choice of chain survives reopening.
    let dir = store.dir().to_owned();
    drop(store);
    assert_eq!(open(&dir).chain(), new);
}

#[test]
fn a_read_only_store_writes_nothing() {
    let (_temp, store) = fresh();
    let mut reader = twoline::store::Store::open(
        store.dir(),
        &twoline::store::Secret::None,
        twoline::store::Access::ReadOnly,
    )
    .unwrap();
    let error = reader
        .append(&author(), |tx| tx.add(&child("Q-1", "Okafor", "Ada")))
        .unwrap_err();
    assert_eq!(error.kind(), ErrorKind::ReadOnly);
    assert!(
        error
            .to_string()
            .contains(&format!("process {} is writing since", std::process::id()))
    );
    assert!(reader.drafts().is_err());
}

#[test]
fn ids_are_made_in_order() {
    let ids: Vec<_> = (0..5000).map(|_| new_id()).collect();
    assert!(ids.is_sorted());
    assert!(ids.windows(2).all(|w| w[0] != w[1]));
    assert!(ids.iter().all(|id| id.get_version_num() == 7));
}

#[test]
fn every_table_with_a_projection_names_its_key() {
    for table in TABLES {
        let column = match table.touch {
            Touch::None => continue,
            Touch::Child => "child_id",
            Touch::Visit => "visit_id",
        };
        assert!(table.columns.contains(&column), "{}", table.name);
    }
}
