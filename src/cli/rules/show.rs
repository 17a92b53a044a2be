//! `twoline rules show`: one rule set or protocol in full.

use clap::{Args, ValueEnum};

use crate::actions::Library;
use crate::actions::rulebook::{self, ShowAs};
use crate::cli::Failure;
use crate::cli::output::print;

/// Show one rule set or protocol in full
#[derive(Debug, Args)]
pub(super) struct Show {
    /// Id of a rule set or protocol
    id: String,
    /// Lines for a terminal, a page that prints, or a table for a spreadsheet
    #[arg(long, value_enum, default_value = "text")]
    format: Format,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum Format {
    Text,
    Html,
    Csv,
}

impl Show {
    pub(super) fn run(&self, library: &Library) -> Result<(), Failure> {
        let form = match self.format {
            Format::Text => ShowAs::Text,
            Format::Html => ShowAs::Html,
            Format::Csv => ShowAs::Csv,
        };
        print(&rulebook::show_as(library, &self.id, form)?)
    }
}
