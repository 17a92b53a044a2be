//! One writer: a second one waits, then says who holds the store; readers read on.

use std::process::Stdio;
use std::time::Duration;

use twoline::actions::{Desk, DeskOptions, Secret};

use super::{Bench, Ran};

fn hold(bench: &Bench) -> Desk {
    Desk::open(&bench.path("store"), &Secret::None, &DeskOptions::default()).expect("the store")
}

#[test]
fn a_second_writer_gives_up_and_names_the_holder() {
    let bench = Bench::with_children();
    let head = bench.head();
    let writer = hold(&bench);
    let ran = bench.run(&["site", "add", "QW", "--name", "Quillmere West"]);
    assert_eq!(ran.code, 1, "{}{}", ran.out, ran.err);
    let holder = format!("process {}", std::process::id());
    assert!(
        ran.err.contains(&holder) && ran.err.contains("hint: "),
        "{}",
        ran.err
    );
    // Reading goes on meanwhile, and says who writes.
    let ran = bench.run(&["child", "find", "okafor"]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(
        ran.out.contains("Q-2") && ran.err.contains(&holder),
        "{}{}",
        ran.out,
        ran.err
    );
    drop(writer);
    assert_eq!(bench.head(), head);
    assert_eq!(
        bench.run(&["child", "find", "okafor"]).err,
        "",
        "nobody writes any more"
    );
}

#[test]
fn a_second_writer_waits_for_the_first() {
    let bench = Bench::with_children();
    let writer = hold(&bench);
    let waiting = bench
        .command(&["site", "add", "QW", "--name", "Quillmere West"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("it runs");
    std::thread::sleep(Duration::from_millis(600));
    drop(writer);
    let ran = Ran::from(waiting.wait_with_output().expect("it ends"));
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(ran.out.contains("added site QW"), "{}", ran.out);
}
