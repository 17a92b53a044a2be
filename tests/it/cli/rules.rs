//! `twoline rules`, help and usage.

use super::Bench;

#[test]
fn the_list_names_every_rule_set_and_protocol() {
    let ran = Bench::new().run(&["rules", "list"]);
    assert_eq!((ran.code, ran.err.as_str()), (0, ""));
    let library = twoline::rules::Library::shipped();
    let ids: Vec<String> = library
        .rule_sets()
        .map(|s| s.id.to_string())
        .chain(library.protocols().map(|p| p.id.to_string()))
        .collect();
    assert!(ids.len() >= 11, "{ids:?}");
    for id in ids {
        assert!(ran.out.contains(&id), "{id}");
        let shown = Bench::new().run(&["rules", "show", &id]);
        assert_eq!(shown.code, 0);
        assert!(shown.out.contains(&id), "{}", shown.out);
        assert!(!shown.out.contains(|c: char| c.is_control() && c != '\n'));
    }
}

#[test]
fn a_rule_set_is_shown_with_thresholds_and_sources() {
    let ran = Bench::new().run(&["rules", "show", "joint-policy-2016"]);
    assert_eq!(ran.code, 0);
    for word in [
        "worse than 20/50",
        "worse than 20/32",
        "10.1542/peds.2015-3597",
        "from memory",
    ] {
        assert!(ran.out.contains(word), "{word} in {}", ran.out);
    }
}

#[test]
fn an_unknown_id_is_suggested() {
    let ran = Bench::new().run(&["rules", "show", "us-scool"]);
    assert_eq!(
        (ran.code, ran.err.as_str()),
        (
            2,
            "error: no rule set or protocol \"us-scool\"\nhint: did you mean us-school? twoline rules list shows all of them\n"
        )
    );
}

#[test]
fn usage_is_code_2_and_help_is_code_0() {
    let bench = Bench::new();
    assert_eq!(bench.run(&["judge"]).code, 2);
    assert_eq!(bench.run(&["--today", "tomorrow", "rules", "list"]).code, 2);
    let ran = bench.run(&["--help"]);
    assert_eq!((ran.code, ran.err.as_str()), (0, ""));
    assert!(ran.out.contains("judge"));
}

#[test]
fn a_bad_local_rule_file_is_shown_where_it_is_wrong() {
    let bench = Bench::new();
    bench.write("local.toml", "id = \"x\"\nkind = \n");
    let ran = bench.run(&["rules", "list", "--rule-file", "local.toml"]);
    assert_eq!(ran.code, 2);
    assert!(ran.err.contains("local.toml:2:"), "{}", ran.err);
    assert_eq!(
        bench
            .run(&["rules", "list", "--rule-file", "gone.toml"])
            .code,
        2
    );
}
