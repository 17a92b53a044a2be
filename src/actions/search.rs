//! Finds a child while somebody types: exact and beginnings first, then parts, then what a slip of
//! the finger explains.

mod near;

use std::collections::HashMap;

use memchr::memmem::Finder;

use self::near::{Names, slips};
use super::views::FoundChild;
use crate::domain::text::folded;

/// How many digits of a telephone number's end are asked for at least.
const PHONE_DIGITS: usize = 3;

/// All children of the store as folded text in one buffer, a line each.
///
/// One pass over one buffer answers a key in well under 5 ms for 100,000 children; a search per
/// name took three times as long.
pub struct SearchIndex {
    children: Vec<FoundChild>,
    /// Family name, given name, id, class, each after a blank.
    text: Lines,
    /// Where the names end in each line.
    names_end: Vec<u32>,
    /// The digits of the guardian's telephone number.
    phones: Lines,
    names: Names,
}

/// A child as it is indexed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Indexed {
    /// The child.
    pub child: FoundChild,
    /// The guardian's telephone number; empty where it is not to be found by.
    pub phone: String,
}

/// Lines in one buffer.
#[derive(Default)]
struct Lines {
    text: String,
    /// Where each line starts, with the end of the text last.
    starts: Vec<usize>,
}

impl Lines {
    fn line(&self, at: usize) -> &str {
        &self.text[self.starts[at]..self.starts[at + 1]]
    }

    /// Returns the lines that hold a text, in order.
    fn holding(&self, finder: &Finder<'_>) -> Vec<usize> {
        let mut out = Vec::new();
        let mut at = 0;
        let mut from = 0;
        while let Some(found) = finder.find(&self.text.as_bytes()[from..]) {
            let position = from + found;
            at += self.starts[at..].partition_point(|start| *start <= position) - 1;
            out.push(at);
            at += 1;
            from = self.starts[at];
        }
        out
    }
}

/// A word that was typed.
struct Word<'w> {
    text: &'w str,
    finder: Finder<'w>,
    /// The digits before the end of a line of telephone numbers.
    phone: Option<String>,
}

impl<'w> Word<'w> {
    fn new(text: &'w str) -> Word<'w> {
        let digits: String = text.chars().filter(char::is_ascii_digit).collect();
        let is_phone = digits.len() >= PHONE_DIGITS
            && text
                .chars()
                .all(|c| c.is_ascii_digit() || matches!(c, '-' | '+' | '(' | ')' | '.' | '/'));
        Word {
            text,
            finder: Finder::new(text),
            phone: is_phone.then(|| digits + "\n"),
        }
    }

    /// Returns how well a line holds the word: exactly, at a beginning, inside; nothing if not.
    fn rank(&self, line: &str) -> Option<u32> {
        let bytes = line.as_bytes();
        let mut best = None;
        for at in self.finder.find_iter(bytes) {
            let begins = bytes.get(at.wrapping_sub(1)) == Some(&b' ');
            let ends = matches!(bytes.get(at + self.text.len()), Some(b' ' | b'\n'));
            let rank = match (begins, ends) {
                (true, true) => return Some(0),
                (true, false) => 1,
                (false, _) => 3,
            };
            best = Some(best.map_or(rank, |b: u32| b.min(rank)));
        }
        best
    }
}

impl SearchIndex {
    /// Builds the index.
    pub fn new(mut indexed: Vec<Indexed>) -> SearchIndex {
        indexed.sort_by_cached_key(|i| {
            let child = &i.child;
            (
                folded(&child.family_name),
                folded(&child.given_name),
                child.dob,
            )
        });
        let mut text = Lines::default();
        let mut phones = Lines::default();
        let mut names_end = Vec::with_capacity(indexed.len());
        let mut names = Names::default();
        text.text.reserve(indexed.len() * 40);
        let mut children = Vec::with_capacity(indexed.len());
        for (at, Indexed { child, phone }) in indexed.into_iter().enumerate() {
            text.starts.push(text.text.len());
            phones.starts.push(phones.text.len());
            for part in [&child.family_name, &child.given_name] {
                let part = folded(part);
                part.split_whitespace().for_each(|name| names.add(name, at));
                text.text.push(' ');
                text.text.push_str(&part);
            }
            names_end.push((text.text.len() - text.starts[at]) as u32);
            for part in [&child.child_id, &child.class] {
                text.text.push(' ');
                text.text.push_str(&folded(part));
            }
            text.text.push('\n');
            phones
                .text
                .extend(phone.chars().filter(char::is_ascii_digit));
            phones.text.push('\n');
            children.push(child);
        }
        text.starts.push(text.text.len());
        phones.starts.push(phones.text.len());
        SearchIndex {
            children,
            text,
            names_end,
            phones,
            names,
        }
    }

    /// Returns how many children the index holds.
    pub fn len(&self) -> usize {
        self.children.len()
    }

    /// Says whether there is nobody to find.
    pub fn is_empty(&self) -> bool {
        self.children.is_empty()
    }

    /// Returns the child with exactly this id.
    pub fn by_id(&self, child_id: &str) -> Option<&FoundChild> {
        self.children.iter().find(|c| c.child_id == child_id)
    }

    /// Returns the best hits for what was typed: every word must be found somewhere in name, id,
    /// class, or at the end of the guardian's telephone number (three digits or more).
    ///
    /// Exact words come before beginnings, beginnings before middles, and last what one slip in a
    /// word of four letters or more, or two in eight or more, explains.
    pub fn find(&self, typed: &str, limit: usize) -> Vec<FoundChild> {
        let typed = folded(typed);
        let words: Vec<Word<'_>> = typed
            .split_whitespace()
            .map(|w| w.trim_end_matches(','))
            .filter(|w| !w.is_empty())
            .map(Word::new)
            .collect();
        if words.is_empty() || limit == 0 {
            return Vec::new();
        }
        let mut hits = self.strict(&words, limit);
        best(&mut hits, limit);
        if hits.len() < limit {
            let mut more = self.forgiving(&words);
            let known: Vec<usize> = hits.iter().map(|(_, at)| *at).collect();
            more.retain(|(_, at)| !known.contains(at));
            best(&mut more, limit - hits.len());
            hits.extend(more);
        }
        hits.into_iter()
            .map(|(_, at)| FoundChild {
                why: self.why(&words, at),
                ..self.children[at].clone()
            })
            .collect()
    }

    /// Returns (rank, place) of the lines that hold every word; a smaller rank is better.
    fn strict(&self, words: &[Word<'_>], limit: usize) -> Vec<(u32, usize)> {
        let Some(longest) = words.iter().max_by_key(|w| w.text.len()) else {
            return Vec::new();
        };
        if let [only] = words
            && only.phone.is_none()
        {
            // One short word begins thousands of names: its middles are not looked at then.
            let beginning = format!(" {}", only.text);
            let begins = self.text.holding(&Finder::new(&beginning));
            if begins.len() >= limit {
                return self.ranked(begins, words);
            }
        }
        let mut lines = self.text.holding(&longest.finder);
        if let Some(end) = &longest.phone {
            lines.extend(self.phones.holding(&Finder::new(end)));
            lines.sort_unstable();
            lines.dedup();
        }
        self.ranked(lines, words)
    }

    fn ranked(&self, lines: Vec<usize>, words: &[Word<'_>]) -> Vec<(u32, usize)> {
        lines
            .into_iter()
            .filter_map(|at| Some((self.rank(words, at)?, at)))
            .collect()
    }

    fn rank(&self, words: &[Word<'_>], at: usize) -> Option<u32> {
        let line = self.text.line(at);
        let leads = words.first().is_some_and(|w| line[1..].starts_with(w.text));
        words
            .iter()
            .map(|word| word.rank(line).or_else(|| self.phone_rank(word, at)))
            .try_fold(u32::from(!leads), |sum, rank| Some(sum + rank?))
    }

    fn phone_rank(&self, word: &Word<'_>, at: usize) -> Option<u32> {
        let end = word.phone.as_ref()?;
        self.phones.line(at).ends_with(end.as_str()).then_some(2)
    }

    /// Returns (rank, place) of the children whose names a slip explains; each word is held by the
    /// line or near one of the names.
    fn forgiving(&self, words: &[Word<'_>]) -> Vec<(u32, usize)> {
        let near: Vec<HashMap<usize, u32>> = words
            .iter()
            .map(|word| self.names.near(word.text))
            .collect();
        let mut hits: HashMap<usize, u32> = HashMap::new();
        for at in near.iter().flat_map(HashMap::keys) {
            let line = self.text.line(*at);
            let rank = words.iter().zip(&near).try_fold(0, |sum, (word, near)| {
                let rank = word
                    .rank(line)
                    .or_else(|| self.phone_rank(word, *at))
                    .or_else(|| near.get(at).map(|slips| 10 * slips))?;
                Some(sum + rank)
            });
            if let Some(rank) = rank {
                hits.insert(*at, rank);
            }
        }
        hits.into_iter().map(|(at, rank)| (rank, at)).collect()
    }

    /// Says what was found where it is not the name as it was typed.
    fn why(&self, words: &[Word<'_>], at: usize) -> String {
        let line = self.text.line(at);
        let (name, rest) = line.split_at(self.names_end[at] as usize);
        let child = &self.children[at];
        let mut said: Vec<String> = Vec::new();
        for word in words {
            let words = if word.rank(name).is_some() {
                continue;
            } else if word.rank(rest).is_some() {
                if folded(&child.child_id).contains(word.text) {
                    "id".to_owned()
                } else {
                    "class".to_owned()
                }
            } else if let Some(end) = word.phone.as_ref().map(|end| end.trim_end()) {
                format!("phone ends {end}")
            } else if slips(word.text) > 0 {
                format!("a name like {}", word.text)
            } else {
                continue;
            };
            if !said.contains(&words) {
                said.push(words);
            }
        }
        said.join(", ")
    }
}

/// Keeps the best hits, in order.
fn best(hits: &mut Vec<(u32, usize)>, limit: usize) {
    if hits.len() > limit {
        hits.select_nth_unstable(limit);
        hits.truncate(limit);
    }
    hits.sort_unstable();
}

#[cfg(test)]
mod tests {
    use super::*;

    fn index(children: &[(&str, &str, &str, &str, &str)]) -> SearchIndex {
        SearchIndex::new(
            children
                .iter()
                .map(|(family, given, id, class, phone)| Indexed {
                    child: FoundChild {
                        child_id: (*id).into(),
                        family_name: (*family).into(),
                        given_name: (*given).into(),
                        dob: None,
                        site: "QE".into(),
                        class: (*class).into(),
                        why: String::new(),
                    },
                    phone: (*phone).into(),
                })
                .collect(),
        )
    }

    fn ids(index: &SearchIndex, typed: &str) -> Vec<String> {
        index
            .find(typed, 10)
            .into_iter()
            .map(|c| c.child_id)
            .collect()
    }

    fn why(index: &SearchIndex, typed: &str) -> Vec<(String, String)> {
        index
            .find(typed, 10)
            .into_iter()
            .map(|c| (c.child_id, c.why))
            .collect()
    }

    #[test]
    fn finds_by_parts_in_any_order_and_script_without_accents() {
        let index = index(&[
            ("Nguyễn", "Bảo", "Q-1", "1B", ""),
            ("Łukaszewicz", "Đặng", "Q-2", "1B", ""),
            ("Bauer", "Nia", "Q-3", "1C", ""),
            ("王", "小明", "Q-4", "1C", ""),
            ("Αγγελίδης", "Νίκος", "Q-5", "1C", ""),
            ("النجار", "سامي", "Q-6", "1C", ""),
        ]);
        assert_eq!(ids(&index, "nguyen"), ["Q-1"]);
        assert_eq!(ids(&index, "bao ngu"), ["Q-1"]);
        assert_eq!(ids(&index, "dang"), ["Q-2"]);
        assert_eq!(ids(&index, "kaszew"), ["Q-2"], "any part");
        assert_eq!(ids(&index, "q-3"), ["Q-3"]);
        assert_eq!(ids(&index, "小明"), ["Q-4"]);
        assert_eq!(ids(&index, "νικος αγγ"), ["Q-5"]);
        assert_eq!(ids(&index, "نجار"), ["Q-6"]);
        assert_eq!(ids(&index, "ba"), ["Q-3", "Q-1"], "the family name leads");
        assert!(ids(&index, "").is_empty());
        assert!(ids(&index, " , ").is_empty());
        assert!(ids(&index, "zzz").is_empty());
    }

    #[test]
    fn first_letters_of_both_names_are_enough() {
        let index = index(&[
            ("Brook", "Madison", "Q-1", "", ""),
            ("Okafor", "Ada", "Q-2", "", ""),
            ("Adair", "Okal", "Q-3", "", ""),
        ]);
        assert_eq!(ids(&index, "ok ad"), ["Q-2", "Q-3", "Q-1"]);
        assert_eq!(ids(&index, "okafor, ada"), ["Q-2"]);
    }

    #[test]
    fn exact_words_come_before_beginnings_and_middles() {
        let index = index(&[
            ("Annan", "Kofi", "Q-1", "", ""),
            ("Hanna", "Iris", "Q-2", "", ""),
            ("Anna", "Zoe", "Q-3", "", ""),
            ("Zebra", "Anna", "Q-4", "", ""),
        ]);
        assert_eq!(ids(&index, "anna"), ["Q-3", "Q-1", "Q-4", "Q-2"]);
    }

    #[test]
    fn one_slip_in_four_letters_two_in_eight() {
        let index = index(&[
            ("Okafor", "Ada", "Q-1", "", ""),
            ("Oyelaran-Benali", "Tunde", "Q-2", "", ""),
            ("Smith", "Rowan", "Q-3", "", ""),
            ("Smyth", "Rowan", "Q-4", "", ""),
        ]);
        for typed in [
            "okofor",
            "okafr",
            "okkafor",
            "koafor",
            "okafr ada",
            "tunde oyelarn",
        ] {
            assert_eq!(ids(&index, typed).len(), 1, "{typed}");
        }
        assert_eq!(
            ids(&index, "oyalarn"),
            Vec::<String>::new(),
            "two slips in seven"
        );
        assert_eq!(
            ids(&index, "oyalarn-be"),
            ["Q-2"],
            "two slips in more than eight"
        );
        assert_eq!(
            ids(&index, "okf"),
            Vec::<String>::new(),
            "three letters are taken as typed"
        );
        assert_eq!(ids(&index, "smyth"), ["Q-4", "Q-3"], "the exact one first");
        assert_eq!(why(&index, "smyth")[1].1, "a name like smyth");
        assert_eq!(why(&index, "smyth")[0].1, "");
        assert!(
            ids(&index, "okafor tundo").is_empty(),
            "each word belongs to one child"
        );
    }

    #[test]
    fn the_end_of_a_telephone_number_counts_and_says_so() {
        let index = index(&[
            ("Okafor", "Ada", "Q-10190", "1B", "(555) 0-123"),
            ("Petit", "Léa", "Q-2", "2A", "+1 555-0190"),
            ("Sands", "Oliver", "Q-3", "2A", "555-0191"),
        ]);
        assert_eq!(
            why(&index, "0190"),
            [
                ("Q-2".to_owned(), "phone ends 0190".to_owned()),
                ("Q-10190".to_owned(), "id".to_owned())
            ]
        );
        assert_eq!(ids(&index, "555-0190"), ["Q-2"]);
        assert_eq!(ids(&index, "pet 190"), ["Q-2"]);
        assert!(
            ids(&index, "90").iter().all(|id| id == "Q-10190"),
            "two digits are no phone"
        );
        assert!(ids(&index, "5550").is_empty(), "the end, not the beginning");
        assert_eq!(
            why(&index, "2a"),
            [
                ("Q-2".to_owned(), "class".to_owned()),
                ("Q-3".to_owned(), "class".to_owned())
            ]
        );
    }
}
