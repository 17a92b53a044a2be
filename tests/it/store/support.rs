//! A small store to test with, and a raw connection that walks past every guard.

use std::path::Path;
use std::time::Duration;

use chrono::NaiveTime;
use rusqlite::Connection;
use tempfile::TempDir;
use twoline::clock::Moment;
use twoline::domain::codes::{AcuityMethod, Attempt, Consent, YesNo};
use twoline::domain::exam::{Evidence, ExamField};
use twoline::domain::field::Field;
use twoline::domain::outcome::{OutcomeKind, Urgency};
use twoline::domain::referral::{Channel, ContactResult, StepKind};
use twoline::store::{self, Access, Author, DayKey, Kdf, New, Secret, Store, new_id, row};
use uuid::Uuid;
use zeroize::Zeroizing;

pub const PASSPHRASE: &str = "nine green kettles sing";

pub fn date(text: &str) -> chrono::NaiveDate {
    text.parse().unwrap()
}

pub fn secret() -> Secret {
    Secret::Passphrase(Zeroizing::new(PASSPHRASE.to_owned()))
}

pub fn author() -> Author {
    Author {
        screener: None,
        at: Moment {
            utc_ms: 1_792_000_000_000,
            offset_minutes: -300,
        },
    }
}

pub const WRITE: Access = Access::Write {
    wait: Duration::ZERO,
};

pub fn new(secret: Secret) -> New {
    New {
        programme: "Quillmere vision".to_owned(),
        programme_id: None,
        station: "east".to_owned(),
        notation: "feet".to_owned(),
        secret,
        kdf: Kdf::test(),
    }
}

/// An unprotected store in a fresh folder.
pub fn fresh() -> (TempDir, Store) {
    let temp = TempDir::new().unwrap();
    let (store, key) = Store::create(&temp.path().join("store"), new(Secret::None)).unwrap();
    assert!(key.is_none());
    (temp, store)
}

pub fn open(dir: &Path) -> Store {
    Store::open(dir, &Secret::None, WRITE).unwrap()
}

/// A keyed connection of its own, without any of the store's guards.
pub fn raw(dir: &Path) -> Connection {
    let key = store::key::unlock(dir, &Secret::None).unwrap();
    let conn = Connection::open(dir.join("store.db")).unwrap();
    conn.execute_batch(&format!(
        "PRAGMA key = \"x'{}'\";",
        store::ledger::hex(&key[..])
    ))
    .unwrap();
    conn
}

pub fn drop_triggers(conn: &Connection) {
    let names: Vec<String> = conn
        .prepare("SELECT name FROM sqlite_schema WHERE type = 'trigger'")
        .unwrap()
        .query_map([], |r| r.get(0))
        .unwrap()
        .map(Result::unwrap)
        .collect();
    assert!(names.len() > 40);
    for name in names {
        conn.execute_batch(&format!("DROP TRIGGER {name}")).unwrap();
    }
}

pub fn day() -> DayKey {
    DayKey {
        site: "QE".to_owned(),
        screened_on: date("2026-10-14"),
        protocol: "us-school".to_owned(),
    }
}

pub fn child(id: &str, family: &str, given: &str) -> row::Child {
    row::Child {
        id: new_id(),
        child_id: id.to_owned(),
        family_name: family.to_owned(),
        given_name: given.to_owned(),
        dob: Some(date("2020-09-01")),
        provisional: false,
    }
}

pub fn enrolment(id: &str, class: &str) -> row::Enrolment {
    row::Enrolment {
        id: new_id(),
        child_id: id.to_owned(),
        term: "2026-autumn".to_owned(),
        site: "QE".to_owned(),
        grade: twoline::domain::age::Grade::parse("1"),
        class: class.to_owned(),
        teacher: String::new(),
        from_on: date("2026-09-01"),
        left_on: None,
    }
}

pub fn visit(child_id: &str) -> row::Visit {
    row::Visit {
        id: new_id(),
        visit_id: new_id(),
        child_id: child_id.to_owned(),
        site: "QE".to_owned(),
        screened_on: date("2026-10-14"),
        protocol: "us-school".to_owned(),
        attempt: Attempt::First,
    }
}

pub fn reading(visit_id: Uuid, field: Field, value: &str) -> row::Reading {
    row::Reading {
        id: new_id(),
        visit_id,
        try_no: 1,
        field,
        value: value.to_owned(),
    }
}

pub fn outcome(visit_id: Uuid, kind: OutcomeKind) -> row::Outcome {
    row::Outcome {
        id: new_id(),
        visit_id,
        kind,
        decided_by: "criterion".to_owned(),
        urgency: (kind == OutcomeKind::Refer).then_some(Urgency::Prompt),
        act_within_days: (kind == OutcomeKind::Refer).then_some(14),
        act_by: (kind == OutcomeKind::Refer).then(|| date("2026-10-28")),
        due_on: (kind == OutcomeKind::Rescreen).then(|| date("2026-10-28")),
        risks: String::new(),
        criteria: "joint-policy-2016/between-eyes".to_owned(),
        unknown: "plus-lens-2.50/plus-lens".to_owned(),
        qualifiers: String::new(),
        reasons: "two steps between the eyes".to_owned(),
        protocol_notes: String::new(),
        rule_set: "us-school".to_owned(),
        edition: "1".to_owned(),
        content_hash: "ab".repeat(32),
        age_months: Some(73),
        grade: twoline::domain::age::Grade::parse("1"),
        screener_id: None,
        station_id: None,
        tested_on: date("2026-10-14"),
        entered_on: date("2026-10-14"),
        late: false,
    }
}

/// Puts at least one entry into every table, in several transactions. Returns the visit's id.
pub fn fill(store: &mut Store) -> Uuid {
    let (screener, chart) = (new_id(), new_id());
    programme(store, screener, chart);
    let by = Author {
        screener: Some(screener),
        ..author()
    };
    roster(store, &by, chart);
    let visit_id = screened(store, &by);
    corrected(store, &by, visit_id);
    visit_id
}

/// Who and what there is before the roster.
fn programme(store: &mut Store, screener: Uuid, chart: Uuid) {
    store
        .append(&author(), |tx| {
            tx.add(&row::Screener {
                id: new_id(),
                screener_id: screener,
                initials: "JI".to_owned(),
                name: "J. Imani".to_owned(),
            })?;
            tx.add(&row::Site {
                id: new_id(),
                code: "QE".to_owned(),
                name: "Quillmere East".to_owned(),
            })?;
            tx.add(&row::Term {
                id: new_id(),
                code: "2026-autumn".to_owned(),
                title: "Autumn 2026".to_owned(),
                starts_on: date("2026-09-01"),
                ends_on: date("2026-12-20"),
            })?;
            tx.add(&row::Chart {
                id: new_id(),
                chart_id: chart,
                name: "wall chart".to_owned(),
                optotypes: "letters".to_owned(),
                crowded: true,
                letters_per_line: 5,
                distance_mm: 3000,
                lines: "20/40 20/32".to_owned(),
            })?;
            tx.add(&row::Calendar {
                id: new_id(),
                site: "QE".to_owned(),
                days_held: "mon,tue,wed,thu,fri".to_owned(),
                holidays: "2026-11-26..2026-11-27;2026-12-25".to_owned(),
            })
        })
        .unwrap();
}

/// Two children on the roster, and a day.
fn roster(store: &mut Store, by: &Author, chart: Uuid) {
    store
        .append(by, |tx| {
            tx.add(&row::Import {
                id: new_id(),
                import_id: new_id(),
                kind: "roster".to_owned(),
                file_name: "roster.csv".to_owned(),
                file_hash: "cd".repeat(32),
                rows_new: 2,
                rows_changed: 0,
                rows_unchanged: 0,
                rows_gone: 0,
            })?;
            tx.add(&row::ColumnMapping {
                id: new_id(),
                kind: "roster".to_owned(),
                header: "Surname".to_owned(),
                meaning: "family_name".to_owned(),
            })?;
            for (id, family, given) in [("Q-1", "Okafor", "Ada"), ("Q-2", "Trần", "Bảo")] {
                tx.add(&child(id, family, given))?;
                tx.add(&row::ChildDetail {
                    id: new_id(),
                    child_id: id.to_owned(),
                    sex: "f".to_owned(),
                    language: "en".to_owned(),
                    ethnicity: String::new(),
                    insurance: String::new(),
                    special_education: Some(YesNo::No),
                    state_id: String::new(),
                    wears_glasses: None,
                    last_exam_on: Some(date("2025-01-31")),
                    under_care: Some(YesNo::No),
                    known_condition: String::new(),
                    doctor_name: String::new(),
                    doctor_phone: String::new(),
                    history: String::new(),
                    notes: String::new(),
                })?;
                for place in [1, 2] {
                    tx.add(&row::Guardian {
                        id: new_id(),
                        child_id: id.to_owned(),
                        place,
                        name: format!("Guardian {place}"),
                        phone: format!("555-010{place}"),
                        email: String::new(),
                        address: String::new(),
                    })?;
                }
                tx.add(&row::ConsentGiven {
                    id: new_id(),
                    child_id: id.to_owned(),
                    consent: Consent::Yes,
                    given_by: "roster".to_owned(),
                })?;
                tx.add(&enrolment(id, "1B"))?;
            }
            tx.add(&row::SameChild {
                id: new_id(),
                a: "Q-1".to_owned(),
                b: "P-7".to_owned(),
            })?;
            let rows = follow_up(new_id(), new_id());
            tx.add(&rows.referral)?;
            tx.add(&rows.step)?;
            tx.add(&rows.report)?;
            tx.add(&rows.value)?;
            tx.add(&rows.disclosure)?;
            tx.add(&row::ScreeningDay {
                id: new_id(),
                site: "QE".to_owned(),
                screened_on: date("2026-10-14"),
                protocol: "us-school".to_owned(),
                term: "2026-autumn".to_owned(),
                acuity_method: AcuityMethod::Threshold,
                chart_id: Some(chart),
            })
        })
        .unwrap();
}

/// One child screened, one emergency.
fn screened(store: &mut Store, by: &Author) -> Uuid {
    let visit = visit("Q-1");
    let visit_id = visit.visit_id;
    store
        .append(by, |tx| {
            tx.add(&visit)?;
            tx.add(&reading(visit_id, Field::Status, "present"))?;
            tx.add(&reading(visit_id, Field::DistanceRight, "20/20"))?;
            tx.add(&reading(visit_id, Field::DistanceLeft, "20/40"))?;
            tx.add(&outcome(visit_id, OutcomeKind::Rescreen))?;
            tx.add(&row::RuleSetUsed {
                id: new_id(),
                content_hash: "ab".repeat(32),
                rule_set: "us-school".to_owned(),
                edition: "1".to_owned(),
                text: "id = \"us-school\"\n".to_owned(),
            })
        })
        .unwrap();
    store
        .append(by, |tx| {
            tx.add(&row::UrgentAction {
                id: new_id(),
                urgent_id: new_id(),
                step: "raised".to_owned(),
                child_id: "Q-2".to_owned(),
                visit_id: None,
                signs: "white_pupil:left".to_owned(),
                told: String::new(),
                at_ms: author().at.utc_ms,
                at_offset_minutes: -300,
                screener_id: by.screener,
                note: String::new(),
            })
        })
        .unwrap();
    visit_id
}

/// One reading put right.
fn corrected(store: &mut Store, by: &Author, visit_id: Uuid) {
    let old = store
        .read()
        .readings(visit_id)
        .unwrap()
        .into_iter()
        .find(|r| r.field == Field::DistanceLeft)
        .unwrap();
    store
        .append(by, |tx| {
            tx.supersede(
                &[old.id],
                Some(reading(visit_id, Field::DistanceLeft, "20/32")),
                "typed the wrong row",
            )
        })
        .unwrap();
}

/// One entry of each kind about a referral; the ids of the entries do not matter to their hash.
pub struct FollowUp {
    pub referral: row::Referral,
    pub step: row::StepEntry,
    pub report: row::ExamEntry,
    pub value: row::ExamValue,
    pub disclosure: row::Disclosure,
}

pub fn follow_up(referral_id: Uuid, other: Uuid) -> FollowUp {
    FollowUp {
        referral: row::Referral {
            id: new_id(),
            referral_id,
            child_id: "Q-1".to_owned(),
            visit_id: None,
            opened_on: date("2026-10-14"),
            urgency: Urgency::Routine,
            act_by: None,
            reason: "teacher's concern".to_owned(),
            responsible: "J. Imani".to_owned(),
            consent_to_share: Some(YesNo::Yes),
            interpreter: None,
            language: "Español".to_owned(),
            prior_exam: String::new(),
        },
        step: row::StepEntry {
            id: new_id(),
            step_id: other,
            referral_id,
            child_id: "Q-1".to_owned(),
            kind: StepKind::Call,
            done_on: date("2026-11-10"),
            done_at: NaiveTime::from_hms_opt(14, 5, 0),
            channel: Some(Channel::Telephone),
            language: "Español".to_owned(),
            result: Some(ContactResult::NoAnswer),
            letter: None,
            due_on: None,
            worn: None,
            evidence: None,
            closing: None,
            whom: "R. Moss".to_owned(),
            note: String::new(),
            screener_id: Some(Uuid::from_bytes([0x5c; 16])),
            entered_on: date("2026-11-10"),
        },
        report: row::ExamEntry {
            id: new_id(),
            report_id: other,
            referral_id,
            child_id: "Q-1".to_owned(),
            examined_on: date("2026-12-02"),
            received_on: date("2026-12-09"),
            evidence: Evidence::Form,
            screener_id: None,
        },
        value: row::ExamValue {
            id: new_id(),
            report_id: other,
            field: ExamField::BestLeft,
            value: "20/50".to_owned(),
        },
        disclosure: row::Disclosure {
            id: new_id(),
            disclosure_id: other,
            child_id: "Q-1".to_owned(),
            disclosed_on: date("2026-10-15"),
            recipient: "Dr. P. Lindqvist".to_owned(),
            purpose: "referral".to_owned(),
            what: "referral letter".to_owned(),
            file_name: "due.html".to_owned(),
            screener_id: None,
        },
    }
}
