//! Findings of an examination as ICD-10-CM codes, chosen by words.
//!
//! ICD-10-CM is in the public domain in the US. The list holds what such reports need most; its titles
//! are from memory: check them against the edition in use. Any other code of the right shape is kept
//! as it was written, without a title.

use std::fmt;

use super::text::folded;

/// What kind of finding a code is, for "confirmed".
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum FindingKind {
    /// An encounter or a history, no finding.
    Encounter,
    /// A refractive error.
    Refractive,
    /// Amblyopia, present.
    Amblyopia,
    /// Amblyopia suspected.
    AmblyopiaSuspect,
    /// Strabismus.
    Strabismus,
    /// Disease of the media, the lids or the eye.
    Organic,
    /// Something else, or a code without a title here.
    Other,
}

/// One listed code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Listed {
    /// The code.
    pub code: &'static str,
    /// Its title.
    pub title: &'static str,
    /// What kind of finding it is.
    pub kind: FindingKind,
}

use FindingKind as K;

const fn listed(code: &'static str, title: &'static str, kind: FindingKind) -> Listed {
    Listed { code, title, kind }
}

/// Every listed code, in the order of the codes.
#[rustfmt::skip]
pub const LISTED: &[Listed] = &[
    listed("H02.401", "Unspecified ptosis of right eyelid", K::Organic),
    listed("H44.531", "Leucocoria, right eye", K::Organic),
    listed("H50.00", "Unspecified esotropia", K::Strabismus),
    listed("H50.10", "Unspecified exotropia", K::Strabismus),
    listed("H50.9", "Unspecified strabismus", K::Strabismus),
    listed("H52.01", "Hypermetropia, right eye", K::Refractive),
    listed("H52.02", "Hypermetropia, left eye", K::Refractive),
    listed("H52.03", "Hypermetropia, bilateral", K::Refractive),
    listed("H52.11", "Myopia, right eye", K::Refractive),
    listed("H52.12", "Myopia, left eye", K::Refractive),
    listed("H52.13", "Myopia, bilateral", K::Refractive),
    listed("H52.221", "Regular astigmatism, right eye", K::Refractive),
    listed("H52.222", "Regular astigmatism, left eye", K::Refractive),
    listed("H52.223", "Regular astigmatism, bilateral", K::Refractive),
    listed("H52.31", "Anisometropia", K::Refractive),
    listed("H52.7", "Unspecified disorder of refraction", K::Refractive),
    listed("H53.001", "Unspecified amblyopia, right eye", K::Amblyopia),
    listed("H53.002", "Unspecified amblyopia, left eye", K::Amblyopia),
    listed("H53.003", "Unspecified amblyopia, bilateral", K::Amblyopia),
    listed("H53.011", "Deprivation amblyopia, right eye", K::Amblyopia),
    listed("H53.012", "Deprivation amblyopia, left eye", K::Amblyopia),
    listed("H53.013", "Deprivation amblyopia, bilateral", K::Amblyopia),
    listed("H53.021", "Refractive amblyopia, right eye", K::Amblyopia),
    listed("H53.022", "Refractive amblyopia, left eye", K::Amblyopia),
    listed("H53.023", "Refractive amblyopia, bilateral", K::Amblyopia),
    listed("H53.031", "Strabismic amblyopia, right eye", K::Amblyopia),
    listed("H53.032", "Strabismic amblyopia, left eye", K::Amblyopia),
    listed("H53.033", "Strabismic amblyopia, bilateral", K::Amblyopia),
    listed("H53.041", "Amblyopia suspect, right eye", K::AmblyopiaSuspect),
    listed("H53.042", "Amblyopia suspect, left eye", K::AmblyopiaSuspect),
    listed("H53.043", "Amblyopia suspect, bilateral", K::AmblyopiaSuspect),
    listed("H53.2", "Diplopia", K::Other),
    listed("Q12.0", "Congenital cataract", K::Organic),
    listed("Z01.00", "Encounter for examination of eyes and vision without abnormal findings", K::Encounter),
    listed("Z01.01", "Encounter for examination of eyes and vision with abnormal findings", K::Encounter),
    listed("Z01.020", "Encounter for examination of eyes and vision following failed vision screening without abnormal findings", K::Encounter),
    listed("Z01.021", "Encounter for examination of eyes and vision following failed vision screening with abnormal findings", K::Encounter),
    listed("Z13.5", "Encounter for screening for eye and ear disorders", K::Encounter),
    listed("Z97.3", "Presence of spectacles and contact lenses", K::Encounter),
];

/// A code as it was reported.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Diagnosis(String);

impl Diagnosis {
    /// Reads a code of the shape of ICD-10-CM: a letter, a digit, a digit or letter, then up to four
    /// letters or digits after a dot, which may be left out.
    pub fn parse(text: &str) -> Option<Diagnosis> {
        let plain: String = text
            .trim()
            .chars()
            .filter(|c| *c != '.')
            .map(|c| c.to_ascii_uppercase())
            .collect();
        let bytes = plain.as_bytes();
        let fits = (3..=7).contains(&bytes.len())
            && bytes[0].is_ascii_uppercase()
            && bytes[1].is_ascii_digit()
            && bytes[2..].iter().all(u8::is_ascii_alphanumeric)
            && text.trim().matches('.').count() <= 1
            && text.trim().find('.').is_none_or(|at| at == 3);
        fits.then(|| {
            Diagnosis(if plain.len() > 3 {
                format!("{}.{}", &plain[..3], &plain[3..])
            } else {
                plain
            })
        })
    }

    /// Returns the code.
    pub fn code(&self) -> &str {
        &self.0
    }

    /// Returns the listed code with its title, if it is one.
    pub fn listed(&self) -> Option<&'static Listed> {
        LISTED.iter().find(|l| l.code == self.0)
    }

    /// Returns the kind of finding; `Other` for a code that is not listed.
    pub fn kind(&self) -> FindingKind {
        self.listed().map_or(FindingKind::Other, |l| l.kind)
    }
}

impl fmt::Display for Diagnosis {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

/// Returns the listed codes whose title or code holds every word that was typed.
pub fn by_words(text: &str) -> Vec<&'static Listed> {
    let words: Vec<String> = folded(text).split_whitespace().map(str::to_owned).collect();
    LISTED
        .iter()
        .filter(|l| {
            let title = folded(l.title);
            let code = l.code.to_ascii_lowercase();
            words
                .iter()
                .all(|w| title.contains(w.as_str()) || code.starts_with(w.as_str()))
        })
        .collect()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn a_listed_code_is_found_by_its_words_and_by_itself() {
        assert_eq!(by_words("refractive ambly right")[0].code, "H53.021");
        assert_eq!(by_words("h53.02").len(), 3);
        assert_eq!(by_words("Anisometropia")[0].code, "H52.31");
        assert!(by_words("no such thing").is_empty());
    }

    #[test]
    fn codes_are_read_with_and_without_the_dot() {
        for text in ["H53.021", "h53021", " H53.021 "] {
            assert_eq!(Diagnosis::parse(text).unwrap().code(), "H53.021");
        }
        assert_eq!(Diagnosis::parse("h40").unwrap().code(), "H40");
        let other = Diagnosis::parse("H40.1").unwrap();
        assert_eq!((other.listed(), other.kind()), (None, FindingKind::Other));
        for wrong in [
            "",
            "H5",
            "553.021",
            "H5302.1",
            "H53.0.1",
            "H53.02111",
            "lazy eye",
        ] {
            assert_eq!(Diagnosis::parse(wrong), None, "{wrong}");
        }
    }

    #[test]
    fn the_list_is_in_order_and_every_code_reads_back() {
        assert!(LISTED.is_sorted_by(|a, b| a.code < b.code));
        for l in LISTED {
            assert_eq!(Diagnosis::parse(l.code).unwrap().listed(), Some(l));
        }
    }
}
