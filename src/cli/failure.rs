//! How a command ends when it does not end well.

use std::fmt;
use std::io::{self, Write as _};

use super::output::{error_width, folded_under};
use crate::actions::judge::JudgeError;
use crate::actions::rulebook::{RuleFileError, UnknownRule};
use crate::actions::{ActionError, Damage, Kind};
use crate::domain::text::shown;

/// A message, a hint and an exit code. Its text ends with a line break and is safe to print.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Failure {
    code: u8,
    /// Printed as it is, before the message: the problems of a file, a line each.
    details: String,
    message: String,
    hint: Option<String>,
}

impl Failure {
    /// Something failed: exit code 1.
    pub fn failed(message: impl Into<String>) -> Failure {
        Failure {
            code: 1,
            details: String::new(),
            message: message.into(),
            hint: None,
        }
    }

    /// Bad input or usage: exit code 2.
    pub fn bad_input(message: impl Into<String>) -> Failure {
        Failure {
            code: 2,
            ..Failure::failed(message)
        }
    }

    /// Interrupted by the user: exit code 130.
    pub fn interrupted(message: impl Into<String>) -> Failure {
        Failure {
            code: 130,
            ..Failure::failed(message)
        }
    }

    /// Wrong arguments, in the argument parser's own words: exit code 2.
    pub(super) fn usage_text(error: &clap::Error) -> Failure {
        Failure {
            code: 2,
            details: error.render().to_string(),
            message: String::new(),
            hint: None,
        }
    }

    /// Returns the failure with what to do about it.
    #[must_use]
    pub fn hint(mut self, hint: impl Into<String>) -> Failure {
        self.hint = Some(hint.into());
        self
    }

    /// Returns the failure with lines that stand before its message.
    #[must_use]
    pub fn details(mut self, details: &impl ToString) -> Failure {
        self.details = details.to_string();
        self
    }

    /// Returns the exit code.
    pub fn code(&self) -> u8 {
        self.code
    }
}

impl Failure {
    /// Returns the text in lines of at most `columns`, broken between words; the problems of a file
    /// keep their lines.
    pub fn in_columns(&self, columns: Option<usize>) -> String {
        let mut lines: Vec<String> = Vec::new();
        if !self.details.is_empty() {
            lines.push(self.details.trim_end().to_owned());
        }
        let told = [
            ("error: ", Some(&self.message)),
            ("hint: ", self.hint.as_ref()),
        ];
        for (label, text) in told {
            let Some(text) = text.filter(|t| !t.is_empty()) else {
                continue;
            };
            let mut label = label.to_owned();
            for line in text.lines() {
                match columns {
                    Some(columns) => lines.extend(folded_under(&label, line, columns)),
                    None => lines.push(format!("{label}{line}")),
                }
                label = String::new();
            }
        }
        let mut out = lines.join("\n");
        out.push('\n');
        out
    }

    /// Writes it to standard error, as wide as the terminal there.
    pub fn print(&self) {
        // Nothing can be done about a standard error that is closed.
        let _ = io::stderr()
            .lock()
            .write_all(self.in_columns(error_width()).as_bytes());
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.in_columns(None))
    }
}

impl std::error::Error for Failure {}

impl From<UnknownRule> for Failure {
    fn from(error: UnknownRule) -> Self {
        Failure::bad_input(error.to_string()).hint(error.hint())
    }
}

impl From<RuleFileError> for Failure {
    fn from(error: RuleFileError) -> Self {
        match error {
            RuleFileError::Wrong(errors) => {
                Failure::bad_input("the rule file was not taken").details(&errors)
            }
            unreadable @ RuleFileError::Unreadable { .. } => {
                Failure::bad_input(unreadable.to_string())
            }
        }
    }
}

impl From<JudgeError> for Failure {
    fn from(error: JudgeError) -> Self {
        match error {
            JudgeError::Input(problems) => {
                let total = problems.total();
                let count = if total == 1 {
                    "1 problem".to_owned()
                } else {
                    format!("{total} problems")
                };
                Failure::bad_input(format!("{count}; nothing was written")).details(&problems)
            }
            JudgeError::Output(problem) => {
                Failure::bad_input("nothing was written").details(&problem)
            }
            stopped @ JudgeError::Interrupted => Failure::interrupted(stopped.to_string()),
            failed @ JudgeError::Write { .. } => Failure::failed(failed.to_string()),
        }
    }
}

impl From<ActionError> for Failure {
    fn from(error: ActionError) -> Self {
        const NOTHING: &str = "nothing was written";
        let code = match error.kind {
            Kind::BadInput => 2,
            Kind::Failed | Kind::NotConfirmed => 1,
        };
        let failure = Failure {
            code,
            ..Failure::failed(safe(&error.message))
        };
        match error.hint {
            // The problems of a file stand before the message, a line each.
            Some(hint) if hint == NOTHING => Failure {
                code,
                ..Failure::failed(NOTHING).details(&failure.message)
            },
            Some(hint) => failure.hint(safe(&hint)),
            None => failure,
        }
    }
}

impl From<Damage> for Failure {
    fn from(damage: Damage) -> Self {
        let failure = Failure::failed(safe(&damage.to_string()));
        match damage.hint() {
            Some(hint) => failure.hint(hint),
            None => failure,
        }
    }
}

/// Makes what must not reach a terminal visible, line by line.
fn safe(text: &str) -> String {
    let lines: Vec<String> = text.lines().map(|line| shown(line, 10_000)).collect();
    lines.join("\n")
}

impl From<io::Error> for Failure {
    fn from(error: io::Error) -> Self {
        Failure::failed(error.to_string())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_message_breaks_between_words_at_the_width_of_the_terminal() {
        let failure =
            Failure::bad_input("the clock of this computer is three days behind the newest entry")
                .hint("set the clock, then start again; nothing was written meanwhile")
                .details(
                    &"roster.csv:3: a line of its own that stays as it is, however long it may be",
                );
        let text = failure.in_columns(Some(40));
        let mut lines = text.lines();
        assert!(lines.next().is_some_and(|l| l.len() > 40));
        for line in lines {
            assert!(line.len() <= 40, "{line}");
        }
        let words = |text: &str| {
            text.split_whitespace()
                .map(str::to_owned)
                .collect::<Vec<_>>()
        };
        assert_eq!(words(&text), words(&failure.to_string()));
        assert_eq!(failure.to_string().lines().count(), 3);
    }
}
