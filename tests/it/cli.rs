//! Tests of `cli`, through the real binary.

mod acceptance;
mod judge;
mod judge_counts;
mod rules;

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

/// A folder with files, and the program run in it.
pub struct Bench {
    folder: tempfile::TempDir,
}

impl Bench {
    pub fn new() -> Bench {
        Bench {
            folder: tempfile::tempdir().expect("a folder"),
        }
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub fn write(&self, name: &str, bytes: impl AsRef<[u8]>) {
        std::fs::write(self.path(name), bytes).expect("written");
    }

    pub fn read(&self, name: &str) -> String {
        std::fs::read_to_string(self.path(name)).expect("there")
    }

    /// The names in the folder, in order.
    pub fn names(&self) -> Vec<String> {
        let mut names: Vec<String> = std::fs::read_dir(self.folder.path())
            .expect("a folder")
            .map(|e| {
                e.expect("an entry")
                    .file_name()
                    .to_string_lossy()
                    .into_owned()
            })
            .collect();
        names.sort();
        names
    }

    fn command(&self, args: &[&str]) -> Command {
        let mut command = twoline();
        command.current_dir(self.folder.path()).args(args);
        command
    }

    pub fn run(&self, args: &[&str]) -> Ran {
        Ran::from(self.command(args).output().expect("the program runs"))
    }
}

fn twoline() -> Command {
    let mut command = Command::new(Path::new(env!("CARGO_BIN_EXE_twoline")));
    command
        .env_remove("TWOLINE_STORE")
        .env_remove("TWOLINE_PASSPHRASE_FILE");
    command
}

/// What a run left behind.
pub struct Ran {
    pub code: i32,
    pub out: String,
    pub err: String,
}

impl From<Output> for Ran {
    fn from(output: Output) -> Ran {
        Ran {
            code: output.status.code().unwrap_or(-1),
            out: String::from_utf8_lossy(&output.stdout).into_owned(),
            err: String::from_utf8_lossy(&output.stderr).into_owned(),
        }
    }
}

/// Reads CSV text into rows of cells by header.
pub fn rows(text: &str) -> Vec<std::collections::HashMap<String, String>> {
    csv::Reader::from_reader(text.as_bytes())
        .deserialize()
        .map(|row| row.expect("CSV"))
        .collect()
}
