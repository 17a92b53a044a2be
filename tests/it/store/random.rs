//! Whatever is added, corrected and taken back: the projections agree with the entries.

use twoline::domain::codes::{Attempt, Consent};
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::store::{Result, Row, Store, Tx, new_id, row};
use uuid::Uuid;

use super::support::*;

/// A small generator of numbers (xorshift), so that a seed says everything.
struct Dice(u64);

impl Dice {
    fn upto(&mut self, n: u64) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0 % n
    }
}

fn take_back_one<R: Row>(tx: &mut Tx<'_>, dice: &mut Dice) -> Result<()> {
    let all = tx.read().all::<R>()?;
    if all.is_empty() {
        return Ok(());
    }
    let at = dice.upto(all.len() as u64) as usize;
    tx.supersede::<R>(&[all[at].id()], None, "taken back")?;
    Ok(())
}

fn guardian(child_id: String, place: i64, name: String) -> row::Guardian {
    row::Guardian {
        id: new_id(),
        child_id,
        place,
        name,
        phone: String::new(),
        email: String::new(),
        address: String::new(),
    }
}

fn step(tx: &mut Tx<'_>, dice: &mut Dice, visits: &[Uuid]) -> Result<()> {
    let id = format!("Q-{}", dice.upto(4));
    let name = format!("N{}", dice.upto(3));
    let visit_id = visits[dice.upto(visits.len() as u64) as usize];
    match dice.upto(14) {
        0 => tx.put(child(&id, "Okafor", &name), "").map(|_| ()),
        1 => tx.add(&child(&id, "Okafor", &name)),
        2 => tx.put(enrolment(&id, &name), "").map(|_| ()),
        3 => tx
            .put(guardian(id, 1 + dice.upto(2) as i64, name), "")
            .map(|_| ()),
        4 => tx.add(&row::ConsentGiven {
            id: new_id(),
            child_id: id,
            consent: Consent::ALL[dice.upto(3) as usize],
            given_by: name,
        }),
        5 => take_back_one::<row::Child>(tx, dice),
        6 => take_back_one::<row::Guardian>(tx, dice),
        7 => take_back_one::<row::ConsentGiven>(tx, dice),
        8 => tx.add(&row::Visit {
            visit_id,
            attempt: Attempt::ALL[dice.upto(2) as usize],
            ..visit(&id)
        }),
        9 => take_back_one::<row::Visit>(tx, dice),
        10 => tx
            .put(
                reading(visit_id, Field::ALL[dice.upto(12) as usize], &name),
                "",
            )
            .map(|_| ()),
        11 => tx.add(&reading(visit_id, Field::Status, "present")),
        12 => take_back_one::<row::Reading>(tx, dice),
        _ => tx.add(&outcome(visit_id, OutcomeKind::ALL[dice.upto(5) as usize])),
    }
}

fn run(seed: u64, store: &mut Store) {
    let mut dice = Dice(seed);
    let visits: Vec<Uuid> = (0..4).map(|_| new_id()).collect();
    for _ in 0..60 {
        let steps = 1 + dice.upto(3);
        store
            .append(&author(), |tx| {
                for _ in 0..steps {
                    step(tx, &mut dice, &visits)?;
                }
                Ok(())
            })
            .unwrap_or_else(|e| panic!("seed {seed}: {e}"));
        store
            .verify(None, |_, _| {})
            .unwrap_or_else(|e| panic!("seed {seed}: {e}"));
    }
}

#[test]
fn projections_agree_after_anything() {
    for seed in 1..=6 {
        let (_temp, mut store) = fresh();
        run(seed, &mut store);
        assert!(store.head().unwrap().entries > 60, "seed {seed}");
    }
}

/// One projection moved away from the entries is enough for verify to notice.
#[test]
fn and_verify_would_notice_if_they_did_not() {
    let (_temp, mut store) = fresh();
    run(7, &mut store);
    let conn = raw(store.dir());
    for (table, harm) in [
        (
            "child_current",
            "UPDATE child_current SET consent = 'never'",
        ),
        (
            "visit_current",
            "UPDATE visit_current SET readings = readings + 1",
        ),
        ("child_current", "DELETE FROM child_current"),
    ] {
        conn.execute_batch("BEGIN").unwrap();
        conn.execute_batch(harm).unwrap();
        conn.execute_batch("COMMIT").unwrap();
        let damage = store.verify(None, |_, _| {}).unwrap_err();
        assert!(
            damage.table == table || damage.table == "child_current",
            "{damage}"
        );
    }
}
