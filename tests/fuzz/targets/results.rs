//! Any bytes as a results file: rows that every rule set judges without a panic, or problems that
//! are safe to print.
#![no_main]

use libfuzzer_sys::fuzz_target;
use twoline::intake::results::{Options, read_results};
use twoline::rules::{Case, Library, judge_protocol, judge_rule_set};

fuzz_target!(|bytes: &[u8]| {
    let options = Options {
        takes_age: true,
        takes_repeats: true,
        pass_through: true,
        ..Options::default()
    };
    match read_results("results.csv", bytes, options, None) {
        Ok(rows) => {
            let library = Library::shipped();
            for row in rows.iter().take(4) {
                let case = Case {
                    age: row.age,
                    grade: row.grade,
                    on: row.screened_on,
                    attempt: row.attempt.unwrap_or(twoline::domain::codes::Attempt::First),
                    ..Case::new(&row.readings)
                };
                for set in library.rule_sets() {
                    judge_rule_set(set, &case);
                }
                for protocol in library.protocols() {
                    judge_protocol(library, protocol, &case);
                }
            }
        }
        Err(problems) => {
            let text = problems.to_string();
            assert!(text.chars().all(|c| c == '\n' || !c.is_control()), "{text:?}");
        }
    }
});
