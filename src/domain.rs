//! What vision screening knows, without I/O, clock or database.

pub mod acuity;
pub mod age;
pub mod codes;
pub mod diagnosis;
pub mod exam;
pub mod field;
pub mod form_code;
pub mod formula;
pub mod number;
pub mod outcome;
pub mod readings;
pub mod referral;
pub mod refraction;
pub mod roster;
pub mod school_calendar;
pub mod screening_test;
pub mod text;
