//! Signs, history and the other tests, a second time in SQL.

use rusqlite::{Connection, params_from_iter, types::Value};
use twoline::domain::codes::{Correction, Cover, History, PlusLens, Reflex, SignKind};
use twoline::domain::readings::{Hundredths, Readings, Sign};

use super::{Dice, Row, agree, env, strabismus};

/// Reflexes in the order of their numbers in the SQL: 0 normal to 5 unequal.
const REFLEXES: [Reflex; 6] = [
    Reflex::Normal,
    Reflex::Absent,
    Reflex::White,
    Reflex::Dull,
    Reflex::DarkSpot,
    Reflex::Unequal,
];
const CORRECTIONS: [Correction; 4] = [
    Correction::None,
    Correction::Worn,
    Correction::NotWorn,
    Correction::LeftAtHome,
];

fn either_reflex(at: usize) -> String {
    format!("(COALESCE(rr = {at}, 0) OR COALESCE(rl = {at}, 0))")
}

fn days(urgency: &str, days: &str) -> String {
    format!("'refer {urgency} {days}'")
}

/// Guidance, urgency: at once and white pupil Queensland (primary), new squint with a lost reflex or
/// with ataxia NICE NG127 (secondary), abnormal reflex and no visual response New South Wales (primary),
/// new squint with limited movement, nystagmus or face turn Br J Gen Pract 2017 (primary, "a few days");
/// the rest is practice. Of two sources the sooner stands.
fn urgent_signs() -> String {
    let [absent, white, dull, dark, unequal] = [1, 2, 3, 4, 5].map(either_reflex);
    format!(
        "CASE WHEN white_pupil OR sudden_vision_loss OR sudden_diplopia OR eye_injury OR chemical_injury \
           OR orbital_cellulitis OR no_visual_response OR lost_red_reflex OR {absent} OR {white} OR {dull} \
           OR {dark} OR (new_squint AND ataxia_vomiting_headache) THEN {} \
         WHEN new_squint AND (limited_abduction OR nystagmus OR face_turn) THEN {} \
         WHEN {unequal} THEN {} \
         WHEN (nystagmus OR face_turn) AND NOT care THEN {} \
         WHEN new_squint OR (known_squint AND NOT care) OR limited_abduction OR head_tilt \
           OR large_or_cloudy_eye OR light_avoidance OR unequal_pupils THEN {} \
         WHEN NOT looked THEN 'incomplete' ELSE 'pass' END",
        days("emergency", "0"),
        days("prompt", "3"),
        days("prompt", "14"),
        days("prompt", ""),
        days("routine", "")
    )
}

/// Pediatrics 2002;109:980 (primary) for what refers; how soon as in `urgent_signs`.
fn red_reflex() -> String {
    let unequal = either_reflex(5);
    let lost = [1, 2, 3, 4].map(either_reflex).join(" OR ");
    format!(
        "CASE WHEN {lost} THEN {} WHEN {unequal} THEN {} \
         WHEN rr IS NULL OR rl IS NULL THEN 'incomplete' ELSE 'pass' END",
        days("emergency", "0"),
        days("prompt", "14")
    )
}

/// Expert panel 2015 (primary; Down syndrome practice), 36 to 71 months.
fn direct_referral() -> String {
    format!(
        "CASE WHEN age < 36 OR age >= 72 THEN 'incomplete' \
         WHEN visible_abnormality OR neurodevelopmental OR systemic_condition OR down_syndrome \
           OR family_strabismus OR family_amblyopia OR preterm_under_32_weeks OR parent_concern THEN {} \
         WHEN NOT told THEN 'incomplete' ELSE 'pass' END",
        days("routine", "")
    )
}

/// Minnesota module 7a and IAPB (primary): 60 months and over, no glasses owned (correction 0).
fn plus_lens() -> String {
    format!(
        "CASE WHEN age < 60 OR correction IS NULL OR correction > 0 OR lens IS NULL THEN 'incomplete' \
         WHEN lens THEN {} ELSE 'pass' END",
        days("routine", "")
    )
}

/// Joint policy 2003 (memory): fewer than four of six.
fn stereo() -> String {
    format!(
        "CASE WHEN correct IS NULL OR shown > 6 THEN 'incomplete' WHEN correct >= 4 THEN 'pass' \
         WHEN shown - correct >= 3 THEN {} ELSE 'incomplete' END",
        days("routine", "")
    )
}

/// Joint policy 2003 (memory): any movement of the uncovered eye.
fn cover_test() -> String {
    format!(
        "CASE {} WHEN 1 THEN {} WHEN 0 THEN 'pass' ELSE 'incomplete' END",
        strabismus(None),
        days("routine", "")
    )
}

/// A random cover test and size of a manifest deviation, as readings and as the SQL sees them.
pub(super) fn alignment(dice: &mut Dice, readings: &mut Readings) -> (Option<i64>, Option<i32>) {
    const COVERS: [Cover; 4] = [
        Cover::None,
        Cover::Phoria,
        Cover::Intermittent,
        Cover::Constant,
    ];
    // Mostly nothing manifest, so that what else refers is seen as well.
    let cover = [
        None,
        None,
        Some(0),
        Some(0),
        Some(0),
        Some(1),
        Some(2),
        Some(3),
    ][dice.index(8)];
    let size = [
        None,
        None,
        None,
        Some(0),
        Some(0),
        Some(400),
        Some(800),
        Some(801),
    ][dice.index(8)];
    readings.cover = cover.map(|at: usize| COVERS[at]);
    readings.deviation_pd = size.map(Hundredths);
    (cover.map(|at| i64::try_from(at).unwrap()), size)
}

fn fill(db: &Connection, rows: u64, dice: &mut Dice) -> Vec<Row> {
    let words = || {
        SignKind::ALL
            .iter()
            .map(|s| s.word())
            .chain(History::ALL.iter().map(|h| h.word()))
    };
    let columns: Vec<String> = words().map(|w| format!("{w} INT")).collect();
    db.execute_batch(&format!(
        "CREATE TABLE s(id INTEGER PRIMARY KEY, age INT, looked INT, told INT, care INT, rr INT, rl INT,
         correction INT, lens INT, correct INT, shown INT, cover INT, pd INT, {})",
        columns.join(", ")
    ))
    .unwrap();
    let marks = vec!["?"; 13 + columns.len()].join(",");
    let mut insert = db
        .prepare(&format!("INSERT INTO s VALUES ({marks})"))
        .unwrap();
    let number = |n: usize| Value::Integer(i64::try_from(n).unwrap());
    let maybe = |n: Option<usize>| n.map_or(Value::Null, number);
    let mut out = Vec::new();
    for id in 0..rows {
        let age = u32::try_from(dice.roll(110)).unwrap();
        let mut readings = Readings::default();
        // None, one or two of a list; a quarter of the lists not filled in.
        let list = |of: usize, dice: &mut Dice| -> Option<Vec<usize>> {
            (dice.roll(4) > 0).then(|| {
                let count = dice.roll(3);
                (0..count).map(|_| dice.index(of as u64)).collect()
            })
        };
        let signs = list(SignKind::ALL.len(), dice);
        let history = list(History::ALL.len(), dice);
        readings.signs = signs.as_ref().map(|list| {
            let sign = |at: &usize| Sign {
                kind: SignKind::ALL[*at],
                side: None,
            };
            list.iter().map(sign).collect()
        });
        readings.history = history
            .as_ref()
            .map(|list| list.iter().map(|at| History::ALL[*at]).collect());
        let mut reflex = || {
            (dice.roll(4) > 0)
                .then(|| dice.index(18))
                .map(|at| if at < 6 { at } else { 0 })
        };
        let (right, left) = (reflex(), reflex());
        readings.red_reflex.right = right.map(|at| REFLEXES[at]);
        readings.red_reflex.left = left.map(|at| REFLEXES[at]);
        let correction = (dice.roll(5) > 0)
            .then(|| dice.index(8))
            .map(|at| if at < 4 { at } else { 0 });
        readings.correction = correction.map(|at| CORRECTIONS[at]);
        let lens = (dice.roll(4) > 0).then(|| dice.index(2));
        readings.plus_lens = lens.map(|read| [PlusLens::Blurred, PlusLens::Read][read]);
        let shown = (dice.roll(5) > 0).then(|| dice.index(8));
        let correct = shown.map(|shown| dice.index(shown as u64 + 1));
        readings.stereo_shown = shown.map(|n| u8::try_from(n).unwrap());
        readings.stereo_correct = correct.map(|n| u8::try_from(n).unwrap());
        let (cover, size) = alignment(dice, &mut readings);
        let by_roster = dice.roll(4) == 0;
        let told = |word: &str| {
            let named = |list: &Option<Vec<usize>>, words: Vec<&str>| {
                list.iter().flatten().any(|at| words[*at] == word)
            };
            named(&signs, SignKind::ALL.iter().map(|s| s.word()).collect())
                || named(&history, History::ALL.iter().map(|h| h.word()).collect())
        };
        let mut values = vec![
            Value::Integer(i64::try_from(id).unwrap()),
            Value::Integer(i64::from(age)),
            number(usize::from(signs.is_some())),
            number(usize::from(history.is_some())),
            number(usize::from(by_roster || told("under_care"))),
            maybe(right),
            maybe(left),
            maybe(correction),
            maybe(lens),
            maybe(correct),
            maybe(shown),
            cover.map_or(Value::Null, Value::Integer),
            size.map_or(Value::Null, |v| Value::Integer(i64::from(v))),
        ];
        values.extend(words().map(|word| number(usize::from(told(word)))));
        insert.execute(params_from_iter(values)).unwrap();
        out.push(Row {
            age,
            grade: "01",
            under_care: by_roster,
            readings,
        });
    }
    out
}

#[test]
fn sql_over_signs_agrees() {
    let rows = env("TWOLINE_SQL_ROWS", 3_000);
    let seed = env("TWOLINE_SQL_SEED", 20_261_014).max(1);
    let db = Connection::open_in_memory().unwrap();
    db.execute_batch("BEGIN").unwrap();
    let filled = fill(&db, rows, &mut Dice(seed));
    db.execute_batch("COMMIT").unwrap();
    let lens = plus_lens();
    let sets = [
        ("urgent-signs", urgent_signs(), 7),
        ("red-reflex", red_reflex(), 4),
        ("direct-referral", direct_referral(), 3),
        ("plus-lens-2.00", lens.clone(), 3),
        ("plus-lens-2.50", lens, 3),
        ("stereo-random-dot-e", stereo(), 3),
        ("cover-test", cover_test(), 3),
        // Minnesota (primary): a missed plate informs and never refers.
        ("color-plates", "'pass'".to_owned(), 1),
    ];
    for (id, sql, outcomes) in sets {
        agree(&db, id, "s", &sql, &filled, seed, outcomes);
    }
}

/// Every rule set that ships is evaluated a second time.
#[test]
fn no_set_is_left_out() {
    let signs = [
        "urgent-signs",
        "red-reflex",
        "direct-referral",
        "plus-lens-2.00",
        "plus-lens-2.50",
        "stereo-random-dot-e",
        "cover-test",
        "color-plates",
    ];
    let tables = super::tables();
    for set in twoline::rules::Library::shipped().rule_sets() {
        let known = signs.contains(&&*set.id)
            || tables.iter().any(|(id, _)| *id == &*set.id)
            || super::AGAIN.iter().any(|(id, ..)| *id == &*set.id);
        assert!(known, "{}", set.id);
    }
}
