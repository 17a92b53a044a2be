//! What the screens look like; each snapshot was read before it was accepted.

use crossterm::event::KeyCode;
use twoline::keys::Key;

use super::desk::Hands;

#[test]
fn look() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32");
    eprintln!("{}", h.screen());
    h.enter();
    eprintln!("{}", h.screen());
    eprintln!("{}", h.screen_at(120, 36));
    h.press(Key::f(4));
    eprintln!("{}", h.screen());
    h.key(KeyCode::Esc).enter();
    eprintln!("{}", h.screen());
}
