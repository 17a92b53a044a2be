//! Tests of the commands that work on a store, through the real binary.

#![allow(clippy::panic, clippy::unwrap_used)]

mod board;
mod children;
mod demo;
mod disclosures;
mod exam_files;
mod files;
mod follow_up;
mod lock;
mod lost;
mod packets;
mod programme;
mod terminal;
mod whole_day;

use std::path::PathBuf;
use std::process::{Command, Output, Stdio};

use twoline::actions::{DeskOptions, Kdf, NewStore, Secret, init};
use twoline::domain::acuity::Notation;

/// The civil date of these tests.
const TODAY: &str = "2026-10-14";

const ROSTER: &str = "\
child_id,family_name,given_name,dob,grade,site,class,consent,wears_glasses
Q-1,Tansley,Marigold,2020-03-02,1,QE,1B,yes,no
Q-2,Okafor,Ada,2020-09-01,1,QE,1B,yes,no
Q-3,Brightwater,Emeka,2022-04-10,PK,QE,Guests,yes,no
Q-4,Moss,Tobin,2018-05-20,3,QE,3A,yes,yes
Q-5,Idris,Noor,2021-01-08,KG,QE,KA,no,no
";

/// A folder with files and a store, and the program run in it.
struct Bench {
    folder: tempfile::TempDir,
}

impl Bench {
    /// A folder without a store.
    fn empty() -> Bench {
        Bench {
            folder: tempfile::tempdir().expect("a folder"),
        }
    }

    /// A store that no passphrase protects, so that opening it costs nothing.
    fn with_store() -> Bench {
        let bench = Bench::empty();
        let new = NewStore {
            programme: "Quillmere".into(),
            station: "east".into(),
            notation: Notation::Feet,
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        init(&bench.path("store"), new, &DeskOptions::default()).expect("a store");
        bench
    }

    /// The same with a screener, a site, a term and the five children.
    fn with_children() -> Bench {
        let bench = Bench::with_store();
        bench.ok(&["screener", "add", "--name", "J. Imani", "--initials", "JI"]);
        bench.ok(&["site", "add", "QE", "--name", "Quillmere East"]);
        bench.ok(&[
            "term",
            "add",
            "2026-autumn",
            "--from",
            "2026-08-01",
            "--to",
            "2026-12-31",
        ]);
        bench.write("roster.csv", ROSTER);
        bench.ok(&["roster", "add", "roster.csv", "--yes"]);
        bench
    }

    /// The same with a screening day open.
    fn on_a_day(protocol: &str, method: &str) -> Bench {
        let bench = Bench::with_children();
        bench.ok(&[
            "day",
            "open",
            "--site",
            "QE",
            "--protocol",
            protocol,
            "--method",
            method,
        ]);
        bench
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn write(&self, name: &str, bytes: impl AsRef<[u8]>) {
        std::fs::write(self.path(name), bytes).expect("written");
    }

    fn read(&self, name: &str) -> String {
        std::fs::read_to_string(self.path(name)).expect("there")
    }

    /// The program on the store of this folder, on the day of these tests, without a terminal.
    fn command(&self, args: &[&str]) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_twoline"));
        command
            .current_dir(self.folder.path())
            .env_remove("TWOLINE_PASSPHRASE_FILE")
            .env("TWOLINE_STORE", self.path("store"))
            .env("XDG_DATA_HOME", self.path("data"))
            .stdin(Stdio::null())
            .args(args)
            .args(["--today", TODAY]);
        command
    }

    fn run(&self, args: &[&str]) -> Ran {
        Ran::from(self.command(args).output().expect("the program runs"))
    }

    /// Runs what must succeed and returns what it printed.
    fn ok(&self, args: &[&str]) -> String {
        let ran = self.run(args);
        assert_eq!(ran.code, 0, "{args:?}\n{}{}", ran.out, ran.err);
        ran.out
    }

    /// Runs what must be refused as bad input and returns what it said.
    fn refused(&self, args: &[&str]) -> String {
        let ran = self.run(args);
        assert_eq!(ran.code, 2, "{args:?}\n{}{}", ran.out, ran.err);
        assert!(ran.err.contains("error: "), "{args:?}\n{}", ran.err);
        ran.err
    }

    /// The whole head of the store, as verify prints it.
    fn head(&self) -> String {
        let out = self.ok(&["verify"]);
        out.lines()
            .find_map(|line| line.strip_prefix("store head "))
            .expect("a head")
            .to_owned()
    }

    /// The rows of the day report by column.
    fn report(&self, args: &[&str]) -> Vec<std::collections::HashMap<String, String>> {
        let mut all = vec!["report", "day"];
        all.extend(args);
        let out = self.ok(&all);
        csv::Reader::from_reader(out.trim_start_matches('\u{feff}').as_bytes())
            .deserialize()
            .map(|row| row.expect("CSV"))
            .collect()
    }
}

/// What a run left behind.
struct Ran {
    code: i32,
    out: String,
    err: String,
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
