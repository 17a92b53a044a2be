//! Age in completed months, and grades.

use chrono::NaiveDate;
use twoline::domain::age::{AgeMonths, Grade, months_after};

use super::table;

fn date(text: &str) -> NaiveDate {
    text.parse().unwrap_or_else(|why| panic!("{text}: {why}"))
}

/// 47 birth and screening dates, most at the end of a month or around 29 February.
///
/// Source: python-dateutil 4.0.0 `relativedelta`, column `completed_months_dateutil`; the rows marked
/// DIFFERS show that the strict convention (1 March) is another one.
#[test]
fn completed_months_follow_the_oracle() {
    let rows = table("age_pairs.csv");
    assert_eq!(rows.len(), 47);
    let mut differing = 0;
    for row in rows {
        let (born, on) = (&row["dob"], &row["screened"]);
        let months: u32 = row["completed_months_dateutil"].parse().expect("months");
        assert_eq!(
            AgeMonths::between(date(born), date(on)),
            Some(AgeMonths(months)),
            "born {born}, screened {on}"
        );
        if row["conventions"] == "DIFFERS" {
            differing += 1;
            assert_ne!(
                row["completed_months_strict"],
                row["completed_months_dateutil"]
            );
        }
    }
    assert!(differing > 0);
}

/// A child who is born after the day has no age.
#[test]
fn no_age_before_birth() {
    assert_eq!(
        AgeMonths::between(date("2026-10-15"), date("2026-10-14")),
        None
    );
    assert_eq!(
        AgeMonths::between(date("2026-10-14"), date("2026-10-14")),
        Some(AgeMonths(0))
    );
}

/// Calendar months after a date are clipped to a shorter month.
#[test]
fn months_are_calendar_months() {
    assert_eq!(months_after(date("2026-10-14"), 6), date("2027-04-14"));
    assert_eq!(months_after(date("2026-08-31"), 6), date("2027-02-28"));
}

/// Every way a grade is written, and none of those it is not.
#[test]
fn grades() {
    for (text, shown) in [
        ("PK", "PK"),
        ("tk", "TK"),
        ("K", "KG"),
        ("kg", "KG"),
        ("1", "01"),
        ("01", "01"),
        (" 12 ", "12"),
    ] {
        assert_eq!(Grade::parse(text).expect(text).to_string(), shown);
    }
    for text in ["", "0", "13", "00", "001", "1st", "-1", "P", "١"] {
        assert_eq!(Grade::parse(text), None, "{text:?}");
    }
    let order: Vec<_> = ["PK", "TK", "KG", "01", "12"].map(Grade::parse).into();
    assert!(order.is_sorted());
}
