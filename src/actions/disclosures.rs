//! What left the programme, to whom and what for: the log of disclosures (34 CFR 99.32).

use std::collections::{BTreeSet, HashMap};

use chrono::NaiveDate;

use super::desk::Desk;
use super::error::{ActionError, Result};
use super::report::Report;
use crate::domain::age::spoken;
use crate::domain::text::one_line;
use crate::reports::csv::Form;
use crate::reports::day::StoreState;
use crate::reports::disclosures::{self, DisclosureRow};
use crate::store::new_id;
use crate::store::row::Disclosure;

/// Longest recipient or purpose, in characters.
const LONGEST: usize = 200;

/// Who outside the programme gets a file, and what for.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Recipient {
    who: String,
    purpose: String,
}

impl Recipient {
    /// Makes a recipient with the purpose.
    ///
    /// # Errors
    /// Bad input where one of the two says nothing, is no line of text, or has more than 200
    /// characters.
    pub fn new(who: &str, purpose: &str) -> Result<Recipient> {
        let said = |what: &str, text: &str| {
            one_line(text, LONGEST)
                .ok()
                .filter(|text| !text.is_empty())
                .ok_or_else(|| {
                    ActionError::bad(format!(
                        "the {what} is a line of 1 to {LONGEST} ordinary characters"
                    ))
                })
        };
        Ok(Recipient {
            who: said("recipient", who)?,
            purpose: said("purpose", purpose)?,
        })
    }
}

impl Report {
    /// Returns the text beside the file, which says for whom it is.
    pub fn about_for(&self, to: Option<&Recipient>) -> String {
        let whom = match to {
            Some(to) => format!(
                "For {}. Purpose: {}. Each child in it stands in the disclosure log.",
                to.who, to.purpose
            ),
            None => {
                "For the programme's own use: no recipient was named, and nothing stands in the \
                     disclosure log. Before it leaves the programme, write it with --recipient and \
                     --purpose."
                    .to_owned()
            }
        };
        format!("{}\n{whom}\n", self.about)
    }
}

impl Desk {
    /// Enters that a file goes to somebody outside the programme: one entry for each child in it, in
    /// one transaction. Returns how many.
    pub fn disclose(
        &mut self,
        to: &Recipient,
        what: &str,
        file: &str,
        children: &[String],
    ) -> Result<usize> {
        let left = children.iter().map(|id| (what.to_owned(), id.clone()));
        self.disclose_each(to, file, left)
    }

    /// Enters each child with what left about it, the same once; returns how many.
    pub(super) fn disclose_each(
        &mut self,
        to: &Recipient,
        file: &str,
        left: impl Iterator<Item = (String, String)>,
    ) -> Result<usize> {
        let rows: Vec<Disclosure> = left
            .collect::<BTreeSet<_>>()
            .into_iter()
            .map(|(what, child_id)| Disclosure {
                id: new_id(),
                disclosure_id: new_id(),
                child_id,
                disclosed_on: self.today,
                recipient: to.who.clone(),
                purpose: to.purpose.clone(),
                what,
                file_name: file.to_owned(),
                screener_id: self.screener.as_ref().map(|s| s.screener_id),
            })
            .collect();
        if !rows.is_empty() {
            let author = self.author();
            self.store
                .append(&author, |tx| rows.iter().try_for_each(|row| tx.add(row)))?;
        }
        Ok(rows.len())
    }

    /// Returns what left the programme, of one child or of all, in the order of the days.
    ///
    /// # Errors
    /// Bad input for a child that is not known.
    pub fn disclosures(&self, child: Option<&str>) -> Result<Vec<DisclosureRow>> {
        let read = self.read();
        if let Some(id) = child
            && read.child(id)?.is_none()
        {
            return Err(ActionError::bad(format!("no child has the id {id:?}"))
                .hint("twoline child find TEXT"));
        }
        let screeners = self.screener_names()?;
        let mut names: HashMap<String, (String, String)> = HashMap::new();
        let mut list = Vec::new();
        for entry in read.disclosures()? {
            if child.is_some_and(|id| id != entry.child_id) {
                continue;
            }
            if !names.contains_key(&entry.child_id) {
                let name = read
                    .child(&entry.child_id)?
                    .map(|c| (c.family_name, c.given_name));
                names.insert(entry.child_id.clone(), name.unwrap_or_default());
            }
            let (family_name, given_name) = names.get(&entry.child_id).cloned().unwrap_or_default();
            list.push(DisclosureRow {
                disclosed_on: entry.disclosed_on,
                family_name,
                given_name,
                child_id: entry.child_id,
                recipient: entry.recipient,
                purpose: entry.purpose,
                what: entry.what,
                file: entry.file_name,
                by: entry
                    .screener_id
                    .and_then(|id| screeners.get(&id).cloned())
                    .unwrap_or_default(),
            });
        }
        Ok(list)
    }

    /// Returns the log in CSV, or as plain text for people.
    pub fn disclosures_report(
        &self,
        child: Option<&str>,
        csv: bool,
        exact: bool,
    ) -> Result<Report> {
        let list = self.disclosures(child)?;
        let head = self.head()?;
        let state = StoreState {
            head: head.whole(),
            entries: head.entries,
        };
        let title = title(child, self.today);
        let bytes = if csv {
            disclosures::write(Vec::new(), Form::exact(exact), &list, &state)
                .map_err(|e| ActionError::failed(e.to_string()))?
        } else {
            let mut text = format!("{title}: {} entries\n", list.len());
            for row in &list {
                text.push_str(&in_words(row));
                text.push('\n');
            }
            text.into_bytes()
        };
        Ok(Report {
            bytes,
            about: format!(
                "{title}\n\nStore head {}, {} entries\n",
                state.head, state.entries
            ),
            rows: list.len(),
            children: list.into_iter().map(|row| row.child_id).collect(),
            title,
        })
    }
}

fn title(child: Option<&str>, today: NaiveDate) -> String {
    let whose = child.map(|id| format!(" of {id}")).unwrap_or_default();
    format!("Disclosures{whose} up to {}", spoken(today))
}

/// Returns an entry as a sentence.
fn in_words(row: &DisclosureRow) -> String {
    let mut words = format!(
        "{}  {} {}, {}: {} to {}, for {}",
        row.disclosed_on,
        row.child_id,
        row.family_name,
        row.given_name,
        row.what,
        row.recipient,
        row.purpose
    );
    for (before, text) in [("; file ", &row.file), ("; by ", &row.by)] {
        if !text.is_empty() {
            words.push_str(before);
            words.push_str(text);
        }
    }
    words
}
