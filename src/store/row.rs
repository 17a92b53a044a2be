//! Every table of entries, declared once: struct, frozen field order, key.
//!
//! A field is only ever added at the end of a table, together with a new row version and a
//! migration that adds a nullable column; the bytes of older rows never change.

use chrono::{NaiveDate, NaiveTime};
use uuid::Uuid;

use crate::domain::age::Grade;
use crate::domain::codes::{AcuityMethod, Attempt, Consent, YesNo};
use crate::domain::exam::{Evidence, ExamField};
use crate::domain::field::Field;
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::domain::referral::{Channel, Closing, ContactResult, LetterKind, StepKind};
use crate::domain::screening_test::ScreeningTest;

use super::cell::{Cell, Ids, Value};

/// Which projection an entry moves.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Touch {
    /// None.
    None,
    /// That of the child named by `child_id`.
    Child,
    /// That of the visit named by `visit_id`.
    Visit,
}

/// What the store knows of a table of entries.
#[derive(Debug)]
pub struct Table {
    /// Its name.
    pub name: &'static str,
    /// Its fields in their frozen order.
    pub columns: &'static [&'static str],
    /// The fields that say what an entry is about.
    pub key: &'static [&'static str],
    /// How many of the fields each row version has, version 1 first.
    pub versions: &'static [usize],
    /// Which projection its entries move.
    pub touch: Touch,
}

/// A row struct of a table of entries.
pub trait Row: Sized + Clone + PartialEq {
    /// The table.
    const TABLE: &'static Table;
    /// Returns the id of the entry.
    fn id(&self) -> Uuid;
    /// Returns the same values under another id, for a replacement.
    #[must_use]
    fn with_id(self, id: Uuid) -> Self;
    /// Passes the fields in their frozen order.
    fn each(&self, f: impl FnMut(Cell<'_>));
    /// Passes the key fields.
    fn each_key(&self, f: impl FnMut(Cell<'_>));
    /// Reads id and fields, beginning at column `at`; names the column that does not fit.
    fn from_stored(row: &rusqlite::Row<'_>, at: usize) -> std::result::Result<Self, &'static str>;
    /// Returns what kind of projection it moves, and the key of it.
    fn touched(&self) -> Touched<'_>;
}

/// The projection an entry moves, by its key.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Touched<'a> {
    /// None.
    Nothing,
    /// A child.
    Child(&'a str),
    /// A visit.
    Visit(Uuid),
}

/// What a screening day is known by.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct DayKey {
    /// Site code.
    pub site: String,
    /// Civil date.
    pub screened_on: NaiveDate,
    /// Protocol id.
    pub protocol: String,
}

/// Returns the key of a row in bytes, to compare.
pub(super) fn key_bytes<R: Row>(row: &R) -> Vec<u8> {
    let mut out = Vec::new();
    row.each_key(|cell| cell.write(&mut out));
    out
}

macro_rules! touched {
    (None, $self:ident) => {
        Touched::Nothing
    };
    (Child, $self:ident) => {
        Touched::Child(&$self.child_id)
    };
    (Visit, $self:ident) => {
        Touched::Visit($self.visit_id)
    };
}

/// Returns how many fields each row version has, from how many it added.
const fn in_all<const N: usize>(mut added: [usize; N]) -> [usize; N] {
    let mut at = 1;
    while at < N {
        added[at] += added[at - 1];
        at += 1;
    }
    added
}

// A `+` block after the fields holds those of the next row version; an older row has none of
// them, and its bytes and hash stay as they were.
macro_rules! tables {
    ($(
        $(#[$doc:meta])*
        $name:ident = $table:literal, key($($key:ident),+), touches $touch:ident {
            $($(#[$fdoc:meta])* $field:ident: $ty:ty,)+
            $(+ {
                $($(#[$xdoc:meta])* $xfield:ident: $xty:ty,)+
            })*
        }
    )+) => {
        $(
            $(#[$doc])*
            #[derive(Debug, Clone, PartialEq, Eq)]
            #[allow(missing_docs)]
            pub struct $name {
                /// Id of the entry, made before it is written.
                pub id: Uuid,
                $($(#[$fdoc])* pub $field: $ty,)+
                $($($(#[$xdoc])* pub $xfield: $xty,)+)*
            }

            impl Row for $name {
                const TABLE: &'static Table = &Table {
                    name: $table,
                    columns: &[$(stringify!($field),)+ $($(stringify!($xfield),)+)*],
                    key: &[$(stringify!($key)),+],
                    versions: &in_all([
                        [$(stringify!($field)),+].len(),
                        $([$(stringify!($xfield)),+].len(),)*
                    ]),
                    touch: Touch::$touch,
                };

                fn id(&self) -> Uuid {
                    self.id
                }

                fn with_id(self, id: Uuid) -> Self {
                    $name { id, ..self }
                }

                fn each(&self, mut f: impl FnMut(Cell<'_>)) {
                    $(f(self.$field.cell());)+
                    $($(f(self.$xfield.cell());)+)*
                }

                fn each_key(&self, mut f: impl FnMut(Cell<'_>)) {
                    $(f(self.$key.cell());)+
                }

                fn from_stored(
                    row: &rusqlite::Row<'_>,
                    at: usize,
                ) -> std::result::Result<Self, &'static str> {
                    let mut next = at;
                    Ok($name {
                        id: take(row, &mut next, "id")?,
                        $($field: take(row, &mut next, stringify!($field))?,)+
                        $($($xfield: take(row, &mut next, stringify!($xfield))?,)+)*
                    })
                }

                fn touched(&self) -> Touched<'_> {
                    touched!($touch, self)
                }
            }
        )+

        /// Every table of entries.
        pub const TABLES: &[&Table] = &[$($name::TABLE),+];
    };
}

fn take<T: Value>(
    row: &rusqlite::Row<'_>,
    next: &mut usize,
    name: &'static str,
) -> std::result::Result<T, &'static str> {
    let at = *next;
    *next += 1;
    row.get_ref(at).ok().and_then(T::from_stored).ok_or(name)
}

tables! {
    /// The programme this store belongs to.
    Programme = "programme", key(programme_id), touches None {
        programme_id: Uuid,
        name: String,
    }

    /// The beginning of a chain, and what it follows.
    Chain = "chain", key(chain_id), touches None {
        chain_id: Uuid,
        /// `init`, `restore`, `installation` or `fork`.
        why: String,
        follows_chain: Option<Uuid>,
        follows_seq: Option<i64>,
        follows_hash: Option<Vec<u8>>,
    }

    /// One table or laptop.
    Station = "station", key(station_id), touches None {
        station_id: Uuid,
        name: String,
        /// The chart it uses.
        chart_id: Option<Uuid>,
        + {
            /// The one test that is done here; none for a whole screening.
            task: Option<ScreeningTest>,
            /// Whether outcome and pass line wait until both eyes are entered; not known is no.
            masked: Option<bool>,
        }
    }

    /// A person who records.
    Screener = "screener", key(screener_id), touches None {
        screener_id: Uuid,
        initials: String,
        name: String,
    }

    /// A child, by the district's own id.
    Child = "child", key(child_id), touches Child {
        child_id: String,
        family_name: String,
        given_name: String,
        /// Birth date; nothing when unknown.
        dob: Option<NaiveDate>,
        /// Whether the id was given at the table and waits for the roster's.
        provisional: bool,
    }

    /// What a roster knows of a child besides; empty text when nothing.
    ChildDetail = "child_detail", key(child_id), touches Child {
        child_id: String,
        sex: String,
        language: String,
        ethnicity: String,
        insurance: String,
        special_education: Option<YesNo>,
        state_id: String,
        wears_glasses: Option<YesNo>,
        last_exam_on: Option<NaiveDate>,
        under_care: Option<YesNo>,
        known_condition: String,
        doctor_name: String,
        doctor_phone: String,
        history: String,
        notes: String,
    }

    /// A guardian of a child.
    Guardian = "guardian", key(child_id, place), touches Child {
        child_id: String,
        /// 1 for the first, 2 for the second.
        place: i64,
        name: String,
        phone: String,
        email: String,
        address: String,
    }

    /// Consent for a child.
    ConsentGiven = "consent", key(child_id), touches Child {
        child_id: String,
        consent: Consent,
        /// Where it is known from: `roster`, or who said so.
        given_by: String,
    }

    /// A school or clinic.
    Site = "site", key(code), touches None {
        code: String,
        name: String,
    }

    /// A child at a site in a term.
    Enrolment = "enrolment", key(child_id, term), touches Child {
        child_id: String,
        term: String,
        site: String,
        grade: Option<Grade>,
        class: String,
        teacher: String,
        /// The first day it holds: where a child has several, the latest is the present one.
        from_on: NaiveDate,
        /// The day from which the child was no longer on the roster.
        left_on: Option<NaiveDate>,
    }

    /// A school term.
    Term = "term", key(code), touches None {
        code: String,
        title: String,
        starts_on: NaiveDate,
        ends_on: NaiveDate,
    }

    /// Days on which school is held at a site.
    Calendar = "school_calendar", key(site), touches None {
        /// Site code; empty for every site without a row of its own.
        site: String,
        /// `mon,tue,wed,thu,fri`
        days_held: String,
        /// `2026-11-26..2026-11-27;2026-12-25`
        holidays: String,
    }

    /// Two ids that a person found to be one child.
    SameChild = "same_child", key(a, b), touches None {
        /// The id that stays.
        a: String,
        /// The id that is the same child.
        b: String,
    }

    /// A chart the programme owns.
    Chart = "chart", key(chart_id), touches None {
        chart_id: Uuid,
        name: String,
        /// `letters` or `symbols`.
        optotypes: String,
        crowded: bool,
        letters_per_line: i64,
        distance_mm: i64,
        /// Its lines from the largest, separated by spaces.
        lines: String,
    }

    /// A screening day: one site, one date, one protocol.
    ScreeningDay = "screening_day", key(site, screened_on, protocol), touches None {
        site: String,
        screened_on: NaiveDate,
        protocol: String,
        term: String,
        acuity_method: AcuityMethod,
        chart_id: Option<Uuid>,
    }

    /// One child on one screening day.
    Visit = "visit", key(child_id, site, screened_on, protocol, attempt), touches Visit {
        /// Named by readings and outcome; given when the first key is pressed.
        visit_id: Uuid,
        child_id: String,
        site: String,
        screened_on: NaiveDate,
        protocol: String,
        attempt: Attempt,
    }

    /// One recorded value of a visit, as canonical text.
    Reading = "reading", key(visit_id, try_no, field), touches Visit {
        visit_id: Uuid,
        /// 1, or 2 for a second try the same day.
        try_no: i64,
        field: Field,
        value: String,
    }

    /// What a visit came to, as a person signed it; lists are separated by `;`.
    Outcome = "outcome", key(visit_id, rule_set, edition), touches Visit {
        visit_id: Uuid,
        kind: OutcomeKind,
        decided_by: String,
        urgency: Option<Urgency>,
        act_within_days: Option<i64>,
        act_by: Option<NaiveDate>,
        due_on: Option<NaiveDate>,
        risks: String,
        criteria: String,
        unknown: String,
        qualifiers: String,
        reasons: String,
        protocol_notes: String,
        rule_set: String,
        edition: String,
        content_hash: String,
        age_months: Option<i64>,
        grade: Option<Grade>,
        screener_id: Option<Uuid>,
        station_id: Option<Uuid>,
        /// The screening day.
        tested_on: NaiveDate,
        /// The civil date of entry.
        entered_on: NaiveDate,
        /// Whether it was entered after the day.
        late: bool,
    }

    /// A step of an emergency: `raised` when it was saved, `told` when somebody was told.
    UrgentAction = "urgent_action", key(urgent_id, step), touches None {
        urgent_id: Uuid,
        /// `raised` or `told`.
        step: String,
        child_id: String,
        visit_id: Option<Uuid>,
        /// The signs as recorded.
        signs: String,
        /// Who was told.
        told: String,
        at_ms: i64,
        at_offset_minutes: i64,
        screener_id: Option<Uuid>,
        note: String,
    }

    /// What replaces or takes back earlier entries, and why.
    Correction = "correction", key(id), touches None {
        table_name: String,
        supersedes: Ids,
        /// None takes them back.
        replacement: Option<Uuid>,
        reason: String,
        screener_id: Option<Uuid>,
    }

    /// A setting of the store.
    Setting = "setting", key(name), touches None {
        name: String,
        value: String,
    }

    /// What a header of a file was taken to mean.
    ColumnMapping = "column_mapping", key(kind, header), touches None {
        /// The kind of file: `roster`, `results`.
        kind: String,
        header: String,
        meaning: String,
    }

    /// A file that was read in.
    Import = "import", key(import_id), touches None {
        import_id: Uuid,
        kind: String,
        file_name: String,
        /// SHA-256 of the file in hex.
        file_hash: String,
        rows_new: i64,
        rows_changed: i64,
        rows_unchanged: i64,
        rows_gone: i64,
    }

    /// The text of a rule set or protocol an outcome was signed with.
    RuleSetUsed = "rule_set_used", key(content_hash), touches None {
        content_hash: String,
        rule_set: String,
        edition: String,
        text: String,
    }

    /// What is known of a referral beside the outcome that opened it, or its opening by hand.
    Referral = "referral", key(referral_id), touches None {
        /// That of the visit whose outcome opened it, else its own.
        referral_id: Uuid,
        child_id: String,
        visit_id: Option<Uuid>,
        opened_on: NaiveDate,
        urgency: Urgency,
        act_by: Option<NaiveDate>,
        /// Why it was opened by hand; empty where an outcome did.
        reason: String,
        responsible: String,
        consent_to_share: Option<YesNo>,
        interpreter: Option<YesNo>,
        language: String,
        prior_exam: String,
    }

    /// One thing that was done about a referral.
    StepEntry = "step", key(step_id), touches None {
        step_id: Uuid,
        referral_id: Uuid,
        child_id: String,
        kind: StepKind,
        done_on: NaiveDate,
        done_at: Option<NaiveTime>,
        channel: Option<Channel>,
        language: String,
        result: Option<ContactResult>,
        letter: Option<LetterKind>,
        due_on: Option<NaiveDate>,
        worn: Option<YesNo>,
        evidence: Option<Evidence>,
        closing: Option<Closing>,
        whom: String,
        note: String,
        screener_id: Option<Uuid>,
        entered_on: NaiveDate,
    }

    /// A report of an examination; its values are entries of their own.
    ExamEntry = "exam_report", key(report_id), touches None {
        report_id: Uuid,
        referral_id: Uuid,
        child_id: String,
        examined_on: NaiveDate,
        received_on: NaiveDate,
        evidence: Evidence,
        screener_id: Option<Uuid>,
    }

    /// One value of a report, as canonical text.
    ExamValue = "exam_value", key(report_id, field), touches None {
        report_id: Uuid,
        field: ExamField,
        value: String,
    }

    /// Something about a child that left the programme (34 CFR 99.32).
    Disclosure = "disclosure", key(disclosure_id), touches None {
        disclosure_id: Uuid,
        child_id: String,
        disclosed_on: NaiveDate,
        recipient: String,
        purpose: String,
        what: String,
        file_name: String,
        screener_id: Option<Uuid>,
    }
}
