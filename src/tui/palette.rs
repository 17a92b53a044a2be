//! The palette: every command by its words or its keys, where each works, and why not now.

use crossterm::event::KeyCode;

use crate::keys::{self, Binding, Command, Key};
use crate::tui::app::{App, Effect, Request, Tone};
use crate::tui::prompt::{Ask, Choice, Choices, Prompt, listed};
use crate::tui::text::fit;
use crate::tui::theme::{Theme, ThemeName};

impl App {
    /// Opens the palette.
    pub(crate) fn ask_palette(&mut self) {
        let live = self.context().stack();
        let mut items: Vec<Choice> = Vec::new();
        for binding in keys::palette() {
            let why_not = if live.contains(&binding.context) {
                self.why_not(binding.command)
            } else {
                Some(format!("works in {}", binding.context.title()))
            };
            let shown = if binding.keys.is_empty() {
                String::new()
            } else {
                keys::keys_text(binding)
            };
            let what = why_not.as_ref().map_or_else(
                || binding.help.to_owned(),
                |why| format!("({why}) {}", binding.help),
            );
            items.push(Choice {
                key: '\0',
                label: format!(
                    "{} {} {what}",
                    fit(binding.command.name(), 14),
                    fit(&shown, 13)
                ),
                word: binding.command.name().to_owned(),
                keys: written(binding),
                idle: why_not.is_some(),
            });
        }
        // What can be done stands first; each half keeps the order of the key table.
        items.sort_by_key(|item| item.idle);
        let mut choices = Choices::new(items);
        choices.find = Some(String::new());
        self.prompt = Some(Prompt::choices(
            Ask::Palette,
            "palette: type words or keys, Enter runs",
            choices,
        ));
    }

    /// Runs the command of a name from the palette, or says why it cannot be done.
    pub(crate) fn run_named(&mut self, word: &str) -> Vec<Effect> {
        let Some(command) = Command::ALL.iter().copied().find(|c| c.name() == word) else {
            return Vec::new();
        };
        let live = self.context().stack();
        let bindings = || keys::TABLE.iter().filter(|b| b.command == command);
        if !bindings().any(|b| live.contains(&b.context)) {
            let place = bindings().next().map_or("", |b| b.context.title());
            self.say(Tone::Attention, format!("{word} works in {place}"));
            return Vec::new();
        }
        if let Some(why) = self.why_not(command) {
            self.say(Tone::Attention, format!("{word}: {why}"));
            return Vec::new();
        }
        self.run(command)
    }

    /// Returns why a command of this place cannot be done now.
    fn why_not(&self, command: Command) -> Option<String> {
        use Command as K;
        let writes = matches!(
            command,
            K::Sign | K::Correct | K::AddChild | K::OpenDay | K::Told | K::Move
        );
        if writes && let Some(holder) = &self.session.read_only {
            return Some(format!(
                "this store is open for reading only: {}",
                crate::tui::text::safe(holder)
            ));
        }
        let bench = self.day.as_ref().ok().and_then(|d| d.bench.as_ref());
        let on_child = matches!(
            command,
            K::Sign
                | K::NotTestable
                | K::NotPresent
                | K::Why
                | K::Signs
                | K::Swap
                | K::Move
                | K::Correct
        );
        if on_child && bench.is_none() {
            return Some("no child is on the bench".into());
        }
        let signed = bench.is_some_and(crate::tui::day::bench::Bench::is_signed);
        match command {
            K::Sign | K::NotTestable | K::NotPresent | K::Signs if signed => {
                Some("this visit is signed".into())
            }
            K::Correct if !signed => Some("nothing is signed yet: type over the value".into()),
            K::Told if self.urgent.is_empty() => Some("no emergency waits".into()),
            K::Screener if self.session.screeners.is_empty() => {
                Some("no screener is entered yet".into())
            }
            K::DayPin if self.lock.is_day_only() => Some("the passphrase first".into()),
            K::Tour if !self.session.demo => Some("only in the demo".into()),
            K::Theme if !self.session.color => Some("colors are off: NO_COLOR".into()),
            _ => None,
        }
    }

    /// Asks which colors are wanted.
    pub(crate) fn ask_theme(&mut self) {
        let now = self.session.theme.name();
        let mut choices = listed(ThemeName::ALL.into_iter().zip('1'..).map(|(theme, key)| {
            let mark = if theme == now { "✓ " } else { "" };
            (
                key,
                format!("{mark}{}: {}", theme.word(), theme.help()),
                theme.word(),
            )
        }));
        choices.at = ThemeName::ALL.iter().position(|t| *t == now).unwrap_or(0);
        self.prompt = Some(Prompt::choices(Ask::Theme, "colors", choices));
    }

    /// Takes a theme and has it kept.
    pub(crate) fn set_theme(&mut self, word: &str) -> Vec<Effect> {
        let Some(theme) = ThemeName::from_word(word) else {
            return Vec::new();
        };
        if !self.session.color {
            self.say(
                Tone::Attention,
                "NO_COLOR is set, or this terminal has no colors: the theme stays plain",
            );
            return Vec::new();
        }
        self.session.theme = Theme::named(theme);
        vec![Effect::ask(Request::Prefer("theme", word.to_owned()))]
    }
}

/// Returns the keys of a binding as somebody types them into the palette, without blanks and dashes.
fn written(binding: &Binding) -> Vec<String> {
    binding.keys.iter().map(|key| bare(*key)).collect()
}

fn bare(key: Key) -> String {
    match key.code {
        KeyCode::Up => "up".into(),
        KeyCode::Down => "down".into(),
        KeyCode::Left => "left".into(),
        KeyCode::Right => "right".into(),
        _ => key.to_string().replace('-', "").to_lowercase(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::keys::Context;

    #[test]
    fn keys_are_found_as_they_are_said() {
        assert_eq!(bare(Key::f(7)), "f7");
        assert_eq!(bare(Key::ctrl('z')), "ctrlz");
        assert_eq!(bare(Key::alt('m')), "altm");
        assert_eq!(bare(Key::plain(KeyCode::PageUp)), "pgup");
    }

    #[test]
    fn no_command_of_the_palette_stands_in_it_twice() {
        let mut seen: Vec<(Command, Context)> = Vec::new();
        for binding in keys::palette() {
            assert!(!seen.iter().any(|(c, _)| *c == binding.command));
            seen.push((binding.command, binding.context));
        }
    }
}
