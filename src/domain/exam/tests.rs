//! A report set from text, read back, and what cannot be.

use super::*;
use crate::domain::acuity::Notation;
use crate::domain::readings::ReadingContext;

const FEET: ReadingContext = ReadingContext {
    bare: Some(Notation::Feet),
    critical_line: None,
};

fn report(fields: &[(ExamField, &str)]) -> ExamReport {
    let mut report = ExamReport::default();
    for (field, text) in fields {
        report.set(*field, text, FEET).unwrap();
    }
    report
}

fn day(text: &str) -> NaiveDate {
    text.parse().unwrap()
}

#[test]
fn every_field_reads_back_what_it_wrote() {
    use ExamField as E;
    let whole = report(&[
        (E::ExaminedOn, "2026-12-02"),
        (E::ReceivedOn, "2026-12-09"),
        (E::Evidence, "form"),
        (E::Examiner, "Dr. P. Lindqvist"),
        (E::ExaminerPhone, "555 0142"),
        (E::UncorrectedRight, "40"),
        (E::UncorrectedLeft, "20/100"),
        (E::PresentingRight, "20/20"),
        (E::PresentingLeft, "CF"),
        (E::SphereRight, "+1.25"),
        (E::CylinderRight, "-0.50"),
        (E::AxisRight, "180"),
        (E::SphereLeft, "+4.75"),
        (E::CylinderLeft, "0"),
        (E::RefractionMethod, "retinoscopy"),
        (E::Cycloplegia, "cyclopentolate"),
        (E::BestRight, "20/20"),
        (E::BestLeft, "20/50"),
        (E::Cover, "none"),
        (E::StereoSeconds, "200"),
        (E::FundusRight, "normal"),
        (E::FundusLeft, "normal"),
        (E::AmblyopiaRight, "none"),
        (E::AmblyopiaLeft, "present"),
        (E::NoAbnormality, "no"),
        (E::Findings, "h53022; H52.31;H53.022"),
        (E::Treatment, "glasses;patching"),
        (E::GlassesWear, "full_time"),
        (E::GlassesSphereRight, "+0.50"),
        (E::GlassesSphereLeft, "+4.00"),
        (E::ReturnOn, "2027-03-01"),
        (E::ClassroomAdvice, "sits at the front"),
        (E::ReleaseConsent, "yes"),
    ]);
    let again = report(
        &whole
            .recorded()
            .iter()
            .map(|(f, t)| (*f, t.as_str()))
            .collect::<Vec<_>>(),
    );
    assert_eq!(again, whole);
    assert_eq!(whole.get(E::UncorrectedRight).as_deref(), Some("20/40"));
    assert_eq!(whole.get(E::Findings).as_deref(), Some("H53.022;H52.31"));
    // What was left out stays unknown: nothing is copied from the other eye.
    assert_eq!(whole.get(E::GlassesCylinderLeft), None);
    assert!(contradictions(&whole, day("2026-10-14"), day("2026-12-09")).is_empty());
}

#[test]
fn a_wrong_value_names_its_field_and_keeps_the_old_one() {
    let mut report = report(&[(ExamField::AmblyopiaLeft, "suspect")]);
    let error = report
        .set(ExamField::AmblyopiaLeft, "presnt", FEET)
        .unwrap_err();
    assert!(
        error.to_string().contains("did you mean present?"),
        "{error}"
    );
    assert_eq!(report.amblyopia.left, Some(Amblyopia::Suspect));
    for (field, text) in [
        (ExamField::ExaminedOn, "02/12/2026"),
        (ExamField::SphereRight, "99"),
        (ExamField::AxisLeft, "0"),
        (ExamField::Findings, "lazy eye"),
        (ExamField::StereoSeconds, "0"),
    ] {
        assert!(report.set(field, text, FEET).is_err(), "{text}");
    }
}

// The definition is printed wherever the word is used; each part of it counts by itself.
#[test]
fn each_part_of_the_definition_confirms_by_itself() {
    use ExamField as E;
    for (field, text) in [
        (E::AmblyopiaRight, "present"),
        (E::Cover, "constant"),
        (E::Cover, "intermittent"),
        (E::FundusLeft, "abnormal"),
        (E::Findings, "H50.9"),
        (E::Findings, "Q12.0"),
        (E::Treatment, "glasses"),
        (E::Treatment, "drops"),
    ] {
        let one = report(&[(field, text)]);
        assert!(matches!(one.confirmed(None), Confirmed::Yes(_)), "{text}");
    }
    let plain = ExamReport::default();
    assert_eq!(plain.confirmed(None), Confirmed::NotKnown);
    for group in 1..=3 {
        assert!(matches!(plain.confirmed(Some(group)), Confirmed::Yes(_)));
    }
    for (field, text) in [
        (E::AmblyopiaRight, "suspect"),
        (E::Cover, "phoria"),
        (E::Findings, "H53.041"),
        (E::Treatment, "observation"),
        (E::Treatment, "surgery_advised"),
        (E::AmblyopiaRight, "none"),
    ] {
        let one = report(&[(field, text)]);
        assert_eq!(one.confirmed(None), Confirmed::NotKnown, "{text}");
    }
    assert_eq!(
        report(&[(E::NoAbnormality, "yes")]).confirmed(None),
        Confirmed::No
    );
}

#[test]
fn what_cannot_be_is_named_with_its_field() {
    use ExamField as E;
    let named = |fields: &[(ExamField, &str)]| -> Vec<ExamField> {
        contradictions(&report(fields), day("2026-10-14"), day("2026-12-09"))
            .iter()
            .map(|e| e.field)
            .collect()
    };
    let on = (E::ExaminedOn, "2026-12-02");
    assert_eq!(named(&[]), [E::ExaminedOn]);
    assert_eq!(named(&[(E::ExaminedOn, "2026-10-13")]), [E::ExaminedOn]);
    assert_eq!(named(&[(E::ExaminedOn, "2026-10-14")]), []);
    assert_eq!(named(&[(E::ExaminedOn, "2026-12-10")]), [E::ExaminedOn]);
    assert_eq!(named(&[on, (E::ReceivedOn, "2026-12-01")]), [E::ReceivedOn]);
    assert_eq!(named(&[on, (E::ReturnOn, "2026-12-02")]), [E::ReturnOn]);
    assert_eq!(named(&[on, (E::CylinderLeft, "-1.00")]), [E::AxisLeft]);
    assert_eq!(
        named(&[on, (E::GlassesCylinderRight, "-1.00")]),
        [E::GlassesAxisRight]
    );
    assert_eq!(
        named(&[on, (E::NoAbnormality, "yes"), (E::AmblyopiaLeft, "present")]),
        [E::NoAbnormality]
    );
    assert_eq!(named(&[on, (E::Treatment, "none;glasses")]), [E::Treatment]);
}
