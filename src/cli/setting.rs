//! `twoline setting`: what holds for the whole store.

use clap::{Args, Subcommand};

use super::output::{aligned, clean, print_clean, print_lines};
use super::site::done;
use super::{Failure, Global, open};

/// Show and change what holds for the whole store
#[derive(Debug, Args)]
pub(super) struct Setting {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// List every setting with its value
    List,
    /// Change a setting; `none` takes it back
    Set {
        /// Name of the setting
        name: String,
        /// Its value
        value: String,
    },
}

impl Setting {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::List => {
                let rows: Vec<Vec<String>> = open::to_read(global)?
                    .settings()?
                    .into_iter()
                    .map(|s| vec![s.name.to_owned(), s.value, s.what.to_owned()])
                    .collect();
                print_clean(&aligned(&rows))
            }
            Command::Set { name, value } => {
                let put = open::to_write(global)?.set(name, value)?;
                print_lines(&[format!(
                    "{} {}: {}",
                    done(put),
                    clean(name),
                    clean(value.trim())
                )])
            }
        }
    }
}
