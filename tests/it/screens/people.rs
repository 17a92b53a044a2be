//! Finding, scanning, moving and adding children; the other places.

use crossterm::event::KeyCode;
use twoline::keys::{Command, Key};

use super::desk::Hands;

#[test]
fn a_scanned_id_brings_the_child_and_leaves_the_draft_with_its_own() {
    let mut h = Hands::sit();
    h.typed("20/2")
        .scan("Q-10484")
        .sees("PETIT, Léa")
        .sees("draft");
    h.scan("Q-10482").sees("OKAFOR, Ada");
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("20/2 ")),
        "{screen}"
    );
}

#[test]
fn a_scan_works_in_a_choice_on_the_sign_line_and_in_the_list() {
    let mut h = Hands::sit();
    h.scan("Q-10488")
        .sees("TRAN, Bảo")
        .scan("Q-10482")
        .sees("OKAFOR, Ada");
    h.typed("20")
        .enter()
        .typed("20")
        .enter()
        .scan("Q-10491")
        .sees("VEGA, Luz");
    h.scan("Q-10482")
        .misses("blurred by the lens")
        .misses("line read through");
    h.key(KeyCode::Esc).scan("Q-10483").sees("OYELARAN, Tunde");
}

#[test]
fn an_unknown_scan_changes_nothing_and_says_so() {
    let mut h = Hands::sit();
    h.typed("20/2")
        .scan("Q-99999")
        .sees("no id of this day")
        .sees("OKAFOR, Ada");
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("20/2 ")),
        "{screen}"
    );
}

#[test]
fn an_id_that_reads_as_an_acuity_needs_the_scanners_prefix() {
    let mut h = Hands::sit();
    h.scan("40").sees("20/40").sees("OKAFOR, Ada");
    h.app.session.scan_prefix = Some("*".into());
    h.scan("*40").sees("SANDS, Oliver");
}

#[test]
fn an_id_typed_by_hand_into_a_field_counts_too() {
    let mut h = Hands::sit();
    h.typed("q-10484")
        .enter()
        .sees("PETIT, Léa")
        .misses("draft");
}

#[test]
fn typing_in_the_list_finds_without_accents() {
    let mut h = Hands::sit();
    h.key(KeyCode::Esc)
        .typed("bao")
        .sees("1 found")
        .enter()
        .sees("TRAN, Bảo");
    h.key(KeyCode::Esc).typed("10491").enter().sees("VEGA, Luz");
    h.key(KeyCode::Esc)
        .typed("zzz")
        .sees("no child of this day");
    h.key(KeyCode::Esc).sees("To come 10 of 10");
}

#[test]
fn a_draft_moves_to_the_child_it_belongs_to() {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("25")
        .press(Key::f(11))
        .typed("petit")
        .sees("Q-10484")
        .enter();
    h.sees("PETIT, Léa").sees("nothing is signed yet");
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("20/20")),
        "{screen}"
    );
    h.scan("Q-10482");
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("____")),
        "{screen}"
    );
}

#[test]
fn a_signed_visit_moves_with_a_reason() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    h.scan("Q-10482")
        .press(Key::f(11))
        .typed("Q-10484")
        .enter()
        .typed("wrong child")
        .enter();
    h.sees("moved to Petit, Léa: pass")
        .sees("PETIT, Léa")
        .sees("To come 9 of 10");
    h.scan("Q-10482").misses("signed ·");
}

#[test]
fn a_child_is_added_at_the_table() {
    let mut h = Hands::sit();
    h.press(Key::f(10)).enter().sees("family name is needed");
    h.typed("Hale")
        .enter()
        .typed("Rowan")
        .enter()
        .typed("2019-13-01")
        .enter();
    h.enter().enter().sees("a date as 2020-09-01");
    h.press(Key::ctrl('u'))
        .typed("2019-05-06")
        .enter()
        .typed("1")
        .enter()
        .typed("1B")
        .enter();
    h.sees("HALE, Rowan")
        .sees("7 y 5 m")
        .sees("To come 11 of 11");
}

#[test]
fn the_palette_finds_a_command_by_its_words_and_runs_it() {
    let mut h = Hands::sit();
    h.press(Key::ctrl('p'))
        .typed("not test")
        .enter()
        .sees("distance not testable, why?");
    h.key(KeyCode::Esc)
        .press(Key::alt('k'))
        .typed("qqq")
        .sees("no matches");
}

#[test]
fn help_lists_every_key_of_the_table() {
    let mut h = Hands::sit();
    h.press(Key::char('?'))
        .sees("keys")
        .sees("DAY, A FIELD OF THE BENCH");
    let rows = twoline::keys::rows();
    assert_eq!(rows.len(), twoline::keys::TABLE.len());
    assert!(
        rows.iter()
            .any(|r| r[2] == Command::Sign.name() && r[1] == "Ctrl-S")
    );
}

#[test]
fn esc_in_a_question_leaves_the_bench_as_it_was() {
    let mut h = Hands::sit();
    h.typed("20/2");
    for key in [
        Key::f(2),
        Key::f(3),
        Key::f(4),
        Key::f(5),
        Key::f(11),
        Key::f(10),
        Key::f(1),
        Key::ctrl('p'),
    ] {
        h.press(key).key(KeyCode::Esc);
    }
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("20/2")),
        "{screen}"
    );
    assert!(!h.left);
    h.press(Key::ctrl('q'));
    assert!(h.left);
}

#[test]
fn the_other_places_show_what_is_known() {
    let mut h = Hands::sit();
    h.typed("200").enter().typed("20").enter();
    h.sees("10 lines between the eyes").enter().enter();
    h.sees("saved Okafor, Ada: refer");
    h.press(Key::alt('3')).sees("Okafor");
    h.press(Key::alt('4')).misses("reading…");
    h.press(Key::alt('5'))
        .sees("joint-policy-2016")
        .sees("us-school");
    h.press(Key::alt('2'))
        .typed("xyzzy")
        .sees("no matches")
        .key(KeyCode::Esc);
    h.typed("okafor")
        .enter()
        .sees("20/200")
        .sees("born 1 Sep 2020");
    h.press(Key::alt('1')).sees("OYELARAN, Tunde");
}

#[test]
fn the_list_of_days_opens_a_day_and_shows_the_cautions() {
    let mut h = Hands::sit();
    h.press(Key::alt('d'))
        .sees("A screening is not an eye examination")
        .sees("Quillmere East");
    h.enter().sees("OKAFOR, Ada");
    h.press(Key::alt('d'))
        .typed("n")
        .typed("QE")
        .enter()
        .typed("2026-10-28")
        .enter();
    h.typed("us-school").enter().enter().sees("28 Oct 2026");
}

#[test]
fn who_records_is_asked_once_when_it_is_not_known() {
    let (mut desk, folder) = super::desk::store(
        super::desk::ROSTER,
        twoline::domain::codes::AcuityMethod::Threshold,
    );
    desk.add_screener("TB", "T. Brandt").unwrap();
    let h = Hands::with(desk, folder);
    // The screener of the set-up is still chosen; at the next start there are two to choose from.
    drop(h.app);
    let folder = h.folder;
    let drafts = h.clerk.into_desk();
    drop(drafts);
    let options = twoline::actions::DeskOptions {
        today: Some(super::desk::day()),
        ..Default::default()
    };
    let desk = twoline::actions::Desk::open(
        &folder.path().join("store"),
        &twoline::actions::Secret::None,
        &options,
    )
    .unwrap();
    let mut h = Hands::with(desk, folder);
    h.sees("who is recording?")
        .typed("2")
        .sees("recording as T. Brandt");
}

/// Enter takes the first hit: who is still to come stands before who is done.
#[test]
fn a_find_has_the_children_to_come_first() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("20").enter();
    h.press(Key::ctrl('s'));
    h.key(KeyCode::Esc)
        .typed("o")
        .enter()
        .sees("OYELARAN, Tunde");
}

/// Why a hit matched stands beside it where it is not the name; twins are told apart on the line.
#[test]
fn a_find_says_what_matched_and_tells_namesakes_apart() {
    let roster = "\
child_id,family_name,given_name,dob,grade,class,site,guardian_phone
Q-1,Okafor,Ada,2020-09-01,1,1B,QE,555-0190
Q-2,Okafor,Ada,2019-02-11,2,2A,QE,555-0191
Q-3,Okafor,Adaeze,2020-09-01,1,1B,QE,555-0190
Q-4,Petit,Léa,,1,1C,QE,555-4190
";
    let mut h = Hands::sit_at(roster, twoline::domain::codes::AcuityMethod::Threshold);
    h.press(Key::alt('2')).typed("okafor");
    insta::assert_snapshot!("children_namesakes_80x24", h.screen());
    h.key(KeyCode::Esc)
        .typed("190")
        .sees("Petit, Léa  by phone ends 190")
        .sees("no birth date");
    insta::assert_snapshot!("children_phone_120x36", h.screen_at(120, 36));
    h.key(KeyCode::Esc)
        .typed("okofor ad")
        .sees("Okafor, Ada  by a name like okofor");
    h.key(KeyCode::Esc)
        .typed("2a")
        .sees("Okafor, Ada  by class");
}

/// Eighty columns hold the outcome with its date; who entered it is not cut off beside it.
#[test]
fn a_history_names_the_screener_in_full() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").press(Key::ctrl('s'));
    h.press(Key::alt('2')).typed("okafor").enter();
    let screen = h.screen();
    assert!(screen.contains("rescreen by "), "{screen}");
    assert!(screen.contains("J. Imani, east"), "{screen}");
}
