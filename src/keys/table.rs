//! The table itself, in the order of the help page and of the foot line.

use crossterm::event::KeyCode;

use super::{Binding, Command as K, Context as C, Key};

const fn on(
    context: C,
    command: K,
    keys: &'static [Key],
    foot: &'static str,
    help: &'static str,
) -> Binding {
    Binding {
        command,
        context,
        keys,
        foot,
        help,
    }
}

const ENTER: Key = Key::plain(KeyCode::Enter);
const ESC: Key = Key::plain(KeyCode::Esc);
const TAB: Key = Key::plain(KeyCode::Tab);
const BACKTAB: Key = Key::plain(KeyCode::BackTab);
const UP: Key = Key::plain(KeyCode::Up);
const DOWN: Key = Key::plain(KeyCode::Down);
const LEFT: Key = Key::plain(KeyCode::Left);
const RIGHT: Key = Key::plain(KeyCode::Right);
const PAGE_UP: Key = Key::plain(KeyCode::PageUp);
const PAGE_DOWN: Key = Key::plain(KeyCode::PageDown);
const HOME: Key = Key::plain(KeyCode::Home);
const END: Key = Key::plain(KeyCode::End);
const BACKSPACE: Key = Key::plain(KeyCode::Backspace);
const DELETE: Key = Key::plain(KeyCode::Delete);

/// Every command with its keys.
#[rustfmt::skip]
pub const TABLE: &[Binding] = &[
    // The bench.
    on(C::Bench, K::Accept, &[ENTER], "next, or sign", "Takes the value and goes on; on the last line signs the visit and brings the next child"),
    on(C::Bench, K::NextField, &[TAB], "", "Goes to the next field, optional tests included"),
    on(C::Bench, K::PreviousField, &[BACKTAB], "", "Goes to the field before"),
    on(C::Bench, K::Better, &[UP], "", "Moves to the better line, starting above the pass line; in a choice, to the one before"),
    on(C::Bench, K::Worse, &[DOWN], "", "Moves to the worse line, starting on the pass line; in a choice, to the next"),
    on(C::Bench, K::OtherEyeLeft, &[LEFT], "", "Goes to the right eye's field, on the left-hand side"),
    on(C::Bench, K::OtherEyeRight, &[RIGHT], "", "Goes to the left eye's field, on the right-hand side"),
    on(C::Bench, K::Erase, &[BACKSPACE], "", "Erases the last character, or a chosen value"),
    on(C::Bench, K::ClearField, &[DELETE, Key::ctrl('u')], "", "Empties the field"),
    on(C::Bench, K::ToList, &[ESC], "list", "Goes to the list of children; what was typed stays as a draft"),
    // The list of children.
    on(C::List, K::Open, &[ENTER], "to the bench", "Brings the child to the bench"),
    on(C::List, K::ListUp, &[UP], "", "Goes one child up"),
    on(C::List, K::ListDown, &[DOWN], "", "Goes one child down"),
    on(C::List, K::PageUp, &[PAGE_UP], "", "Goes one page up"),
    on(C::List, K::PageDown, &[PAGE_DOWN], "", "Goes one page down"),
    on(C::List, K::First, &[HOME], "", "Goes to the first child"),
    on(C::List, K::Last, &[END], "", "Goes to the last child"),
    on(C::List, K::EraseFind, &[BACKSPACE], "", "Erases the last letter of the find"),
    on(C::List, K::ClearFind, &[ESC], "back", "Ends the find; without one goes back to the bench"),
    on(C::List, K::ToBench, &[TAB, RIGHT], "", "Goes back to the child on the bench"),
    // The Day place.
    on(C::Day, K::Sign, &[Key::ctrl('s')], "", "Signs the visit from any field"),
    on(C::Day, K::NotTestable, &[Key::f(2), Key::alt('n')], "not testable", "Records an eye as not testable, with the reason"),
    on(C::Day, K::NotPresent, &[Key::f(3), Key::alt('p')], "not present", "Records absent, opted out, not attempted, left early, under care, or glasses not here"),
    on(C::Day, K::Why, &[Key::f(4), Key::alt('w')], "reason", "Shows every criterion with its reading, answer, margin and source"),
    on(C::Day, K::Signs, &[Key::f(5), Key::alt('s')], "signs", "Chooses the signs seen; an emergency is saved at once"),
    on(C::Day, K::Swap, &[Key::f(6), Key::alt('x')], "swap eyes", "Swaps right and left acuity; after signing as a correction with a reason"),
    on(C::Day, K::Move, &[Key::f(11), Key::alt('m')], "move", "Moves what was entered to another child"),
    on(C::Day, K::Correct, &[Key::ctrl('e'), Key::alt('c')], "correct", "Corrects a signed value, with the reason"),
    on(C::Day, K::Tests, &[Key::f(12), Key::alt('t')], "", "Brings another test to the bench, or goes to it"),
    on(C::Day, K::SecondTry, &[Key::alt('r')], "", "Enters a second try of a child who was not testable; both tries stay"),
    on(C::Day, K::Note, &[Key::f(7), Key::alt('o')], "note", "Writes one line of note for the visit; it is kept and shown, never judged"),
    on(C::Day, K::ValueHistory, &[Key::alt('v')], "", "Shows every value that the field under the cursor had: who, when and why"),
    on(C::Day, K::Discreet, &[Key::alt('i')], "", "Keeps outcomes, reasons and notes off the screen, or shows them again"),
    on(C::Day, K::Station, &[], "", "Sets the one test of this station, whether it is masked, and its chart"),
    on(C::Day, K::AddChild, &[Key::f(10), Key::alt('a')], "add", "Adds a child who is not on the roster"),
    on(C::Day, K::Undo, &[Key::ctrl('z')], "undo", "Undoes the last edit; with none, offers to take back the last signature"),
    on(C::Day, K::NextChild, &[Key::ctrl('n')], "", "Brings the next child to come"),
    on(C::Day, K::ShowAll, &[Key::alt('l')], "", "Lists all children of the day, or only those to come"),
    on(C::Day, K::Days, &[Key::alt('d')], "", "Goes back to the list of days"),
    on(C::Day, K::Board, &[Key::f(8), Key::alt('b')], "board", "Shows how the day stands, by class and by station, and when it will end"),
    // The day board.
    on(C::Board, K::ListDown, &[DOWN], "scroll", "Scrolls down"),
    on(C::Board, K::ListUp, &[UP], "", "Scrolls up"),
    on(C::Board, K::PageUp, &[PAGE_UP], "", "Scrolls one page up"),
    on(C::Board, K::PageDown, &[PAGE_DOWN], "", "Scrolls one page down"),
    on(C::Board, K::First, &[HOME], "", "Goes to the top"),
    on(C::Board, K::Last, &[END], "", "Goes to the stations, at the end"),
    on(C::Board, K::Cancel, &[ESC, Key::f(8), Key::alt('b')], "back", "Goes back to the bench"),
    // The other places.
    on(C::Days, K::Open, &[ENTER], "open the day", "Opens the day"),
    on(C::Days, K::ListUp, &[UP], "", "Goes one day up"),
    on(C::Days, K::ListDown, &[DOWN], "", "Goes one day down"),
    on(C::Days, K::OpenDay, &[Key::char('n')], "new day", "Opens a new screening day"),
    on(C::Children, K::Open, &[ENTER], "history", "Shows the child's history"),
    on(C::Children, K::ListUp, &[UP], "", "Goes one child up"),
    on(C::Children, K::ListDown, &[DOWN], "", "Goes one child down"),
    on(C::Children, K::PageUp, &[PAGE_UP], "", "Scrolls the history up"),
    on(C::Children, K::PageDown, &[PAGE_DOWN], "scroll", "Scrolls the history down"),
    on(C::Children, K::EraseFind, &[BACKSPACE], "", "Erases the last letter of the find"),
    on(C::Children, K::ClearFind, &[ESC], "clear", "Empties the find"),
    on(C::Referrals, K::Open, &[ENTER], "history", "Shows the child's history in Children"),
    on(C::Referrals, K::ListUp, &[UP], "", "Goes one child up"),
    on(C::Referrals, K::ListDown, &[DOWN], "next", "Goes one child down"),
    on(C::Referrals, K::PageUp, &[PAGE_UP], "", "Goes one page up"),
    on(C::Referrals, K::PageDown, &[PAGE_DOWN], "", "Goes one page down"),
    on(C::Tables, K::ListUp, &[UP], "", "Scrolls up"),
    on(C::Tables, K::ListDown, &[DOWN], "scroll", "Scrolls down"),
    on(C::Tables, K::PageUp, &[PAGE_UP], "", "Scrolls one page up"),
    on(C::Tables, K::PageDown, &[PAGE_DOWN], "", "Scrolls one page down"),
    on(C::Rules, K::ListUp, &[UP], "", "Goes to the rule set before"),
    on(C::Rules, K::ListDown, &[DOWN], "next rule set", "Goes to the next rule set"),
    on(C::Rules, K::PageUp, &[PAGE_UP], "", "Scrolls the sheet up"),
    on(C::Rules, K::PageDown, &[PAGE_DOWN], "scroll", "Scrolls the sheet down"),
    on(C::Rules, K::CompareSets, &[Key::char('c')], "compare", "Marks the rule set; pressed on a second one, compares the two on the children of this term"),
    on(C::Rules, K::OneKind, &[Key::char('f')], "one kind", "Lists one kind of rule set after the other, then all again"),
    on(C::Compare, K::ListUp, &[UP], "", "Goes to the threshold before"),
    on(C::Compare, K::ListDown, &[DOWN], "threshold", "Goes to the next threshold"),
    on(C::Compare, K::Stricter, &[LEFT], "stricter", "Moves the threshold to a stricter place; nothing is written"),
    on(C::Compare, K::Milder, &[RIGHT], "milder", "Moves the threshold to a milder place; nothing is written"),
    on(C::Compare, K::OtherSet, &[TAB], "other set", "Goes to the thresholds of the other set"),
    on(C::Compare, K::PutBack, &[Key::char('r')], "put back", "Puts every threshold back where its file has it"),
    on(C::Compare, K::PageUp, &[PAGE_UP], "", "Scrolls the counts up"),
    on(C::Compare, K::PageDown, &[PAGE_DOWN], "", "Scrolls the counts down"),
    on(C::Compare, K::Cancel, &[ESC], "back", "Goes back to the rule sets"),
    // Questions.
    on(C::Choices, K::Choose, &[ENTER], "choose", "Takes the choice; its own key does the same"),
    on(C::Choices, K::ChoiceUp, &[UP], "", "Goes to the choice before"),
    on(C::Choices, K::ChoiceDown, &[DOWN], "", "Goes to the next choice"),
    on(C::Choices, K::Scope, &[TAB], "", "Goes through right eye, left eye, both eyes, where an eye is asked for"),
    on(C::Choices, K::Cancel, &[ESC], "back", "Closes the question; nothing is lost"),
    on(C::Signs, K::Submit, &[ENTER], "done", "Takes the signs that are marked (or the one under the cursor)"),
    on(C::Signs, K::Toggle, &[Key::char(' ')], "mark", "Marks or unmarks the sign"),
    on(C::Signs, K::SideRight, &[Key::char('r')], "right eye", "Marks the sign in the right eye"),
    on(C::Signs, K::SideLeft, &[Key::char('l')], "left eye", "Marks the sign in the left eye"),
    on(C::Signs, K::SideBoth, &[Key::char('b')], "", "Marks the sign in both eyes"),
    on(C::Signs, K::NoneSeen, &[Key::char('n')], "none seen", "Says that somebody looked and saw none"),
    on(C::Signs, K::ChoiceUp, &[UP], "", "Goes to the sign before"),
    on(C::Signs, K::ChoiceDown, &[DOWN], "", "Goes to the next sign"),
    on(C::Signs, K::Cancel, &[ESC], "back", "Closes the choice; nothing is changed"),
    on(C::Form, K::Submit, &[ENTER], "next, or done", "Goes to the next field; in the last one finishes"),
    on(C::Form, K::FormNext, &[TAB, DOWN], "", "Goes to the next field"),
    on(C::Form, K::FormPrevious, &[BACKTAB, UP], "", "Goes to the field before"),
    on(C::Form, K::Cancel, &[ESC], "back", "Closes the question; the bench is untouched"),
    on(C::Locked, K::Submit, &[ENTER], "", "Opens the lock with what was typed: the passphrase, or the day PIN for Day alone"),
    on(C::Locked, K::Erase, &[BACKSPACE], "", "Erases the last character"),
    on(C::Locked, K::ClearField, &[DELETE, Key::ctrl('u')], "", "Empties the field"),
    on(C::Locked, K::Cancel, &[ESC], "", "Goes back, where the question is not the lock itself"),
    on(C::Page, K::ListDown, &[DOWN], "scroll", "Scrolls down"),
    on(C::Page, K::ListUp, &[UP], "", "Scrolls up"),
    on(C::Page, K::PageUp, &[PAGE_UP], "", "Scrolls one page up"),
    on(C::Page, K::PageDown, &[PAGE_DOWN], "", "Scrolls one page down"),
    on(C::Page, K::Cancel, &[ESC, ENTER, Key::char('q')], "back", "Closes the page"),
    // Places and everything else.
    on(C::Places, K::Told, &[Key::f(9), Key::alt('u')], "", "Enters who was told of an emergency, when and by whom"),
    on(C::Places, K::PlaceDay, &[Key::alt('1')], "", "Goes to Day"),
    on(C::Places, K::PlaceChildren, &[Key::alt('2')], "", "Goes to Children"),
    on(C::Places, K::PlaceReferrals, &[Key::alt('3')], "", "Goes to Referrals"),
    on(C::Places, K::PlaceTerm, &[Key::alt('4')], "", "Goes to Term"),
    on(C::Places, K::PlaceRules, &[Key::alt('5')], "", "Goes to Rules"),
    on(C::Places, K::Palette, &[Key::ctrl('p'), Key::alt('k')], "palette", "Finds a command by its words or its keys"),
    on(C::Places, K::Help, &[Key::char('?'), Key::f(1), Key::alt('h')], "keys", "Shows all keys"),
    on(C::Places, K::Screener, &[Key::alt('y')], "", "Changes who is recording"),
    on(C::Places, K::Suspend, &[], "", "Gives the terminal back until the program is woken; drafts are saved, and it locks"),
    on(C::Places, K::Lock, &[Key::ctrl('x')], "", "Locks the screen; drafts are saved"),
    on(C::Places, K::DayPin, &[], "", "Sets a day PIN of six digits, which opens Day alone after a lock"),
    on(C::Places, K::Theme, &[], "", "Changes the colors: light, dark, contrast or plain"),
    on(C::Places, K::Tour, &[Key::alt('g')], "", "Begins the tour of the demo, or leaves it"),
    on(C::Places, K::Redraw, &[Key::ctrl('l')], "", "Draws the whole screen anew"),
    on(C::Everywhere, K::Quit, &[Key::ctrl('q'), Key::ctrl('c')], "", "Leaves; drafts are kept"),
];
