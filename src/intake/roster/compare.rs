//! A roster read again: what is new, changed, unchanged and gone.

use std::collections::{HashMap, HashSet};

use crate::domain::codes::{Consent, YesNo};
use crate::domain::roster::RosterChild;

/// A child whose row differs from what is known.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Changed {
    /// Index of the child among the new rows.
    pub new: usize,
    /// Index of the child among the known ones.
    pub known: usize,
    /// The columns that differ, with the known and the new text.
    pub fields: Vec<(&'static str, String, String)>,
}

/// The difference between a roster and what is known.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct RosterUpdate {
    /// Indexes of the new rows whose child is not known.
    pub new: Vec<usize>,
    /// Children whose row differs.
    pub changed: Vec<Changed>,
    /// Indexes of the new rows that say what is known.
    pub unchanged: Vec<usize>,
    /// Indexes of the known children that are not in the new rows.
    pub gone: Vec<usize>,
}

impl RosterUpdate {
    /// Compares by child id. Nothing is written or decided here.
    pub fn compare(known: &[RosterChild], new: &[RosterChild]) -> RosterUpdate {
        let by_id: HashMap<&str, usize> = known
            .iter()
            .enumerate()
            .map(|(i, child)| (child.child_id.as_str(), i))
            .collect();
        let mut update = RosterUpdate::default();
        let mut met = HashSet::with_capacity(new.len());
        for (i, child) in new.iter().enumerate() {
            let Some(&old) = by_id.get(child.child_id.as_str()) else {
                update.new.push(i);
                continue;
            };
            met.insert(old);
            if known[old] == *child {
                update.unchanged.push(i);
            } else {
                update.changed.push(Changed {
                    new: i,
                    known: old,
                    fields: differences(&known[old], child),
                });
            }
        }
        update.gone = (0..known.len()).filter(|i| !met.contains(i)).collect();
        update
    }
}

fn differences(old: &RosterChild, new: &RosterChild) -> Vec<(&'static str, String, String)> {
    cells(old)
        .into_iter()
        .zip(cells(new))
        .filter(|(a, b)| a.1 != b.1)
        .map(|(a, b)| (a.0, a.1, b.1))
        .collect()
}

fn cells(child: &RosterChild) -> Vec<(&'static str, String)> {
    fn text<T: ToString>(value: Option<T>) -> String {
        value.map(|v| v.to_string()).unwrap_or_default()
    }
    let d = &child.details;
    vec![
        ("family_name", child.family_name.clone()),
        ("given_name", child.given_name.clone()),
        ("dob", text(child.dob)),
        ("grade", text(child.grade)),
        ("site", child.site.clone()),
        ("class", d.class.clone()),
        ("teacher", d.teacher.clone()),
        ("sex", d.sex.clone()),
        ("language", d.language.clone()),
        ("ethnicity", d.ethnicity.clone()),
        ("insurance", d.insurance.clone()),
        (
            "special_education",
            text(d.special_education.map(YesNo::word)),
        ),
        ("state_id", d.state_id.clone()),
        ("guardian_name", d.guardian_name.clone()),
        ("guardian_phone", d.guardian_phone.clone()),
        ("guardian_email", d.guardian_email.clone()),
        ("guardian_address", d.guardian_address.clone()),
        ("guardian2_name", d.guardian2_name.clone()),
        ("guardian2_phone", d.guardian2_phone.clone()),
        ("guardian2_email", d.guardian2_email.clone()),
        ("consent", text(d.consent.map(Consent::word))),
        ("wears_glasses", text(d.wears_glasses.map(YesNo::word))),
        ("last_exam_on", text(d.last_exam_on)),
        ("under_care", text(d.under_care.map(YesNo::word))),
        ("known_condition", d.known_condition.clone()),
        ("doctor_name", d.doctor_name.clone()),
        ("doctor_phone", d.doctor_phone.clone()),
        ("history", d.history.clone()),
        ("notes", d.notes.clone()),
    ]
}
