//! Without a command: the terminal screens.

use super::{Failure, Global, open};
use crate::actions::Desk;

/// Opens the store in the terminal screens.
pub(super) fn run(global: &Global) -> Result<(), Failure> {
    show(open::to_write(global)?)
}

/// Shows an open store.
pub(super) fn show(_desk: Desk) -> Result<(), Failure> {
    Err(Failure::failed("the screens are not in this build")
        .hint("twoline --help shows what can be done from the command line"))
}
