//! Any text as an acuity: answered, printable, and the same again when its canonical text is read.
#![no_main]

use libfuzzer_sys::fuzz_target;
use twoline::domain::acuity::{AcuityContext, parse_acuity};

fuzz_target!(|text: &str| {
    let context = AcuityContext::default();
    match parse_acuity(text, &context) {
        Ok(understood) => {
            let canonical = understood.value.to_string();
            let again = parse_acuity(&canonical, &context);
            assert_eq!(
                again.map(|a| a.value),
                Ok(understood.value),
                "{text:?} reads as {canonical:?}"
            );
        }
        Err(why) => assert!(!why.chars().any(char::is_control), "{why:?}"),
    }
});
