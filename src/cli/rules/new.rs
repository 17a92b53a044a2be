//! `twoline rules new`: the commented start of a local rule set.

use std::io::{ErrorKind, Write};
use std::path::PathBuf;

use clap::Args;

use crate::actions::{Library, rulebook};
use crate::cli::Failure;
use crate::cli::output::{clean, print, print_lines};

/// Write the commented start of a local rule set; only its approval is left blank
#[derive(Debug, Args)]
pub(super) struct New {
    /// Override single criteria of this rule set, instead of beginning with a copy
    #[arg(long, value_name = "ID")]
    based_on: Option<String>,
    /// Id of the new set
    #[arg(long, value_name = "ID", default_value = "local-rules")]
    id: String,
    /// Where to write it, `-` for standard output; without it ID.toml in this folder
    #[arg(short, long, value_name = "FILE")]
    out: Option<PathBuf>,
}

impl New {
    pub(super) fn run(&self, library: &Library) -> Result<(), Failure> {
        let named = |b: u8| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'-' || b == b'.';
        if self.id.is_empty()
            || self.id.len() > 64
            || self.id.starts_with('.')
            || !self.id.bytes().all(named)
        {
            return Err(Failure::bad_input("that is not an id")
                .hint("small letters, digits, `-` and `.`, such as quillmere-school"));
        }
        if library.rule_set(&self.id).is_some() || library.protocol(&self.id).is_some() {
            return Err(Failure::bad_input(format!("the id {} is taken", self.id))
                .hint("nothing shipped is edited in place: give the local set its own id"));
        }
        let text = rulebook::start(library, self.based_on.as_deref(), &self.id)?;
        let path = match &self.out {
            Some(path) if path.as_os_str() == "-" => return print(&text),
            Some(path) => path.clone(),
            None => PathBuf::from(format!("{}.toml", self.id)),
        };
        let shown = clean(&path.to_string_lossy());
        let mut file = std::fs::File::create_new(&path).map_err(|error| match error.kind() {
            ErrorKind::AlreadyExists => Failure::bad_input(format!("{shown} is there already"))
                .hint("nothing was written; name another file with -o"),
            _ => Failure::failed(format!("cannot write {shown}: {error}")),
        })?;
        file.write_all(text.as_bytes())?;
        print_lines(&[
            format!("wrote {shown}"),
            format!("fill in approved_by and approved_on, then: twoline rules check {shown}"),
        ])
    }
}
