//! Who is eligible today: after opt-outs, examinations, transfers, and what is due.

use std::collections::{HashMap, HashSet};

use chrono::NaiveDate;

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::report::Report;
use super::views::{DayChild, DayInfo, QueueState};
use crate::domain::age::spoken;
use crate::domain::codes::{Attempt, Consent};
use crate::domain::outcome::OutcomeKind;
use crate::domain::text::folded;
use crate::reports::csv::Form;
use crate::reports::day::{self, About, StoreState};
use crate::reports::door::{self, DoorRow};
use crate::rules::{CAUTIONS, Exemption, Protocol};
use crate::store::read::{ChildNow, VisitNow};
use crate::store::row::{Enrolment, Guardian};

/// How a child stands at the door, in the order of the list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Door {
    /// A rescreen is due.
    RescreenDue,
    /// The child comes back for another reason: glasses, a chart that is due.
    ReturnDue,
    /// Nothing was done this term.
    ToScreen,
    /// The protocol wants consent and nobody has given it yet.
    NoConsentYet,
    /// The guardian opted out.
    OptedOut,
    /// Under care.
    UnderCare,
    /// Examined less than 12 months before the day.
    ExaminedRecently,
    /// Due, but on a later day.
    DueLater,
    /// Signed on this day.
    SeenToday,
    /// Signed earlier in the term, with nothing due.
    SeenThisTerm,
    /// No longer on the roster.
    Left,
}

impl Door {
    /// Every state, in the order of the list.
    pub const ALL: [Door; 11] = [
        Door::RescreenDue,
        Door::ReturnDue,
        Door::ToScreen,
        Door::NoConsentYet,
        Door::OptedOut,
        Door::UnderCare,
        Door::ExaminedRecently,
        Door::DueLater,
        Door::SeenToday,
        Door::SeenThisTerm,
        Door::Left,
    ];

    /// Returns the state in words.
    pub fn title(self) -> &'static str {
        match self {
            Door::RescreenDue => "rescreen due",
            Door::ReturnDue => "return due",
            Door::ToScreen => "to screen",
            Door::NoConsentYet => "no consent yet",
            Door::OptedOut => "opted out",
            Door::UnderCare => "under care",
            Door::ExaminedRecently => "examined under 12 months ago",
            Door::DueLater => "due on a later day",
            Door::SeenToday => "seen today",
            Door::SeenThisTerm => "seen this term",
            Door::Left => "left",
        }
    }

    /// Says whether the child is screened today.
    pub fn is_today(self) -> bool {
        matches!(self, Door::RescreenDue | Door::ReturnDue | Door::ToScreen)
    }
}

/// One child at the door.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct AtTheDoor {
    /// How the child stands.
    pub door: Door,
    /// The child.
    pub child: DayChild,
    /// When something is due.
    pub due_on: Option<NaiveDate>,
    /// What else should be known: overdue, birth date unknown, contact details missing, transfers.
    pub remarks: Vec<String>,
}

/// What is known of a site's children beside the queue.
struct Roster {
    /// The first day on which the site's roster was read in this term.
    begun: Option<NaiveDate>,
    enrolments: HashMap<String, Enrolment>,
    left: Vec<Enrolment>,
    reachable: HashSet<String>,
}

impl Desk {
    /// Returns every child of a day as it stands at the door: who is due first, then who is to be
    /// screened, then who is not and why; inside by class and name.
    pub fn at_the_door(&self, day: &DayInfo) -> Result<Vec<AtTheDoor>> {
        let library = self.library();
        let protocol = library.protocol(&day.protocol);
        let since = self.earlier_since(day)?;
        let roster = self.roster_of(day)?;
        let mut out = Vec::new();
        for stored in self.read().day_children(&key_of(day), since)? {
            let earlier = self.all_now(stored.earlier.clone())?;
            let child = self.child_of_day(stored, day)?;
            let door = door(protocol, &child, &earlier, day.date);
            let mut remarks = remarks(&child, &earlier, door, day.date);
            if !roster.reachable.contains(&child.child_id) {
                remarks.push("contact details missing".to_owned());
            }
            if let Some(enrolment) = roster
                .enrolments
                .get(&child.child_id)
                .filter(|e| roster.begun.is_some_and(|begun| e.from_on > begun))
            {
                remarks.push(format!("came on {}", spoken(enrolment.from_on)));
            }
            out.push(AtTheDoor {
                due_on: child.due_on,
                door,
                child,
                remarks,
            });
        }
        for left in &roster.left {
            if let Some(child) = self.read().child(&left.child_id)? {
                let child = self.child_of_day(no_visits(child), day)?;
                let on = left.left_on.map(spoken).unwrap_or_default();
                out.push(AtTheDoor {
                    door: Door::Left,
                    child,
                    due_on: None,
                    remarks: vec![format!("left on {on}")],
                });
            }
        }
        out.sort_by_cached_key(|at| {
            let late = at.due_on.filter(|_| at.door.is_today());
            let name = folded(&format!("{} {}", at.child.family_name, at.child.given_name));
            (
                at.door,
                late.is_none(),
                late,
                at.child.grade,
                at.child.class.clone(),
                name,
            )
        });
        Ok(out)
    }

    fn roster_of(&self, day: &DayInfo) -> Result<Roster> {
        let term = self.term_on(day.date)?;
        let here = self
            .read()
            .all::<Enrolment>()?
            .into_iter()
            .filter(|e| e.term == term.code && e.site == day.site);
        let mut roster = Roster {
            begun: None,
            enrolments: HashMap::new(),
            left: Vec::new(),
            reachable: HashSet::new(),
        };
        for enrolment in here {
            let begun = roster.begun.get_or_insert(enrolment.from_on);
            *begun = enrolment.from_on.min(*begun);
            if enrolment.left_on.is_some_and(|left| left <= day.date) {
                roster.left.push(enrolment);
            } else {
                roster
                    .enrolments
                    .insert(enrolment.child_id.clone(), enrolment);
            }
        }
        let reaches = |g: &Guardian| !g.phone.trim().is_empty() || !g.email.trim().is_empty();
        roster.reachable = self
            .read()
            .all::<Guardian>()?
            .into_iter()
            .filter(reaches)
            .map(|g| g.child_id)
            .collect();
        Ok(roster)
    }

    /// Returns the list for the door, in CSV or as a page that prints.
    pub fn door_report(&self, day: &DayInfo, html: bool, exact: bool) -> Result<Report> {
        let list = self.at_the_door(day)?;
        let head = self.head()?;
        let state = StoreState {
            head: head.whole(),
            entries: head.entries,
        };
        let title = format!("At the door, {}, {}", day.site_name, spoken(day.date));
        let rows: Vec<DoorRow> = list.iter().map(|at| row(at, day.date)).collect();
        let count = rows.len();
        let bytes = if html {
            let about = format!("{}, {}", day.protocol, day.method.title());
            door::html(&title, &about, &rows, &CAUTIONS).into_bytes()
        } else {
            door::write(Vec::new(), Form::exact(exact), &rows, &state)
                .map_err(|e| ActionError::failed(e.to_string()))?
        };
        let about = day::about(&About {
            title: &title,
            state: Some(&state),
            rule_sets: &self.rule_sets_of(day, std::collections::BTreeSet::new()),
            cautions: &CAUTIONS,
            guarded: !html && !exact,
        });
        Ok(Report {
            bytes,
            about,
            rows: count,
            title,
            children: list.into_iter().map(|at| at.child.child_id).collect(),
        })
    }
}

fn no_visits(child: ChildNow) -> crate::store::read::DayChild {
    crate::store::read::DayChild {
        child,
        visits: Vec::new(),
        earlier: Vec::new(),
    }
}

/// Returns how a child stands. What the guardian said comes before everything that is due.
fn door(
    protocol: Option<&Protocol>,
    child: &DayChild,
    earlier: &[VisitNow],
    on: NaiveDate,
) -> Door {
    let exempts = |why| protocol.is_none_or(|p| p.exempt.contains(&why));
    if child.state != QueueState::ToCome {
        return Door::SeenToday;
    }
    if child.consent == Some(Consent::No) {
        return Door::OptedOut;
    }
    if protocol.is_some_and(|p| p.consent_opt_in) && child.consent != Some(Consent::Yes) {
        return Door::NoConsentYet;
    }
    if child.under_care && exempts(Exemption::UnderCare) {
        return Door::UnderCare;
    }
    if child.examined_recently && exempts(Exemption::ExaminedRecently) {
        return Door::ExaminedRecently;
    }
    let judged = earlier
        .iter()
        .any(|v| v.kind.is_some_and(|kind| kind != OutcomeKind::Incomplete));
    match child.due_on {
        Some(due) if due > on => Door::DueLater,
        Some(_) if child.attempt == Attempt::Rescreen => Door::RescreenDue,
        Some(_) => Door::ReturnDue,
        None if child.attempt == Attempt::Rescreen => Door::RescreenDue,
        None if judged => Door::SeenThisTerm,
        None => Door::ToScreen,
    }
}

fn remarks(child: &DayChild, earlier: &[VisitNow], door: Door, on: NaiveDate) -> Vec<String> {
    let mut out = Vec::new();
    match (door, child.due_on) {
        (Door::SeenToday, _) => out.push(child.state.title().to_owned()),
        (Door::SeenThisTerm, _) => {
            if let Some(last) = earlier.iter().rfind(|v| v.kind.is_some()) {
                let kind = last.kind.map_or("", OutcomeKind::title);
                out.push(format!("{kind} on {}", spoken(last.screened_on)));
            }
        }
        (door, Some(due)) if door.is_today() && due < on => {
            let late = (on - due).num_days();
            let plural = if late == 1 { "" } else { "s" };
            out.push(format!("{late} day{plural} overdue"));
        }
        (_, Some(due)) => out.push(format!("due {}", spoken(due))),
        _ => {}
    }
    if child.dob.is_none() {
        out.push("birth date unknown".to_owned());
    }
    if child.grade.is_none() {
        out.push("grade unknown".to_owned());
    }
    if child.wears_glasses == Some(true) {
        out.push("owns glasses".to_owned());
    }
    if child.child_id.starts_with("P-") {
        out.push("provisional id".to_owned());
    }
    out
}

fn row(at: &AtTheDoor, on: NaiveDate) -> DoorRow {
    let child = &at.child;
    DoorRow {
        today: at.door.is_today(),
        status: at.door.title(),
        due_on: at.due_on,
        overdue_days: at
            .due_on
            .filter(|due| at.door.is_today() && *due < on)
            .map(|due| (on - due).num_days()),
        child_id: child.child_id.clone(),
        family_name: child.family_name.clone(),
        given_name: child.given_name.clone(),
        dob: child.dob,
        age: child.age,
        grade: child.grade,
        class: child.class.clone(),
        remarks: at.remarks.join("; "),
    }
}
