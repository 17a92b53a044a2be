//! Parses, runs, prints the error and its hint, and returns the exit code.

use std::process::ExitCode;

fn main() -> ExitCode {
    match twoline::cli::run(std::env::args_os()) {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            failure.print();
            ExitCode::from(failure.code())
        }
    }
}
