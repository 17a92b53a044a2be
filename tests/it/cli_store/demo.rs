//! The demo: made once, opened again at its own day, made anew only where it is a demo.

use super::Bench;

#[test]
fn made_opened_again_and_made_anew() {
    let bench = Bench::empty();
    let demo = |args: &[&str]| {
        let mut command = bench.command(&[]);
        // On the clock's own day unless the arguments say another.
        let mut fresh = std::process::Command::new(command.get_program());
        fresh
            .current_dir(bench.folder.path())
            .env("TWOLINE_STORE", bench.path("store"))
            .stdin(std::process::Stdio::null())
            .arg("demo")
            .arg("--no-screens")
            .args(args);
        command = fresh;
        super::Ran::from(command.output().expect("it runs"))
    };
    let ran = demo(&["--today", "2026-10-14"]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(
        ran.out.contains("not protected") && ran.out.contains("2026-10-14"),
        "{}",
        ran.out
    );
    let head = bench.head();
    let ran = demo(&[]);
    assert!(
        ran.out.contains("2026-10-14"),
        "its own latest day: {}",
        ran.out
    );
    assert_eq!(bench.head(), head, "opened, not made again");
    let rows = bench.report(&[]);
    assert!(
        rows.len() > 100 && rows.iter().any(|r| r["outcome"] == "pass"),
        "{}",
        rows.len()
    );
    assert_eq!(
        demo(&["--seed", "7"]).code,
        2,
        "a demo that is there keeps its seed"
    );

    let without = bench.refused(&["demo", "--fresh"]);
    assert!(without.contains("need a terminal"), "{without}");
    assert_eq!(bench.head(), head, "no terminal, nothing made anew");
    bench.write("store/mine.txt", "stays");
    let ran = demo(&["--fresh", "--seed", "7", "--today", "2026-11-02"]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(ran.out.contains("2026-11-02"), "{}", ran.out);
    assert_ne!(bench.head(), head);
    assert_eq!(bench.read("store/mine.txt"), "stays");
}

#[cfg(target_os = "linux")]
#[test]
fn without_a_folder_it_lies_in_the_data_folder() {
    let bench = Bench::empty();
    let ran = super::Ran::from(
        bench
            .command(&["demo", "--no-screens"])
            .env_remove("TWOLINE_STORE")
            .output()
            .expect("it runs"),
    );
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(
        bench.path("data/twoline/demo/store.key").exists(),
        "{}",
        ran.out
    );
    assert!(!bench.path("data/twoline/store.key").exists());
}
