//! Typed rows in, bytes out.

pub mod csv;
pub mod day;
pub mod letters;
pub mod referrals;
