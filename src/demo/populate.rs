//! Puts the invented district into a store, the way a nurse would.

use std::path::Path;

use chrono::{Datelike, NaiveDate};

use super::{DemoVisit, District, generate};
use crate::actions::{
    Desk, DeskOptions, Kdf, NewDay, NewStore, Result, Secret, SignRequest, init, new_visit_id,
};
use crate::clock::{self, Moment};
use crate::domain::acuity::Notation;
use crate::domain::codes::{AcuityMethod, SignKind};

/// Makes the demo store in an empty folder.
pub fn populate(dir: &Path, seed: u64, day: NaiveDate) -> Result<Desk> {
    let district = generate(seed, day);
    let options = DeskOptions {
        today: Some(day),
        ..DeskOptions::default()
    };
    let new = NewStore {
        programme: district.programme.clone(),
        station: "east".to_owned(),
        notation: Notation::Feet,
        secret: Secret::None,
        kdf: Kdf::Calibrated,
    };
    let (mut desk, _) = init(dir, new, &options)?;
    for screener in &district.screeners {
        desk.add_screener(screener.initials, screener.name)?;
    }
    for site in &district.sites {
        desk.add_site(site.code, site.name)?;
    }
    let (starts, ends, code, title) = term_of(district.earlier_day, day);
    desk.add_term(&code, &title, starts, ends)?;
    let plan = desk.plan_children(district.children.clone(), Some(&code))?;
    desk.add_roster(&plan)?;
    sign_day(
        &mut desk,
        &district,
        district.earlier_day,
        &district.earlier_visits,
    )?;
    sign_day(&mut desk, &district, district.day, &district.visits)?;
    if let Some(first) = district.screeners.first() {
        desk.set_screener(first.name)?;
    }
    Ok(desk)
}

fn sign_day(
    desk: &mut Desk,
    district: &District,
    date: NaiveDate,
    visits: &[DemoVisit],
) -> Result<()> {
    let Some(site) = district.sites.first() else {
        return Ok(());
    };
    let now = clock::now();
    let is_today = now.date() == Some(date);
    let day = desk.open_day(NewDay {
        site: site.code.to_owned(),
        date,
        protocol: district.protocol.to_owned(),
        method: AcuityMethod::Threshold,
    })?;
    for (i, visit) in visits.iter().enumerate() {
        desk.set_screener(visit.screener)?;
        if is_today {
            let at = Moment {
                utc_ms: now.utc_ms - 1_000 * seconds_ago(visit, visits.len() - i),
                ..now
            };
            desk.as_if(Some((visit.station, at)))?;
        }
        desk.sign(SignRequest {
            day: day.id,
            child_id: visit.child_id.clone(),
            attempt: visit.attempt,
            visit: new_visit_id(),
            readings: visit.readings.clone(),
            remarks: Vec::new(),
        })?;
    }
    desk.as_if(None)
}

/// Returns how long ago a visit was entered when so many have come since: a child about every 75
/// seconds at two tables, a break after the first hour or so, and an emergency not long ago.
fn seconds_ago(visit: &DemoVisit, since: usize) -> i64 {
    const BREAK: (usize, i64) = (80, 20 * 60);
    if visit
        .readings
        .signs
        .as_ref()
        .is_some_and(|signs| signs.iter().any(|s| s.kind == SignKind::WhitePupil))
    {
        return 221;
    }
    let since_ms = since as i64;
    since_ms * 75 + since_ms * 37 % 50 + if since > BREAK.0 { BREAK.1 } else { 0 }
}

/// Returns a term that holds both days: the half year of the day, widened to the earlier one.
fn term_of(earlier: NaiveDate, day: NaiveDate) -> (NaiveDate, NaiveDate, String, String) {
    let (name, from, to) = if day.month() >= 8 {
        ("Autumn", (8, 1), (12, 31))
    } else {
        ("Spring", (1, 1), (7, 31))
    };
    let date =
        |(month, last): (u32, u32)| NaiveDate::from_ymd_opt(day.year(), month, last).unwrap_or(day);
    (
        date(from).min(earlier),
        date(to),
        format!("{}-{}", day.year(), name.to_lowercase()),
        format!("{name} {}", day.year()),
    )
}
