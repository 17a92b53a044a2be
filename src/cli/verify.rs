//! `twoline verify`: recomputes the ledger.

use clap::Args;
use indicatif::{ProgressBar, ProgressStyle};

use super::output::print_lines;
use super::{Failure, Global, open};
use crate::actions::ExpectedHead;

/// Recompute the ledger and check the store
#[derive(Debug, Args)]
pub(super) struct Verify {
    /// A head printed elsewhere, with the count of entries beside it: entries cut off since show
    #[arg(long, value_name = "HEX[:COUNT]")]
    head: Option<String>,
}

impl Verify {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let expected = self.head.as_deref().map(expected).transpose()?;
        let desk = open::to_read_without_rules(global)?;
        // Drawn on standard error, and only where that is a terminal.
        let bar = ProgressBar::new(0);
        if let Ok(style) = ProgressStyle::with_template("{pos} of {len} entries {wide_bar} {eta}") {
            bar.set_style(style);
        }
        let verified = desk.verify(expected.as_ref(), |done, all| {
            bar.set_length(all);
            bar.set_position(done);
        });
        bar.finish_and_clear();
        let verified = verified?;
        print_lines(&[
            format!(
                "verified: {} entries in {} transactions",
                verified.head.entries, verified.transactions
            ),
            format!("store head {}", verified.head.whole()),
            format!(
                "in short   {} ({} entries)",
                verified.head.short(),
                verified.head.entries
            ),
        ])
    }
}

/// Reads `HEX` or `HEX:COUNT`.
fn expected(text: &str) -> Result<ExpectedHead, Failure> {
    ExpectedHead::parse(&text.replacen(':', " ", 1)).ok_or_else(|| {
        Failure::bad_input(format!("{:?} is not a head", super::output::clean(text)))
            .hint("16 to 64 hex digits, and the number of entries after a colon where it is known")
    })
}
