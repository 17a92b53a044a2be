//! Tests of `store`.
#![allow(clippy::unwrap_used, clippy::panic)]

mod append;
mod drafts;
mod key;
mod ledger;
mod older;
mod open;
mod packets;
mod random;
mod reads;
mod support;
mod tamper;
