//! How a command ends when it does not end well.

use std::fmt;
use std::io;

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

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if !self.details.is_empty() {
            writeln!(f, "{}", self.details.trim_end())?;
        }
        if !self.message.is_empty() {
            writeln!(f, "error: {}", self.message)?;
        }
        self.hint
            .as_ref()
            .map_or(Ok(()), |hint| writeln!(f, "hint: {hint}"))
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
