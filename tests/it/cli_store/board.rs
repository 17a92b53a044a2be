//! `twoline report board`: the day board on the command line.

use super::Bench;

#[test]
fn the_board_in_words_and_as_a_table() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let words = bench.ok(&["report", "board"]);
    assert!(words.contains("Seen 0 of 5, 5 to come"), "{words}");
    assert!(words.contains("No station has signed"), "{words}");
    bench.ok(&[
        "record",
        "Q-1",
        "distance_right=20/20",
        "distance_left=20/80",
        "--sign",
    ]);
    bench.ok(&["record", "Q-5", "status=absent", "--sign"]);
    let words = bench.ok(&["report", "board", "--site", "QE"]);
    for expected in [
        "Seen 1 of 5, 3 to come",
        "east",
        "from 20 children on",
        "1 of 1 100.0%",
    ] {
        assert!(words.contains(expected), "{expected}\n{words}");
    }
    let csv = bench.ok(&["report", "board", "--format", "csv", "--exact"]);
    let rows = super::super::cli::rows(&csv);
    let of = |part: &str, name: &str| {
        rows.iter()
            .find(|r| r["part"] == part && r["name"] == name)
            .unwrap_or_else(|| panic!("no {part} {name}\n{csv}"))
    };
    let day = of("day", "Quillmere East");
    let cells = [
        "children",
        "seen",
        "to_come",
        "refer",
        "opted_out",
        "absent",
    ];
    assert_eq!(
        cells.map(|c| day[c].as_str()),
        ["5", "1", "3", "1", "1", "0"]
    );
    assert_eq!(of("class", "1B")["to_come"], "1");
    let east = of("station", "east");
    assert_eq!(east["refer_or_rescreen"], "1");
    assert_eq!(east["expected"], "", "one child is no number");
    assert!(
        bench
            .refused(&["report", "board", "--date", "2026-10-15"])
            .contains("no such screening day")
    );
}
