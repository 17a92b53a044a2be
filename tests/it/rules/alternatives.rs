//! Two values for one fact that nobody has settled.

use proptest::prelude::*;
use twoline::domain::outcome::{DecidedBy, Open, OutcomeKind, Urgency};
use twoline::domain::readings::Readings;
use twoline::rules::{
    CONFLICT, Case, Library, explain, judge_protocol, judge_protocol_alternatives,
};

use super::properties::{case, fields, set_all};
use super::support::{child, date, readings};

fn judged(texts: &[&str]) -> twoline::domain::outcome::Outcome {
    let library = Library::shipped();
    let alternatives: Vec<Readings> = texts.iter().map(|t| readings(t)).collect();
    let child = child(72, texts[0]);
    judge_protocol_alternatives(
        library,
        library.protocol("us-school").unwrap(),
        &child.case(),
        &alternatives,
    )
}

const SEEN: &str = "signs=none history=none distance_right=20/20";

#[test]
fn refer_or_pass_only_where_all_agree() {
    // Joint policy 2016 from 60 months: worse than 20/32 refers (memory), and three steps between the
    // eyes refer at once (practice).
    let open = judged(&[
        &format!("{SEEN} distance_left=20/20"),
        &format!("{SEEN} distance_left=20/40"),
    ]);
    assert_eq!(open.kind, OutcomeKind::Incomplete);
    assert_eq!(open.decided_by, DecidedBy::Conflict);
    assert_eq!(open.unknown[0], CONFLICT);
    assert!(
        open.unknown
            .contains(&"joint-policy-2016/line.60+".to_owned())
    );
    assert!(open.criteria.is_empty());
    assert_eq!(
        explain::short(&open),
        "Values that nobody has settled: pass or refer."
    );
    let line = open
        .reasons
        .iter()
        .find(|r| &*r.criterion == "line.60+")
        .unwrap();
    assert!(line.reading.contains("; or "), "{}", line.reading);

    let settled = judged(&[
        &format!("{SEEN} distance_left=20/20"),
        &format!("{SEEN} distance_left=20/25"),
    ]);
    assert_eq!(settled.kind, OutcomeKind::Pass);
    assert!(!settled.unknown.contains(&CONFLICT.to_owned()));
}

#[test]
fn the_sooner_urgency_stands_meanwhile() {
    let open = judged(&[
        &format!("{SEEN} distance_left=20/20"),
        "signs=white_pupil history=none distance_right=20/20 distance_left=20/20",
    ]);
    assert_eq!(open.kind, OutcomeKind::Incomplete);
    assert_eq!(open.urgency, Some(Urgency::Emergency));
    assert_eq!(open.act_by, Some(date("2026-10-14")));
    // Both refer, one of them sooner.
    let both = judged(&[
        "signs=white_pupil history=none distance_right=20/20 distance_left=20/20",
        "signs=nystagmus history=none distance_right=20/20 distance_left=20/20",
    ]);
    assert_eq!(both.kind, OutcomeKind::Refer);
    assert_eq!(both.urgency, Some(Urgency::Emergency));
}

/// Where both refer for different reasons neither reason is a fact yet.
#[test]
fn what_only_one_alternative_says_is_not_settled() {
    let both = judged(&[
        "signs=nystagmus history=none distance_right=20/20 distance_left=20/200",
        "signs=limited_abduction history=none distance_right=20/20 distance_left=20/200",
    ]);
    assert_eq!(both.kind, OutcomeKind::Refer);
    let only_one = |id: &&String| id.contains("nystagmus") || id.contains("limited_abduction");
    assert_eq!(both.criteria.iter().find(only_one), None);
    assert!(
        both.criteria
            .contains(&"joint-policy-2016/line.60+".to_owned()),
        "{:?}",
        both.criteria
    );
    let open: Vec<String> = both
        .reasons
        .iter()
        .filter(|r| r.open == Open::NotSettled)
        .map(twoline::domain::outcome::Reason::full_id)
        .collect();
    for sign in ["nystagmus", "limited_abduction"] {
        assert!(open.iter().any(|id| id.contains(sign)), "{open:?}");
        assert!(
            both.unknown.iter().any(|id| id.contains(sign)),
            "{:?}",
            both.unknown
        );
    }
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, cases: 64, ..ProptestConfig::default() })]

    #[test]
    fn one_alternative_is_the_plain_judge_and_order_makes_no_difference(
        a in fields(), b in fields(), c in fields(), age in 0u32..240, rescreen: bool,
    ) {
        let library = Library::shipped();
        let [a, b, c] = [a, b, c].map(|f| set_all(&f));
        let of = |readings, list: &[Readings], protocol| {
            judge_protocol_alternatives(library, protocol, &case(readings, age, rescreen), list)
        };
        for protocol in library.protocols() {
            let plain = |readings| {
                judge_protocol(library, protocol, &Case { ..case(readings, age, rescreen) })
            };
            let list = |of: &[&Readings]| of.iter().map(|r| (*r).clone()).collect::<Vec<_>>();
            prop_assert_eq!(&of(&a, &list(&[&b]), protocol), &plain(&b));
            prop_assert_eq!(&of(&a, &[], protocol), &plain(&a));
            let joined = of(&a, &list(&[&a, &b, &c]), protocol);
            prop_assert_eq!(&of(&b, &list(&[&c, &a, &b, &a]), protocol), &joined);
            let each = [plain(&a), plain(&b), plain(&c)];
            let agreed = each.iter().all(|o| o.kind == each[0].kind);
            prop_assert_eq!(joined.decided_by == DecidedBy::Conflict, !agreed);
            prop_assert_eq!(joined.unknown.contains(&CONFLICT.to_owned()), !agreed);
            prop_assert_eq!(joined.urgency, each.iter().filter_map(|o| o.urgency).min());
            prop_assert_eq!(joined.act_by, each.iter().filter_map(|o| o.act_by).min());
            if agreed { prop_assert_eq!(joined.kind, each[0].kind); }
        }
    }
}
