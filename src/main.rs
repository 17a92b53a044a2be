//! Parses, runs, prints the error and its hint, and returns the exit code.

use std::io::Write;
use std::process::ExitCode;

fn main() -> ExitCode {
    match twoline::cli::run(std::env::args_os()) {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            // Nothing can be done about a standard error that is closed.
            let _ = write!(std::io::stderr().lock(), "{failure}");
            ExitCode::from(failure.code())
        }
    }
}
