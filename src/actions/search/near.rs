//! Names that a slip of the finger explains.

use std::collections::HashMap;

/// Every word of every name, each once, with the children who have it.
#[derive(Default)]
pub(super) struct Names {
    places: HashMap<Box<str>, usize>,
    words: Vec<(Box<str>, Vec<u32>)>,
}

impl Names {
    /// Adds a word of a child's name.
    pub fn add(&mut self, name: &str, child: usize) {
        let next = self.words.len();
        let at = *self.places.entry(name.into()).or_insert(next);
        if at == next {
            self.words.push((name.into(), Vec::new()));
        }
        self.words[at].1.push(child as u32);
    }

    /// Returns the children with a name that begins as the word does, but for a slip or two, with
    /// how many.
    pub fn near(&self, word: &str) -> HashMap<usize, u32> {
        let mut out = HashMap::new();
        let allowed = slips(word);
        if allowed == 0 {
            return out;
        }
        let Some(pattern) = Pattern::new(word) else {
            return out;
        };
        for (name, children) in &self.words {
            let Some(slips) = pattern.slips_to_beginning(name, allowed).filter(|n| *n > 0) else {
                continue;
            };
            for child in children {
                out.entry(*child as usize)
                    .and_modify(|known: &mut u32| *known = slips.min(*known))
                    .or_insert(slips);
            }
        }
        out
    }
}

/// Returns how many slips are forgiven in a word: one from four letters, two from eight; none where
/// it is not all letters, because one digit more or less is another id.
pub(super) fn slips(word: &str) -> u32 {
    let letter = |c: char| c.is_alphabetic() || matches!(c, '-' | '\'');
    if !word.chars().all(letter) {
        return 0;
    }
    match word.chars().count() {
        0..4 => 0,
        4..8 => 1,
        _ => 2,
    }
}

/// A typed word as bits: a row of the table of edit distances is one number.
///
/// A letter left out, added, replaced, or two neighbours in the wrong order are one slip each
/// (optimal string alignment; Hyyrö, A bit-vector algorithm for computing Levenshtein and Damerau
/// edit distances, Nordic Journal of Computing 2003;10:29–39).
struct Pattern {
    ascii: [u64; 128],
    other: Vec<(char, u64)>,
    letters: u32,
}

impl Pattern {
    /// Takes words of up to 64 letters.
    fn new(word: &str) -> Option<Pattern> {
        let mut pattern = Pattern {
            ascii: [0; 128],
            other: Vec::new(),
            letters: u32::try_from(word.chars().count())
                .ok()
                .filter(|n| (1..=64).contains(n))?,
        };
        for (bit, c) in word.chars().enumerate() {
            let mask = 1 << bit;
            match pattern.ascii.get_mut(c as usize) {
                Some(known) => *known |= mask,
                None => match pattern.other.iter_mut().find(|(other, _)| *other == c) {
                    Some((_, known)) => *known |= mask,
                    None => pattern.other.push((c, mask)),
                },
            }
        }
        Some(pattern)
    }

    fn places(&self, c: char) -> u64 {
        match self.ascii.get(c as usize) {
            Some(mask) => *mask,
            None => self
                .other
                .iter()
                .find(|(other, _)| *other == c)
                .map_or(0, |(_, mask)| *mask),
        }
    }

    /// Returns the fewest slips between the word and any beginning of a name, if they are few enough.
    fn slips_to_beginning(&self, name: &str, allowed: u32) -> Option<u32> {
        let last = 1u64 << (self.letters - 1);
        let (mut up, mut down, mut diagonal, mut before) = (u64::MAX, 0u64, 0u64, 0u64);
        let mut slips = self.letters;
        let mut fewest = slips;
        for c in name.chars().take((self.letters + allowed) as usize) {
            let here = self.places(c);
            let swapped = ((!diagonal & here) << 1) & before;
            diagonal = ((here & up).wrapping_add(up) ^ up) | here | down | swapped;
            let right = down | !(diagonal | up);
            let left = diagonal & up;
            slips += u32::from(right & last != 0);
            slips -= u32::from(left & last != 0);
            let right = (right << 1) | 1;
            up = (left << 1) | !(diagonal | right);
            down = right & diagonal;
            before = here;
            fewest = fewest.min(slips);
        }
        (fewest <= allowed).then_some(fewest)
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// The same, from a table of edit distances.
    fn by_table(word: &str, name: &str) -> u32 {
        let letters: Vec<char> = name.chars().collect();
        (0..=letters.len())
            .map(|n| strsim::osa_distance(word, &letters[..n].iter().collect::<String>()))
            .min()
            .unwrap() as u32
    }

    proptest! {
        #[test]
        fn agrees_with_a_table_of_distances(word in "[abcλ]{1,12}", name in "[abcλ]{0,14}") {
            for allowed in [1, 2] {
                let expected = Some(by_table(&word, &name)).filter(|n| *n <= allowed);
                let found = Pattern::new(&word).unwrap().slips_to_beginning(&name, allowed);
                prop_assert_eq!(found, expected);
            }
        }
    }

    #[test]
    fn long_words_and_digits_are_taken_as_typed() {
        assert_eq!(slips("q-10482"), 0);
        assert_eq!((slips("ada"), slips("okaf"), slips("oyelaran")), (0, 1, 2));
        assert!(Pattern::new(&"a".repeat(65)).is_none());
        let mut names = Names::default();
        names.add("okafor", 7);
        assert_eq!(names.near("okofor"), HashMap::from([(7, 1)]));
        assert!(names.near("okafor").is_empty(), "not near but there");
        assert!(names.near(&"a".repeat(70)).is_empty());
    }
}
