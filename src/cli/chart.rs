//! `twoline chart`: the charts in use.

use clap::{Args, Subcommand};

use super::output::{clean, print_lines};
use super::{Failure, Global, open};
use crate::actions::NewChart;
use crate::domain::field::Field;
use crate::domain::readings::{Distance, ReadingContext, Readings};

/// Add charts
#[derive(Debug, Args)]
pub(super) struct Chart {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a chart
    Add {
        /// Name of the chart
        name: String,
        /// Its lines, such as 20/200,20/100,20/50,20/40,20/32,20/25,20/20
        #[arg(long, value_name = "LINE,…", value_delimiter = ',', required = true)]
        lines: Vec<String>,
        /// Letters or symbols on a line
        #[arg(long, value_name = "N", default_value_t = 5, value_parser = clap::value_parser!(u8).range(1..=10))]
        letters_per_line: u8,
        /// The distance the chart is made for, in metres
        #[arg(long, value_name = "METRES", required_unless_present = "distance_ft")]
        distance_m: Option<String>,
        /// The distance the chart is made for, in feet
        #[arg(long, value_name = "FEET", conflicts_with = "distance_m")]
        distance_ft: Option<String>,
        /// The letters stand close together or are framed
        #[arg(long)]
        crowded: bool,
        /// What it shows
        #[arg(long, value_parser = ["letters", "symbols"], default_value = "letters")]
        optotypes: String,
    },
}

impl Chart {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add {
            name,
            lines,
            letters_per_line,
            distance_m,
            distance_ft,
            crowded,
            optotypes,
        } = &self.command;
        let distance_mm = match (distance_m, distance_ft) {
            (Some(text), _) => millimetres(Field::ChartDistanceM, text)?,
            (None, Some(text)) => millimetres(Field::ChartDistanceFt, text)?,
            (None, None) => return Err(Failure::bad_input("a chart is made for some distance")),
        };
        let chart = NewChart {
            name: name.clone(),
            letters: optotypes == "letters",
            crowded: *crowded,
            letters_per_line: *letters_per_line,
            distance_mm,
            lines: lines.clone(),
        };
        open::to_write(global)?.add_chart(&chart)?;
        print_lines(&[format!("added chart {}", clean(name.trim()))])
    }
}

/// Reads a distance the way the field of a visit does.
fn millimetres(field: Field, text: &str) -> Result<u32, Failure> {
    let mut readings = Readings::default();
    readings
        .set(field, text, ReadingContext::default())
        .map_err(|e| Failure::bad_input(e.to_string()))?;
    readings
        .chart_distance
        .map(Distance::millimetres)
        .ok_or_else(|| Failure::bad_input("a chart is made for some distance"))
}
