//! The Referrals place as a worklist.

use crossterm::event::KeyCode;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER, store};

/// Two referred children, one due to come back, with a triage set chosen.
fn with_referrals() -> Hands {
    let (mut desk, folder) = store(ROSTER, AcuityMethod::Threshold);
    desk.set("triage", "south-australia-acuity").unwrap();
    let mut h = Hands::with(desk, folder);
    // The question about so many lines between the eyes costs one Enter.
    h.typed("200").enter().typed("20").enter().enter().enter();
    h.scan("Q-10484");
    h.typed("20").enter().typed("100").enter().enter().enter();
    h.scan("Q-10483");
    h.typed("20").enter().typed("32").enter().enter();
    h
}

#[test]
fn the_worklist_says_why_a_child_stands_where_it_stands() {
    let mut h = with_referrals();
    h.press(Key::alt('3'))
        .sees("Referrals 2 · 0 late")
        .sees("clinic bands: South Australia, acuity")
        .sees("▸ in 30 days   Okafor, Ada")
        .sees("act by 13 Nov 2026; waiting 0 days")
        .sees("Order: emergencies")
        .sees("due to come back: 1");
    insta::assert_snapshot!("referrals_120x36", h.screen_at(120, 36));
    insta::assert_snapshot!("referrals_bands_80x24", h.screen());
    h.key(KeyCode::Down).sees("▸ in 90 days   Petit, Léa");
    h.key(KeyCode::Down).sees("▸ Oyelaran, Tunde");
    h.key(KeyCode::Up).enter().sees("PETIT, Léa").sees("20/100");
    h.sees("clinic band within 90 days (South Australia, acuity; on presenting acuity");
}

#[test]
fn the_whole_reason_shows_the_band() {
    let mut h = with_referrals();
    h.scan("Q-10482").press(Key::f(4));
    for _ in 0..60 {
        if h.screen().contains("the band means best-corrected") {
            break;
        }
        h.key(KeyCode::Down);
    }
    h.sees("clinic band (South Australia, acuity): within 30 days, acuity");
    for _ in 0..30 {
        h.key(KeyCode::Down);
    }
    h.sees("on presenting acuity; the band means best-corrected");
}
