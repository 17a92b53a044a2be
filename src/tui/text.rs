//! Text that keeps its columns: widths of the terminal, wrapping, and names of every script.

use ratatui::buffer::Buffer;
use unicode_segmentation::UnicodeSegmentation;
use unicode_width::UnicodeWidthStr;

use crate::domain::text::shown;

/// Returns how many columns a text takes.
pub fn width(text: &str) -> usize {
    text.width()
}

/// Returns the text in at most `columns` columns, with an ellipsis when it was cut.
pub fn cut(text: &str, columns: usize) -> String {
    if text.width() <= columns {
        return text.to_owned();
    }
    let mut out = String::new();
    let mut used = 0;
    for grapheme in text.graphemes(true) {
        let wide = grapheme.width();
        if used + wide + 1 > columns {
            break;
        }
        used += wide;
        out.push_str(grapheme);
    }
    if columns > 0 {
        out.push('…');
    }
    out
}

/// Returns the text in exactly `columns` columns, padded on the right.
pub fn fit(text: &str, columns: usize) -> String {
    let mut out = cut(text, columns);
    let used = out.width();
    out.extend(std::iter::repeat_n(' ', columns.saturating_sub(used)));
    out
}

/// Returns two texts on one line of `columns` columns, the second against the right margin; the
/// second is kept whole where the line can hold it.
pub fn ends(left: &str, right: &str, columns: usize) -> (String, String) {
    let right = cut(right, columns);
    let space = columns.saturating_sub(right.width());
    if right.is_empty() {
        return (fit(left, columns), right);
    }
    (fit(&cut(left, space.saturating_sub(1)), space), right)
}

/// Returns the text in lines of at most `columns` columns, broken at spaces where there are any.
pub fn wrap(text: &str, columns: usize) -> Vec<String> {
    let columns = columns.max(1);
    let mut lines = Vec::new();
    for paragraph in text.split('\n') {
        let mut line = String::new();
        let mut begun = false;
        for word in paragraph.split(' ') {
            if begun && line.width() + 1 + word.width() > columns {
                lines.push(std::mem::take(&mut line));
            } else if begun {
                line.push(' ');
            }
            begun = true;
            for grapheme in word.graphemes(true) {
                if line.width() + grapheme.width() > columns {
                    lines.push(std::mem::take(&mut line));
                }
                line.push_str(grapheme);
            }
        }
        lines.push(line);
    }
    lines
}

/// Returns the text in lines, those after the first set in under what follows its label: after the
/// first gap of two blanks, or after `- `.
pub fn wrap_under(text: &str, columns: usize) -> Vec<String> {
    let lead = text.len() - text.trim_start().len();
    let body = &text[lead..];
    let label = match body.find("  ") {
        Some(gap) if !body.is_empty() => {
            let after = body[gap..].len() - body[gap..].trim_start().len();
            width(&body[..gap]) + after
        }
        _ if body.starts_with("- ") => 2,
        _ => 0,
    };
    let indent = (lead + label).min(columns / 2);
    let first = wrap(text, columns);
    if first.len() <= 1 || indent == 0 {
        return first;
    }
    let Some(head) = first.first().cloned() else {
        return first;
    };
    let rest = text[head.len().min(text.len())..].trim_start();
    let mut out = vec![head];
    out.extend(
        wrap(rest, columns - indent)
            .into_iter()
            .map(|line| format!("{}{line}", " ".repeat(indent))),
    );
    out
}

/// Returns `Family, Given`, safe to print.
pub fn name(family: &str, given: &str) -> String {
    let text = match (family.is_empty(), given.is_empty()) {
        (true, _) => given.to_owned(),
        (_, true) => family.to_owned(),
        _ => format!("{family}, {given}"),
    };
    shown(&text, 120)
}

/// Returns a text from outside, safe to print.
pub fn safe(text: &str) -> String {
    shown(text, 2_000)
}

fn is_rtl(symbol: &str) -> bool {
    symbol.chars().any(|c| {
        matches!(c, '\u{0590}'..='\u{08FF}' | '\u{FB1D}'..='\u{FDFF}' | '\u{FE70}'..='\u{FEFE}' | '\u{10800}'..='\u{10FFF}' | '\u{1E800}'..='\u{1EFFF}')
    })
}

/// Puts a left-to-right mark into the first blank after each right-to-left run, so that a terminal
/// that reorders text does not pull the figures beside a name into it.
pub fn settle_rtl(buffer: &mut Buffer) {
    let area = *buffer.area();
    for y in area.top()..area.bottom() {
        let mut in_run = false;
        for x in area.left()..area.right() {
            let symbol = buffer[(x, y)].symbol();
            if is_rtl(symbol) {
                in_run = true;
            } else if in_run && symbol == " " {
                let more = x + 1 < area.right() && is_rtl(buffer[(x + 1, y)].symbol());
                if !more {
                    buffer[(x, y)].set_symbol(" \u{200E}");
                    in_run = false;
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn wide_and_combining_names_keep_their_columns() {
        assert_eq!(width(&fit("王小明", 10)), 10);
        assert_eq!(width(&fit("Le\u{301}a", 10)), 10);
        assert_eq!(width(&fit("王小明明明明", 6)), 6);
        assert_eq!(cut("Okafor, Ada", 6), "Okafo…");
        assert_eq!(cut("x", 0), "");
    }

    #[test]
    fn lines_break_at_spaces_and_inside_long_words() {
        assert_eq!(wrap("two steps apart", 9), ["two steps", "apart"]);
        assert_eq!(wrap("abcdefgh", 3), ["abc", "def", "gh"]);
    }

    #[test]
    fn a_line_goes_on_under_what_follows_its_label() {
        assert_eq!(
            wrap_under("  Enter   takes the value", 20),
            ["  Enter   takes the", "          value"]
        );
        assert_eq!(wrap_under("- one two", 6), ["- one", "  two"]);
    }

    #[test]
    fn escape_sequences_do_not_reach_the_terminal() {
        assert!(
            !name("\u{1b}[2JX", "Y\u{202E}")
                .chars()
                .any(crate::domain::text::is_unsafe)
        );
    }
}
