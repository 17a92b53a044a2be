//! Whatever the bytes, intake answers; whatever it says is one line per problem and safe to print.

use chrono::NaiveDate;
use proptest::prelude::*;
use twoline::domain::acuity::Notation;
use twoline::intake::Problems;
use twoline::intake::exams::read_exams;
use twoline::intake::results::{Options, read_results};
use twoline::intake::roster::read_roster;

fn safe(problems: &Problems) -> bool {
    let text = problems.to_string();
    text.chars().all(|c| c == '\n' || !c.is_control())
        && problems
            .kept()
            .iter()
            .all(|p| !p.to_string().contains('\n'))
}

/// Files that look like what is expected and go wrong somewhere.
fn almost(header: &'static str) -> impl Strategy<Value = String> {
    let cells = prop::sample::select(vec![
        "A1",
        "20/40",
        "20/0",
        "-2.50",
        "180",
        "181",
        "2020-02-30",
        "2020-03-02",
        "PK",
        "none",
        "white_pupil:left",
        "\"",
        "\"a\nb\"",
        "\u{1b}[2J",
        "=1+1",
        "'=1+1",
        "\0",
        "é",
        "",
        " ",
        "yes",
        "NT:shy",
        "\r",
        "99999999999999999999",
    ]);
    let row = prop::collection::vec(cells, 1..12).prop_map(|cells| cells.join(","));
    prop::collection::vec(row, 0..6).prop_map(move |rows| format!("{header}\n{}", rows.join("\n")))
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2_000))]

    #[test]
    fn results(text in almost("child_id,dob,screened_on,grade,distance_right,sphere_right,cylinder_right,axis_right,signs")) {
        if let Err(problems) = read_results("r.csv", text.as_bytes(), Options::default(), None) {
            prop_assert!(safe(&problems), "{problems:?}");
        }
    }

    #[test]
    fn exams(text in almost("code,child_id,examined_on,best_right,sphere_right,cylinder_right,axis_right,findings,treatment,examiner")) {
        if let Err(problems) = read_exams("r.csv", text.as_bytes(), Some(Notation::Feet)) {
            prop_assert!(safe(&problems), "{problems:?}");
        }
    }

    #[test]
    fn rosters(text in almost("child_id,family_name,given_name,dob,grade,site,notes,consent")) {
        let today = NaiveDate::from_ymd_opt(2026, 10, 14).expect("a date");
        if let Err(problems) = read_roster("r.csv", text.as_bytes(), today) {
            prop_assert!(safe(&problems), "{problems:?}");
        }
    }

    #[test]
    fn bytes(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        let options = Options { pass_through: true, takes_age: true, ..Options::default() };
        if let Err(problems) = read_results("r.csv", &bytes, options, None) {
            prop_assert!(safe(&problems), "{problems:?}");
        }
    }
}
