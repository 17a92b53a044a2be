//! The short code of a referral: printed on the form, told over the telephone, holds no name.
//!
//! Ten digits: eight at random and two check digits by ISO/IEC 7064, MOD 97-10 (published standard;
//! basis: memory). Every single wrong digit and every swap of two neighbours is noticed.

use std::fmt;

/// Digits that carry the number.
const DIGITS: usize = 8;

/// How many codes there are.
const CODES: u64 = 10u64.pow(DIGITS as u32);

/// The code of a referral.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct FormCode(u32);

/// Why a text is not a code.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum FormCodeError {
    /// It has another number of digits, or something else than digits.
    #[error("a form code has ten digits, such as {example}; found {found:?}", example = FormCode::new(48_291_356))]
    Form {
        /// What was there, made safe to print.
        found: String,
    },
    /// Its check digits do not fit: a digit was misread or two were swapped.
    #[error("{found} is not a form code: a digit is wrong, or two are swapped")]
    Check {
        /// The digits as written.
        found: String,
    },
}

impl FormCode {
    /// Makes the code of a number; numbers past the last code begin again.
    pub fn new(number: u64) -> FormCode {
        FormCode((number % CODES) as u32)
    }

    /// Reads a code; spaces, hyphens and dots between the digits do not matter.
    pub fn parse(text: &str) -> Result<FormCode, FormCodeError> {
        let digits = digits_of(text)?;
        valid(&digits).ok_or_else(|| FormCodeError::Check {
            found: digits.iter().map(|d| char::from(b'0' + d)).collect(),
        })
    }

    /// Returns the valid codes one slip away from what was written: one digit wrong, or two
    /// neighbours swapped. Empty when the text is no ten digits.
    pub fn near(text: &str) -> Vec<FormCode> {
        let Ok(written) = digits_of(text) else {
            return Vec::new();
        };
        let mut near = Vec::new();
        for at in 0..written.len() {
            for digit in 0..10 {
                let mut other = written;
                other[at] = digit;
                near.extend(valid(&other));
            }
            if at > 0 {
                let mut other = written;
                other.swap(at - 1, at);
                near.extend(valid(&other));
            }
        }
        near.sort_unstable();
        near.dedup();
        near
    }

    /// Returns the ten digits without spaces.
    pub fn digits(self) -> String {
        format!("{:08}{:02}", self.0, check(self.0))
    }
}

/// Returns the two check digits: the whole number leaves 1 when divided by 97.
fn check(number: u32) -> u64 {
    98 - (u64::from(number) * 100) % 97
}

fn digits_of(text: &str) -> Result<[u8; DIGITS + 2], FormCodeError> {
    let digits: Vec<u8> = text
        .chars()
        .filter(|c| !matches!(c, ' ' | '-' | '.' | '\u{2011}' | '\u{a0}'))
        .map(|c| c.to_digit(10).map_or(u8::MAX, |d| d as u8))
        .collect();
    match <[u8; DIGITS + 2]>::try_from(digits) {
        Ok(digits) if digits.iter().all(|d| *d < 10) => Ok(digits),
        _ => Err(FormCodeError::Form {
            found: super::text::shown(text, 40),
        }),
    }
}

fn valid(digits: &[u8; DIGITS + 2]) -> Option<FormCode> {
    let whole = digits.iter().fold(0u64, |n, d| n * 10 + u64::from(*d));
    let number = (whole / 100) as u32;
    (check(number) == whole % 100).then_some(FormCode(number))
}

impl fmt::Display for FormCode {
    /// Writes the digits in groups, as they are read out: `482 913 5694`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let digits = self.digits();
        write!(f, "{} {} {}", &digits[..3], &digits[3..6], &digits[6..])
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    // ISO/IEC 7064 MOD 97-10: the number with its check digits is 1 modulo 97 (from memory).
    #[test]
    fn the_whole_number_leaves_one() {
        for number in [0, 1, 96, 97, 12_345_678, 99_999_999] {
            let code = FormCode::new(number);
            let whole: u64 = code.digits().parse().unwrap();
            assert_eq!(whole % 97, 1, "{code}");
            assert_eq!(FormCode::parse(&code.to_string()), Ok(code));
            assert_eq!(FormCode::parse(&code.digits()), Ok(code));
        }
    }

    #[test]
    fn every_wrong_digit_and_every_swap_is_noticed_and_the_right_code_is_near() {
        for number in [48_291_356, 7, 55_555_550, 90_909_090] {
            let code = FormCode::new(number);
            let right = code.digits().into_bytes();
            for at in 0..right.len() {
                for digit in b'0'..=b'9' {
                    let mut wrong = right.clone();
                    wrong[at] = digit;
                    if wrong == right {
                        continue;
                    }
                    let text = String::from_utf8(wrong).unwrap();
                    assert!(
                        matches!(FormCode::parse(&text), Err(FormCodeError::Check { .. })),
                        "{text}"
                    );
                    assert!(FormCode::near(&text).contains(&code), "{text}");
                }
                if at > 0 && right[at] != right[at - 1] {
                    let mut wrong = right.clone();
                    wrong.swap(at - 1, at);
                    let text = String::from_utf8(wrong).unwrap();
                    assert!(FormCode::parse(&text).is_err(), "{text}");
                    assert!(FormCode::near(&text).contains(&code), "{text}");
                }
            }
        }
    }

    #[test]
    fn what_is_no_code_says_so() {
        for text in ["", "123", "12345678901", "48291356AB", "٤٨٢٩١٣٥٦٩٤"] {
            assert!(
                matches!(FormCode::parse(text), Err(FormCodeError::Form { .. })),
                "{text}"
            );
            assert!(FormCode::near(text).is_empty(), "{text}");
        }
    }
}
