//! What is looked for in a source file, with proof that each check can fail.

/// Returns the module a source file belongs to: `src/tui/day.rs` is `tui`.
pub fn top_module(path: &str) -> String {
    let rest = path.strip_prefix("src/").unwrap_or(path);
    rest.split('/')
        .next()
        .unwrap_or(rest)
        .trim_end_matches(".rs")
        .to_owned()
}

/// Returns a line without its comment; the words of a comment are no arrows.
fn code(line: &str) -> &str {
    line.split("//").next().unwrap_or(line)
}

/// Returns the first path segments that follow `crate::` or `twoline::` in a text, `use
/// crate::{a::X, b}` included.
fn used(text: &str) -> Vec<String> {
    let text: String = text.lines().map(code).collect::<Vec<_>>().join(" ");
    let mut out = Vec::new();
    for root in ["crate::", "twoline::"] {
        for (at, _) in text.match_indices(root) {
            let before = text[..at].chars().next_back();
            if before.is_some_and(|c| c.is_alphanumeric() || c == '_') {
                continue;
            }
            let rest = &text[at + root.len()..];
            if let Some(group) = rest.strip_prefix('{') {
                out.extend(heads(group));
            } else {
                out.push(name(rest));
            }
        }
    }
    out.retain(|name| !name.is_empty());
    out
}

/// Returns the heads of a braced list that may hold braces itself.
fn heads(group: &str) -> Vec<String> {
    let (mut depth, mut start, mut out) = (0, 0, Vec::new());
    for (i, c) in group.char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth == 0 => {
                out.push(name(&group[start..i]));
                break;
            }
            '}' => depth -= 1,
            ',' if depth == 0 => {
                out.push(name(&group[start..i]));
                start = i + 1;
            }
            _ => {}
        }
    }
    out
}

fn name(text: &str) -> String {
    text.trim_start()
        .chars()
        .take_while(|c| c.is_alphanumeric() || *c == '_')
        .collect()
}

/// Returns the arrows of a file that the table does not allow.
pub fn arrows(path: &str, text: &str, allowed: &[(&str, &[&str])]) -> Vec<String> {
    let module = top_module(path);
    let known = |name: &str| allowed.iter().any(|(module, _)| *module == name);
    let may: &[&str] = allowed
        .iter()
        .find(|(name, _)| *name == module)
        .map_or(&[], |(_, may)| *may);
    let mut found: Vec<String> = used(text)
        .into_iter()
        .filter(|to| known(to) && *to != module && !may.contains(&to.as_str()))
        .map(|to| format!("{path}: {module} → {to}"))
        .collect();
    found.dedup();
    found
}

/// Returns the lines that ask the time outside `clock.rs`.
pub fn clock(path: &str, text: &str) -> Vec<String> {
    if path == "src/clock.rs" {
        return Vec::new();
    }
    lines_with(path, text, |line| {
        [
            "Local::now",
            "Utc::now",
            "SystemTime::now",
            "now_v7",
            "Uuid::now",
        ]
        .iter()
        .any(|word| line.contains(word))
    })
}

/// Returns the lines outside the store whose string literals look like SQL.
pub fn sql(path: &str, text: &str) -> Vec<String> {
    const STARTS: [&str; 8] = [
        "SELECT ",
        "INSERT INTO ",
        "INSERT OR ",
        "DELETE FROM ",
        "CREATE TABLE ",
        "DROP TABLE ",
        "PRAGMA ",
        "BEGIN IMMEDIATE",
    ];
    if top_module(path) == "store" {
        return Vec::new();
    }
    lines_with(path, text, |line| {
        line.contains("rusqlite")
            || STARTS.iter().any(|word| line.contains(word))
            || (line.contains("UPDATE ") && line.contains(" SET "))
    })
}

/// Returns the lines with words that do not belong in the project.
pub fn words(path: &str, text: &str) -> Vec<String> {
    text.lines()
        .enumerate()
        .filter(|(_, line)| {
            let unfinished = [
                "TODO",
                "FIXME",
                "XXX",
                "#[ignore",
                "todo!(",
                "unimplemented!(",
            ]
            .iter()
            .any(|word| line.contains(word));
            let eyes = line
                .split(|c: char| !c.is_alphanumeric())
                .any(|word| matches!(word, "OD" | "OS" | "OU"));
            // The test of the readings shows that such an abbreviation is refused.
            unfinished || (eyes && !path.starts_with("tests/"))
        })
        .map(|(i, line)| format!("{path}:{}: {}", i + 1, line.trim()))
        .collect()
}

fn lines_with(path: &str, text: &str, bad: impl Fn(&str) -> bool) -> Vec<String> {
    text.lines()
        .enumerate()
        .filter(|(_, line)| bad(code(line)))
        .map(|(i, line)| format!("{path}:{}: {}", i + 1, line.trim()))
        .collect()
}

const TABLE: &[(&str, &[&str])] = &[
    ("domain", &[]),
    ("rules", &["domain"]),
    ("store", &["domain"]),
];

#[test]
fn wrong_arrows_are_found() {
    for (path, text) in [
        ("src/domain/age.rs", "use crate::rules::Library;"),
        ("src/domain.rs", "fn f() -> crate::store::Store {}"),
        (
            "src/rules/load.rs",
            "use crate::{domain::age::{A, B}, store::Store};",
        ),
        (
            "src/rules/load.rs",
            "use crate::{\n    domain,\n    store,\n};",
        ),
        ("src/rules.rs", "pub use crate::store as data;"),
        ("src/rules.rs", "let x = twoline::store::open();"),
    ] {
        assert_eq!(arrows(path, text, TABLE).len(), 1, "{text}");
    }
    for (path, text) in [
        ("src/rules.rs", "use crate::domain::age::Grade;"),
        ("src/rules.rs", "// see crate::store for the rest"),
        ("src/rules.rs", "use crate::rules::load;"),
        ("src/rules.rs", "let store = my_crate::store::open();"),
    ] {
        assert_eq!(arrows(path, text, TABLE), [""; 0], "{text}");
    }
}

#[test]
fn the_clock_sql_and_words_are_found() {
    assert_eq!(clock("src/tui.rs", "let t = Local::now();").len(), 1);
    assert_eq!(clock("src/clock.rs", "let t = Local::now();").len(), 0);
    assert_eq!(
        clock("src/tui.rs", "// Local::now is asked in clock").len(),
        0
    );
    assert_eq!(sql("src/tui.rs", "run(\"SELECT x FROM y\")").len(), 1);
    assert_eq!(sql("src/cli.rs", "run(\"UPDATE y SET x = 1\")").len(), 1);
    assert_eq!(
        sql("src/store/read.rs", "run(\"SELECT x FROM y\")").len(),
        0
    );
    assert_eq!(
        words("src/tui.rs", "// TODO later\nlet od = \"OD\";").len(),
        2
    );
    assert_eq!(words("src/tui.rs", "fn the_od_count() {}").len(), 0);
    assert_eq!(top_module("src/tui/day/bench.rs"), "tui");
    assert_eq!(top_module("src/lib.rs"), "lib");
}
