//! Lost children: referred in an earlier term or at another site, and never examined.

use std::collections::HashMap;

use chrono::NaiveDate;

use super::super::desk::Desk;
use super::super::error::Result;
use super::ReferralView;
use crate::domain::age::spoken;
use crate::domain::referral::StepKind;
use crate::store::row::Term;

/// A referral that was lost sight of.
#[derive(Debug, Clone, PartialEq)]
pub struct Lost {
    /// The referral.
    pub referral: ReferralView,
    /// Why it is on the list, in words.
    pub why: String,
}

impl Desk {
    /// Returns every lost child, the longest referred first: the referral is open, of an earlier term
    /// or of another site than the child's, and no examination since is known.
    pub fn lost_children(&self) -> Result<Vec<Lost>> {
        self.lost_of(self.referral_list()?)
    }

    /// Says of one child what was lost sight of.
    pub fn lost_child(&self, child_id: &str) -> Result<Vec<Lost>> {
        self.lost_of(self.referrals_of(child_id)?)
    }

    fn lost_of(&self, referrals: Vec<ReferralView>) -> Result<Vec<Lost>> {
        let terms = self.read().terms()?;
        let mut examinations: HashMap<String, NaiveDate> = HashMap::new();
        for referral in &referrals {
            let newest = referral
                .reports
                .iter()
                .filter_map(|r| r.examined_on)
                .chain(referral.last_exam_on)
                .max();
            if let Some(on) = newest {
                let known = examinations.entry(referral.child_id.clone()).or_insert(on);
                *known = on.max(*known);
            }
        }
        let mut lost: Vec<Lost> = referrals
            .into_iter()
            .filter(|r| {
                let newest = examinations.get(&r.child_id);
                newest.is_none_or(|on| *on < r.opened.on)
            })
            .filter_map(|referral| {
                let why = reason(&referral, &terms, self.today)?;
                Some(Lost { referral, why })
            })
            .collect();
        lost.sort_by(|a, b| {
            let key = |l: &Lost| (l.referral.opened.on, l.referral.child_id.clone());
            key(a).cmp(&key(b))
        });
        Ok(lost)
    }
}

/// Says why a referral is lost; nothing where it is not.
fn reason(referral: &ReferralView, terms: &[Term], today: NaiveDate) -> Option<String> {
    let reported = referral
        .steps
        .iter()
        .any(|s| s.step.kind == StepKind::ReportReceived);
    if !referral.standing.state.is_open() || reported {
        return None;
    }
    let mut why = Vec::new();
    if let Some(term) = earlier_term(referral.opened.on, terms, today) {
        why.push(format!("referred {} {term}", spoken(referral.opened.on)));
    }
    let there = &referral.referred_at;
    if !there.is_empty() && *there != referral.site {
        why.push(if referral.site.is_empty() {
            format!("referred at {there}, now at no site")
        } else {
            format!("referred at {there}, now at {}", referral.site)
        });
    }
    if why.is_empty() {
        return None;
    }
    why.push("no examination is known".to_owned());
    Some(why.join("; "))
}

/// Says in which earlier term a day was; nothing where it is in the present one, or where the store
/// has no term that could tell.
fn earlier_term(on: NaiveDate, terms: &[Term], today: NaiveDate) -> Option<String> {
    let includes = |term: &&Term, day: NaiveDate| term.starts_on <= day && day <= term.ends_on;
    let now = terms.iter().find(|term| includes(term, today));
    if now.is_some_and(|term| term.starts_on <= on) {
        return None;
    }
    match terms.iter().find(|term| includes(term, on)) {
        Some(term) if term.ends_on < today => Some(format!("in an earlier term ({})", term.code)),
        _ => now.map(|term| format!("before this term ({}) began", term.code)),
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn term(code: &str, from: &str, to: &str) -> Term {
        Term {
            id: crate::store::new_id(),
            code: code.into(),
            title: code.into(),
            starts_on: day(from),
            ends_on: day(to),
        }
    }

    #[test]
    fn an_earlier_term_is_one_that_ended_or_any_day_before_the_present_one() {
        let terms = [
            term("spring", "2026-01-07", "2026-06-12"),
            term("autumn", "2026-08-17", "2026-12-18"),
        ];
        let said = |on: &str, today: &str| earlier_term(day(on), &terms, day(today));
        // In the same term, from its first to its last day.
        assert_eq!(said("2026-08-17", "2026-12-18"), None);
        assert_eq!(said("2026-06-12", "2026-06-12"), None);
        // The last day of the term before; a day between terms.
        assert_eq!(
            said("2026-06-12", "2026-08-17").unwrap(),
            "in an earlier term (spring)"
        );
        assert_eq!(
            said("2026-07-01", "2026-08-17").unwrap(),
            "before this term (autumn) began"
        );
        // In the holidays the term that ended is an earlier one.
        assert_eq!(
            said("2026-06-12", "2026-06-13").unwrap(),
            "in an earlier term (spring)"
        );
        // Without a term nothing can be said.
        assert_eq!(said("2025-11-01", "2026-07-01"), None);
        assert_eq!(
            earlier_term(day("2025-11-01"), &[], day("2026-07-01")),
            None
        );
    }
}
