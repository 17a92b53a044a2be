//! A local rule set that overrides single criteria of another one.
//!
//! The same id replaces, a new id adds, `remove = [..]` leaves out. What is taken over keeps its
//! own source, so that the set carries both.

use std::ops::Range;
use std::sync::Arc;

use crate::domain::outcome::Source;
use crate::domain::text::nearest;
use crate::rules::{Applies, Criterion, Library, RuleSet};

use super::reader::{Reader, Section};

/// The rule set that a file is based on.
pub(super) struct Base<'l> {
    set: &'l RuleSet,
    removed: Vec<String>,
    /// Where the file names it.
    pub span: Range<usize>,
    /// Whether the file says its own line credit.
    own_credit: bool,
    /// Whether the file says its own ages.
    own_ages: bool,
}

/// Reads `based_on` and `remove`.
pub(super) fn read<'l>(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    local: bool,
    library: &'l Library,
) -> Option<Base<'l>> {
    let Some((id, span)) = reader.optional(root, "based_on") else {
        if let Some(remove) = root.table.get("remove") {
            reader.fault(
                remove.span(),
                "`remove` without `based_on`",
                "based_on = \"…\"",
                "only what another rule set has can be left out",
            );
        }
        return None;
    };
    if !local {
        reader.fault(
            span,
            "a shipped rule set stands on its own",
            "no based_on",
            "",
        );
        return None;
    }
    let Some(set) = library.rule_set(&id) else {
        let known: Vec<&str> = library.rule_sets().map(|s| &*s.id).collect();
        let cure = nearest(&id, known.iter().copied())
            .map(|near| format!("did you mean \"{near}\"?"))
            .unwrap_or_default();
        let expected = format!("one of {}", known.join(", "));
        reader.fault(span, format!("no rule set `{id}`"), expected, cure);
        return None;
    };
    let mut removed = Vec::new();
    for (id, span) in reader.list(root, "remove") {
        if set.criteria.iter().any(|c| *c.id == *id) {
            removed.push(id);
            continue;
        }
        let known: Vec<&str> = set.criteria.iter().map(|c| &*c.id).collect();
        let cure = nearest(&id, known.iter().copied())
            .map(|near| format!("did you mean \"{near}\"?"))
            .unwrap_or_default();
        let expected = format!("one of {}", known.join(", "));
        let what = format!("{} has no criterion `{id}`", set.id);
        reader.fault(span, what, expected, cure);
    }
    Some(Base {
        set,
        removed,
        span,
        own_credit: root.table.contains_key("line_credit"),
        own_ages: root.table.contains_key("ages"),
    })
}

impl Base<'_> {
    /// Returns the criteria that are taken over as they are.
    pub fn kept(&self, is_own: impl Fn(&str) -> bool) -> impl Iterator<Item = &Criterion> {
        self.set
            .criteria
            .iter()
            .filter(move |c| !is_own(&c.id) && !self.removed.iter().any(|r| **r == *c.id))
    }

    /// Puts a file's own criteria in their places among those taken over.
    pub fn completed(self, mut own: RuleSet) -> RuleSet {
        let mut news = std::mem::take(&mut own.criteria);
        let own_bands = super::span_of(&news);
        for criterion in &self.set.criteria {
            if let Some(at) = news.iter().position(|n| n.id == criterion.id) {
                own.criteria.push(news.remove(at));
            } else if !self.removed.iter().any(|r| **r == *criterion.id) {
                own.criteria.push(criterion.clone());
            }
        }
        own.criteria.extend(news);
        if !self.own_ages {
            own.span = self.ages(&own.criteria, own_bands);
        }
        own.by_grade |= own
            .criteria
            .iter()
            .any(|c| matches!(c.applies, Applies::Grades(_)));
        if !self.own_credit {
            own.credit = self.set.credit;
            own.credit_text = Arc::clone(&self.set.credit_text);
            own.credit_source = Arc::clone(&self.set.credit_source);
        }
        for source in &self.set.sources {
            if !own.sources.contains(source) {
                own.sources.push(Arc::clone(source));
            }
        }
        if own.region.is_empty() {
            own.region.clone_from(&self.set.region);
        }
        if own.note.is_empty() {
            own.note.clone_from(&self.set.note);
        }
        // The text that is kept with an outcome says everything that decided it.
        let text = format!(
            "{}\n\n# Based on {}, whose text follows.\n\n{}",
            own.text, self.set.id, self.set.text
        );
        own.content_hash = super::hash([text.as_str()]);
        own.text = text.into();
        own.based_on = Some(Arc::clone(&self.set.id));
        own
    }

    /// Returns the ages that the criteria speak of: never more than some criterion is for, so that
    /// a child whose band was left out is not passed by the rest.
    fn ages(
        &self,
        criteria: &[Criterion],
        own: Option<(u32, Option<u32>)>,
    ) -> Option<(u32, Option<u32>)> {
        let banded = |list: &[Criterion]| {
            list.iter()
                .any(|c| matches!(c.applies, Applies::Ages { .. }))
        };
        let for_everyone = criteria.iter().any(|c| c.applies == Applies::Everyone);
        if banded(&self.set.criteria) || !for_everyone {
            return super::span_of(criteria);
        }
        let (base, own) = (self.set.span?, own.or(self.set.span)?);
        Some((base.0.min(own.0), base.1.zip(own.1).map(|(a, b)| a.max(b))))
    }
}

/// Marks every source of a local set with who approved it, so that it is said wherever the set
/// speaks.
pub(super) fn approved(mut set: RuleSet) -> RuleSet {
    let Some(words) = set.approval_words() else {
        return set;
    };
    let mark = |source: &mut Arc<Source>| {
        if source.approval != words {
            Arc::make_mut(source).approval.clone_from(&words);
        }
    };
    set.sources.iter_mut().for_each(mark);
    set.criteria.iter_mut().for_each(|c| mark(&mut c.source));
    mark(&mut set.credit_source);
    set
}
