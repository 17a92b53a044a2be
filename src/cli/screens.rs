//! Without a command: the terminal screens.

use std::io::IsTerminal;

use super::{Failure, Global, open};
use crate::actions::Desk;
use crate::tui;

/// Opens the store in the terminal screens.
pub(super) fn run(global: &Global) -> Result<(), Failure> {
    show(open::to_write(global)?)
}

/// Shows an open store.
pub(super) fn show(desk: Desk) -> Result<(), Failure> {
    if !std::io::stdout().is_terminal() {
        return Err(Failure::bad_input("the screens need a terminal")
            .hint("twoline --help shows what can be done from the command line"));
    }
    tui::run(desk, tui::Options::default()).map_err(|error| match error {
        tui::Error::Store(error) => error.into(),
        other => Failure::failed(other.to_string()),
    })
}
