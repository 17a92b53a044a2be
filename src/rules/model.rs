//! Rule sets and protocols as they are once their text is typed.

use std::fmt;
use std::sync::Arc;

use chrono::NaiveDate;

use crate::domain::acuity::{Line, LineCredit};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::{History, Reflex, SignKind, code_list};
use crate::domain::outcome::{RiskKind, Source, Then, Urgency};
use crate::domain::screening_test::ScreeningTest;

code_list! {
    /// What a rule set is about.
    Kind {
        Acuity = "acuity", "chart acuity";
        Refraction = "refraction", "refraction and alignment by instrument";
        Signs = "signs", "signs, history and other tests";
    }
}

code_list! {
    /// What a criterion looks at.
    Measure {
        DistanceEachEye = "distance acuity, each eye", "distance acuity, each eye";
        NearEachEye = "near acuity, each eye", "near acuity, each eye";
        DistanceBetweenEyes = "distance acuity, between the eyes", "distance acuity, between the eyes";
        Anisometropia = "anisometropia", "anisometropia";
        Hyperopia = "hyperopia", "hyperopia";
        Astigmatism = "astigmatism", "astigmatism";
        Myopia = "myopia", "myopia";
        Strabismus = "strabismus", "strabismus";
        MediaOpacity = "media opacity", "media opacity";
        Ptosis = "margin reflex distance", "margin reflex distance";
        Signs = "signs", "signs";
        History = "history", "history";
        RedReflex = "red reflex", "red reflex";
        PlusLens = "plus lens", "plus lens";
        Stereo = "stereo", "stereo";
        ColorPlates = "color plates", "color plates";
    }
}

impl Measure {
    /// Returns the test that it judges; nothing for what is seen or told.
    pub fn test(self) -> Option<ScreeningTest> {
        Some(match self {
            Measure::DistanceEachEye | Measure::DistanceBetweenEyes => ScreeningTest::Distance,
            Measure::NearEachEye => ScreeningTest::Near,
            Measure::Anisometropia
            | Measure::Hyperopia
            | Measure::Astigmatism
            | Measure::Myopia
            | Measure::MediaOpacity
            | Measure::Ptosis => ScreeningTest::Instrument,
            Measure::Strabismus => ScreeningTest::Cover,
            Measure::RedReflex => ScreeningTest::RedReflex,
            Measure::PlusLens => ScreeningTest::PlusLens,
            Measure::Stereo => ScreeningTest::Stereo,
            Measure::ColorPlates => ScreeningTest::ColorPlates,
            Measure::Signs | Measure::History => return None,
        })
    }
}

code_list! {
    /// How an acuity is compared with a threshold.
    Compare {
        Line = "line", "by line";
        Letter = "letter", "by letter";
    }
}

code_list! {
    /// Which quantity stands for a refractive finding.
    Metric {
        MostPlusMeridian = "most-plus meridian", "most-plus meridian";
        MostMinusMeridian = "most-minus meridian", "most-minus meridian";
        Cylinder = "cylinder magnitude", "size of the cylinder";
        SphericalEquivalent = "spherical equivalent", "difference of spherical equivalents";
        EquivalentOrCylinder = "spherical equivalent or cylinder", "difference of spherical equivalents or of cylinders";
        Meridional = "meridional", "largest difference along any meridian";
    }
}

/// Whom a criterion is for.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Applies {
    /// Every age and grade the rule set speaks of.
    Everyone,
    /// Completed months, from and up to but not including.
    Ages {
        /// The first month that belongs to it.
        from: u32,
        /// The first month that no longer does; open when none.
        to: Option<u32>,
    },
    /// Grades by name.
    Grades(Vec<Grade>),
}

impl Applies {
    /// Says whether an age in completed months lies in the band.
    pub fn holds_age(&self, age: AgeMonths) -> bool {
        match self {
            Applies::Ages { from, to } => *from <= age.0 && to.is_none_or(|to| age.0 < to),
            _ => true,
        }
    }
}

impl fmt::Display for Applies {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Applies::Everyone => f.write_str("all ages"),
            Applies::Ages { from, to: None } => write!(f, "{from} months and over"),
            Applies::Ages {
                from: 0,
                to: Some(to),
            } => write!(f, "under {to} months"),
            Applies::Ages { from, to: Some(to) } => write!(f, "{from}–{} months", to - 1),
            Applies::Grades(list) => match list.as_slice() {
                [one] => write!(f, "grade {one}"),
                [low, .., high] => write!(f, "grades {low}–{high}"),
                [] => f.write_str("no grade"),
            },
        }
    }
}

/// When a criterion refers, typed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Test {
    /// `worse than 20/50`: the line itself passes.
    WorseThanLine(Line),
    /// `20/50 or worse`: the line itself refers.
    LineOrWorse(Line),
    /// `6/9-2 or worse`: so many letters missed of the line, by letter score.
    LettersOrWorse {
        /// The line.
        line: Line,
        /// Letters missed of it.
        missed: u8,
    },
    /// `2 lines or more`: that many steps of 0.1 logMAR.
    LinesOrMore(i32),
    /// `more than 4.00 D`, in thousandths of a dioptre.
    MoreThanDiopters(i32),
    /// `4.00 D or more`, in thousandths of a dioptre.
    DioptersOrMore(i32),
    /// `more than 8 prism dioptres`, in hundredths.
    MoreThanPrism(i32),
    /// `any manifest`.
    AnyManifest,
    /// `constant`.
    Constant,
    /// `more than 1 mm`, in hundredths.
    MoreThanMillimetres(i32),
    /// `1 mm or less`, in hundredths.
    MillimetresOrLess(i32),
    /// `present`.
    Present,
    /// `read`: the line is still read through the plus lens.
    ReadThroughLens,
    /// `fewer than 4 of 6`.
    FewerThan {
        /// Answers needed to pass.
        need: u8,
        /// Presentations.
        of: u8,
    },
    /// `any missed`.
    AnyMissed,
}

/// Something that is seen or told, named in `seen`, `with` and `without` lists.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Finding {
    /// A sign of the signs list.
    Sign(SignKind),
    /// A red reflex of either eye.
    Reflex(Reflex),
    /// An entry of the history list.
    History(History),
    /// Under care, from roster, status or history.
    UnderCare,
}

/// Which amblyopia risk a criterion stands for when it refers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RiskRule {
    /// None.
    None,
    /// This kind.
    Kind(RiskKind),
    /// Isoametropic when both eyes are past the limit, anisometropic when one alone is.
    ByEyes,
    /// Anisometropic when one eye alone is past the limit.
    OneEyeAlone,
}

/// One threshold of a rule set.
#[derive(Debug, Clone, PartialEq)]
pub struct Criterion {
    /// Its id inside the rule set.
    pub id: Arc<str>,
    /// Whom it is for.
    pub applies: Applies,
    /// What it looks at.
    pub measure: Measure,
    /// When it refers.
    pub test: Test,
    /// The threshold as the file prints it.
    pub threshold: Arc<str>,
    /// By line or by letter.
    pub compare: Compare,
    /// The quantity compared, for refraction.
    pub metric: Option<Metric>,
    /// Only cylinders whose axis is more than this many degrees from 90 and 180.
    pub axis_beyond: Option<u8>,
    /// Findings of which one must be present (signs, history, red reflex).
    pub seen: Vec<Finding>,
    /// Findings of which one must be present as well.
    pub with: Vec<Finding>,
    /// Findings that set it aside.
    pub without: Vec<Finding>,
    /// Where the number comes from.
    pub source: Arc<Source>,
    /// What should be known about it.
    pub note: Arc<str>,
    /// Amblyopia risk.
    pub risk: RiskRule,
    /// How soon.
    pub urgency: Urgency,
    /// Days, where a source prints a number.
    pub act_within_days: Option<u32>,
    /// Whether an unknown answer makes the set incomplete.
    pub required: bool,
    /// Whether it informs family and school instead of referring.
    pub informs: bool,
    /// What it asks for when it speaks.
    pub then: Then,
    /// Whether it makes a referral one of high priority.
    pub high_priority: bool,
}

/// Who approved a local file, and when.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Approval {
    /// Name or office.
    pub by: String,
    /// Date.
    pub on: NaiveDate,
}

/// Published guidance as data.
#[derive(Debug, Clone, PartialEq)]
pub struct RuleSet {
    /// Its id, which appears in files.
    pub id: Arc<str>,
    /// What it is, for people.
    pub title: String,
    /// Its name in one sentence at the foot of a screen.
    pub short_title: Arc<str>,
    /// Edition.
    pub edition: Arc<str>,
    /// What it is about.
    pub kind: Kind,
    /// Country or state.
    pub region: String,
    /// `current`, or what came after it.
    pub status: String,
    /// What should be known about it.
    pub note: String,
    /// When a line counts as read, and where that comes from.
    pub credit: LineCredit,
    /// The line credit as printed.
    pub credit_text: Arc<str>,
    /// Source of the line credit.
    pub credit_source: Arc<Source>,
    /// Every source it names.
    pub sources: Vec<Arc<Source>>,
    /// Its criteria in the order of the file.
    pub criteria: Vec<Criterion>,
    /// Who approved it, for a local set.
    pub local: Option<Approval>,
    /// The file's text.
    pub text: Arc<str>,
    /// SHA-256 of the text, in hex.
    pub content_hash: Arc<str>,
    /// The ages it speaks of, in completed months, when it has age bands.
    pub span: Option<(u32, Option<u32>)>,
    /// Whether it goes by grade.
    pub by_grade: bool,
    /// The rule set whose criteria it takes over, for a local set that overrides single ones.
    pub based_on: Option<Arc<str>>,
}

impl RuleSet {
    /// Returns "local, approved by … on …" for a local set, with what it is based on.
    pub fn approval_words(&self) -> Option<String> {
        let approval = self.local.as_ref()?;
        let mut words = format!("local, approved by {} on {}", approval.by, approval.on);
        if let Some(base) = &self.based_on {
            words.push_str(", based on ");
            words.push_str(base);
        }
        Some(words)
    }
}

/// When a child who could not be tested comes back.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NotTestablePolicy {
    /// Whom it is for.
    pub applies: Applies,
    /// Calendar months to the next try; none where the service says when.
    pub rescreen_months: Option<u32>,
    /// Where it comes from.
    pub source: Arc<Source>,
}

code_list! {
    /// Why a child of whom nothing was tested is exempt.
    Exemption {
        OptedOut = "opted_out", "opted out";
        NoConsent = "no_consent", "no consent";
        UnderCare = "under_care", "under care";
        ExaminedRecently = "examined_12_months", "examined in the last 12 months";
    }
}

/// What a first fail means.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum FirstFail {
    /// Refer at once.
    Refer,
    /// Rescreen within so many calendar days, then refer.
    WithinDays(u32),
    /// Rescreen within so many days on which school is held, then refer.
    WithinSchoolDays(u32),
}

impl fmt::Display for FirstFail {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            FirstFail::Refer => f.write_str("refer at once"),
            FirstFail::WithinDays(days) => write!(f, "rescreen within {days} calendar days"),
            FirstFail::WithinSchoolDays(days) => write!(f, "rescreen within {days} working days"),
        }
    }
}

/// Measures that must be answered at some ages.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RequiredTests {
    /// Whom it is for.
    pub applies: Applies,
    /// The measures.
    pub measures: Vec<Measure>,
}

/// What a programme does with the answers.
#[derive(Debug, Clone, PartialEq)]
#[allow(clippy::struct_excessive_bools)] // each is one key of the file
pub struct Protocol {
    /// Its id, which appears in files.
    pub id: Arc<str>,
    /// What it is, for people.
    pub title: String,
    /// Edition.
    pub edition: Arc<str>,
    /// What should be known about it.
    pub note: String,
    /// Rule sets that always speak.
    pub rule_sets: Vec<Arc<str>>,
    /// Rule sets that speak when their test was done.
    pub when_done: Vec<Arc<str>>,
    /// The rule set for instruments, where one may stand in for the chart.
    pub instrument: Option<Arc<str>>,
    /// Below this age in months the instrument is the required test.
    pub instrument_below_months: Option<u32>,
    /// Whether the instrument may stand in for a chart that is not testable.
    pub instrument_stands_in: bool,
    /// Measures that must be answered.
    pub required: Vec<RequiredTests>,
    /// What a first fail means.
    pub first_fail: FirstFail,
    /// Where the settings of the protocol come from that name no source of their own.
    pub settings_source: Arc<Source>,
    /// Where the first-fail policy comes from.
    pub first_fail_source: Arc<Source>,
    /// Why a child of whom nothing was tested is exempt, in the order asked.
    pub exempt: Vec<Exemption>,
    /// Whether glasses that are broken or lost refer (else they count as not worn).
    pub broken_glasses_refer: bool,
    /// Criteria of its rule sets that are shown and not acted on, as `rule-set/criterion`.
    pub leave_out: Vec<String>,
    /// Days until a child comes back with glasses.
    pub glasses_return_days: u32,
    /// After this many visits without the glasses the child is referred.
    pub glasses_visits: u32,
    /// Whether consent must be given (else it must be refused to count).
    pub consent_opt_in: bool,
    /// Whether the day must be read to threshold or on the critical line.
    pub acuity_method: Option<crate::domain::codes::AcuityMethod>,
    /// Criteria of its rule sets that never wait, as `rule-set/criterion`.
    pub refer_at_once: Vec<String>,
    /// Thresholds of its own that never wait.
    pub at_once: RuleSet,
    /// What happens with a child who could not be tested.
    pub not_testable: Vec<NotTestablePolicy>,
    /// Every source it names.
    pub sources: Vec<Arc<Source>>,
    /// Who approved it, for a local protocol.
    pub local: Option<Approval>,
    /// The file's text.
    pub text: Arc<str>,
    /// SHA-256 of its text and of the texts of its rule sets, in hex.
    pub content_hash: Arc<str>,
}

impl Protocol {
    /// Says whether a measure must be answered at this age; an unknown age may be any.
    pub fn requires(&self, measure: Measure, age: Option<AgeMonths>) -> bool {
        self.required.iter().any(|r| {
            r.measures.contains(&measure) && age.is_none_or(|age| r.applies.holds_age(age))
        })
    }
}
