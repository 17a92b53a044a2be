//! Text to standard output, where a closed pipe is no error.

use std::io::{self, ErrorKind, Write};

use super::Failure;

/// Writes text as it is.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    unless_closed(out.write_all(text.as_bytes()).and_then(|()| out.flush()))
}

/// Writes lines.
pub(super) fn print_lines(lines: &[String]) -> Result<(), Failure> {
    let mut text = lines.join("\n");
    text.push('\n');
    print(&text)
}

/// Writes a line to standard error; nothing can be done when that is closed.
pub(super) fn say(line: &str) {
    let _ = writeln!(io::stderr().lock(), "{line}");
}

/// Takes a broken pipe for the reader's wish to read no more.
pub(super) fn unless_closed(result: io::Result<()>) -> Result<(), Failure> {
    match result {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(error.into()),
        _ => Ok(()),
    }
}
