//! Without a command: the terminal screens.

use std::io::{IsTerminal, stdin, stdout};

use clap::Args;

use super::{Failure, Global, open};
use crate::actions::Desk;
use crate::tui;

/// How the screens are shown.
#[derive(Debug, Args)]
pub(super) struct How {
    /// Show plain lines in one column, for a screen reader
    #[arg(long, env = "TWOLINE_LINEAR", hide_env_values = true, value_parser = clap::builder::FalseyValueParser::new())]
    linear: bool,
    /// Colors: light, dark, contrast or plain; without it those kept for this installation
    #[arg(long, value_name = "THEME", value_parser = theme)]
    theme: Option<tui::ThemeName>,
}

impl How {
    fn options(&self) -> tui::Options {
        tui::Options {
            theme: self.theme,
            linear: self.linear,
            ..tui::Options::default()
        }
    }
}

fn theme(word: &str) -> Result<tui::ThemeName, String> {
    tui::ThemeName::from_word(word).ok_or_else(|| {
        let words = tui::ThemeName::ALL.map(tui::ThemeName::word);
        format!("one of {}", words.join(", "))
    })
}

/// Opens the store in the terminal screens; for reading only while another process writes it, which
/// the screens then say.
pub(super) fn run(global: &Global, how: &How) -> Result<(), Failure> {
    needs_terminal()?;
    show(open::to_write_or_read(global)?, how, false)
}

/// Shows an open store.
pub(super) fn show(desk: Desk, how: &How, tour: bool) -> Result<(), Failure> {
    needs_terminal()?;
    tui::run(
        desk,
        tui::Options {
            tour,
            ..how.options()
        },
    )
    .map_err(|error| match error {
        tui::Error::Store(error) => error.into(),
        other => Failure::failed(other.to_string()),
    })
}

/// Says that there is no terminal before a passphrase is asked for or a demo made.
pub(super) fn needs_terminal() -> Result<(), Failure> {
    if stdin().is_terminal() && stdout().is_terminal() {
        return Ok(());
    }
    Err(Failure::bad_input("the screens need a terminal")
        .hint("twoline --help shows what can be done from the command line"))
}
