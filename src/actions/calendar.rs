//! Days on which school is held, by site.

use std::collections::HashMap;

use chrono::{NaiveDate, Weekday};

use super::desk::Desk;
use super::error::{ActionError, Result};
use crate::domain::school_calendar::SchoolCalendar;
use crate::store::row::Calendar;
use crate::store::{Put, new_id};

/// What changes in a calendar.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct CalendarChange {
    /// Days of the week on which school is held; none leaves them.
    pub held: Option<Vec<Weekday>>,
    /// Holidays to add, first and last day of each.
    pub add: Vec<(NaiveDate, NaiveDate)>,
    /// Holidays to take away.
    pub drop: Vec<(NaiveDate, NaiveDate)>,
}

/// A calendar as it is in use.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct CalendarView {
    /// Site code; empty for every site without a calendar of its own.
    pub site: String,
    /// Name of the site, in words.
    pub name: String,
    /// The days.
    pub calendar: SchoolCalendar,
}

impl Desk {
    /// Returns every calendar, that of all other sites first.
    pub fn school_calendars(&self) -> Result<Vec<CalendarView>> {
        let names: HashMap<String, String> = self.sites()?.into_iter().collect();
        let mut out: Vec<CalendarView> = self
            .calendars()?
            .into_iter()
            .map(|(site, calendar)| CalendarView {
                name: if site.is_empty() {
                    "every site without a calendar of its own".to_owned()
                } else {
                    names.get(&site).cloned().unwrap_or_else(|| site.clone())
                },
                site,
                calendar,
            })
            .collect();
        out.sort_by(|a, b| a.site.cmp(&b.site));
        Ok(out)
    }

    /// Changes the calendar of a site, or with an empty code that of every site without one of its
    /// own. A site's first calendar starts from the one of all sites, else from Monday to Friday.
    /// What it was before stays in the ledger.
    pub fn change_calendar(&mut self, site: &str, change: &CalendarChange) -> Result<Put> {
        if !site.is_empty() && !self.sites()?.iter().any(|(code, _)| code == site) {
            return Err(ActionError::bad(format!("this store has no site {site:?}"))
                .hint("add it: twoline site add CODE --name NAME"));
        }
        let known = self.calendars()?;
        let mut calendar = known
            .get(site)
            .or_else(|| known.get(""))
            .cloned()
            .unwrap_or_default();
        for (first, last) in &change.drop {
            if !calendar.holidays().contains(&(*first, *last)) {
                return Err(ActionError::bad(format!(
                    "no holiday runs from {first} to {last} in this calendar"
                ))
                .hint("twoline site calendar lists them"));
            }
            calendar = calendar.without_holiday(*first, *last);
        }
        for (first, last) in &change.add {
            calendar = calendar.with_holiday(*first, *last);
        }
        let held = change.held.as_ref().map_or_else(
            || calendar.days_held_text(),
            |d| SchoolCalendar::on(d).days_held_text(),
        );
        let row = Calendar {
            id: new_id(),
            site: site.to_owned(),
            days_held: held,
            holidays: calendar.holidays_text(),
        };
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| tx.put(row, "school calendar changed"))?)
    }

    /// Returns the calendars by site code.
    pub(super) fn calendars(&self) -> Result<HashMap<String, SchoolCalendar>> {
        self.read()
            .school_calendars()?
            .into_iter()
            .map(|row| {
                let calendar = SchoolCalendar::parse(&row.days_held, &row.holidays)
                    .map_err(|e| ActionError::failed(format!("a stored calendar: {e}")))?;
                Ok((row.site, calendar))
            })
            .collect()
    }
}
