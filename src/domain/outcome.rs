//! An outcome and everything that explains it.

use std::fmt;
use std::sync::Arc;

use chrono::NaiveDate;

use crate::domain::acuity::Line;
use crate::domain::codes::code_list;
use crate::domain::readings::Eye;

code_list! {
    /// What a visit comes to.
    OutcomeKind {
        Pass = "pass", "pass";
        Rescreen = "rescreen", "rescreen";
        Refer = "refer", "refer";
        Incomplete = "incomplete", "incomplete";
        Exempt = "exempt", "exempt";
    }
}

code_list! {
    /// How soon a refer or rescreen is acted on; the sooner is the smaller.
    Urgency {
        Emergency = "emergency", "emergency";
        Prompt = "prompt", "prompt";
        Routine = "routine", "routine";
    }
}

code_list! {
    /// A risk factor for amblyopia, by kind.
    RiskKind {
        InterocularDifference = "interocular_difference", "interocular difference";
        Anisometropic = "anisometropic", "anisometropic";
        Strabismic = "strabismic", "strabismic";
        Deprivation = "deprivation", "deprivation";
        Isoametropic = "isoametropic", "isoametropic";
    }
}

code_list! {
    /// How well a number is known.
    Basis {
        Primary = "primary", "read in the source";
        Secondary = "secondary", "as quoted elsewhere";
        Memory = "memory", "from memory: check against the source before use";
        Practice = "practice", "common practice";
    }
}

/// A criterion's three-valued answer.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Answer {
    /// The threshold is passed, whatever the reading may be within its interval.
    Pass,
    /// The threshold is crossed, whatever the reading may be within its interval.
    Refer,
    /// The reading cannot say.
    Unknown,
}

code_list! {
    /// Why a criterion has no answer.
    Open {
        NotDone = "not_done", "not done";
        NotLookedFor = "not_looked_for", "not looked for";
        NotTestable = "not_testable", "not testable";
        NotJudged = "not_judged", "not judged";
        NotApplicable = "not_applicable", "not applicable";
        NotSettled = "not_settled", "not settled";
        NotDecided = "not_decided", "not decided by the reading";
    }
}

/// Where a number comes from.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Source {
    /// The key by which criteria name it.
    pub key: String,
    /// Authors, title, where published.
    pub citation: String,
    /// DOI or other locator, empty if none.
    pub locator: String,
    /// How it was read.
    pub basis: Basis,
    /// Where it was quoted, for a secondary basis.
    pub quoted_in: String,
    /// "local, approved by … on …" where a local rule file speaks; empty for what is shipped.
    pub approval: String,
}

/// How far a reading lies from the threshold, in the criterion's own unit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Margin {
    /// Nothing to measure (a sign, an unknown).
    None,
    /// Lines or steps of 0.1 logMAR: positive is on the passing side, zero is the threshold as printed.
    Steps(i32),
    /// Thousandths of a dioptre.
    Diopters(i32),
    /// Hundredths of a millimetre.
    Millimetres(i32),
    /// Hundredths of a prism dioptre.
    PrismDiopters(i32),
    /// Answers of a counted test.
    Count(i32),
    /// Hundredths of a letter line by letter score (thousandths of logMAR).
    LogMar(i32),
}

/// What a criterion asks for once its threshold is crossed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub enum Then {
    /// An examination.
    #[default]
    Refer,
    /// A second screening, when the service says.
    Rescreen,
    /// A second screening after so many calendar months.
    Recheck(u32),
    /// Information for the family and the school.
    Inform,
}

impl Then {
    /// Says whether it asks for a second screening.
    pub fn is_again(self) -> bool {
        matches!(self, Then::Rescreen | Then::Recheck(_))
    }

    /// Returns what is asked for, in words.
    pub fn in_words(self) -> String {
        match self {
            Then::Refer => "refer".to_owned(),
            Then::Rescreen => "rescreen".to_owned(),
            Then::Recheck(months) => format!("recheck at {months} months"),
            Then::Inform => "inform the family and the school".to_owned(),
        }
    }
}

/// What the eyes would have to read on the chart to turn a criterion's answer.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct ChartChange {
    /// Whether the near chart is meant.
    pub near: bool,
    /// The line of the right eye, where it would have to change.
    pub right: Option<Line>,
    /// The line of the left eye, where it would have to change.
    pub left: Option<Line>,
    /// How many steps of 0.1 logMAR away that is.
    pub steps: i32,
}

/// One criterion that was asked, with what it answered and why.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reason {
    /// The rule set's id.
    pub rule_set: Arc<str>,
    /// The rule set's short title, for one sentence.
    pub said_by: Arc<str>,
    /// The criterion's id inside it.
    pub criterion: Arc<str>,
    /// What it answered.
    pub answer: Answer,
    /// Why it has no answer, where it has none.
    pub open: Open,
    /// Whether an unknown answer makes the outcome incomplete.
    pub required: bool,
    /// The eye that decided it, if one did.
    pub eye: Option<Eye>,
    /// The reading in words with its unit ("20/20 and 20/32", "anisometropia 1.75 D").
    pub reading: String,
    /// The threshold as printed ("worse than 20/32").
    pub threshold: Arc<str>,
    /// The distance to it.
    pub margin: Margin,
    /// Where the threshold comes from.
    pub source: Arc<Source>,
    /// The rule file's note on this criterion, empty if none.
    pub note: Arc<str>,
    /// Remarks on this reading (rounded to a line, neighbouring lines, one meridian).
    pub remarks: Vec<String>,
    /// The kind of amblyopia risk it stands for.
    pub risk: Option<RiskKind>,
    /// How soon, when it refers.
    pub urgency: Urgency,
    /// Days, where a source prints a number.
    pub act_within_days: Option<u32>,
    /// What it asks for when it speaks.
    pub then: Then,
    /// Whether it makes a referral one of high priority.
    pub high_priority: bool,
    /// Whether an answer could make the protocol refer at once.
    pub may_be_at_once: bool,
    /// The smallest single change that would turn the answer (what would refer, for one that passes), in
    /// words; empty when there is none.
    pub would_change: String,
    /// The same for a chart, line by line; also for an answer that passes.
    pub chart_change: Option<ChartChange>,
}

impl Reason {
    /// Returns the id as a protocol writes it: `rule-set/criterion`.
    pub fn full_id(&self) -> String {
        format!("{}/{}", self.rule_set, self.criterion)
    }
}

code_list! {
    /// Which line of a protocol decided.
    DecidedBy {
        UrgentSign = "urgent_sign", "an emergency or prompt sign";
        Exempt = "exempt", "exempt and nothing tested";
        DirectReferral = "direct_referral", "a direct-referral group";
        ReferAtOnce = "refer_at_once", "a finding that never waits for a rescreen";
        GlassesNotWorn = "glasses_not_worn", "glasses owned and not worn";
        GlassesNeverAvailable = "glasses_never_available", "glasses never available";
        Criterion = "criterion", "a criterion";
        NotTestable = "not_testable", "not testable";
        Conflict = "conflict", "values that nobody has settled";
        Missing = "missing", "a required test is unknown";
        Nothing = "nothing", "nothing speaks against a pass";
    }
}

/// An outcome with its explanation.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Outcome {
    /// What it comes to.
    pub kind: OutcomeKind,
    /// Which line of the protocol (or of a bare rule set) decided.
    pub decided_by: DecidedBy,
    /// How soon; empty unless refer or rescreen, or unless values are not settled of which one refers.
    pub urgency: Option<Urgency>,
    /// Days to act within, where a source prints a number.
    pub act_within_days: Option<u32>,
    /// The date to act by, counted from the screening day.
    pub act_by: Option<NaiveDate>,
    /// The date of the rescreen, or of the return with glasses.
    pub due_on: Option<NaiveDate>,
    /// Amblyopia risk, by kind, in list order.
    pub risks: Vec<RiskKind>,
    /// Ids of the criteria that referred.
    pub criteria: Vec<String>,
    /// Ids of the criteria (and `age`, `grade`) that could not be answered.
    pub unknown: Vec<String>,
    /// Every criterion that was asked.
    pub reasons: Vec<Reason>,
    /// What the outcome says of itself: "critical line; difference between the eyes not tested".
    pub qualifiers: Vec<String>,
    /// Sentences of the protocol in the order they matter ("first fail is rescreened within 14 days").
    pub protocol_notes: Vec<String>,
    /// Id of the rule set or protocol that answered.
    pub rule_set: Arc<str>,
    /// Its edition.
    pub edition: Arc<str>,
    /// SHA-256 of the text of the rule set or protocol and of all rule sets it uses, in hex.
    pub content_hash: Arc<str>,
}

impl fmt::Display for Outcome {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.kind.title())?;
        if !self.qualifiers.is_empty() {
            write!(f, " ({})", self.qualifiers.join("; "))?;
        }
        Ok(())
    }
}
