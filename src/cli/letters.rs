//! `twoline letters`: print-ready letters for what is due.

use std::path::PathBuf;

use clap::Args;

use super::leaves::{Leaves, file_name};
use super::output::{aligned, asked, clean, print_clean, say};
use super::values::code;
use super::{Failure, Global, open, write};
use crate::actions::{LetterChoice, Printed, Recipient};
use crate::domain::referral::LetterKind;

/// Print letters for what is due: one HTML file, each child on its own page
///
/// Without `-o` only the list is shown. An urgent letter is never in a batch: give `--child`. Templates
/// and languages of the programme's own stand in the folder `letters` of the store.
#[derive(Debug, Args)]
pub(super) struct Letters {
    /// The file to write; printing is entered as a step of each referral
    #[arg(short, long, value_name = "OUT.html")]
    out: Option<PathBuf>,
    /// Only this kind; may be given several times
    #[arg(long = "kind", value_name = "KIND", value_parser = |s: &str| code(s, LetterKind::from_word, LetterKind::words))]
    kinds: Vec<LetterKind>,
    /// Only this site
    #[arg(long, value_name = "CODE")]
    site: Option<String>,
    /// Only this child, whether due or not
    #[arg(long, value_name = "ID")]
    child: Option<String>,
    /// In this language, whatever the roster says
    #[arg(long, value_name = "LANGUAGE")]
    language: Option<String>,
    #[command(flatten)]
    leaves: Leaves,
}

impl Letters {
    /// Returns who outside the programme and the family gets the letters. A letter to the child's
    /// doctor always leaves: who and what for is asked at a terminal.
    fn recipient(&self, printed: &Printed) -> Result<Option<Recipient>, Failure> {
        let given = self.leaves.to()?;
        if given.is_some()
            || !printed
                .letters
                .iter()
                .any(|l| l.kind.is_for_a_third_party())
        {
            return Ok(given);
        }
        let missing = || {
            Failure::bad_input(
                "a letter to the child's doctor leaves the programme; nothing was written",
            )
            .hint("--recipient and --purpose enter it in the disclosure log")
        };
        let who = asked("To whom does the letter to the doctor go?")?.ok_or_else(missing)?;
        let purpose = asked("What do they need it for?")?.ok_or_else(missing)?;
        Ok(Some(Recipient::new(&who, &purpose)?))
    }

    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let choice = LetterChoice {
            kinds: self.kinds.clone(),
            site: self.site.clone(),
            child: self.child.clone(),
            language: self.language.clone(),
        };
        if self.out.is_none() && self.leaves.to()?.is_some() {
            return Err(Failure::bad_input("without -o no letter leaves")
                .hint("name the file: -o OUT.html"));
        }
        let mut desk = if self.out.is_some() {
            open::to_sign(global)?
        } else {
            open::to_read(global)?
        };
        if let Some(out) = self.out.as_ref().filter(|out| out.exists()) {
            // The letters in it are entered as printed, and would be printed by nobody.
            return Err(Failure::bad_input(format!(
                "{} is there already; letters are not written over it",
                clean(&out.to_string_lossy())
            ))
            .hint("name another file, such as letters-2.html"));
        }
        let printed = desk.letters(&choice)?;
        if let Some(out) = self.out.as_ref().filter(|_| !printed.letters.is_empty()) {
            let to = self.recipient(&printed)?;
            write::whole_once(&[(out, printed.html.as_bytes())], || {
                if let Some(to) = &to {
                    let entered = desk.letters_leave(&printed, to, &file_name(Some(out)))?;
                    say(&format!("{entered} entries in the disclosure log"));
                }
                Ok(())
            })?;
            desk.letters_printed(&printed)?;
            say(&format!(
                "{} letters: {}; open it in a browser and print it",
                printed.letters.len(),
                clean(&out.to_string_lossy())
            ));
        }
        let mut rows = vec![
            ["letter", "child", "id", "language"]
                .map(str::to_owned)
                .to_vec(),
        ];
        for letter in &printed.letters {
            rows.push(vec![
                letter.kind.title().to_owned(),
                letter.name.clone(),
                letter.child_id.clone(),
                letter.language.clone(),
            ]);
        }
        let mut lines = if printed.letters.is_empty() {
            vec!["no letter is due".to_owned()]
        } else {
            aligned(&rows)
        };
        for letter in printed.letters.iter().filter(|l| !l.missing.is_empty()) {
            if letter.kind != LetterKind::ExamForm {
                lines.push(format!("{}: missing: {}", letter.name, letter.missing));
            }
        }
        lines.extend(printed.left_out);
        print_clean(&lines)
    }
}
