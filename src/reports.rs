//! Typed rows in, bytes out.

pub mod csv;
pub mod day;
pub mod disclosures;
pub mod door;
pub mod html;
pub mod letters;
pub mod referrals;
pub mod sheet;
