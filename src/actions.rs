//! One function is one user intention and one transaction.
//!
//! A [`Desk`] is an open store with the rule library beside it: what a nurse sits down at. The
//! screens and the command line ask it and tell it things; neither sees a table.

mod judging;
mod search;
mod views;

pub use crate::rules::{CAUTIONS, Library, PassLine, explain, show};
pub use judging::{bench_fields, correction_from_roster, pass_line_for, preview};
pub use search::SearchIndex;
pub use views::{
    ChildHistory, CorrectionView, DayChild, DayInfo, FoundChild, NewChild, NewDay, OpenUrgent,
    QueueState, SignRequest, Signed, StoredOutcome, UrgentAnswer, VisitView,
};
