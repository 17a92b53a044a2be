//! Text from outside, made safe to show and to search.

use unicode_normalization::UnicodeNormalization;
use unicode_normalization::char::is_combining_mark;

/// Says whether a character must never reach a terminal: controls, line
/// separators, and the marks that reorder or hide text.
pub fn is_unsafe(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{061C}' | '\u{2028}' | '\u{2029}' | '\u{206A}'..='\u{206F}' | '\u{E0000}'..='\u{E007F}' | '\u{200B}' | '\u{200E}' | '\u{200F}' | '\u{202A}'..='\u{202E}' | '\u{2060}'..='\u{2064}' | '\u{2066}'..='\u{2069}' | '\u{FEFF}' | '\u{FFF9}'..='\u{FFFB}')
}

/// Returns the text with unsafe characters shown as `�`, at most `limit` characters long.
pub fn shown(text: &str, limit: usize) -> String {
    let mut out: String = text
        .chars()
        .take(limit)
        .map(|c| if is_unsafe(c) { '\u{FFFD}' } else { c })
        .collect();
    if text.chars().nth(limit).is_some() {
        out.push('…');
    }
    out
}

/// Returns the text as it is searched: lower case, without accents, in plain Latin where one letter
/// has an agreed plain form.
pub fn folded(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text
        .nfkd()
        .filter(|c| !is_combining_mark(*c) && !is_unsafe(*c))
    {
        match c {
            'đ' | 'Đ' | 'ð' | 'Ð' => out.push('d'),
            'ł' | 'Ł' => out.push('l'),
            'ø' | 'Ø' => out.push('o'),
            'ß' | 'ẞ' => out.push_str("ss"),
            'æ' | 'Æ' => out.push_str("ae"),
            'œ' | 'Œ' => out.push_str("oe"),
            'þ' | 'Þ' => out.push_str("th"),
            'ı' => out.push('i'),
            'ς' => out.push('σ'),
            'ħ' | 'Ħ' => out.push('h'),
            '\u{2019}' | '\u{02BC}' | '`' => out.push('\''),
            c => out.extend(c.to_lowercase()),
        }
    }
    out
}

/// Returns the known word nearest to what was written, if one is near.
pub fn nearest<'a>(written: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    known
        .into_iter()
        .map(|word| (strsim::damerau_levenshtein(written, word), word))
        .filter(|(distance, word)| *distance <= 2.max(word.len() / 4))
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, word)| word)
}

/// Returns what would have been taken from a list of words, naming the one that was perhaps meant.
pub fn one_of(words: &str, written: &str) -> String {
    match nearest(&written.to_lowercase(), words.split(", ")) {
        Some(word) => format!("one of {words} (did you mean {word}?)"),
        None => format!("one of {words}"),
    }
}

/// Reads a free text of one line, at most `limit` characters long and of characters that can be shown.
///
/// # Errors
/// What would have been taken.
pub fn one_line(text: &str, limit: usize) -> Result<String, String> {
    let text = text.trim();
    if text.chars().count() > limit {
        return Err(format!("at most {limit} characters"));
    }
    if text.chars().any(is_unsafe) {
        return Err("text on one line, without control characters".to_owned());
    }
    Ok(text.to_owned())
}
