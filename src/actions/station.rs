//! What this station is set to: one test or all, masked or not, and its chart.

use super::desk::Desk;
use super::error::{ActionError, Result};
use crate::domain::acuity::{AcuityContext, Line, parse_acuity};
use crate::domain::screening_test::ScreeningTest;
use crate::store::Put;
use crate::store::row::{Chart, Station};

/// The chart that hangs at a station.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct StationChart {
    /// Its name.
    pub name: String,
    /// Letters or symbols on a line.
    pub letters_per_line: u8,
    /// The distance it is made for, in millimetres.
    pub distance_mm: u32,
    /// Its lines, from the largest.
    pub lines: Vec<Line>,
}

/// What a station is set to.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct StationRole {
    /// The name of the station.
    pub name: String,
    /// The one test that is done here; none for a whole screening.
    pub task: Option<ScreeningTest>,
    /// Whether outcome and pass line wait until both eyes are entered.
    pub masked: bool,
    /// The chart.
    pub chart: Option<StationChart>,
}

/// What to change of a station; what is none stays as it is.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct StationChange {
    /// A task, or none for a whole screening.
    pub task: Option<Option<ScreeningTest>>,
    /// Whether the station is masked.
    pub masked: Option<bool>,
    /// The name of a chart, or none.
    pub chart: Option<Option<String>>,
}

impl Desk {
    /// Returns what this station is set to.
    pub fn station_role(&self) -> Result<StationRole> {
        let Some(station) = self.this_station()? else {
            return Ok(StationRole::default());
        };
        let charts = self.read().charts()?;
        let chart = station
            .chart_id
            .and_then(|id| charts.into_iter().find(|c| c.chart_id == id));
        Ok(StationRole {
            name: station.name,
            task: station.task,
            masked: station.masked == Some(true),
            chart: chart.map(station_chart),
        })
    }

    /// Returns the names of the charts of the programme.
    pub fn charts(&self) -> Result<Vec<String>> {
        Ok(self.read().charts()?.into_iter().map(|c| c.name).collect())
    }

    /// Changes what this station is set to; the old setting stays in the ledger.
    ///
    /// # Errors
    /// Bad input for a chart that the programme does not have.
    pub fn set_station(&mut self, change: &StationChange) -> Result<Put> {
        let Some(mut station) = self.this_station()? else {
            return Err(ActionError::failed("this store does not know its station"));
        };
        if let Some(task) = change.task {
            station.task = task;
        }
        if let Some(masked) = change.masked {
            station.masked = Some(masked);
        }
        if let Some(name) = &change.chart {
            station.chart_id = match name {
                Some(name) => Some(self.chart_named(name)?.chart_id),
                None => None,
            };
        }
        station.id = crate::store::new_id();
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| tx.put(station, "station set"))?)
    }

    fn this_station(&self) -> Result<Option<Station>> {
        Ok(self.stations()?.remove(&self.store.station_id()))
    }

    fn chart_named(&self, name: &str) -> Result<Chart> {
        let charts = self.read().charts()?;
        let known: Vec<String> = charts.iter().map(|c| c.name.clone()).collect();
        charts
            .into_iter()
            .find(|c| c.name.eq_ignore_ascii_case(name.trim()))
            .ok_or_else(|| {
                ActionError::bad(format!(
                    "there is no chart {:?}",
                    crate::domain::text::shown(name, 40)
                ))
                .hint(if known.is_empty() {
                    "add one: twoline chart add NAME --lines … --distance-m 3".to_owned()
                } else {
                    format!("known: {}", known.join(", "))
                })
            })
    }
}

fn station_chart(chart: Chart) -> StationChart {
    StationChart {
        letters_per_line: u8::try_from(chart.letters_per_line).unwrap_or(5),
        distance_mm: u32::try_from(chart.distance_mm).unwrap_or(0),
        lines: chart
            .lines
            .split_whitespace()
            .filter_map(|text| {
                let understood = parse_acuity(text, &AcuityContext::default()).ok()?;
                understood.value.acuity()?.line()
            })
            .collect(),
        name: chart.name,
    }
}
