//! `twoline rules check`: everything wrong with a local rule file at once.

use std::path::PathBuf;

use clap::Args;

use crate::actions::rulebook;
use crate::cli::Failure;
use crate::cli::output::print_lines;

/// Check a local rule file, or every file of a folder
///
/// All errors are shown at once, each with file, line, caret and cure; exit code 2 if there are any.
#[derive(Debug, Args)]
pub(super) struct Check {
    /// The file or folder
    path: PathBuf,
}

impl Check {
    pub(super) fn run(&self) -> Result<(), Failure> {
        print_lines(&rulebook::check(&self.path)?)
    }
}
