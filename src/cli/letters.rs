//! `twoline letters`: print-ready letters for what is due.

use std::path::PathBuf;

use clap::Args;

use super::output::{aligned, clean, print_clean, say};
use super::values::code;
use super::{Failure, Global, open, write};
use crate::actions::LetterChoice;
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
}

impl Letters {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let choice = LetterChoice {
            kinds: self.kinds.clone(),
            site: self.site.clone(),
            child: self.child.clone(),
            language: self.language.clone(),
        };
        let mut desk = if self.out.is_some() {
            open::to_sign(global)?
        } else {
            open::to_read(global)?
        };
        let printed = desk.letters(&choice)?;
        if let Some(out) = self.out.as_ref().filter(|_| !printed.letters.is_empty()) {
            write::whole(&[(out, printed.html.as_bytes())])?;
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
