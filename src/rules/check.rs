//! Everything wrong with a local rule file at once: what the loader refuses, and thresholds that
//! can never speak.

mod start;

use std::ops::Range;

use toml::de::DeTable;

use crate::domain::acuity::Step;
use crate::domain::age::Grade;
use crate::domain::outcome::{Then, Urgency};
use crate::rules::error::{RuleError, RuleErrors};
use crate::rules::load::{Loaded, load};
use crate::rules::{Applies, Compare, Criterion, Library, Measure, RuleSet, Test, threshold};

pub use start::start;

/// What sound files hold.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Checked {
    /// One line for each file: what it is.
    pub lines: Vec<String>,
}

/// Checks local files (name and text of each), in the order given.
///
/// # Errors
/// Everything that is wrong, file by file, each in the order of its lines.
pub fn check(library: &Library, files: &[(String, String)]) -> Result<Checked, RuleErrors> {
    let mut errors = Vec::new();
    let mut checked = Checked::default();
    let sound = together(library, files, &mut errors);
    for (file, text) in files {
        let mut found: Vec<RuleError> = errors
            .iter()
            .filter(|e| e.file == crate::domain::text::shown(file, 200))
            .cloned()
            .collect();
        found.extend(never_speaking(library, file, text));
        found.sort_by_key(|e| (e.line, e.column));
        found.dedup();
        if found.is_empty() {
            checked.lines.extend(described(&sound, file, text));
        }
        errors.retain(|e| e.file != crate::domain::text::shown(file, 200));
        errors.extend(found);
    }
    if errors.is_empty() {
        Ok(checked)
    } else {
        Err(RuleErrors(errors))
    }
}

/// Loads all files beside each other, and says what is wrong with any of them.
fn together(library: &Library, files: &[(String, String)], errors: &mut Vec<RuleError>) -> Library {
    match library.with_local(files.to_vec()) {
        Ok(with) => with,
        Err(RuleErrors(found)) => {
            errors.extend(found);
            library.clone()
        }
    }
}

fn described(library: &Library, file: &str, text: &str) -> Option<String> {
    match load(file, text, true, library).ok()? {
        Loaded::Set(set) => Some(format!(
            "{file}: rule set {}, {} criteria; {}",
            set.id,
            set.criteria.len(),
            set.approval_words().unwrap_or_default()
        )),
        Loaded::Grading(grading) => Some(format!(
            "{file}: table {}, {} entries{}",
            grading.id,
            grading.entries.len(),
            grading.local.as_ref().map_or_else(String::new, |a| format!(
                "; local, approved by {} on {}",
                a.by, a.on
            ))
        )),
        Loaded::Protocol(protocol) => Some(format!(
            "{file}: protocol {}, rule sets {}",
            protocol.id,
            protocol
                .rule_sets
                .iter()
                .map(|s| &**s)
                .collect::<Vec<_>>()
                .join(", ")
        )),
    }
}

/// A threshold of a file with its places, typed as far as it can be.
struct Placed {
    criterion: Loose,
    refer: Range<usize>,
    band: Range<usize>,
}

/// What decides whether a threshold can speak, without source and words.
#[derive(Clone)]
struct Loose {
    id: String,
    applies: Applies,
    measure: Measure,
    test: Test,
    compare: Compare,
    metric: Option<String>,
    axis_beyond: Option<i64>,
    seen: Vec<String>,
    with: Vec<String>,
    without: Vec<String>,
    urgency: Urgency,
    act_within_days: Option<i64>,
    then: Then,
    high_priority: bool,
}

/// Returns the thresholds of a file that no child can ever be referred by.
fn never_speaking(library: &Library, file: &str, text: &str) -> Vec<RuleError> {
    let (table, faults) = DeTable::parse_recoverable(text);
    if !faults.is_empty() {
        return Vec::new();
    }
    let table = table.get_ref();
    let own: Vec<Placed> = sections(table).filter_map(placed).collect();
    let word = |key: &str| table.get(key).and_then(|v| v.get_ref().as_str());
    let base = word("based_on").and_then(|id| library.rule_set(id));
    let inherited = inherited(base, table, &own);
    let ages = word("ages").and_then(threshold::ages);
    let mut errors = Vec::new();
    for (at, placed) in own.iter().enumerate() {
        let mut fault = |span: &Range<usize>, what: String, expected: &str, cure: &str| {
            errors.push(RuleError::at(
                file,
                text,
                span.clone(),
                crate::domain::text::shown(&what, 200),
                expected,
                cure,
            ));
        };
        let me = &placed.criterion;
        if let Some(why) = nobody(&me.applies, ages) {
            let what = format!("`{}` can never speak: {why}", me.id);
            fault(
                &placed.band,
                what,
                "a band that children are in",
                "mend the band, or take the criterion out",
            );
            continue;
        }
        if let Some(why) = impossible(me) {
            let what = format!("`{}` can never speak: {why}", me.id);
            fault(
                &placed.refer,
                what,
                "a threshold that a reading can cross",
                "mend the threshold, or take the criterion out",
            );
            continue;
        }
        let others = own
            .iter()
            .enumerate()
            .filter(|(i, _)| *i != at)
            .map(|(i, p)| (i < at, &p.criterion))
            .chain(inherited.iter().map(|l| (true, l)));
        let shadow = others
            .filter(|(before, other)| shadows(other, me) && (*before || !shadows(me, other)))
            .map(|(_, other)| other)
            .next();
        if let Some(other) = shadow {
            let what = format!(
                "`{}` can never speak: `{}` refers every child it would",
                me.id, other.id
            );
            fault(
                &placed.refer,
                what,
                "a threshold stricter than that one, or another band",
                "take one of the two out",
            );
            continue;
        }
        if let Some((other, most)) =
            between_within(me, own.iter().map(|p| &p.criterion), &inherited)
        {
            let what = format!(
                "`{}` can never speak: two eyes that pass `{other}` differ by {most} lines at most",
                me.id
            );
            fault(
                &placed.refer,
                what,
                "a difference that two passing eyes can have",
                "fewer lines, or take the criterion out",
            );
        }
    }
    errors
}

fn sections<'a>(table: &'a DeTable<'a>) -> impl Iterator<Item = (&'a DeTable<'a>, Range<usize>)> {
    table
        .get("criterion")
        .and_then(|v| v.get_ref().as_array())
        .into_iter()
        .flatten()
        .filter_map(|item| Some((item.get_ref().as_table()?, item.span())))
}

fn placed((table, span): (&DeTable<'_>, Range<usize>)) -> Option<Placed> {
    let text = |key: &str| table.get(key).and_then(|v| v.get_ref().as_str());
    let place = |key: &str| table.get(key).map_or(span.clone(), toml::Spanned::span);
    let number = |key: &str| {
        table
            .get(key)
            .and_then(|v| v.get_ref().as_integer())
            .and_then(|i| i.as_str().parse().ok())
    };
    let list = |key: &str| -> Vec<String> {
        table
            .get(key)
            .and_then(|v| v.get_ref().as_array())
            .into_iter()
            .flatten()
            .filter_map(|v| v.get_ref().as_str().map(str::to_owned))
            .collect()
    };
    let measure = Measure::from_word(text("measure")?)?;
    let (applies, band) = if let Some(ages) = text("ages") {
        let (from, to) = threshold::ages(ages)?;
        (Applies::Ages { from, to }, place("ages"))
    } else if table.contains_key("grades") {
        let grades = list("grades")
            .iter()
            .filter_map(|g| Grade::parse(g))
            .collect();
        (Applies::Grades(grades), place("grades"))
    } else {
        (Applies::Everyone, span.clone())
    };
    let informs = table
        .get("informs")
        .and_then(|v| v.get_ref().as_bool())
        .unwrap_or(false);
    Some(Placed {
        criterion: Loose {
            id: text("id").unwrap_or_default().to_owned(),
            applies,
            measure,
            test: threshold::parse(measure, text("refer")?).ok()?,
            compare: text("compare")
                .and_then(Compare::from_word)
                .unwrap_or(Compare::Line),
            metric: text("metric").map(str::to_owned),
            axis_beyond: number("axis_beyond"),
            seen: list("seen"),
            with: list("with"),
            without: list("without"),
            urgency: text("urgency")
                .and_then(Urgency::from_word)
                .unwrap_or(Urgency::Routine),
            act_within_days: number("act_within_days"),
            then: match (text("then"), number("after_months"), informs) {
                (Some("rescreen"), ..) => Then::Rescreen,
                (Some("recheck"), Some(months), _) => Then::Recheck(u32::try_from(months).ok()?),
                (None, _, true) => Then::Inform,
                _ => Then::Refer,
            },
            high_priority: text("priority") == Some("high"),
        },
        refer: place("refer"),
        band,
    })
}

/// Returns what a file takes over from the set it is based on.
fn inherited(base: Option<&RuleSet>, table: &DeTable<'_>, own: &[Placed]) -> Vec<Loose> {
    let removed: Vec<&str> = table
        .get("remove")
        .and_then(|v| v.get_ref().as_array())
        .into_iter()
        .flatten()
        .filter_map(|v| v.get_ref().as_str())
        .collect();
    base.iter()
        .flat_map(|set| &set.criteria)
        .filter(|c| !removed.contains(&&*c.id))
        .filter(|c| own.iter().all(|o| o.criterion.id != *c.id))
        // What is seen beside what is not compared here: only quantities are taken over.
        .filter(|c| c.seen.is_empty())
        .map(loose)
        .collect()
}

fn loose(criterion: &Criterion) -> Loose {
    Loose {
        id: criterion.id.to_string(),
        applies: criterion.applies.clone(),
        measure: criterion.measure,
        test: criterion.test.clone(),
        compare: criterion.compare,
        metric: criterion.metric.map(|m| m.word().to_owned()),
        axis_beyond: criterion.axis_beyond.map(i64::from),
        seen: Vec::new(),
        with: Vec::new(),
        without: Vec::new(),
        urgency: criterion.urgency,
        act_within_days: criterion.act_within_days.map(i64::from),
        then: criterion.then,
        high_priority: criterion.high_priority,
    }
}

/// From this age on nobody is in school: 22 years.
const LEFT_SCHOOL: u32 = 264;

/// Says why no child is in a band.
fn nobody(applies: &Applies, set_ages: Option<(u32, Option<u32>)>) -> Option<String> {
    match applies {
        Applies::Grades(list) if list.is_empty() => Some("no grade is named".to_owned()),
        Applies::Ages { from, .. } if *from >= LEFT_SCHOOL => {
            Some(format!("no child is {from} months old"))
        }
        Applies::Ages { from, to } => {
            let (low, high) = set_ages?;
            let before = to.is_some_and(|to| to <= low);
            let after = high.is_some_and(|high| *from >= high);
            (before || after).then(|| {
                let span = Applies::Ages {
                    from: low,
                    to: high,
                };
                format!("the set speaks of {span} only")
            })
        }
        _ => None,
    }
}

/// Largest sphere and cylinder that are taken, in thousandths of a dioptre.
const SPHERE: i32 = 30_000;
const CYLINDER: i32 = 15_000;

/// Says why no reading crosses a threshold.
fn impossible(criterion: &Loose) -> Option<String> {
    let limit = match criterion.test {
        Test::MoreThanDiopters(v) => Some(v),
        Test::DioptersOrMore(v) => Some(v - 1),
        _ => None,
    };
    let most = match criterion.measure {
        Measure::Hyperopia | Measure::Myopia => SPHERE + CYLINDER,
        Measure::Astigmatism => CYLINDER,
        Measure::Anisometropia => 2 * (SPHERE + CYLINDER),
        _ => i32::MAX,
    };
    if limit.is_some_and(|limit| limit >= most) {
        return Some(format!(
            "no instrument gives {} of more than {} D",
            criterion.measure.title(),
            most / 1_000
        ));
    }
    if criterion.axis_beyond.is_some_and(|beyond| beyond >= 45) {
        return Some("no axis is more than 45° from both 90 and 180".to_owned());
    }
    let seen = !criterion.seen.is_empty();
    (seen && criterion.seen.iter().all(|s| criterion.without.contains(s)))
        .then(|| "what must be seen also sets it aside".to_owned())
}

/// Says whether every child whom `weak` refers is referred by `strong`, no later and no differently.
fn shadows(strong: &Loose, weak: &Loose) -> bool {
    // Two sources may name one sign; both are shown, and the sooner is acted on.
    weak.test != Test::Present
        && strong.measure == weak.measure
        && strong.compare == weak.compare
        && strong.metric == weak.metric
        && (strong.axis_beyond.is_none() || strong.axis_beyond == weak.axis_beyond)
        && strong.seen == weak.seen
        && strong.with == weak.with
        && strong.without == weak.without
        // A referral stands before a second screening; a notice to the family is another matter.
        && (strong.then == Then::Inform) == (weak.then == Then::Inform)
        && strong.then <= weak.then
        && (strong.high_priority || !weak.high_priority)
        && strong.urgency <= weak.urgency
        && match (strong.act_within_days, weak.act_within_days) {
            (_, None) => true,
            (Some(strong), Some(weak)) => strong <= weak,
            (None, Some(_)) => false,
        }
        && covers(&strong.applies, &weak.applies)
        && as_strict(&strong.test, &weak.test, strong.compare)
}

fn covers(wide: &Applies, narrow: &Applies) -> bool {
    match (wide, narrow) {
        (Applies::Everyone, _) => true,
        (Applies::Ages { from, to }, Applies::Ages { from: f, to: t }) => {
            from <= f && to.is_none_or(|to| t.is_some_and(|t| t <= to))
        }
        (Applies::Grades(wide), Applies::Grades(narrow)) => narrow.iter().all(|g| wide.contains(g)),
        _ => false,
    }
}

/// Says whether one threshold refers whatever another one does.
fn as_strict(strong: &Test, weak: &Test, compare: Compare) -> bool {
    let line = |test: &Test| match *test {
        Test::WorseThanLine(l) if compare == Compare::Line => Some(l.step().0),
        Test::LineOrWorse(l) if compare == Compare::Line => Some(l.step().0 - 1),
        Test::WorseThanLine(l) => Some(l.logmar().0 * 2),
        Test::LineOrWorse(l) => Some(l.logmar().0 * 2 - 1),
        _ => None,
    };
    let diopters = |test: &Test| match *test {
        Test::MoreThanDiopters(v) => Some(v),
        Test::DioptersOrMore(v) => Some(v - 1),
        _ => None,
    };
    let pair = |read: &dyn Fn(&Test) -> Option<i32>| read(strong).zip(read(weak));
    if let Some((strong, weak)) = pair(&line).or_else(|| pair(&diopters)) {
        return strong <= weak;
    }
    match (strong, weak) {
        (Test::LinesOrMore(a), Test::LinesOrMore(b)) => a <= b,
        // Letters missed weigh differently by how many a line has: only what holds for every chart.
        (Test::WorseThanLine(a) | Test::LineOrWorse(a), Test::LettersOrWorse { line, .. }) => {
            a.logmar() <= line.logmar()
        }
        (
            Test::LettersOrWorse { line: a, missed: m },
            Test::LettersOrWorse { line: b, missed: n },
        ) => a.logmar() <= b.logmar() && m <= n,
        (Test::MoreThanPrism(a), Test::MoreThanPrism(b)) => a <= b,
        (Test::AnyManifest, Test::MoreThanPrism(_) | Test::Constant) => true,
        (Test::MoreThanPrism(_), Test::Constant) => true,
        (Test::MoreThanMillimetres(a), Test::MoreThanMillimetres(b)) => a <= b,
        (Test::MillimetresOrLess(a), Test::MillimetresOrLess(b)) => a >= b,
        (Test::FewerThan { need: a, of: m }, Test::FewerThan { need: b, of: n }) => {
            m == n && a >= b
        }
        (a, b) => a == b,
    }
}

/// Says which line keeps two passing eyes closer together than a difference asks for, and how far
/// apart they can be.
fn between_within<'a>(
    me: &Loose,
    own: impl Iterator<Item = &'a Loose>,
    inherited: &'a [Loose],
) -> Option<(String, i32)> {
    let Test::LinesOrMore(lines) = me.test else {
        return None;
    };
    own.chain(inherited)
        .filter(|other| other.measure == Measure::DistanceEachEye && other.compare == Compare::Line)
        .filter(|other| covers(&other.applies, &me.applies) && other.urgency <= me.urgency)
        .filter(|other| other.then <= me.then && (other.high_priority || !me.high_priority))
        .find_map(|other| {
            let passes = match other.test {
                Test::WorseThanLine(line) => line.step().0,
                Test::LineOrWorse(line) => line.step().0 - 1,
                _ => return None,
            };
            let most = passes - Step::FINEST.0;
            (most < lines).then(|| (other.id.clone(), most.max(0)))
        })
}
