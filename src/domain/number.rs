//! Decimal text to integers without a float in between.

/// Reads an unsigned decimal with at most `places` digits after the point (a comma is not one), as
/// an integer scaled by ten to that power; nothing for anything else.
pub fn fixed(text: &str, places: u32) -> Option<i64> {
    let (whole, part) = text.split_once('.').unwrap_or((text, ""));
    if (whole.is_empty() && part.is_empty())
        || whole.len() > 9
        || part.len() > places as usize
        || (text.contains('.') && part.is_empty())
        || !whole
            .bytes()
            .chain(part.bytes())
            .all(|b| b.is_ascii_digit())
    {
        return None;
    }
    let mut value: i64 = if whole.is_empty() {
        0
    } else {
        whole.parse().ok()?
    };
    for i in 0..places as usize {
        value = value * 10 + i64::from(part.as_bytes().get(i).map_or(0, |b| b - b'0'));
    }
    Some(value)
}

/// Reads a decimal with an optional sign (`+`, `-` or the typographic minus).
pub fn signed(text: &str, places: u32) -> Option<i64> {
    if let Some(rest) = text.strip_prefix(['-', '\u{2212}']) {
        fixed(rest, places).map(|v| -v)
    } else {
        fixed(text.strip_prefix('+').unwrap_or(text), places)
    }
}
