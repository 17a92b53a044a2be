//! What the store answered about visits of the day.

use crate::actions::{DayChild, QueueState, Signed};
use crate::tui::app::{Effect, Request, Session};
use crate::tui::day::Day;
use crate::tui::day::bench::Bench;
use crate::tui::text::name;

impl Day {
    /// Takes the store's word that a visit is signed.
    pub fn signed(&mut self, signed: Signed) -> Vec<Effect> {
        let child = signed.child;
        let id = child.child_id.clone();
        self.saving.remove(&id);
        self.last_signed = Some((
            signed.visit,
            id.clone(),
            name(&child.family_name, &child.given_name),
        ));
        let mut effects = self.forget_draft(&id);
        self.queue.update(child);
        effects.extend(self.reload(&id));
        effects
    }

    /// Takes the store's word that a visit was not signed: the draft stays.
    pub fn not_signed(&mut self, id: &str) -> String {
        self.saving.remove(id);
        self.queue
            .child(id)
            .map_or_else(|| id.to_owned(), |c| name(&c.family_name, &c.given_name))
    }

    /// Puts a child's new standing into the list, and onto the bench if the child is there.
    pub fn refresh(&mut self, session: &Session, child: DayChild) -> Vec<Effect> {
        let id = child.child_id.clone();
        self.queue.update(child.clone());
        if self.bench.as_ref().is_some_and(|b| b.child.child_id == id) {
            let draft = self.drafts.get(&id);
            self.bench = Some(Bench::new(session, &self.info, child, draft));
        }
        self.reload(&id)
    }

    fn reload(&self, id: &str) -> Vec<Effect> {
        let on_bench = self.bench.as_ref().is_some_and(|b| b.child.child_id == id);
        let done = self
            .queue
            .child(id)
            .is_some_and(|c| c.state != QueueState::ToCome);
        if on_bench && done {
            vec![Effect::ask(Request::Visit(
                (*self.info).clone(),
                id.to_owned(),
            ))]
        } else {
            Vec::new()
        }
    }

    /// Shows a signed visit, with one's own draft or part beside it, if its child is on the bench.
    pub fn show_visit(&mut self, id: &str, visit: Option<crate::actions::VisitView>) {
        if let (Some(bench), Some(visit)) = (&mut self.bench, visit)
            && bench.child.child_id == id
        {
            bench.show_visit(visit, self.drafts.get(id));
        }
    }
}
