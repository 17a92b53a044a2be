//! Without a command: the terminal screens.

use std::io::{IsTerminal, stdin, stdout};

use super::{Failure, Global, open};
use crate::actions::Desk;
use crate::tui;

/// Opens the store in the terminal screens; for reading only while another process writes it, which
/// the screens then say.
pub(super) fn run(global: &Global) -> Result<(), Failure> {
    needs_terminal()?;
    show(open::to_write_or_read(global)?)
}

/// Shows an open store.
pub(super) fn show(desk: Desk) -> Result<(), Failure> {
    needs_terminal()?;
    tui::run(desk, tui::Options::default()).map_err(|error| match error {
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
