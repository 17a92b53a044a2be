//! Without a command: the terminal screens.

use super::{Failure, Global};

/// Opens the store in the terminal screens.
pub(super) fn run(_global: &Global) -> Result<(), Failure> {
    Err(Failure::failed("the screens are not part of this version"))
}
