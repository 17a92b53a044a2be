//! Commands that are declared and do not work yet; they stand in no help text.

use clap::Subcommand;

use super::{Failure, Global};

/// Commands of later versions. Each says so and ends with exit code 2.
#[derive(Debug, Subcommand)]
pub(super) enum Later {
    #[command(hide = true)]
    Refer(Anything),
    #[command(hide = true)]
    Step(Anything),
    #[command(hide = true)]
    Exam(Anything),
    #[command(hide = true)]
    Letters(Anything),
}

/// Whatever else was written.
#[derive(Debug, clap::Args)]
pub(super) struct Anything {
    #[arg(trailing_var_arg = true, allow_hyphen_values = true, hide = true)]
    _rest: Vec<String>,
}

impl Later {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        let name = match self {
            Later::Refer(_) => "refer",
            Later::Step(_) => "step",
            Later::Exam(_) => "exam",
            Later::Letters(_) => "letters",
        };
        Err(
            Failure::bad_input(format!("{name} is not part of this version"))
                .hint("twoline --help shows what is"),
        )
    }
}
