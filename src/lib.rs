//! Twoline records children's vision screenings, applies published referral rules exactly and
//! explains each outcome.

pub mod domain;
