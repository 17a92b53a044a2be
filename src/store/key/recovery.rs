//! The recovery key: 128 random bits as seven groups of four, with a check against slips.

use zeroize::Zeroizing;

use super::random;
use crate::store::error::Result;
use crate::store::ledger::hash;

/// Digits and letters that are not taken for one another (no I, L, O, U).
const ALPHABET: &[u8; 32] = b"0123456789ABCDEFGHJKMNPQRSTVWXYZ";
/// 128 bits in letters of five bits.
const LETTERS: usize = 26;
/// The check after them.
const CHECK: usize = 2;

/// A recovery key, to be printed once and kept elsewhere.
#[derive(Clone)]
pub struct RecoveryKey(Zeroizing<String>);

impl std::fmt::Debug for RecoveryKey {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str("RecoveryKey")
    }
}

impl RecoveryKey {
    pub(super) fn make() -> Result<RecoveryKey> {
        let number = u128::from_be_bytes(*random::<16>()?);
        let mut text = Zeroizing::new(String::with_capacity(LETTERS + CHECK));
        for i in (0..LETTERS).rev() {
            text.push(letter((number >> (5 * i)) as usize));
        }
        let check = check(&text);
        text.push_str(&check);
        Ok(RecoveryKey(text))
    }

    /// Returns the key in groups of four.
    pub fn grouped(&self) -> Zeroizing<String> {
        let mut out = Zeroizing::new(String::new());
        for (i, c) in self.0.chars().enumerate() {
            if i > 0 && i % 4 == 0 {
                out.push('-');
            }
            out.push(c);
        }
        out
    }

    /// Says whether four characters typed back are its last group.
    pub fn ends_with(&self, typed: &str) -> bool {
        let typed: String = plain(typed).collect();
        typed.len() == 4 && self.0.ends_with(&typed)
    }

    pub(super) fn secret(&self) -> Zeroizing<String> {
        self.0.clone()
    }
}

fn letter(bits: usize) -> char {
    char::from(ALPHABET[bits & 31])
}

fn check(letters: &str) -> String {
    let hash = hash(letters.as_bytes());
    [hash[0], hash[1]]
        .map(|b| letter(b as usize))
        .iter()
        .collect()
}

fn plain(text: &str) -> impl Iterator<Item = char> {
    text.chars()
        .filter(|c| !c.is_whitespace() && !matches!(c, '-' | '\u{2010}'..='\u{2015}' | '\u{2212}'))
        .map(|c| match c.to_ascii_uppercase() {
            'O' => '0',
            'I' | 'L' => '1',
            c => c,
        })
}

/// Returns a typed recovery key in its one form; nothing when it is not one.
pub(super) fn normal(text: &str) -> Option<Zeroizing<String>> {
    let key = Zeroizing::new(plain(text).take(LETTERS + CHECK + 1).collect::<String>());
    let known = key.bytes().all(|b| ALPHABET.contains(&b));
    (key.len() == LETTERS + CHECK && known && check(&key[..LETTERS]) == key[LETTERS..])
        .then_some(key)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn typed_with_slips_that_cannot_be_mistaken() {
        let key = RecoveryKey::make().unwrap();
        let grouped = key.grouped();
        assert_eq!(grouped.len(), 34);
        let sloppy = format!(
            " {} ",
            grouped.to_lowercase().replace('0', "o").replace('1', "l")
        );
        assert_eq!(normal(&sloppy).as_deref(), Some(&*key.secret()));
        assert!(key.ends_with(&grouped[30..].to_lowercase()));
        assert!(!key.ends_with(""), "nothing typed is not four characters");
        assert!(!key.ends_with(&grouped[31..]), "nor are three");
    }

    #[test]
    fn most_single_slips_are_noticed() {
        let key = RecoveryKey::make().unwrap().secret();
        let mut taken = 0;
        for at in 0..LETTERS {
            for other in ALPHABET {
                let mut typed = key.as_bytes().to_vec();
                if typed[at] == *other {
                    continue;
                }
                typed[at] = *other;
                taken += usize::from(normal(std::str::from_utf8(&typed).unwrap()).is_some());
            }
        }
        // Ten bits of check: of 806 slips about one passes by chance.
        assert!(taken < 20, "{taken} of 806 slips went unnoticed");
    }
}
