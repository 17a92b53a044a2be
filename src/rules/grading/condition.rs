//! Conditions of a table as guidance prints them, typed and asked.

use std::sync::Arc;

use crate::domain::acuity::{Acuity, AcuityContext, Line, parse_acuity};
use crate::domain::codes::{Cover, SignKind};
use crate::domain::number;
use crate::domain::readings::{AcuityResult, Eye};
use crate::domain::refraction::Range;
use crate::rules::evaluate::in_dioptres;

use super::facts::Powers;
use super::{Clinical, Taken, Truth};

/// What is taken when a text is none of the conditions.
pub(in crate::rules) const EXPECTED: &str = "a condition such as \"worse eye 6/36 or worse\", \"3 lines or more between the eyes\", \
\"risk factor in the worse eye\", \"constant strabismus\", \"hyperopia 5.00 D or more\", \"myopic difference more than 6.00 D\", \
\"onset 3 months or less\", \"seen: sudden_vision_loss\"";

/// One condition of an entry.
#[derive(Debug, Clone, PartialEq)]
pub(in crate::rules) struct Condition {
    what: What,
    /// As printed.
    pub text: Arc<str>,
    corrected: bool,
    /// What a word of it is taken as.
    taken: Option<Taken>,
}

/// What a file says once for all its entries.
#[derive(Debug, Clone, Default)]
pub(in crate::rules) struct Terms {
    /// Its risk factors.
    pub factors: Vec<Condition>,
    /// Words that the source prints without a number.
    pub taken: Vec<Taken>,
}

impl Terms {
    /// Returns what a word is taken as, with its condition.
    fn of(&self, word: &str) -> Option<(What, Taken)> {
        let taken = self.taken.iter().find(|t| *t.word == *word)?;
        // One word is not explained by another.
        Some((what(&taken.stands_for, &Terms::default())?, taken.clone()))
    }
}

/// A limit on a whole number.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Bound {
    Above(i32),
    AtLeast(i32),
    Below(i32),
    AtMost(i32),
    Exactly(i32),
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Power {
    Hyperopia,
    Myopia,
    Astigmatism,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Whose {
    WorseEye,
    BothEyes,
    Nobody,
}

#[derive(Debug, Clone, PartialEq)]
enum What {
    Between(Bound),
    WorseEye(Bound),
    BetterEye(Bound),
    RiskFactor(Whose, Arc<[What]>),
    Squint,
    Constant,
    Intermittent,
    OfPower(Power, Bound),
    DifferenceOf(Power, Bound),
    Equivalents(Bound),
    /// So many months or less, and within how many a new squint was noticed, where that is said.
    Onset(u32, Option<u32>),
    Seen(SignKind),
    NoFixation,
    SuspectedPoor,
    UnequalOrLost(Bound),
    Pair(i32, i32),
}

impl Condition {
    /// Reads a condition in the terms of its file.
    pub fn parse(text: &str, terms: &Terms) -> Option<Condition> {
        let (bare, corrected) = match text.strip_prefix("best-corrected, ") {
            Some(rest) => (rest, true),
            None => (text, false),
        };
        let what = what(bare.trim(), terms)?;
        let taken = match what {
            What::UnequalOrLost(_) => terms.of(UNEQUAL),
            What::Onset(..) => terms.of(NEW_SQUINT),
            _ => None,
        };
        Some(Condition {
            what,
            text: text.into(),
            corrected,
            taken: taken.map(|(_, taken)| taken),
        })
    }

    /// Says whether the band means acuity with the best correction.
    pub fn means_corrected(&self) -> bool {
        self.corrected
    }

    /// Says whether it asks since when.
    pub fn is_onset(&self) -> bool {
        matches!(self.what, What::Onset(..))
    }

    /// Asks it of a child.
    pub fn ask(&self, facts: &Clinical<'_>) -> Truth {
        self.what.ask(facts)
    }

    /// Says what a word was taken as, where the answer hangs on it.
    pub fn remark(&self, facts: &Clinical<'_>) -> Option<String> {
        let hangs = match self.what {
            What::UnequalOrLost(_) => facts.binocularity_lost != Some(true),
            What::Onset(..) => {
                facts.onset_months.is_none() && facts.readings.has_sign(SignKind::NewSquint)
            }
            _ => false,
        };
        self.taken.as_ref().filter(|_| hangs).map(Taken::in_words)
    }

    /// Returns what was found, in words; empty where nothing was.
    pub fn reading(&self, facts: &Clinical<'_>) -> String {
        match &self.what {
            What::Between(_) | What::WorseEye(_) | What::BetterEye(_) | What::Pair(..) => {
                facts.acuity_words()
            }
            What::RiskFactor(..) => String::new(),
            What::Squint | What::Constant | What::Intermittent => {
                let cover = facts.readings.cover.map_or("", Cover::title);
                match facts.readings.deviation_pd {
                    Some(size) => format!("{cover} {size} prism dioptres").trim().to_owned(),
                    None if cover.is_empty() && facts.squint() == Truth::Yes => "squint".to_owned(),
                    None => cover.to_owned(),
                }
            }
            What::OfPower(power, _) => {
                let [right, left] = facts.eyes().map(|eye| in_dioptres(power.of(&eye), false));
                format!("{}: right eye {right}, left eye {left}", power.name())
            }
            What::DifferenceOf(power, _) => {
                format!("difference {}", in_dioptres(power.difference(facts), false))
            }
            What::Equivalents(_) => {
                let twice = equivalents(facts);
                let half = Range {
                    low: twice.low.map(|v| v / 2),
                    high: twice.high.map(|v| v / 2),
                };
                format!(
                    "difference of spherical equivalents {}",
                    in_dioptres(half, true)
                )
            }
            What::Onset(_, new_squint) => match facts.onset(*new_squint) {
                Some((low, high)) if low == high => format!("onset {low} months ago"),
                Some((_, high)) => format!("onset within {high} months"),
                None => "onset unknown".to_owned(),
            },
            What::Seen(kind) => kind.title().to_owned(),
            What::NoFixation => "does not fix and follow".to_owned(),
            What::SuspectedPoor => "suspected of poor vision".to_owned(),
            What::UnequalOrLost(_) if facts.binocularity_lost == Some(true) => {
                "binocularity lost".to_owned()
            }
            What::UnequalOrLost(_) => facts.acuity_words(),
        }
    }
}

/// Words that a file says what they are taken as.
const UNEQUAL: &str = "unequal acuity";
const NEW_SQUINT: &str = "new squint";

fn what(text: &str, terms: &Terms) -> Option<What> {
    let factor = |whose| {
        let list: Arc<[What]> = terms.factors.iter().map(|f| f.what.clone()).collect();
        (!list.is_empty()).then_some(What::RiskFactor(whose, list))
    };
    match text {
        "risk factor in the worse eye" => return factor(Whose::WorseEye),
        "risk factor in both eyes" => return factor(Whose::BothEyes),
        "no risk factor" => return factor(Whose::Nobody),
        "strabismus" => return Some(What::Squint),
        "constant strabismus" => return Some(What::Constant),
        "intermittent strabismus" => return Some(What::Intermittent),
        "does not fix and follow" => return Some(What::NoFixation),
        "suspected of poor vision" => return Some(What::SuspectedPoor),
        "unequal acuity or loss of binocularity" => {
            return match terms.of(UNEQUAL)?.0 {
                What::Between(bound) => Some(What::UnequalOrLost(bound)),
                _ => None,
            };
        }
        _ => {}
    }
    if let Some(rest) = text.strip_suffix(" between the eyes") {
        let (number, at_least) = match rest.strip_suffix(" lines or more") {
            Some(number) => (number, true),
            None => (rest.strip_suffix(" lines")?, false),
        };
        let n = i32::try_from(number::fixed(number, 0)?).ok()?;
        return Some(What::Between(if at_least {
            Bound::AtLeast(n)
        } else {
            Bound::Exactly(n)
        }));
    }
    if let Some(rest) = text.strip_prefix("worse eye ") {
        return acuity_bound(rest).map(What::WorseEye);
    }
    if let Some(rest) = text.strip_prefix("better eye ") {
        return acuity_bound(rest).map(What::BetterEye);
    }
    if let Some(rest) = text.strip_prefix("eyes read ") {
        let (a, b) = rest.split_once(" and ")?;
        return Some(What::Pair(step(a)?, step(b)?));
    }
    if let Some(rest) = text.strip_prefix("onset ") {
        let months = number::fixed(rest.strip_suffix(" months or less")?, 0)?;
        let new_squint = match terms.of(NEW_SQUINT) {
            Some((What::Onset(months, _), _)) => Some(months),
            _ => None,
        };
        let months = u32::try_from(months).ok()?;
        return Some(What::Onset(months, new_squint));
    }
    if let Some(word) = text.strip_prefix("seen: ") {
        return SignKind::from_word(word).map(What::Seen);
    }
    if let Some(rest) = text.strip_prefix("difference of spherical equivalents ") {
        return power_bound(rest, 2).map(What::Equivalents);
    }
    for (name, power) in [
        ("hyperopic difference ", Power::Hyperopia),
        ("myopic difference ", Power::Myopia),
        ("astigmatic difference ", Power::Astigmatism),
    ] {
        if let Some(rest) = text.strip_prefix(name) {
            return power_bound(rest, 1).map(|b| What::DifferenceOf(power, b));
        }
    }
    for power in [Power::Hyperopia, Power::Myopia, Power::Astigmatism] {
        if let Some(rest) = text.strip_prefix(power.name()) {
            return power_bound(rest.trim_start(), 1).map(|b| What::OfPower(power, b));
        }
    }
    None
}

fn line(text: &str) -> Option<Line> {
    match parse_acuity(text, &AcuityContext::default()).ok()?.value {
        AcuityResult::Read(Acuity::Read { line, letters: 0 }) => Some(line),
        _ => None,
    }
}

fn step(text: &str) -> Option<i32> {
    line(text.trim()).map(|l| l.step().0)
}

fn acuity_bound(text: &str) -> Option<Bound> {
    if let Some(rest) = text.strip_prefix("worse than ") {
        step(rest).map(Bound::Above)
    } else if let Some(rest) = text.strip_prefix("better than ") {
        step(rest).map(Bound::Below)
    } else if let Some(rest) = text.strip_suffix(" or worse") {
        step(rest).map(Bound::AtLeast)
    } else {
        step(text.strip_suffix(" or better")?).map(Bound::AtMost)
    }
}

fn power_bound(text: &str, scale: i32) -> Option<Bound> {
    let value = |t: &str| {
        number::fixed(t.strip_suffix('D')?.trim(), 3)
            .and_then(|v| i32::try_from(v).ok())
            .and_then(|v| v.checked_mul(scale))
    };
    if let Some(rest) = text.strip_prefix("more than ") {
        value(rest).map(Bound::Above)
    } else if let Some(rest) = text.strip_prefix("less than ") {
        value(rest).map(Bound::Below)
    } else {
        value(text.strip_suffix(" or more")?).map(Bound::AtLeast)
    }
}

impl Bound {
    fn ask(self, range: Range) -> Truth {
        let (low, high) = (range.low, range.high);
        let (yes, no) = match self {
            Bound::Above(x) => (low.is_some_and(|v| v > x), high.is_some_and(|v| v <= x)),
            Bound::AtLeast(x) => (low.is_some_and(|v| v >= x), high.is_some_and(|v| v < x)),
            Bound::Below(x) => (high.is_some_and(|v| v < x), low.is_some_and(|v| v >= x)),
            Bound::AtMost(x) => (high.is_some_and(|v| v <= x), low.is_some_and(|v| v > x)),
            Bound::Exactly(x) => (
                low == Some(x) && high == Some(x),
                low.is_some_and(|v| v > x) || high.is_some_and(|v| v < x),
            ),
        };
        match (yes, no) {
            (true, _) => Truth::Yes,
            (_, true) => Truth::No,
            _ => Truth::Unknown,
        }
    }
}

impl Power {
    fn name(self) -> &'static str {
        match self {
            Power::Hyperopia => "hyperopia",
            Power::Myopia => "myopia",
            Power::Astigmatism => "astigmatism",
        }
    }

    /// Returns the quantity of one eye.
    fn of(self, eye: &crate::domain::readings::InstrumentEye) -> Range {
        let powers = Powers::of(eye);
        match self {
            Power::Hyperopia => powers.hyperopia,
            Power::Myopia => powers.myopia,
            Power::Astigmatism => powers.astigmatism,
        }
    }

    /// Returns the difference between the eyes; an eye without the error counts as none of it.
    fn difference(self, facts: &Clinical<'_>) -> Range {
        let [right, left] = facts
            .eyes()
            .map(|eye| self.of(&eye).larger(Range::exactly(0)));
        right.plus(left.negated()).magnitude()
    }
}

fn equivalents(facts: &Clinical<'_>) -> Range {
    let [right, left] = facts.eyes().map(|eye| Powers::of(&eye).twice_equivalent);
    right.plus(left.negated()).magnitude()
}

/// Returns the steps of the worse eye and of the better one.
fn worse_and_better(facts: &Clinical<'_>) -> [Range; 2] {
    let [right, left] = facts.steps().map(|range| {
        range.map_or(Range::UNKNOWN, |r| Range {
            low: r.best,
            high: r.worst,
        })
    });
    [
        right.larger(left),
        right.negated().larger(left.negated()).negated(),
    ]
}

fn between(facts: &Clinical<'_>) -> Range {
    let [Some(right), Some(left)] = facts.steps() else {
        return Range::UNKNOWN;
    };
    let (least, most) = right.difference(left);
    Range {
        low: Some(least),
        high: most,
    }
}

fn any(list: impl IntoIterator<Item = Truth>) -> Truth {
    let mut out = Truth::No;
    for truth in list {
        match truth {
            Truth::Yes => return Truth::Yes,
            Truth::Unknown => out = Truth::Unknown,
            Truth::No => {}
        }
    }
    out
}

fn not(truth: Truth) -> Truth {
    match truth {
        Truth::Yes => Truth::No,
        Truth::No => Truth::Yes,
        Truth::Unknown => Truth::Unknown,
    }
}

fn all(list: [Truth; 2]) -> Truth {
    not(any(list.map(not)))
}

impl What {
    /// Says whether this factor is there in one eye; what is between the eyes counts for either.
    fn in_eye(&self, eye: Eye, facts: &Clinical<'_>) -> Truth {
        match self {
            What::OfPower(power, bound) => {
                let [right, left] = facts.eyes();
                bound.ask(power.of(if eye == Eye::Right { &right } else { &left }))
            }
            What::Squint => facts.turns(eye),
            other => other.ask(facts),
        }
    }

    fn ask(&self, facts: &Clinical<'_>) -> Truth {
        let readings = facts.readings;
        let [worse, better] = worse_and_better(facts);
        match self {
            What::Between(bound) => bound.ask(between(facts)),
            What::WorseEye(bound) => bound.ask(worse),
            What::BetterEye(bound) => bound.ask(better),
            What::RiskFactor(whose, factors) => {
                let [right, left] =
                    Eye::BOTH.map(|eye| any(factors.iter().map(|f| f.in_eye(eye, facts))));
                match (whose, facts.worse_eye()) {
                    (Whose::Nobody, _) => not(any([right, left])),
                    (Whose::BothEyes, _) => all([right, left]),
                    (Whose::WorseEye, Some(Eye::Right)) => right,
                    (Whose::WorseEye, Some(Eye::Left)) => left,
                    (Whose::WorseEye, None) if right == left => right,
                    (Whose::WorseEye, None) => Truth::Unknown,
                }
            }
            What::Squint => facts.squint(),
            What::Constant => match readings.cover {
                Some(cover) => (cover == Cover::Constant).into(),
                None if facts.squint() == Truth::No => Truth::No,
                None => Truth::Unknown,
            },
            What::Intermittent => match readings.cover {
                Some(cover) => (cover == Cover::Intermittent).into(),
                None => Truth::Unknown,
            },
            What::OfPower(power, bound) => {
                let [right, left] = facts.eyes().map(|eye| power.of(&eye));
                bound.ask(right.larger(left))
            }
            What::DifferenceOf(power, bound) => bound.ask(power.difference(facts)),
            What::Equivalents(bound) => bound.ask(equivalents(facts)),
            What::Onset(limit, new_squint) => match facts.onset(*new_squint) {
                Some((_, most)) if most <= *limit => Truth::Yes,
                Some((least, _)) if least > *limit => Truth::No,
                _ => Truth::Unknown,
            },
            What::Seen(kind) => match &readings.signs {
                Some(signs) => signs.iter().any(|s| s.kind == *kind).into(),
                None => Truth::Unknown,
            },
            What::NoFixation => facts
                .fixes_and_follows
                .map_or(Truth::Unknown, |f| (!f).into()),
            What::SuspectedPoor => facts
                .suspected_poor_vision
                .map_or(Truth::Unknown, Truth::from),
            What::UnequalOrLost(unequal) => any([
                unequal.ask(between(facts)),
                facts.binocularity_lost.map_or(Truth::Unknown, Truth::from),
            ]),
            What::Pair(a, b) => all([
                Bound::Exactly(*a.max(b)).ask(worse),
                Bound::Exactly(*a.min(b)).ask(better),
            ]),
        }
    }
}
