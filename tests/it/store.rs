//! Tests of `store`.

mod append;
mod drafts;
mod key;
mod ledger;
mod open;
mod reads;
mod support;
mod tamper;
