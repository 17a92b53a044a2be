//! The running line of an emergency, from the key that saved it until somebody was told.

use super::desk::Desk;
use super::error::{ActionError, Result};
use super::views::{OpenUrgent, UrgentAnswer};
use crate::clock::{self, Moment};
use crate::store::new_id;
use crate::store::row::UrgentAction;

impl Desk {
    /// Returns the emergencies that nobody has entered an action for, oldest first.
    pub fn urgent_open(&self) -> Result<Vec<OpenUrgent>> {
        Ok(self
            .read()
            .urgent_open()?
            .into_iter()
            .filter_map(|open| {
                let name = open.child.as_ref().map_or_else(
                    || open.raised.child_id.clone(),
                    |c| format!("{}, {}", c.family_name, c.given_name),
                );
                Some(OpenUrgent {
                    visit: open.raised.visit_id?,
                    child_id: open.raised.child_id,
                    name,
                    class: open.child.and_then(|c| c.class).unwrap_or_default(),
                    what: open.raised.signs,
                    since: Moment {
                        utc_ms: open.raised.at_ms,
                        offset_minutes: open.raised.at_offset_minutes as i32,
                    },
                })
            })
            .collect())
    }

    /// Enters who was told of an emergency, when and by whom; the running line ends.
    pub fn urgent_answer(&mut self, answer: &UrgentAnswer) -> Result<()> {
        for (what, text) in [
            ("who was told", &answer.told),
            ("when", &answer.told_at),
            ("by whom", &answer.told_by),
        ] {
            if text.trim().is_empty() {
                return Err(ActionError::bad(format!("enter {what}")));
            }
        }
        let open = self
            .read()
            .urgent_open()?
            .into_iter()
            .find(|u| u.raised.visit_id == Some(answer.visit))
            .ok_or_else(|| ActionError::bad("this emergency is answered already"))?;
        let at = clock::now();
        let row = UrgentAction {
            id: new_id(),
            urgent_id: open.raised.urgent_id,
            step: "told".to_owned(),
            child_id: open.raised.child_id,
            visit_id: Some(answer.visit),
            signs: open.raised.signs,
            told: answer.told.trim().to_owned(),
            at_ms: at.utc_ms,
            at_offset_minutes: i64::from(at.offset_minutes),
            screener_id: self.screener.as_ref().map(|s| s.screener_id),
            note: format!(
                "told at {} by {}",
                answer.told_at.trim(),
                answer.told_by.trim()
            ),
        };
        let author = self.author();
        Ok(self.store.append(&author, |tx| tx.add(&row))?)
    }
}
