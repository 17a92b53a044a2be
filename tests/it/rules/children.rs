//! The five children of the acceptance table, screened 14 October 2026.

use super::support::{child, date, readings, word};
use twoline::domain::age::AgeMonths;
use twoline::domain::codes::Consent;
use twoline::domain::outcome::{DecidedBy, RiskKind, Urgency};
use twoline::rules::explain;

fn age(born: &str) -> u32 {
    AgeMonths::between(date(born), date("2026-10-14"))
        .unwrap()
        .0
}

#[test]
fn a_pass_at_79_months_with_one_step_between_the_eyes() {
    assert_eq!(age("2020-03-02"), 79);
    let mut it = child(
        79,
        "correction_worn=none distance_right=20/20 distance_left=20/25 plus_lens=blurred signs=none",
    );
    it.grade = Some("01");
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "pass", "{outcome:#?}");
    assert_eq!(outcome.unknown, Vec::<String>::new());
    assert_eq!(outcome.urgency, None);
    let mut text = String::new();
    explain::reasons_text(&outcome, &mut text);
    assert!(text.contains("both lines pass"), "{text}");
    assert!(text.contains("one step between the eyes"), "{text}");
}

#[test]
fn two_steps_between_the_eyes_are_rescreened() {
    assert_eq!(age("2020-09-01"), 73);
    let mut it = child(73, "distance_right=20/20 distance_left=20/32");
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "rescreen", "{outcome:#?}");
    assert_eq!(outcome.due_on, Some(date("2026-10-28")));
    assert_eq!(outcome.criteria, ["joint-policy-2016/between-eyes"]);
    assert_eq!(outcome.risks, [RiskKind::InterocularDifference]);
    assert_eq!(outcome.urgency, Some(Urgency::Routine));
    assert_eq!(explain::headline(&outcome), "RESCREEN by 28 Oct 2026");
    let short = explain::short(&outcome);
    assert!(
        short.contains("wo steps between the eyes (20/20 and 20/32)"),
        "{short}"
    );
    assert!(short.contains("Left eye 20/25 would pass"), "{short}");

    it.readings = readings("acuity_method=critical_line distance_right=20/32 distance_left=20/32");
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "pass", "{outcome:#?}");
    assert!(
        outcome
            .unknown
            .contains(&"joint-policy-2016/between-eyes".to_owned())
    );
    assert_eq!(
        outcome.to_string(),
        "pass (critical line; difference between the eyes not tested)"
    );
}

#[test]
fn not_testable_with_half_an_instrument_result_is_rescreened_in_six_months() {
    let it = child(
        age("2022-04-10"),
        "distance_right=NT:shy distance_left=NT:shy instrument_right=no_reading instrument_left=ok \
         sphere_left=+1.25 cylinder_left=-0.50 axis_left=180",
    );
    let outcome = it.by_protocol("us-preschool");
    assert_eq!(word(&outcome), "rescreen", "{outcome:#?}");
    assert_eq!(outcome.decided_by, DecidedBy::NotTestable);
    assert_eq!(outcome.due_on, Some(date("2027-04-14")));
    assert!(outcome.risks.is_empty());
}

#[test]
fn glasses_at_home_are_not_judged_as_a_fail() {
    let it = child(
        age("2018-05-20"),
        "correction_worn=left_at_home distance_right=20/80 distance_left=20/63",
    );
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "incomplete", "{outcome:#?}");
    assert_eq!(outcome.decided_by, DecidedBy::GlassesNotWorn);
    assert_eq!(outcome.due_on, Some(date("2026-10-28")));
    assert!(outcome.criteria.is_empty());
    assert!(outcome.risks.is_empty());
    assert!(explain::headline(&outcome).starts_with("INCOMPLETE, return by 28 Oct 2026"));
}

#[test]
fn a_white_pupil_is_referred_at_once_without_consent() {
    let mut it = child(age("2021-01-08"), "signs=white_pupil:left");
    it.consent = Some(Consent::No);
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "refer", "{outcome:#?}");
    assert_eq!(outcome.urgency, Some(Urgency::Emergency));
    assert_eq!(outcome.act_by, Some(date("2026-10-14")));
    assert_eq!(outcome.act_within_days, Some(0));
    assert_eq!(outcome.risks, [RiskKind::Deprivation]);
    assert_eq!(
        explain::headline(&outcome),
        "REFER, emergency, act by 14 Oct 2026"
    );
}
