//! `twoline station`: what this laptop is set to.

use clap::{Args, Subcommand};

use super::output::{clean, print_lines};
use super::site::done;
use super::{Failure, Global, open};
use crate::actions::{StationChange, StationRole};
use crate::domain::screening_test::ScreeningTest;

/// Show or set what this station is for
#[derive(Debug, Args)]
pub(super) struct Station {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Show name, task, masking and chart of this station
    Show,
    /// Set the task, the masking or the chart of this station; what is not named stays
    Set {
        /// The one test that is done here, or `all` for a whole screening
        #[arg(long, value_name = "TEST")]
        task: Option<String>,
        /// Show outcome and pass line only after both eyes are entered
        #[arg(long, value_name = "yes|no", value_parser = ["yes", "no"])]
        masked: Option<String>,
        /// Name of the chart that hangs here, or `none`
        #[arg(long, value_name = "CHART")]
        chart: Option<String>,
    },
}

impl Station {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::Show => {
                let role = open::to_read(global)?.station_role()?;
                print_lines(&lines(&role))
            }
            Command::Set {
                task,
                masked,
                chart,
            } => {
                if task.is_none() && masked.is_none() && chart.is_none() {
                    return Err(Failure::bad_input(
                        "nothing to set: name --task, --masked or --chart",
                    ));
                }
                let change = StationChange {
                    task: task.as_deref().map(task_of).transpose()?,
                    masked: masked.as_deref().map(|word| word == "yes"),
                    chart: chart
                        .as_ref()
                        .map(|name| (name != "none").then(|| name.clone())),
                };
                let mut desk = open::to_write(global)?;
                let put = desk.set_station(&change)?;
                let mut shown = lines(&desk.station_role()?);
                shown[0] = format!("{} {}", done(put), shown[0]);
                print_lines(&shown)
            }
        }
    }
}

fn task_of(word: &str) -> Result<Option<ScreeningTest>, Failure> {
    if word == "all" {
        return Ok(None);
    }
    ScreeningTest::from_word(word).map(Some).ok_or_else(|| {
        Failure::bad_input(format!(
            "--task {:?}: expected all, {}",
            crate::domain::text::shown(word, 40),
            ScreeningTest::words()
        ))
    })
}

fn lines(role: &StationRole) -> Vec<String> {
    let chart = role.chart.as_ref().map_or_else(
        || "chart: none named".to_owned(),
        |c| {
            format!(
                "chart: {}, {} on a line, made for {} m, {}",
                clean(&c.name),
                c.letters_per_line,
                f64::from(c.distance_mm) / 1000.0,
                c.lines
                    .iter()
                    .map(ToString::to_string)
                    .collect::<Vec<_>>()
                    .join(" ")
            )
        },
    );
    vec![
        format!("station {}", clean(&role.name)),
        format!(
            "task: {}",
            role.task
                .map_or("the whole screening", ScreeningTest::title)
        ),
        format!(
            "masked: {}",
            if role.masked {
                "yes, the outcome is shown after both eyes are entered"
            } else {
                "no"
            }
        ),
        chart,
    ]
}
