//! Everything that was ever recorded of one field of a visit.

use uuid::Uuid;

use super::desk::Desk;
use super::error::{ActionError, Result};
use crate::clock::Moment;
use crate::domain::field::Field;

/// One value that a field has or had.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ValueEntry {
    /// The value as it is stored.
    pub value: String,
    /// Which try of the visit.
    pub try_no: i64,
    /// Who recorded it.
    pub screener: String,
    /// When.
    pub at: Moment,
    /// Why it holds no more, by whom and when; nothing while it does.
    pub ended: Option<(String, String, Moment)>,
}

impl Desk {
    /// Returns every value of a field of a visit, in the order of recording.
    pub fn value_history(&self, visit: Uuid, field: Field) -> Result<Vec<ValueEntry>> {
        let read = self.read();
        let now = read
            .visit(visit)?
            .ok_or_else(|| ActionError::bad("there is no such visit, or it was taken back"))?;
        let screeners = self.screener_names()?;
        let named = |id: Option<Uuid>| {
            id.and_then(|id| screeners.get(&id).cloned())
                .unwrap_or_default()
        };
        let mut out = Vec::new();
        for reading in read.visit_record(now)?.readings {
            if reading.row.field != field {
                continue;
            }
            let ended = if reading.superseded {
                read.corrections_of(reading.row.id)?
                    .into_iter()
                    .next()
                    .map(|c| (c.row.reason, named(c.row.screener_id), c.at))
            } else {
                None
            };
            out.push(ValueEntry {
                value: reading.row.value,
                try_no: reading.row.try_no,
                screener: named(reading.screener),
                at: reading.at,
                ended,
            });
        }
        out.sort_by_key(|e| (e.at.utc_ms, e.try_no));
        Ok(out)
    }
}
