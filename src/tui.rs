//! The terminal screens: where a nurse with 300 children lives.
//!
//! A key press becomes a message, `update` changes the state without any I/O, effects go to the
//! thread that owns the store, its answers come back as messages, and `view` draws from a shared
//! reference.

mod answers;
pub mod app;
mod ask;
pub mod board;
mod children;
mod day;
mod days;
mod desk;
mod gate;
mod judging;
mod linear;
mod palette;
mod prompt;
mod prompt_view;
mod referrals;
mod rules;
mod run;
mod station;
mod submit;
mod tables;
mod text;
mod theme;
mod tour;
mod update;
pub mod view;
mod waiting;
mod watch;

pub use desk::{Clerk, Keeper, session};
pub use judging::Draft;
pub use run::{Error, Options, run};
pub use theme::{Theme, ThemeName};
