//! `twoline keys`: the key table, and the quick card to print.

mod card;

use clap::{Args, ValueEnum};

use super::output::{folded_under, print, print_lines, width};
use super::{Failure, Global};
use crate::keys::{Context, TABLE, keys_text};

/// Show the key table of the screens, or make a page of it to print
#[derive(Debug, Args)]
pub(super) struct Keys {
    /// The table as text, or one page to print and lay beside the laptop
    #[arg(long, value_enum, default_value = "text")]
    format: Format,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum Format {
    Text,
    Html,
}

impl Keys {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        match self.format {
            Format::Text => print_lines(&lines(width())),
            Format::Html => print(&card::html()),
        }
    }
}

/// Returns the table in lines of so many columns.
fn lines(columns: usize) -> Vec<String> {
    const KEYS: usize = 17;
    let mut out = Vec::new();
    for context in Context::ALL {
        if !out.is_empty() {
            out.push(String::new());
        }
        out.push(context.title().to_owned());
        for binding in TABLE.iter().filter(|b| b.context == *context) {
            let lead = format!("  {:KEYS$} ", keys_text(binding));
            let what = format!("{} ({})", binding.help, binding.command.name());
            out.extend(folded_under(&lead, &what, columns));
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use unicode_width::UnicodeWidthStr;

    use super::*;

    #[test]
    fn the_table_fits_eighty_columns_and_names_every_command() {
        let lines = lines(80);
        for line in &lines {
            assert!(line.width() <= 80, "{line}");
        }
        let text = lines.join(" ");
        for binding in TABLE {
            assert!(text.contains(&format!("({})", binding.command.name())));
        }
    }
}
