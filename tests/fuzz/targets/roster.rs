//! Any bytes as a roster: rows, or problems that are safe to print.
#![no_main]

use libfuzzer_sys::fuzz_target;
use twoline::intake::roster::read_roster;

fuzz_target!(|bytes: &[u8]| {
    let today = chrono::NaiveDate::from_ymd_opt(2026, 10, 14).unwrap();
    if let Err(problems) = read_roster("roster.csv", bytes, today) {
        let text = problems.to_string();
        assert!(text.chars().all(|c| c == '\n' || !c.is_control()), "{text:?}");
    }
});
