//! `rules check` and `rules new` on the command line.

use super::cli::Bench;

/// Everything wrong with one file at once, in the order of its lines, each with caret and cure.
#[test]
fn a_broken_file_shows_all_its_errors_in_order() {
    let bench = Bench::new();
    bench.write(
        "bad.toml",
        "id = \"local\"\ntitle = \"Quillmere\"\nedition = \"1\"\nkind = \"acuity\"\n\
         [[source]]\nkey = \"board\"\ncitation = \"Quillmere school board\"\n\
         [[criterion]]\nid = \"line.36-47\"\nages = \"36..48\"\nmeasure = \"distance acuity, each ey\"\nrefer = \"worse than 20/50\"\nsource = \"board\"\n\
         [[criterion]]\nid = \"line.60+\"\nages = \"60..\"\nmeasure = \"distance acuity, each eye\"\nrefer = \"more than 4.00 D\"\nsource = \"bord\"\n\
         [[criterion]]\nid = \"line.b.300+\"\nages = \"300..\"\nmeasure = \"distance acuity, each eye\"\nrefer = \"worse than 20/40\"\n",
    );
    let ran = bench.run(&["rules", "check", "bad.toml"]);
    assert_eq!((ran.code, ran.out.as_str()), (2, ""));
    let mut at = 0;
    for part in [
        "`approved_by` is missing",
        "`approved_on` is missing",
        "`basis` is missing",
        "unknown measure `distance acuity, each ey`",
        "did you mean \"distance acuity, each eye\"?",
        "a hole in the age bands of line: nothing for 48 to 59 months",
        "`more than 4.00 D` is not a threshold for distance acuity, each eye",
        "no source `bord` in this file",
        "`source` is missing",
        "`line.b.300+` can never speak: no child is 300 months old",
    ] {
        let found = ran.err[at..].find(part);
        assert!(found.is_some(), "{part} after byte {at} of\n{}", ran.err);
        at += found.unwrap_or(0);
    }
    let places: Vec<usize> = ran
        .err
        .lines()
        .filter_map(|l| l.trim_start().strip_prefix("--> bad.toml:"))
        .filter_map(|l| l.split(':').next()?.parse().ok())
        .collect();
    assert!(places.len() >= 9, "{}", ran.err);
    assert!(places.is_sorted(), "{places:?}");
    assert_eq!(ran.err.matches("^ expected").count(), places.len());
}

#[test]
fn new_writes_a_file_once_and_check_takes_it_once_approved() {
    let bench = Bench::new();
    let ran = bench.run(&[
        "rules",
        "new",
        "--based-on",
        "joint-policy-2016",
        "--id",
        "quillmere",
    ]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    let again = bench.run(&["rules", "new", "--id", "quillmere"]);
    assert_eq!(again.code, 2);
    assert!(again.err.contains("is there already"), "{}", again.err);
    let ran = bench.run(&["rules", "check", "quillmere.toml"]);
    assert_eq!(
        (ran.code, ran.err.matches("error: `approved").count()),
        (2, 2),
        "{}",
        ran.err
    );
    let text = bench.read("quillmere.toml");
    bench.write(
        "quillmere.toml",
        text.replace("approved_by = \"\"", "approved_by = \"Dr. R. Quill\"")
            .replace("approved_on = \"\"", "approved_on = \"2026-08-01\""),
    );
    for path in ["quillmere.toml", "."] {
        let ran = bench.run(&["rules", "check", path]);
        assert_eq!((ran.code, ran.err.as_str()), (0, ""));
        assert!(
            ran.out.contains(
                "local, approved by Dr. R. Quill on 2026-08-01, based on joint-policy-2016"
            ),
            "{}",
            ran.out
        );
    }
    for (id, expected) in [("../x", "not an id"), ("joint-policy-2016", "is taken")] {
        let ran = bench.run(&["rules", "new", "--id", id]);
        assert_eq!(ran.code, 2);
        assert!(ran.err.contains(expected), "{}", ran.err);
    }
    assert_eq!(bench.names(), ["quillmere.toml"]);
}
