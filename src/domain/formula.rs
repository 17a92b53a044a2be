//! Text that a spreadsheet would run, and the apostrophe that stops it.
//!
//! First characters by OWASP ASVS 5.0, 1.2.10 (`= + - @`, tab, NUL) and the OWASP page on CSV injection
//! (CR, LF, full-width forms).

/// Says whether a spreadsheet would run the text: its first character after spaces, and after
/// apostrophes that were there already, starts a formula or is a control character.
pub fn would_run(text: &str) -> bool {
    let rest = text.trim_start_matches(['\'', ' ', '\u{A0}', '\u{3000}']);
    rest.chars().next().is_some_and(|c| {
        c.is_control()
            || matches!(
                c,
                '=' | '+' | '-' | '@' | '\u{FF1D}' | '\u{FF0B}' | '\u{FF0D}' | '\u{FF20}'
            )
    })
}

/// Returns the text without the apostrophe that [`would_run`] asked a report to put before it.
pub fn unguarded(text: &str) -> &str {
    match text.strip_prefix('\'') {
        Some(rest) if would_run(rest) => rest,
        _ => text,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_left_alone_and_formulas_found() {
        for safe in ["", "O'Neil", "'t Hooft", "Anne-Marie", "2+2", "'"] {
            assert!(!would_run(safe), "{safe}");
            assert_eq!(unguarded(safe), safe);
        }
        for formula in [
            "=1",
            " =1",
            "'=1",
            "' =1",
            "\u{FF1D}1",
            "\t=1",
            "\0=1",
            "-2.50",
        ] {
            assert!(would_run(formula), "{formula:?}");
            assert_eq!(unguarded(&format!("'{formula}")), formula);
        }
    }
}
