//! Text to standard output, where a closed pipe is no error.

use std::io::{self, BufRead, ErrorKind, IsTerminal, Write};

use unicode_width::UnicodeWidthStr;

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
    let lines = match error_width() {
        Some(columns) => folded_under("", line, columns),
        None => vec![line.to_owned()],
    };
    let _ = writeln!(io::stderr().lock(), "{}", lines.join("\n"));
}

/// Shows that work goes on, on standard error and only where that is a terminal, until it is done.
pub(super) fn busy<T>(doing: &'static str, work: impl FnOnce() -> T) -> T {
    let bar = indicatif::ProgressBar::new_spinner().with_message(doing);
    bar.enable_steady_tick(std::time::Duration::from_millis(120));
    let done = work();
    bar.finish_and_clear();
    done
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

/// Asks for a line of text; nothing where there is no terminal to ask on.
pub(super) fn asked(question: &str) -> Result<Option<String>, Failure> {
    let stdin = io::stdin();
    if !stdin.is_terminal() {
        return Ok(None);
    }
    let mut err = io::stderr().lock();
    let _ = write!(err, "{question} ");
    let _ = err.flush();
    let mut answer = String::new();
    stdin.lock().read_line(&mut answer)?;
    Ok(Some(answer.trim().to_owned()))
}

/// Takes a broken pipe for the reader's wish to read no more.
pub(super) fn unless_closed(result: io::Result<()>) -> Result<(), Failure> {
    match result {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(error.into()),
        _ => Ok(()),
    }
}

/// Returns a paragraph as lines that fit a narrow terminal; in one line where there is no terminal, so
/// that what reads it need not put it together again.
pub(super) fn wrapped(text: &str, indent: &str) -> Vec<String> {
    let width = if io::stdout().is_terminal() {
        78
    } else {
        usize::MAX
    };
    folded(text, indent, width)
}

fn folded(text: &str, indent: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in text.split_whitespace() {
        match lines.last_mut() {
            Some(line) if line.width() + 1 + word.width() <= width => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(format!("{indent}{word}")),
        }
    }
    lines
}

/// Returns the columns of the terminal on standard output, 80 where there is none.
pub(super) fn width() -> usize {
    columns_of(&io::stdout()).unwrap_or(80)
}

/// Returns the columns of the terminal on standard error; nothing where there is none.
pub(super) fn error_width() -> Option<usize> {
    columns_of(&io::stderr())
}

fn columns_of(stream: &impl IsTerminal) -> Option<usize> {
    if !stream.is_terminal() {
        return None;
    }
    crossterm::terminal::size()
        .ok()
        .map(|(columns, _)| usize::from(columns).max(20))
}

/// Returns a text behind a label in lines of at most `columns`, the later ones set in under the first.
pub(super) fn folded_under(label: &str, text: &str, columns: usize) -> Vec<String> {
    let lead = label.width();
    let mut lines = folded(text, "", columns.saturating_sub(lead).max(10));
    if lines.is_empty() {
        lines.push(String::new());
    }
    lines
        .into_iter()
        .enumerate()
        .map(|(i, line)| {
            if i == 0 {
                format!("{label}{line}")
            } else {
                format!("{}{line}", " ".repeat(lead))
            }
        })
        .collect()
}

/// Returns rows of cells as lines with aligned columns.
pub(super) fn aligned(rows: &[Vec<String>]) -> Vec<String> {
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

#[cfg(test)]
mod tests {
    use super::{aligned, folded};

    #[test]
    fn paragraphs_fit_and_lose_no_word() {
        let text = "right eye 20/50; refers when worse than 20/32; 3 lines short";
        let lines = folded(text, "  ", 24);
        assert!(
            lines.iter().all(|l| l.len() <= 24 && l.starts_with("  ")),
            "{lines:?}"
        );
        let words: Vec<&str> = lines.iter().flat_map(|l| l.split_whitespace()).collect();
        assert_eq!(words.join(" "), text);
        assert_eq!(folded(text, "  ", usize::MAX), [format!("  {text}")]);
        assert!(folded("", "  ", 24).is_empty());
    }

    #[test]
    fn columns_stand_below_each_other_in_any_script() {
        let row = |a: &str, b: &str| vec![a.to_owned(), b.to_owned()];
        let lines = aligned(&[row("王", "x"), row("abc", "y"), row("", "z")]);
        assert_eq!(lines, ["王   x", "abc  y", "     z"]);
    }
}
