//! Any text as a local rule file: a library, or errors that point inside the file.
#![no_main]

use libfuzzer_sys::fuzz_target;
use twoline::domain::readings::Readings;
use twoline::rules::{Case, Library, judge_rule_set};

fuzz_target!(|text: &str| {
    let loaded = Library::shipped().with_local([("local.toml".to_owned(), text.to_owned())]);
    match loaded {
        Ok(library) => {
            for set in library.rule_sets().filter(|s| s.local.is_some()) {
                twoline::rules::show::sheet(set);
                let readings = Readings::default();
                judge_rule_set(set, &Case::new(&readings));
            }
        }
        Err(errors) => {
            for error in &errors.0 {
                let lines = text.split('\n').count().max(1);
                assert!((1..=lines).contains(&error.line), "{error:?}");
                let shown = error.to_string();
                assert!(shown.chars().all(|c| c == '\n' || !c.is_control()), "{shown:?}");
            }
        }
    }
});
