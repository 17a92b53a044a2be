//! What the screens and the command line see of the store.

use chrono::NaiveDate;
use uuid::Uuid;

use super::triage::Standing;
use crate::clock::Moment;
use crate::domain::acuity::Line;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::{AcuityMethod, Attempt, Consent, History};
use crate::domain::field::Field;
use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind, RiskKind, Urgency};
use crate::domain::readings::Readings;
use crate::domain::school_calendar::SchoolCalendar;
use crate::rules::explain;

/// A screening day: one site, one date, one protocol.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DayInfo {
    /// Row id.
    pub id: Uuid,
    /// Site code, as the roster writes it.
    pub site: String,
    /// Site name.
    pub site_name: String,
    /// Civil date.
    pub date: NaiveDate,
    /// Protocol id.
    pub protocol: String,
    /// How far the chart is read.
    pub method: AcuityMethod,
    /// Lines of the chart that hangs at this station, from the largest; empty where it is not known.
    pub chart: Vec<Line>,
    /// Days on which school is held, where they are known.
    pub calendar: Option<SchoolCalendar>,
}

/// What is needed to open a screening day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NewDay {
    /// Site code.
    pub site: String,
    /// Civil date.
    pub date: NaiveDate,
    /// Protocol id.
    pub protocol: String,
    /// How far the chart is read.
    pub method: AcuityMethod,
}

/// How a child stands on a screening day.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum QueueState {
    /// Nothing signed yet.
    ToCome,
    /// Signed, with this outcome.
    Signed(OutcomeKind),
    /// Signed, the chart was not testable.
    NotTestable,
    /// Not at school.
    Absent,
    /// Opted out, or consent refused.
    OptedOut,
    /// Under care or examined in the last 12 months.
    UnderCare,
    /// Glasses owned and not worn today.
    GlassesAtHome,
    /// Present, not attempted.
    NotAttempted,
    /// Left before the end.
    LeftEarly,
}

impl QueueState {
    /// Returns the state in a word or two.
    pub fn title(self) -> &'static str {
        match self {
            QueueState::ToCome => "to come",
            QueueState::Signed(kind) => kind.title(),
            QueueState::NotTestable => "not testable",
            QueueState::Absent => "absent",
            QueueState::OptedOut => "opted out",
            QueueState::UnderCare => "under care",
            QueueState::GlassesAtHome => "glasses at home",
            QueueState::NotAttempted => "not attempted",
            QueueState::LeftEarly => "left early",
        }
    }
}

/// A child of a screening day, with all that rules ask beside the readings.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DayChild {
    /// The district's own id (or a provisional one, `P-…`, for a child added at the table).
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, if known.
    pub dob: Option<NaiveDate>,
    /// Completed months on the day.
    pub age: Option<AgeMonths>,
    /// Grade.
    pub grade: Option<Grade>,
    /// Class, empty if unknown.
    pub class: String,
    /// Whether the roster says that the child owns glasses.
    pub wears_glasses: Option<bool>,
    /// Consent of the guardian.
    pub consent: Option<Consent>,
    /// Whether the roster says that the child is under care.
    pub under_care: bool,
    /// Whether the last examination was less than 12 months before the day.
    pub examined_recently: bool,
    /// History from the roster; counted until somebody records the history of the visit.
    pub history: Vec<History>,
    /// Which visit this day is for the child.
    pub attempt: Attempt,
    /// Earlier visits of the term that ended for want of the child's glasses.
    pub glasses_visits: u32,
    /// Whether an earlier visit of the term ended not testable.
    pub not_testable_before: bool,
    /// When a rescreen or a return is due, from an earlier visit.
    pub due_on: Option<NaiveDate>,
    /// On a rescreen: what the visit before leaves to it.
    pub before: Option<Before>,
    /// How the child stands on this day; after several stations, what their readings say now.
    pub state: QueueState,
    /// Tries of this day of a chart that was not testable.
    pub tries: u32,
    /// What several stations' readings of the visit of this day say together.
    pub together: Option<Together>,
}

impl DayChild {
    /// Says whether the one try of this day was not testable, so that a second one is still to come.
    pub fn waits_for_second_try(&self) -> bool {
        self.state == QueueState::NotTestable && self.tries == 1
    }
}

/// What the readings of a visit say together, where several signatures stand for it or values differ.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Together {
    /// What was signed last.
    pub signed: Option<OutcomeKind>,
    /// What all readings say now.
    pub now: Outcome,
    /// The same as one line: `REFER, prompt, by 28 Oct 2026`.
    pub headline: String,
    /// Values that nobody has settled.
    pub unsettled: Vec<Unsettled>,
}

impl Together {
    /// Returns the reasons of what it is now in words; of values that differ that they are to be
    /// settled, where they decide.
    pub fn why(&self) -> String {
        let mut why = String::new();
        if self.now.decided_by == DecidedBy::Conflict {
            let fields: Vec<&str> = self.unsettled.iter().map(|u| u.field.title()).collect();
            why = format!("in conflict: settle it ({})", fields.join(", "));
        }
        let mut reasons = String::new();
        explain::reasons_text(&self.now, &mut reasons);
        if !why.is_empty() && !reasons.is_empty() {
            why.push_str("; ");
        }
        why + &reasons
    }

    /// Says in words what was signed and what it is now; nothing where the two are the same and
    /// nothing differs.
    pub fn words(&self) -> Option<String> {
        let signed = self.signed.map_or("nothing", OutcomeKind::title);
        if self.unsettled.is_empty() {
            return (self.signed != Some(self.now.kind))
                .then(|| format!("signed as {signed}, now {}", self.now.kind.title()));
        }
        let fields: Vec<&str> = self.unsettled.iter().map(|u| u.field.title()).collect();
        Some(format!(
            "signed as {signed}, now {}; not settled: {}",
            self.now.kind.title(),
            fields.join(", ")
        ))
    }
}

/// One fact with different values, until a person settles it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Unsettled {
    /// The try, from 1.
    pub try_no: i64,
    /// The field.
    pub field: Field,
    /// The values, in the order they were recorded.
    pub values: Vec<String>,
}

/// What a visit that ended in a rescreen leaves to the next one.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Before {
    /// Its date.
    pub on: NaiveDate,
    /// The criteria that referred, as `rule-set/criterion`: they are asked again.
    pub failed: Vec<String>,
    /// The readings of tests that passed.
    pub passed: Readings,
}

/// What a person signs.
#[derive(Debug, Clone, PartialEq)]
pub struct SignRequest {
    /// The day's row id.
    pub day: Uuid,
    /// The child.
    pub child_id: String,
    /// First visit or rescreen.
    pub attempt: Attempt,
    /// The visit's id, given at the first key, so that a retry writes nothing twice.
    pub visit: Uuid,
    /// All readings of the visit.
    pub readings: Readings,
    /// What was done while entering that must stay visible (eyes swapped), in words.
    pub remarks: Vec<String>,
}

/// What was stored.
#[derive(Debug, Clone, PartialEq)]
pub struct Signed {
    /// The visit.
    pub visit: Uuid,
    /// The child as they now stand in the queue.
    pub child: DayChild,
    /// The outcome read back from the store.
    pub outcome: StoredOutcome,
    /// The store's head after it, as 16 hex digits.
    pub head: String,
}

/// An outcome as it was signed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct StoredOutcome {
    /// What it came to.
    pub kind: OutcomeKind,
    /// How soon.
    pub urgency: Option<Urgency>,
    /// Act by this date.
    pub act_by: Option<NaiveDate>,
    /// Rescreen or return by this date.
    pub due_on: Option<NaiveDate>,
    /// Amblyopia risk, by kind.
    pub risks: Vec<RiskKind>,
    /// Criteria that referred.
    pub criteria: Vec<String>,
    /// Criteria that could not be answered.
    pub unknown: Vec<String>,
    /// What the outcome says of itself.
    pub qualifiers: Vec<String>,
    /// The reasons as they were written.
    pub reasons: String,
    /// What the protocol and the person who entered it noted beside the reasons.
    pub notes: Vec<String>,
    /// Protocol id.
    pub rule_set: String,
    /// Its edition.
    pub edition: String,
}

/// One visit with everything that was recorded of it.
#[derive(Debug, Clone, PartialEq)]
pub struct VisitView {
    /// Row id.
    pub id: Uuid,
    /// The day's row id.
    pub day: Uuid,
    /// Date of the screening day.
    pub date: NaiveDate,
    /// Site code.
    pub site: String,
    /// First visit or rescreen.
    pub attempt: Attempt,
    /// The readings that are judged.
    pub readings: Readings,
    /// Tries before the judged one, oldest first.
    pub earlier_tries: Vec<Readings>,
    /// The outcome as signed.
    pub outcome: Option<StoredOutcome>,
    /// What the readings would say now, where that differs.
    pub now: Option<String>,
    /// Values that differ between the parts of the visit; they are left out of the readings.
    pub unsettled: Vec<Unsettled>,
    /// Every signature that stands, oldest first: one for each station's part.
    pub signatures: Vec<Signature>,
    /// Who signed.
    pub screener: String,
    /// Where.
    pub station: String,
    /// When it was entered.
    pub entered: Moment,
    /// Whether it was entered on a later day than the test.
    pub late: bool,
    /// What was corrected, oldest first.
    pub corrections: Vec<CorrectionView>,
    /// How serious and how soon it is, as judged now.
    pub standing: Standing,
}

/// What one station signed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Signature {
    /// What it came to there.
    pub kind: OutcomeKind,
    /// Who signed.
    pub screener: String,
    /// Where.
    pub station: String,
    /// When.
    pub at: Moment,
}

/// One correction, for people.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct CorrectionView {
    /// What was corrected (`distance acuity, left eye`).
    pub what: String,
    /// The value before, empty if there was none.
    pub before: String,
    /// The value after, empty if it was taken back.
    pub after: String,
    /// Why.
    pub reason: String,
    /// Who.
    pub screener: String,
    /// When.
    pub at: Moment,
}

/// A child with all visits, newest first.
#[derive(Debug, Clone, PartialEq)]
pub struct ChildHistory {
    /// The district's own id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, if known.
    pub dob: Option<NaiveDate>,
    /// Site code.
    pub site: String,
    /// Grade.
    pub grade: Option<Grade>,
    /// Class.
    pub class: String,
    /// Further facts from the roster as (what, value), only those that are known.
    pub facts: Vec<(String, String)>,
    /// Visits, newest first.
    pub visits: Vec<VisitView>,
}

/// One hit of a search.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct FoundChild {
    /// The district's own id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, to tell twins and namesakes apart.
    pub dob: Option<NaiveDate>,
    /// Site code.
    pub site: String,
    /// Class.
    pub class: String,
    /// What was found where it is not the name as it was typed: id, class, the end of a telephone
    /// number, or a name like it.
    pub why: String,
}

/// A child added at the table.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct NewChild {
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, if known.
    pub dob: Option<NaiveDate>,
    /// Grade, if known.
    pub grade: Option<Grade>,
    /// Class.
    pub class: String,
    /// Site code.
    pub site: String,
}

/// An emergency or prompt finding whose action nobody has entered yet.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct OpenUrgent {
    /// The visit.
    pub visit: Uuid,
    /// The child.
    pub child_id: String,
    /// `Idris, Noor`
    pub name: String,
    /// Class.
    pub class: String,
    /// What was seen, in words.
    pub what: String,
    /// Since when.
    pub since: Moment,
}

/// What was done about an urgent finding.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct UrgentAnswer {
    /// The visit.
    pub visit: Uuid,
    /// Who was told (guardian, on-call eye doctor …).
    pub told: String,
    /// When, as written (`10:42`).
    pub told_at: String,
    /// By whom.
    pub told_by: String,
}
