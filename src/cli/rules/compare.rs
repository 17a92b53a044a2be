//! `twoline rules compare`: two rule sets on the same children.

use std::path::PathBuf;

use clap::Args;

use crate::actions::compare::{self, Comparison, Subject};
use crate::actions::judge::read_input;
use crate::actions::rulebook::UnknownRule;
use crate::actions::{Library, RuleSet};
use crate::cli::output::{busy, clean, print_clean, say};
use crate::cli::{Failure, Global, open};

/// Compare two rule sets on the same children: who is referred by which
#[derive(Debug, Args)]
pub(super) struct Compare {
    /// The first rule set
    a: String,
    /// The second rule set
    b: String,
    /// A results file, with a column site if it has one
    #[arg(long, value_name = "FILE", conflicts_with = "term")]
    on: Option<PathBuf>,
    /// A term of the store; without it and without --on the present term
    #[arg(long, value_name = "CODE")]
    term: Option<String>,
    /// Write the children who flip to this file
    #[arg(short, long, value_name = "FILE")]
    out: Option<PathBuf>,
}

impl Compare {
    pub(super) fn run(
        &self,
        global: &Global,
        library: &Library,
        with_files: bool,
    ) -> Result<(), Failure> {
        if let Some(file) = &self.on {
            let input = read_input(file)?;
            let subjects = compare::subjects_of_file(&input)
                .map_err(crate::actions::judge::JudgeError::Input)?;
            return self.show(library, &subjects, &input.name);
        }
        let desk = open::to_read(global)?;
        let own = desk.library();
        let library = if with_files { library } else { &own };
        // Names are asked first: reading a term takes longer.
        found(library, &self.a)?;
        found(library, &self.b)?;
        let (code, subjects) = desk.subjects_of_term(self.term.as_deref())?;
        self.show(library, &subjects, &format!("term {code}"))
    }

    fn show(&self, library: &Library, subjects: &[Subject], on: &str) -> Result<(), Failure> {
        let (a, b) = (found(library, &self.a)?, found(library, &self.b)?);
        let comparison = busy("judging", || Comparison::new(a, b, subjects));
        print_clean(&compare::report(&comparison, subjects, on))?;
        let Some(out) = &self.out else {
            return Ok(());
        };
        let shown = clean(&out.to_string_lossy());
        let mut bytes = Vec::new();
        compare::write_flips(&comparison, subjects, &mut bytes)?;
        crate::cli::write::whole(&[(out, &bytes)])?;
        say(&format!("wrote {shown}"));
        Ok(())
    }
}

fn found<'l>(library: &'l Library, id: &str) -> Result<&'l RuleSet, Failure> {
    library
        .rule_set(id)
        .ok_or_else(|| UnknownRule::rule_set(library, id).into())
}
