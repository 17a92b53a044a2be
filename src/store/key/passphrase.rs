//! Which passphrases are refused: length and a short list, no composition rules.

use unicode_normalization::UnicodeNormalization;

use crate::domain::text::folded;
use crate::store::error::{Error, ErrorKind, Result};

/// The fewest characters.
const LEAST: usize = 15;

/// Long enough and yet among the first that anyone would try.
const COMMON: &[&str] = &[
    "123456789012345",
    "1234567890123456",
    "1234567890123456789",
    "12345678901234567890",
    "123456789123456789",
    "111111111111111",
    "000000000000000",
    "aaaaaaaaaaaaaaa",
    "abcdefghijklmno",
    "abcdefghijklmnop",
    "abcdefghijklmnopqrstuvwxyz",
    "qwertyuiopasdfg",
    "qwertyuiopasdfgh",
    "qwertyuiopasdfghjkl",
    "qwertyuiopasdfghjklzxcvbnm",
    "1qaz2wsx3edc4rfv",
    "passwordpassword",
    "password12345678",
    "password123456789",
    "passphrasepassphrase",
    "letmeinletmeinletmein",
    "iloveyouiloveyou",
    "correcthorsebatterystaple",
    "correct horse battery staple",
    "thequickbrownfox",
    "the quick brown fox",
    "visionscreening",
    "vision screening",
    "schoolnurseschoolnurse",
    "changemechangeme",
    "administrator123",
    "welcomewelcome1",
];

/// Says whether a passphrase may protect a programme's store.
pub fn check(text: &str, programme: &str) -> Result<()> {
    let weak = |message: String| {
        Err(Error::new(ErrorKind::WeakPassphrase, message).with_hint(
            "four or five words that do not belong together are easy to keep and hard to guess",
        ))
    };
    let length = text.nfc().count();
    if length < LEAST {
        return weak(format!(
            "the passphrase has {length} characters; it needs {LEAST} or more"
        ));
    }
    let plain = folded(text);
    if COMMON.contains(&plain.as_str()) {
        return weak("this passphrase is among the first that are tried".to_owned());
    }
    if plain.trim() == folded(programme).trim() {
        return weak("the passphrase is the programme's name".to_owned());
    }
    Ok(())
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn length_list_and_name() {
        assert_eq!(
            check("fourteen chars", "Q").unwrap_err().to_string(),
            "the passphrase has 14 characters; it needs 15 or more"
        );
        assert!(check("fifteen chars 1", "Q").is_ok());
        assert!(
            check("               ", "Q").is_ok(),
            "no composition rules"
        );
        assert!(check("PasswordPassword", "Q").is_err());
        assert!(check("quillmere vision", "Quillmere Vision").is_err());
    }

    #[test]
    fn the_list_holds_nothing_that_length_refuses() {
        for word in COMMON {
            assert!(word.chars().count() >= LEAST, "{word}");
            assert_eq!(folded(word), *word);
        }
    }
}
