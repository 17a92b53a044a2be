//! Who was referred this term and waits, in the order in which they should be seen to.

use std::collections::{BTreeMap, HashMap};

use chrono::{Days, NaiveDate};

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::follow_up::ReferralView;
use super::judging::known;
use super::report::Report;
use super::triage::{NO_TRIAGE_SET, Standing, triage_set, windows, with_remarks};
use super::views::{DayChild, DayInfo};
use super::visit_rows::{judged, tries_of};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::domain::referral::State;
use crate::reports::csv::Form;
use crate::reports::day::{self, About, StoreState};
use crate::reports::referrals::{self, ReferralRow};
use crate::rules::CAUTIONS;
use crate::rules::explain::source_words;
use crate::rules::grading::{Place, Waiting, order};
use crate::store::read::{ChildNow, VisitNow};
use uuid::Uuid;

/// A child who was referred.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Referred {
    /// The child's id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, if known.
    pub dob: Option<NaiveDate>,
    /// Completed months today.
    pub age: Option<AgeMonths>,
    /// Site code.
    pub site: String,
    /// Grade.
    pub grade: Option<Grade>,
    /// Class.
    pub class: String,
    /// What referred, shortly.
    pub why: String,
    /// What is to be done next, and when; empty where nothing is.
    pub next: String,
    /// How soon.
    pub urgency: Option<Urgency>,
    /// The day of the first visit of the term that referred.
    pub since: NaiveDate,
    /// Days since then.
    pub days_waited: u32,
    /// The date to act by: the sooner of urgency and band.
    pub act_by: Option<NaiveDate>,
    /// Where that date comes from, and the later one where there are two.
    pub act_by_from: String,
    /// What the tables say of the last visit that referred.
    pub standing: Standing,
    /// Where the child stands, with the reasons.
    pub place: Place,
}

impl Referred {
    /// Returns how late the action is, in days; negative while there is time.
    pub fn late(&self, today: NaiveDate) -> Option<i64> {
        self.act_by.map(|by| (today - by).num_days())
    }

    /// Returns the band in words; empty where none spoke.
    pub fn band(&self) -> String {
        self.standing
            .band()
            .map(|(_, spoke)| spoke.level.in_words())
            .unwrap_or_default()
    }

    /// Returns the table and the source of the band, with what it says of itself.
    pub fn band_source(&self) -> String {
        self.standing
            .band()
            .map_or_else(String::new, |(said, spoke)| {
                with_remarks(
                    &format!("{}: {}", said.by, source_words(&spoke.source)),
                    spoke,
                )
            })
    }

    /// Returns the reason of the order in one line.
    pub fn order_reason(&self) -> String {
        self.place.reasons.join("; ")
    }
}

/// A child who is due to come back.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DueBack {
    /// The child's id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Class.
    pub class: String,
    /// When.
    pub due_on: Option<NaiveDate>,
    /// For what.
    pub what: &'static str,
}

/// The referrals of a term and who is due to come back.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Worklist {
    /// Title of the term.
    pub term: String,
    /// The day from which days are counted.
    pub today: NaiveDate,
    /// Who was referred, the first to see to first.
    pub referred: Vec<Referred>,
    /// Who is due to come back, soonest first.
    pub back: Vec<DueBack>,
    /// The triage sets whose bands are shown, or how to choose one.
    pub bands: String,
}

/// The order of the list, in words.
pub const ORDER: &str = "Order: emergencies, date to act by, days waited, age against the treatment \
window, condition group; what is unknown goes with the first, no date last.";

impl Worklist {
    /// Returns how many are late.
    pub fn overdue(&self) -> usize {
        let late = |r: &&Referred| r.late(self.today).is_some_and(|days| days > 0);
        self.referred.iter().filter(late).count()
    }
}

impl Desk {
    /// Returns this term's referrals as a worklist.
    pub fn worklist(&self) -> Result<Worklist> {
        let bands = self.bands_in_use();
        let term = self.term_on(self.today);
        let (from, to, title) = match &term {
            Ok(term) => (term.starts_on, term.ends_on, term.title.clone()),
            Err(_) => (NaiveDate::MIN, NaiveDate::MAX, "all terms".to_owned()),
        };
        let days: HashMap<_, DayInfo> = self
            .days()?
            .into_iter()
            .map(|day| (key_of(&day), day))
            .collect();
        let mut by_child: BTreeMap<String, (ChildNow, Vec<VisitNow>)> = BTreeMap::new();
        for (child, visit) in self.referred_now()? {
            if (from..=to).contains(&visit.screened_on) {
                by_child
                    .entry(child.child_id.clone())
                    .or_insert_with(|| (child, Vec::new()))
                    .1
                    .push(visit);
            }
        }
        let follow_up: HashMap<Uuid, ReferralView> = self
            .referral_list()?
            .into_iter()
            .map(|r| (r.id, r))
            .collect();
        let closed = |visit: &VisitNow| {
            let about = follow_up.get(&visit.visit_id);
            about.is_some_and(|r| matches!(r.standing.state, State::Closed(_) | State::Examined))
        };
        let settings = self.follow_up()?;
        let next = |visit: &VisitNow| {
            let next = follow_up.get(&visit.visit_id)?.standing.next.as_ref()?;
            let due = due_words(Some(next.due), self.today);
            Some(format!("{}, {due}", next.kind.in_words(&settings)))
        };
        let mut referred = Vec::new();
        for (child, mut visits) in by_child.into_values() {
            visits.retain(|visit| !closed(visit));
            visits.sort_by_key(|v| (v.screened_on, v.attempt, v.recorded_at_ms));
            let next = visits.last().and_then(next).unwrap_or_default();
            let referred_child = self.referred(child, &visits, &days)?;
            referred.extend(referred_child.map(|r| Referred { next, ..r }));
        }
        referred.sort_by(|a, b| {
            a.place
                .cmp(&b.place)
                .then_with(|| a.child_id.cmp(&b.child_id))
        });
        let back = self
            .due_now()?
            .into_iter()
            .filter(|(_, visit)| (from..=to).contains(&visit.screened_on))
            .map(|(child, visit)| DueBack {
                child_id: child.child_id,
                family_name: child.family_name,
                given_name: child.given_name,
                class: child.class.unwrap_or_default(),
                due_on: visit.due_on,
                what: visit.kind.map_or("return", OutcomeKind::title),
            })
            .collect();
        Ok(Worklist {
            term: title,
            today: self.today,
            referred,
            back,
            bands,
        })
    }

    /// Names the chosen triage sets, or says how to choose one.
    fn bands_in_use(&self) -> String {
        let chosen = self.triage_sets();
        if chosen.is_empty() {
            return NO_TRIAGE_SET.to_owned();
        }
        let names: Vec<String> = chosen
            .iter()
            .map(|id| match triage_set(&self.library, id) {
                Some(set) => set.short_title.to_string(),
                None => format!("{id} (not among the rule files)"),
            })
            .collect();
        format!("clinic bands: {}", names.join(" and "))
    }

    fn referred(
        &self,
        child: ChildNow,
        visits: &[VisitNow],
        days: &HashMap<crate::store::row::DayKey, DayInfo>,
    ) -> Result<Option<Referred>> {
        let (Some(first), Some(last)) = (visits.first(), visits.last()) else {
            return Ok(None);
        };
        let since = first.screened_on;
        let signed = self.read().outcomes(last.visit_id)?.into_iter().next();
        let readings = judged(&tries_of(&self.read().readings(last.visit_id)?)?);
        let then = signed
            .as_ref()
            .and_then(|o| u32::try_from(o.age_months?).ok())
            .map(AgeMonths);
        let chosen = self.triage_sets();
        let standing = match days.get(&last.day()) {
            Some(day) => {
                let here = DayChild {
                    attempt: last.attempt,
                    ..self.day_child(day, &child.child_id)?
                };
                let (readings, _) = known(&here, &readings);
                Standing::of(&self.library, &chosen, then.or(here.age), &readings)
            }
            None => Standing::of(&self.library, &chosen, then, &readings),
        };
        let age = child
            .dob
            .and_then(|born| AgeMonths::between(born, self.today));
        let days_waited = u32::try_from((self.today - since).num_days()).unwrap_or(0);
        let (act_by, act_by_from) = act_by(visits, &standing, since);
        let urgency = visits.iter().filter_map(|v| v.urgency).min();
        let waiting = Waiting {
            emergency: urgency == Some(Urgency::Emergency),
            act_by,
            band: standing.band().map(|(_, spoke)| spoke.level),
            days_waited,
            age,
            group: standing.group(),
        };
        Ok(Some(Referred {
            place: order(windows(&self.library, &chosen), &waiting),
            why: shortly(&self.why_now(last)?),
            next: String::new(),
            site: child.site.unwrap_or_default(),
            class: child.class.unwrap_or_default(),
            child_id: child.child_id,
            family_name: child.family_name,
            given_name: child.given_name,
            dob: child.dob,
            grade: child.grade,
            age,
            urgency,
            since,
            days_waited,
            act_by,
            act_by_from,
            standing,
        }))
    }

    /// Returns the worklist in CSV, or as plain text for people.
    pub fn referrals_report(&self, csv: bool, exact: bool) -> Result<Report> {
        let list = self.worklist()?;
        let head = self.head()?;
        let state = StoreState {
            head: head.whole(),
            entries: head.entries,
        };
        let rows = list.referred.len();
        let title = format!("Referrals, {}", list.term);
        let bytes = if csv {
            referrals::write(
                Vec::new(),
                Form::exact(exact),
                list.referred.iter().zip(1..).map(|(r, n)| csv_row(r, n)),
                &state,
            )
            .map_err(|e| ActionError::failed(e.to_string()))?
        } else {
            let mut text = text(&list).join("\n");
            text.push('\n');
            text.into_bytes()
        };
        let about = day::about(&About {
            title: &format!("{title}. {}. {ORDER}", list.bands),
            state: Some(&state),
            rule_sets: &self.triage_used(),
            cautions: &CAUTIONS,
            guarded: csv && !exact,
        });
        Ok(Report {
            bytes,
            about,
            rows,
            title,
            children: list.referred.into_iter().map(|r| r.child_id).collect(),
        })
    }

    fn triage_used(&self) -> Vec<day::RuleSetUsed> {
        let chosen = self.triage_sets();
        self.library
            .gradings()
            .filter(|g| {
                g.kind == crate::rules::grading::GradingKind::Severity
                    || chosen.iter().any(|id| **id == *g.id)
            })
            .map(|g| day::RuleSetUsed {
                id: g.id.to_string(),
                title: g.title.clone(),
                edition: g.edition.to_string(),
                content_hash: g.content_hash.to_string(),
                sources: g.sources.iter().map(|s| (**s).clone()).collect(),
            })
            .collect()
    }
}

/// Returns the date to act by and where it comes from: the sooner of the outcome's and the band's.
fn act_by(
    visits: &[VisitNow],
    standing: &Standing,
    since: NaiveDate,
) -> (Option<NaiveDate>, String) {
    let signed = visits
        .iter()
        .filter_map(|v| v.act_by)
        .min()
        .map(|date| (date, "urgency of the outcome".to_owned()));
    let band = standing.band().and_then(|(said, spoke)| {
        let days = spoke.level.act_within_days()?;
        let date = since.checked_add_days(Days::new(u64::from(days)))?;
        Some((date, format!("{}, {}", said.by, spoke.level.in_words())))
    });
    let mut from: Vec<(NaiveDate, String)> = signed.into_iter().chain(band).collect();
    from.sort();
    let words = match &from[..] {
        [] => String::new(),
        [(_, words)] => words.clone(),
        [(a, first), (b, second), ..] if a == b => format!("{first}; {second}"),
        [(_, first), (later, second), ..] => {
            format!("{first}; {second} would be {later}: the sooner is taken")
        }
    };
    let words = match (words.is_empty(), standing.conflict()) {
        (false, Some(conflict)) => format!("{words}; {conflict}"),
        _ => words,
    };
    (from.first().map(|(date, _)| *date), words)
}

/// Returns what referred, shortly: the reading of the first reason.
fn shortly(reasons: &str) -> String {
    let first = reasons.split("; ").next().unwrap_or_default();
    // What referred stands first; a visit decided by the protocol has only its notes.
    first.trim_end_matches('.').to_owned()
}

fn csv_row(r: &Referred, place: usize) -> ReferralRow {
    ReferralRow {
        place,
        child_id: r.child_id.clone(),
        family_name: r.family_name.clone(),
        given_name: r.given_name.clone(),
        dob: r.dob,
        age: r.age,
        site: r.site.clone(),
        grade: r.grade,
        class: r.class.clone(),
        why: r.why.clone(),
        urgency: r.urgency,
        since: r.since,
        days_waited: r.days_waited,
        act_by: r.act_by,
        act_by_from: r.act_by_from.clone(),
        band: r.band(),
        band_source: r.band_source(),
        act_within_days: r.standing.act_within_days(),
        group: r.standing.group(),
        order_reason: r.order_reason(),
    }
}

/// Returns how a date stands to today, in words.
pub fn due_words(act_by: Option<NaiveDate>, today: NaiveDate) -> String {
    let Some(by) = act_by else {
        return "no date".to_owned();
    };
    let plural = |n: i64| if n == 1 { "" } else { "s" };
    match (by - today).num_days() {
        0 => "today".to_owned(),
        n if n < 0 => format!("{} day{} late", -n, plural(-n)),
        n => format!("in {n} day{}", plural(n)),
    }
}

fn text(list: &Worklist) -> Vec<String> {
    let mut out = vec![
        format!(
            "Referrals, {}: {}, {} late",
            list.term,
            list.referred.len(),
            list.overdue()
        ),
        list.bands.clone(),
        ORDER.to_owned(),
    ];
    for (r, n) in list.referred.iter().zip(1..) {
        out.push(String::new());
        out.push(format!(
            "{n}. {}, {} ({}), {}{}",
            r.family_name,
            r.given_name,
            r.child_id,
            r.age
                .map_or_else(|| "age unknown".to_owned(), |a| a.to_string()),
            if r.class.is_empty() {
                String::new()
            } else {
                format!(", {}", r.class)
            }
        ));
        out.push(format!("   why      {}", r.why));
        let by = r.act_by.map_or_else(String::new, |d| format!(", {d}"));
        let from = if r.act_by_from.is_empty() {
            String::new()
        } else {
            format!(" ({})", r.act_by_from)
        };
        out.push(format!(
            "   act by   {}{by}{from}",
            due_words(r.act_by, list.today)
        ));
        if !r.next.is_empty() {
            out.push(format!("   next     {}", r.next));
        }
        let band = r.band_source();
        if !band.is_empty() {
            out.push(format!("   band     {}; {band}", r.band()));
        }
        out.push(format!("   place    {}", r.order_reason()));
    }
    if !list.back.is_empty() {
        out.push(String::new());
        out.push(format!("Due to come back: {}", list.back.len()));
        out.extend(list.back.iter().map(|b| {
            format!(
                "- {}, {} ({}): {}, {}",
                b.family_name,
                b.given_name,
                b.child_id,
                b.what,
                due_words(b.due_on, list.today)
            )
        }));
    }
    out
}
