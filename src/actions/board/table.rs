//! The board as a table: one row for the day, for each class and for each station.

use super::{Board, Counts, STATES, StationRow, Watch};
use crate::actions::error::{ActionError, Result};
use crate::actions::report::instant;
use crate::clock::Moment;
use crate::reports::csv::{Form, Kind, Table};

const STATION: [&str; 13] = [
    "an_hour",
    "last_signed",
    "judged",
    "refer_or_rescreen",
    "compared",
    "compared_refer_or_rescreen",
    "expected",
    "low_95",
    "high_95",
    "low_99_8",
    "high_99_8",
    "funnel_low_95",
    "funnel_high_95",
];

impl Board {
    /// Returns the board in CSV. `low_95` to `high_99_8` are the numbers of children within the limits,
    /// `funnel_…` the interpolated 95% limits of a funnel plot as shares from 0 to 1.
    pub fn csv(&self, exact: bool) -> Result<Vec<u8>> {
        self.write(exact)
            .map_err(|e| ActionError::failed(e.to_string()))
    }

    fn write(&self, exact: bool) -> std::io::Result<Vec<u8>> {
        let states: Vec<String> = STATES.iter().map(|s| s.title().replace(' ', "_")).collect();
        let columns = [("part", Kind::Code), ("name", Kind::Text)]
            .into_iter()
            .chain([("children", Kind::Number), ("seen", Kind::Number)])
            .chain(states.iter().map(|s| (s.as_str(), Kind::Number)))
            .chain(STATION.map(|s| {
                let kind = if s == "last_signed" {
                    Kind::Date
                } else {
                    Kind::Number
                };
                (s, kind)
            }));
        let mut table = Table::new(Vec::new(), Form::exact(exact), columns)?;
        let counted = |part: &str, name: &str, c: &Counts, table: &mut Table<Vec<u8>>| {
            table.cell(part)?;
            table.cell(name)?;
            table.cell(&c.children().to_string())?;
            table.cell(&c.seen().to_string())?;
            STATES
                .iter()
                .try_for_each(|s| table.cell(&c.of(*s).to_string()))
        };
        counted("day", &self.day.site_name, &self.whole, &mut table)?;
        if let Some(pace) = self.pace.recent.or(self.pace.whole) {
            table.cell(&format!("{:.1}", pace.an_hour()))?;
        }
        table.end_row()?;
        for (name, counts) in &self.classes {
            counted("class", name, counts, &mut table)?;
            table.end_row()?;
        }
        for station in &self.stations {
            station.write(&mut table)?;
        }
        table.finish()
    }
}

impl StationRow {
    fn write(&self, table: &mut Table<Vec<u8>>) -> std::io::Result<()> {
        table.cell("station")?;
        table.cell(&self.name)?;
        table.cell("")?;
        table.cell(&self.seen.to_string())?;
        STATES.iter().try_for_each(|_| table.cell(""))?;
        let pace = self.pace.recent.or(self.pace.whole);
        table.cell(&pace.map_or(String::new(), |p| format!("{:.1}", p.an_hour())))?;
        table.cell(&self.last.map_or(String::new(), |at: Moment| instant(at)))?;
        table.cell(&self.judged.to_string())?;
        table.cell(&self.hits.to_string())?;
        if let Watch::Compared(c) = &self.watch {
            for count in [c.share.of, c.share.hits] {
                table.cell(&count.to_string())?;
            }
            table.cell(&format!("{:.2}", c.expected))?;
            for count in [c.gentle.0, c.gentle.1, c.strong.0, c.strong.1] {
                table.cell(&count.to_string())?;
            }
            for limit in [c.funnel.0, c.funnel.1] {
                table.cell(&format!("{limit:.4}"))?;
            }
        }
        table.end_row()
    }
}
