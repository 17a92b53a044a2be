//! The one declaration of commands and keys.
//!
//! Dispatch, the foot line, the `?` page, the palette, `twoline keys` and the table of the README
//! all read [`TABLE`]. Each function key has a twin with Alt, for keyboards and terminals that
//! keep the function keys to themselves.

mod table;

use std::fmt;

use crossterm::event::{KeyCode, KeyEvent, KeyModifiers};

pub use table::TABLE;

/// One key press, without the differences between terminals.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Key {
    /// The key.
    pub code: KeyCode,
    /// Whether Ctrl is held.
    pub ctrl: bool,
    /// Whether Alt is held.
    pub alt: bool,
}

impl Key {
    /// Returns a key pressed alone.
    pub const fn plain(code: KeyCode) -> Key {
        Key {
            code,
            ctrl: false,
            alt: false,
        }
    }

    /// Returns a printable key.
    pub const fn char(c: char) -> Key {
        Key::plain(KeyCode::Char(c))
    }

    /// Returns a function key.
    pub const fn f(n: u8) -> Key {
        Key::plain(KeyCode::F(n))
    }

    /// Returns a letter with Alt.
    pub const fn alt(c: char) -> Key {
        Key {
            code: KeyCode::Char(c),
            ctrl: false,
            alt: true,
        }
    }

    /// Returns a letter with Ctrl.
    pub const fn ctrl(c: char) -> Key {
        Key {
            code: KeyCode::Char(c),
            ctrl: true,
            alt: false,
        }
    }

    /// Returns the key of a terminal's event.
    pub fn of(event: &KeyEvent) -> Key {
        let ctrl = event.modifiers.contains(KeyModifiers::CONTROL);
        let alt = event.modifiers.contains(KeyModifiers::ALT);
        let code = match event.code {
            // AltGr arrives as Ctrl and Alt together on some keyboards: it types a character.
            KeyCode::Char(c) if ctrl && alt => {
                return if c.is_ascii_alphanumeric() {
                    Key {
                        code: KeyCode::Char(c.to_ascii_lowercase()),
                        ctrl,
                        alt,
                    }
                } else {
                    Key::char(c)
                };
            }
            KeyCode::Char(c) if ctrl || alt => KeyCode::Char(c.to_ascii_lowercase()),
            KeyCode::Tab if event.modifiers.contains(KeyModifiers::SHIFT) => KeyCode::BackTab,
            code => code,
        };
        Key { code, ctrl, alt }
    }

    /// Returns the character that this key types, if it types one.
    pub fn typed(self) -> Option<char> {
        match self.code {
            KeyCode::Char(c) if !self.ctrl && !self.alt => Some(c),
            _ => None,
        }
    }
}

impl fmt::Display for Key {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.ctrl {
            f.write_str("Ctrl-")?;
        }
        if self.alt {
            f.write_str("Alt-")?;
        }
        match self.code {
            KeyCode::Char(' ') => f.write_str("Space"),
            KeyCode::Char(c) if self.ctrl => write!(f, "{}", c.to_ascii_uppercase()),
            KeyCode::Char(c) => write!(f, "{c}"),
            KeyCode::F(n) => write!(f, "F{n}"),
            KeyCode::Up => f.write_str("↑"),
            KeyCode::Down => f.write_str("↓"),
            KeyCode::Left => f.write_str("←"),
            KeyCode::Right => f.write_str("→"),
            KeyCode::PageUp => f.write_str("PgUp"),
            KeyCode::PageDown => f.write_str("PgDn"),
            KeyCode::BackTab => f.write_str("Shift-Tab"),
            KeyCode::Backspace => f.write_str("Backspace"),
            other => write!(f, "{other:?}"),
        }
    }
}

macro_rules! contexts {
    ($($(#[$doc:meta])* $name:ident = $title:literal, [$($above:ident),*];)+) => {
        /// Where a key means something.
        #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
        pub enum Context { $($(#[$doc])* $name,)+ }

        impl Context {
            /// Every context, in the order of the help page.
            pub const ALL: &'static [Context] = &[$(Context::$name,)+];

            /// Returns the heading of the context.
            pub fn title(self) -> &'static str {
                match self { $(Context::$name => $title,)+ }
            }

            /// Returns the contexts that are live while this one has the focus, nearest first.
            pub fn stack(self) -> &'static [Context] {
                match self { $(Context::$name => &[Context::$name, $(Context::$above,)*],)+ }
            }
        }
    };
}

contexts! {
    /// In a field of the bench.
    Bench = "Day, a field of the bench", [Day, Places, Everywhere];
    /// In the list of children of a day.
    List = "Day, list of children", [Day, Places, Everywhere];
    /// In the Day place, whatever has the focus.
    Day = "Day", [Places, Everywhere];
    /// On the day board.
    Board = "Day, the day board", [Places, Everywhere];
    /// In the list of days.
    Days = "Day, list of days", [Places, Everywhere];
    /// In the Children place.
    Children = "Children", [Places, Everywhere];
    /// In the worklist of the Referrals place.
    Referrals = "Referrals", [Places, Everywhere];
    /// In the table of the Term place.
    Tables = "Term", [Places, Everywhere];
    /// In the Rules place.
    Rules = "Rules", [Places, Everywhere];
    /// Where two rule sets are compared.
    Compare = "comparing rule sets", [Places, Everywhere];
    /// In every place while no question is open.
    Places = "in every place", [Everywhere];
    /// In a question with choices.
    Choices = "a question with choices", [Everywhere];
    /// In the choice of signs.
    Signs = "choosing signs", [Everywhere];
    /// In a question with fields to type into.
    Form = "a question with fields", [Everywhere];
    /// On the locked screen.
    Locked = "the locked screen", [Everywhere];
    /// In a page to read.
    Page = "a page to read", [Everywhere];
    /// Always.
    Everywhere = "everywhere", [];
}

macro_rules! commands {
    ($($name:ident = $word:literal;)+) => {
        /// Something a person can ask the screens to do.
        #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
        #[allow(missing_docs)]
        pub enum Command { $($name,)+ }

        impl Command {
            /// Every command, in the order of the declaration.
            pub const ALL: &'static [Command] = &[$(Command::$name,)+];

            /// Returns the command's name in tables.
            pub fn name(self) -> &'static str {
                match self { $(Command::$name => $word,)+ }
            }
        }
    };
}

commands! {
    Sign = "sign"; Accept = "accept"; NextField = "next-field"; PreviousField = "previous-field";
    Better = "better-line"; Worse = "worse-line"; OtherEyeLeft = "go-right-eye";
    OtherEyeRight = "go-left-eye"; Erase = "erase"; ClearField = "clear-field"; ToList = "to-list";
    NotTestable = "not-testable"; NotPresent = "not-present"; Why = "whole-reason"; Signs = "signs";
    Swap = "swap-eyes"; Move = "move-to-child"; Correct = "correct"; AddChild = "add-child";
    Undo = "undo"; NextChild = "next-child"; ShowAll = "show-all"; Told = "urgent-told"; Board = "day-board";
    ListUp = "up"; ListDown = "down"; PageUp = "page-up"; PageDown = "page-down"; First = "first";
    Last = "last"; Open = "open"; ClearFind = "clear-find"; EraseFind = "erase-find";
    ToBench = "to-bench"; OpenDay = "open-day"; Days = "days"; Screener = "screener";
    Help = "keys"; Palette = "palette"; PlaceDay = "day"; PlaceChildren = "children";
    PlaceReferrals = "referrals"; PlaceTerm = "term"; PlaceRules = "rules"; Suspend = "suspend";
    Redraw = "redraw"; Quit = "quit"; Choose = "choose"; Cancel = "cancel"; ChoiceUp = "choice-up";
    ChoiceDown = "choice-down"; Scope = "scope"; Toggle = "toggle"; SideRight = "side-right";
    SideLeft = "side-left"; SideBoth = "side-both"; NoneSeen = "none-seen"; Submit = "submit";
    FormNext = "form-next"; FormPrevious = "form-previous"; CompareSets = "compare";
    OneKind = "one-kind"; Stricter = "stricter"; Milder = "milder"; OtherSet = "other-set";
    PutBack = "put-back"; Tests = "other-tests"; SecondTry = "second-try";
    Note = "note"; ValueHistory = "value-history"; Discreet = "discreet";
    Station = "station"; Lock = "lock"; DayPin = "set-day-pin"; Theme = "theme"; Tour = "tour";
}

/// One line of the table: what a command is called, where and by which keys.
#[derive(Debug, Clone, Copy)]
pub struct Binding {
    /// The command.
    pub command: Command,
    /// Where.
    pub context: Context,
    /// The keys, the one to show first.
    pub keys: &'static [Key],
    /// The word for the foot line; empty keeps it out.
    pub foot: &'static str,
    /// One line for help and palette.
    pub help: &'static str,
}

/// Returns the command of a key while a context has the focus.
pub fn command(context: Context, key: Key) -> Option<Command> {
    context.stack().iter().find_map(|live| {
        TABLE
            .iter()
            .find(|b| b.context == *live && b.keys.contains(&key))
            .map(|b| b.command)
    })
}

/// Returns the foot line of a context as (key, word), the nearest first and the help last.
pub fn foot(context: Context) -> Vec<(String, &'static str)> {
    context
        .stack()
        .iter()
        .flat_map(|live| TABLE.iter().filter(move |b| b.context == *live))
        .filter(|b| !b.foot.is_empty())
        .filter_map(|b| b.keys.first().map(|key| (key.to_string(), b.foot)))
        .collect()
}

/// Returns what the palette offers: the commands that need no cursor, each once, with where it works.
pub fn palette() -> Vec<&'static Binding> {
    let mut seen = Vec::new();
    TABLE
        .iter()
        .filter(|b| {
            matches!(
                b.context,
                Context::Day | Context::Places | Context::Everywhere | Context::Days
            )
        })
        .filter(|b| {
            !matches!(
                b.command,
                Command::Palette | Command::Open | Command::ListUp | Command::ListDown
            )
        })
        .filter(|b| {
            let new = !seen.contains(&b.command);
            seen.push(b.command);
            new
        })
        .collect()
}

/// Returns the whole table as rows (where, keys, command, what it does), for `twoline keys`, the
/// help page and the README.
pub fn rows() -> Vec<[String; 4]> {
    Context::ALL
        .iter()
        .flat_map(|context| TABLE.iter().filter(move |b| b.context == *context))
        .map(|b| {
            [
                b.context.title().to_owned(),
                keys_text(b),
                b.command.name().to_owned(),
                b.help.to_owned(),
            ]
        })
        .collect()
}

/// Returns the keys of a binding as text (`F2, Alt-n`), or `palette` when it has none.
pub fn keys_text(binding: &Binding) -> String {
    if binding.keys.is_empty() {
        return "palette".into();
    }
    binding
        .keys
        .iter()
        .map(Key::to_string)
        .collect::<Vec<_>>()
        .join(", ")
}

#[cfg(test)]
#[allow(clippy::panic)]
mod tests {
    use super::*;

    #[test]
    fn no_key_means_two_things_where_both_are_live() {
        for context in Context::ALL {
            let mut seen: Vec<(Key, &Binding)> = Vec::new();
            for binding in TABLE
                .iter()
                .filter(|b| context.stack().contains(&b.context))
            {
                for key in binding.keys {
                    if let Some((_, other)) = seen.iter().find(|(k, _)| k == key) {
                        panic!(
                            "{key} is both {} and {} in {}",
                            other.command.name(),
                            binding.command.name(),
                            context.title()
                        );
                    }
                    seen.push((*key, binding));
                }
            }
        }
    }

    #[test]
    fn each_function_key_has_a_twin_with_alt() {
        for binding in TABLE {
            if binding.keys.iter().any(|k| matches!(k.code, KeyCode::F(_))) {
                assert!(
                    binding.keys.iter().any(|k| k.alt),
                    "{} has no Alt twin",
                    binding.command.name()
                );
            }
        }
    }

    #[test]
    fn every_command_is_in_the_table_and_says_what_it_does() {
        for command in Command::ALL {
            let lines: Vec<_> = TABLE.iter().filter(|b| b.command == *command).collect();
            assert!(!lines.is_empty(), "{} has no line", command.name());
            assert!(lines.iter().all(|b| !b.help.is_empty()));
        }
    }

    #[test]
    fn a_text_field_is_never_robbed_of_a_letter() {
        let written = ('a'..='z')
            .chain('A'..='Z')
            .chain('0'..='9')
            .chain("/-+.<>= ".chars());
        for c in written {
            for context in [
                Context::Bench,
                Context::List,
                Context::Children,
                Context::Form,
            ] {
                assert_eq!(
                    command(context, Key::char(c)),
                    None,
                    "{c} in {}",
                    context.title()
                );
            }
        }
    }
}
