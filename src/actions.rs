//! One function is one user intention and one transaction.
//!
//! A [`Desk`] is an open store with the rule library beside it: what a nurse sits down at. The
//! screens and the command line ask it and tell it things; neither sees a table.

pub mod judge;
pub mod rulebook;
mod search;
mod views;

pub use search::SearchIndex;
pub use views::{
    ChildHistory, CorrectionView, DayChild, DayInfo, FoundChild, NewChild, NewDay, OpenUrgent,
    QueueState, SignRequest, Signed, StoredOutcome, UrgentAnswer, VisitView,
};
