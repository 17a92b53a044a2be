//! Text to standard output, where a closed pipe is no error.

use std::io::{self, BufRead, ErrorKind, IsTerminal, Write};

use super::Failure;
use crate::domain::text::shown;

/// Writes text as it is.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    print_bytes(text.as_bytes())
}

/// Writes bytes as they are.
pub(super) fn print_bytes(bytes: &[u8]) -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    unless_closed(out.write_all(bytes).and_then(|()| out.flush()))
}

/// Writes lines.
pub(super) fn print_lines(lines: &[String]) -> Result<(), Failure> {
    let mut text = lines.join("\n");
    text.push('\n');
    print(&text)
}

/// Writes lines with what must not reach a terminal made visible.
pub(super) fn print_clean(lines: &[String]) -> Result<(), Failure> {
    print_lines(&lines.iter().map(|line| clean(line)).collect::<Vec<_>>())
}

/// Returns one line with what must not reach a terminal made visible.
pub(super) fn clean(line: &str) -> String {
    shown(line, 100_000)
}

/// Writes a line to standard error; nothing can be done when that is closed.
pub(super) fn say(line: &str) {
    let _ = writeln!(io::stderr().lock(), "{line}");
}

/// Asks whether to go on.
///
/// # Errors
/// Exit code 2 where there is no terminal to ask on.
pub(super) fn confirmed(question: &str) -> Result<bool, Failure> {
    let stdin = io::stdin();
    if !stdin.is_terminal() {
        return Err(
            Failure::bad_input("nothing was written: there is no terminal to ask on")
                .hint("--yes writes without asking, --dry-run only shows"),
        );
    }
    let mut err = io::stderr().lock();
    let _ = write!(err, "{question} [y/N] ");
    let _ = err.flush();
    let mut answer = String::new();
    stdin.lock().read_line(&mut answer)?;
    Ok(matches!(answer.trim(), "y" | "Y" | "yes"))
}

/// Takes a broken pipe for the reader's wish to read no more.
pub(super) fn unless_closed(result: io::Result<()>) -> Result<(), Failure> {
    match result {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(error.into()),
        _ => Ok(()),
    }
}

/// Returns rows of cells as lines with aligned columns.
pub(super) fn aligned(rows: &[Vec<String>]) -> Vec<String> {
    use unicode_width::UnicodeWidthStr;
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let widths: Vec<usize> = (0..columns)
        .map(|at| {
            let cells = rows.iter().filter_map(|row| row.get(at));
            cells.map(|cell| cell.width()).max().unwrap_or(0)
        })
        .collect();
    rows.iter()
        .map(|row| {
            let mut line = String::new();
            for (cell, width) in row.iter().zip(&widths) {
                line.push_str(cell);
                line.extend(std::iter::repeat_n(
                    ' ',
                    width.saturating_sub(cell.width()) + 2,
                ));
            }
            line.trim_end().to_owned()
        })
        .collect()
}
