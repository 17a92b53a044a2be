//! `twoline demo`: the program on invented data.

use std::path::Path;

use clap::Args;

use super::output::{clean, print_lines};
use super::{Failure, Global, open, screens};
use crate::actions::{self, Desk, Secret};
use crate::demo::{DEFAULT_SEED, populate};

/// Open the screens on an invented district
///
/// The demo is kept in the folder of --store, else in a folder of its own. Opened again on a later
/// day it goes on at its own latest day.
#[derive(Debug, Args)]
pub(super) struct Demo {
    /// Make the demo anew, even where one is there
    #[arg(long)]
    fresh: bool,
    /// Seed of the invented data; only a demo that is made anew takes it
    #[arg(long, value_name = "N")]
    seed: Option<u64>,
    /// Make the data and do not open the screens
    #[arg(long)]
    no_screens: bool,
    /// Begin with the tour, which leads through the screens in five minutes
    #[arg(long)]
    tour: bool,
    #[command(flatten)]
    how: screens::How,
}

impl Demo {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        if !self.no_screens {
            screens::needs_terminal()?;
        }
        let dir = match &global.store {
            Some(dir) => dir.clone(),
            None => open::data_folder()?.join("demo"),
        };
        if self.fresh {
            actions::remove_demo(&dir)?;
        }
        let desk = match actions::store_info(&dir)? {
            None => populate(&dir, self.seed.unwrap_or(DEFAULT_SEED), global.today())?,
            Some(info) if info.protected => return Err(actions::protected(&dir).into()),
            Some(_) if self.seed.is_some() => {
                return Err(
                    Failure::bad_input("there is a demo already, made with its own seed")
                        .hint("--fresh makes it anew"),
                );
            }
            Some(_) => again(global, &dir)?,
        };
        if !self.no_screens {
            return screens::show(desk, &self.how, self.tour);
        }
        print_lines(&[
            format!("demo: not protected, invented data, {}", desk.today()),
            format!("store in {}", clean(&dir.to_string_lossy())),
        ])
    }
}

/// Opens a demo that was made before, at its own latest day.
fn again(global: &Global, dir: &Path) -> Result<Desk, Failure> {
    let mut desk = Desk::open(dir, &Secret::None, &open::options(global))?;
    let latest = desk.days()?.into_iter().map(|day| day.date).max();
    if let (None, Some(latest)) = (global.today, latest) {
        desk.set_today(latest);
    }
    Ok(desk)
}
