//! Any bytes as a file of examination reports: reports whose canonical text reads back to the same, or
//! problems that are safe to print.
#![no_main]

use libfuzzer_sys::fuzz_target;
use twoline::domain::exam::ExamReport;
use twoline::domain::readings::ReadingContext;
use twoline::intake::exams::read_exams;

fuzz_target!(|bytes: &[u8]| {
    match read_exams("reports.csv", bytes, None) {
        Ok(rows) => {
            for row in rows {
                let mut again = ExamReport::default();
                for (field, text) in row.report.recorded() {
                    let set = again.set(field, &text, ReadingContext::default());
                    assert!(set.is_ok(), "{field:?} {text:?}: {set:?}");
                }
                assert_eq!(again.recorded(), row.report.recorded());
            }
        }
        Err(problems) => {
            let text = problems.to_string();
            assert!(text.chars().all(|c| c == '\n' || !c.is_control()), "{text:?}");
        }
    }
});
