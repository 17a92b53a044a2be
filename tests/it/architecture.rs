//! The shape of the code: direction of dependencies, file lengths, the clock, SQL, words.

#![allow(clippy::panic)]

mod checks;

use std::fs;
use std::path::{Path, PathBuf};

use checks::{arrows, clock, sql, top_module, words};

/// Which modules each module may use, beside itself; every module of the crate is listed.
const ALLOWED: &[(&str, &[&str])] = &[
    ("domain", &[]),
    ("stats", &[]),
    ("clock", &[]),
    ("keys", &["domain"]),
    ("rules", &["domain"]),
    ("store", &["domain", "clock"]),
    ("intake", &["domain"]),
    ("reports", &["domain", "stats"]),
    (
        "actions",
        &[
            "domain", "stats", "rules", "store", "intake", "reports", "clock",
        ],
    ),
    ("tui", &["actions", "domain", "keys", "clock"]),
    ("demo", &["actions", "domain", "keys", "clock"]),
    (
        "cli",
        &["actions", "domain", "keys", "clock", "demo", "tui"],
    ),
    ("main", &["cli", "tui"]),
    ("lib", &[]),
];

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// Returns every file below `dir` whose name ends so, as path relative to the crate and text.
fn files(dir: &str, ending: &str) -> Vec<(String, String)> {
    fn walk(dir: &Path, ending: &str, out: &mut Vec<PathBuf>) {
        let Ok(entries) = fs::read_dir(dir) else {
            return;
        };
        for entry in entries.flatten() {
            let path = entry.path();
            if path.is_dir() {
                walk(&path, ending, out);
            } else if path.to_string_lossy().ends_with(ending) {
                out.push(path);
            }
        }
    }
    let mut paths = Vec::new();
    walk(&root().join(dir), ending, &mut paths);
    paths.sort();
    paths
        .into_iter()
        .map(|path| {
            let text =
                fs::read_to_string(&path).unwrap_or_else(|why| panic!("{}: {why}", path.display()));
            let name = path.strip_prefix(root()).expect("below the crate");
            (name.to_string_lossy().replace('\\', "/"), text)
        })
        .collect()
}

fn sources() -> Vec<(String, String)> {
    let sources = files("src", ".rs");
    assert!(sources.len() > 10, "the sources were found");
    sources
}

fn fail_if_any(what: &str, found: &[String]) {
    assert!(found.is_empty(), "{what}:\n{}", found.join("\n"));
}

/// Arrows point one way: domain ← rules, store, intake; domain ← reports; actions uses all of
/// these; the terminal, the command line and the demo use actions, domain and keys.
#[test]
fn arrows_point_one_way() {
    let found: Vec<String> = sources()
        .iter()
        .flat_map(|(path, text)| arrows(path, text, ALLOWED))
        .collect();
    fail_if_any("arrows that point the wrong way", &found);
}

/// Every module has an entry in the table above.
#[test]
fn every_module_is_in_the_table() {
    for (path, _) in sources() {
        let module = top_module(&path);
        assert!(
            ALLOWED.iter().any(|(name, _)| *name == module),
            "{path}: {module} is not in the table of arrows"
        );
    }
}

/// No file is above 600 lines, and modules are `foo.rs` beside `foo/`.
#[test]
fn files_are_short_and_named_for_their_module() {
    let mut found = Vec::new();
    let tests = files("tests", ".rs");
    for (path, text) in sources().iter().chain(&tests) {
        let lines = text.lines().count();
        if lines > 600 {
            found.push(format!("{path}: {lines} lines"));
        }
        if path.ends_with("/mod.rs") {
            found.push(format!("{path}: no mod.rs"));
        }
    }
    fail_if_any("file shape", &found);
}

/// Only `clock.rs` asks the time.
#[test]
fn only_the_clock_asks_the_time() {
    let found: Vec<String> = sources()
        .iter()
        .flat_map(|(path, text)| clock(path, text))
        .collect();
    fail_if_any("the time is asked outside clock.rs", &found);
}

/// Only the store speaks SQL.
#[test]
fn only_the_store_speaks_sql() {
    let found: Vec<String> = sources()
        .iter()
        .flat_map(|(path, text)| sql(path, text))
        .collect();
    fail_if_any("SQL outside the store", &found);
}

/// No unfinished marks, no switched-off tests, no abbreviations for the eyes that are on lists of
/// confusable abbreviations, in code, rules, samples and pages.
#[test]
fn words_that_do_not_belong() {
    let mut all = sources();
    all.extend(files("tests/it", ".rs"));
    all.extend(files("referral_rules", ".toml"));
    all.extend(files("migrations", ".sql"));
    all.extend(files("sample_data", ""));
    let found: Vec<String> = all
        .iter()
        .filter(|(path, _)| !path.starts_with("tests/it/architecture"))
        .flat_map(|(path, text)| words(path, text))
        .collect();
    fail_if_any("words that do not belong", &found);
}

/// The top level holds what the design says and nothing else (git's own view, so that local build
/// folders do not matter).
#[test]
fn top_level() {
    const EXPECTED: [&str; 12] = [
        "Cargo.lock",
        "Cargo.toml",
        "DEVELOPERS.md",
        "LICENSE",
        "README.md",
        "benches",
        "migrations",
        "referral_rules",
        "sample_data",
        "src",
        "target",
        "tests",
    ];
    for entry in fs::read_dir(root()).expect("the crate's folder").flatten() {
        let name = entry.file_name().to_string_lossy().into_owned();
        assert!(
            name.starts_with('.') || name == "rustfmt.toml" || EXPECTED.contains(&name.as_str()),
            "{name} does not belong at the top level"
        );
    }
}

/// The keys in the README come from the one declaration of keys.
#[test]
fn the_readme_shows_the_keys_of_the_table() {
    let readme = std::fs::read_to_string(concat!(env!("CARGO_MANIFEST_DIR"), "/README.md"))
        .expect("the README");
    for [place, keys, _, help] in twoline::keys::rows() {
        if place.starts_with("Day") || place == "in every place" || place == "everywhere" {
            let row = format!("| {place} | {keys} | {help} |");
            assert!(readme.contains(&row), "missing in the README: {row}");
        }
    }
}
