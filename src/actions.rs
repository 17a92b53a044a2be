//! One function is one user intention and one transaction.
//!
//! A [`Desk`] is an open store with the rule library beside it: what a nurse sits down at. The
//! screens and the command line ask it and tell it things; neither sees a table.

pub mod board;
mod calendar;
mod children;
mod comfort;
pub mod compare;
mod days;
mod desk;
mod disclosures;
mod door;
mod error;
mod follow_up;
pub mod judge;
mod judging;
mod packets;
mod report;
mod rescreen;
mod results;
mod roster;
pub mod rulebook;
mod search;
mod settings;
mod setup;
mod sheet;
mod sign;
mod station;
mod triage;
mod united;
mod upkeep;
mod urgent;
mod value_history;
mod views;
mod visit_rows;
mod worklist;

pub use crate::rules::{CAUTIONS, Library, PassLine, RuleSet, explain, pass_line_of_set, show};
pub use crate::store::new_id as new_visit_id;
pub use crate::store::{
    Damage, Draft, DraftDay, Drafts, ExpectedHead, ForJoin, Fork, Head, Info, Kdf, Merged,
    PacketInfo, Put, RecoveryKey, Secret, Verified,
};
pub use calendar::{CalendarChange, CalendarView};
pub use desk::{Desk, DeskOptions};
pub use disclosures::Recipient;
pub use door::{AtTheDoor, Door};
pub use error::{ActionError, Kind, Result};
pub use follow_up::{
    ExamKept, ExamPlan, LetterChoice, Lost, PlannedExam, Printed, PrintedLetter, ReferralDetails,
    ReferralView, StepView,
};
pub use judging::{BenchTests, bench_tests, correction_from_roster, known, pass_line_for, preview};
pub use packets::{join, packet_info, restore};
pub use report::Report;
pub use results::{Different, PlannedVisit, ResultsPlan};
pub use roster::RosterPlan;
pub use search::SearchIndex;
pub use settings::SettingView;
pub use setup::{NewChart, NewStore, init};
pub use sheet::SheetRequest;
pub use station::{StationChange, StationChart, StationRole};
pub use triage::{NO_TRIAGE_SET, Said, Standing, whole_reason};
pub use upkeep::{protected, remove_demo, store_info, writer};
pub use value_history::ValueEntry;
pub use views::{
    Before, ChildHistory, CorrectionView, DayChild, DayInfo, FoundChild, NewChild, NewDay,
    OpenUrgent, QueueState, SignRequest, Signature, Signed, StoredOutcome, Together, Unsettled,
    UrgentAnswer, VisitView,
};
pub use visit_rows::judged;
pub use worklist::{DueBack, ORDER, Referred, Worklist, due_words};
