//! Letters for what is due.

mod found;

use std::path::Path;

use uuid::Uuid;

use super::super::desk::Desk;
use super::super::disclosures::Recipient;
use super::super::error::{ActionError, Result};
use super::super::visit_rows::{judged, tries_of};
use super::{ReferralView, code_of};
use crate::domain::codes::YesNo;
use crate::domain::outcome::{DecidedBy, OutcomeKind, Urgency};
use crate::domain::readings::Readings;
use crate::domain::referral::{ContactResult, LetterKind, NextKind, Step, StepKind};
use crate::reports::letters::{Because, Letter, Letters, Sender};
use crate::store::read::{ChildNow, VisitNow};

use found::found;

/// Which letters are wanted.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct LetterChoice {
    /// Kinds; all that are due when empty.
    pub kinds: Vec<LetterKind>,
    /// One site.
    pub site: Option<String>,
    /// One child, by id; then also what is not due.
    pub child: Option<String>,
    /// One language, whatever the roster says.
    pub language: Option<String>,
}

/// Letters that are ready to be written to a file, and what is to be said of them.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Printed {
    /// One HTML file.
    pub html: String,
    /// What it holds.
    pub letters: Vec<PrintedLetter>,
    /// What was left out, and why, in words.
    pub left_out: Vec<String>,
}

/// One letter of a file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PrintedLetter {
    /// The referral, or the visit it is about.
    pub about: Uuid,
    /// The child's id.
    pub child_id: String,
    /// `Okafor, Ada`
    pub name: String,
    /// Which letter.
    pub kind: LetterKind,
    /// Language code.
    pub language: String,
    /// What should be known before it leaves, in words; empty where nothing is missing.
    pub missing: String,
}

/// A letter that is wanted: about which visit or referral, of which kind.
struct Wanted {
    about: Uuid,
    child: ChildNow,
    visit: Option<VisitNow>,
    kind: LetterKind,
    referral: Option<ReferralView>,
}

impl Desk {
    /// Makes the letters that are due as one print-ready HTML file; nothing is written.
    ///
    /// An urgent letter is never in a batch: it is made for one child, with the record of the call.
    ///
    /// # Errors
    /// A letter file of the store that cannot be read, with line and caret; a child that is not known.
    pub fn letters(&self, choice: &LetterChoice) -> Result<Printed> {
        let letters = Letters::with(&own_files(self.store.dir())?)
            .map_err(|e| ActionError::bad(e.to_string()))?;
        let sender = self.sender()?;
        let mut left_out = Vec::new();
        let mut pages = Vec::new();
        let mut list = Vec::new();
        for wanted in self.wanted(choice, &mut left_out)? {
            let name = format!("{}, {}", wanted.child.family_name, wanted.child.given_name);
            if self.differs(&wanted)? {
                left_out.push(format!(
                    "{name}: what two stations recorded differs; settle it first: twoline packet conflicts"
                ));
                continue;
            }
            let spoken = choice
                .language
                .clone()
                .or_else(|| wanted.referral.as_ref().map(|r| r.language.clone()))
                .or_else(|| wanted.child.language.clone())
                .unwrap_or_default();
            let language = letters.messages().spoken(&spoken).map(|l| l.code.clone());
            if choice.language.is_some() && language.is_none() {
                return Err(
                    ActionError::bad(format!("there are no letters in {spoken:?}")).hint(format!(
                        "put its file into {}",
                        self.store.dir().join("letters").display()
                    )),
                );
            }
            let mut missing = wanted
                .referral
                .as_ref()
                .map(ReferralView::missing)
                .unwrap_or_default()
                .join(", ");
            if language.is_none() && !spoken.is_empty() {
                let words = format!("no letters in {spoken}: English, with an interpreter");
                missing = [missing, words]
                    .into_iter()
                    .filter(|w| !w.is_empty())
                    .collect::<Vec<_>>()
                    .join(", ");
            }
            let language = language.unwrap_or_else(|| "en".to_owned());
            pages.push(self.page(&wanted, &language)?);
            list.push(PrintedLetter {
                about: wanted.about,
                child_id: wanted.child.child_id,
                name,
                kind: wanted.kind,
                language,
                missing,
            });
        }
        Ok(Printed {
            html: letters
                .print(&pages, &sender)
                .map_err(|e| ActionError::bad(e.to_string()))?,
            letters: list,
            left_out,
        })
    }

    /// Enters that letters were printed, each as a step of its referral or visit.
    pub fn letters_printed(&mut self, printed: &Printed) -> Result<()> {
        let rows: Vec<_> = printed
            .letters
            .iter()
            .map(|letter| {
                let mut step = Step::new(StepKind::LetterPrinted, self.today);
                step.letter = Some(letter.kind);
                step.language.clone_from(&letter.language);
                self.step_row(letter.about, &letter.child_id, step)
            })
            .collect();
        if rows.is_empty() {
            return Ok(());
        }
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| rows.iter().try_for_each(|row| tx.add(row)))?)
    }

    /// Enters that letters go to somebody outside the programme and the family: one entry for each
    /// child and kind of letter. Returns how many.
    pub fn letters_leave(
        &mut self,
        printed: &Printed,
        to: &Recipient,
        file: &str,
    ) -> Result<usize> {
        let left = printed
            .letters
            .iter()
            .map(|l| (format!("letter: {}", l.kind.title()), l.child_id.clone()));
        self.disclose_each(to, file, left)
    }

    fn wanted(&self, choice: &LetterChoice, left_out: &mut Vec<String>) -> Result<Vec<Wanted>> {
        let read = self.read();
        if let Some(id) = &choice.child
            && read.child(id)?.is_none()
        {
            return Err(ActionError::bad(format!("no child has the id {id:?}")));
        }
        let here = |child: &ChildNow| {
            choice.child.as_ref().is_none_or(|id| *id == child.child_id)
                && choice
                    .site
                    .as_ref()
                    .is_none_or(|s| child.site.as_ref() == Some(s))
        };
        let kind_wanted = |kind| choice.kinds.is_empty() || choice.kinds.contains(&kind);
        let mut wanted = Vec::new();
        for referral in self.referral_list()? {
            let Some(child) = read.child(&referral.child_id)?.filter(&here) else {
                continue;
            };
            let Some(kind) = self.kind_of(&referral, choice) else {
                continue;
            };
            if !kind_wanted(kind) {
                continue;
            }
            if kind == LetterKind::Urgent && choice.child.is_none() {
                left_out.push(format!(
                    "{}, {}: urgent, printed alone after the call: twoline letters --child {}",
                    child.family_name, child.given_name, child.child_id
                ));
                continue;
            }
            let visit = read.visit(referral.id)?;
            let with_form = matches!(
                kind,
                LetterKind::Referral | LetterKind::Urgent | LetterKind::Second
            ) && choice.kinds.is_empty();
            for kind in [Some(kind), with_form.then_some(LetterKind::ExamForm)] {
                wanted.extend(kind.map(|kind| Wanted {
                    about: referral.id,
                    child: child.clone(),
                    visit: visit.clone(),
                    kind,
                    referral: Some(referral.clone()),
                }));
            }
        }
        for (child, visit) in self.due_now()?.into_iter().filter(|(c, _)| here(c)) {
            let glasses = decided(&visit) == Some(DecidedBy::GlassesNotWorn);
            let kind = match visit.kind {
                Some(OutcomeKind::Rescreen) => LetterKind::Rescreen,
                _ if glasses => LetterKind::GlassesAtHome,
                _ => continue,
            };
            let said = read
                .referral(visit.visit_id)?
                .is_some_and(|r| r.steps.iter().any(|s| s.letter == Some(kind)));
            if kind_wanted(kind) && (!said || choice.child.is_some()) {
                wanted.push(Wanted {
                    about: visit.visit_id,
                    child,
                    visit: Some(visit),
                    kind,
                    referral: None,
                });
            }
        }
        self.on_request(choice, &here, &mut wanted)?;
        Ok(wanted)
    }

    /// Letters that are never due by themselves: passed, color, to the child's doctor.
    fn on_request(
        &self,
        choice: &LetterChoice,
        here: &impl Fn(&ChildNow) -> bool,
        wanted: &mut Vec<Wanted>,
    ) -> Result<()> {
        let Some(child) = choice
            .child
            .as_deref()
            .map(|id| self.read().child(id))
            .transpose()?
            .flatten()
            .filter(here)
        else {
            return Ok(());
        };
        let asked = |kind: &LetterKind| {
            matches!(
                kind,
                LetterKind::Passed | LetterKind::Color | LetterKind::ToDoctor
            )
        };
        if !choice.kinds.iter().any(asked) {
            return Ok(());
        }
        let latest = self
            .read()
            .visits_now(&child.child_id)?
            .into_iter()
            .max_by_key(|v| (v.screened_on, v.attempt));
        let Some(visit) = latest.map(|v| self.as_now(v)).transpose()? else {
            return Err(ActionError::bad("this child was not screened"));
        };
        for kind in choice.kinds.iter().copied().filter(asked) {
            self.holds(kind, &visit)?;
            wanted.push(Wanted {
                about: visit.visit_id,
                child: child.clone(),
                visit: Some(visit.clone()),
                kind,
                referral: None,
            });
        }
        Ok(())
    }

    /// Refuses a letter that says what the child's latest visit does not.
    fn holds(&self, kind: LetterKind, visit: &VisitNow) -> Result<()> {
        let refused = |what: &str| {
            Err(ActionError::bad(format!(
                "the visit of {} came to {}: no {what} letter",
                visit.screened_on,
                outcome_words(visit)
            )))
        };
        match kind {
            LetterKind::Passed if visit.kind != Some(OutcomeKind::Pass) => refused("passed"),
            LetterKind::Color => {
                let readings = judged(&tries_of(&self.read().readings(visit.visit_id)?)?);
                if readings.plates_missed.is_some_and(|missed| missed > 0) {
                    Ok(())
                } else {
                    Err(ActionError::bad(
                        "no color plate was missed: no color letter",
                    ))
                }
            }
            _ => Ok(()),
        }
    }

    /// Returns the letter that a referral waits for, or the one that is asked for one child.
    fn kind_of(&self, referral: &ReferralView, choice: &LetterChoice) -> Option<LetterKind> {
        let first = match referral.opened.urgency {
            Urgency::Routine => LetterKind::Referral,
            _ => LetterKind::Urgent,
        };
        if choice.child.is_some() {
            let asked = choice
                .kinds
                .iter()
                .copied()
                .find(|k| k.tells_of_referral() || *k == LetterKind::ExamForm);
            if asked.is_some() || !choice.kinds.is_empty() {
                return asked.filter(|_| referral.outcome_now.is_none());
            }
        }
        if !referral.standing.state.is_open() || referral.outcome_now.is_some() {
            return None;
        }
        let due = match &referral.standing.next {
            Some(next) => match next.kind {
                NextKind::Print(LetterKind::Second) if next.due > self.today => None,
                NextKind::Print(kind) => Some(kind),
                NextKind::CallAtOnce => Some(first),
                _ => None,
            },
            None => None,
        };
        due.or_else(|| choice.child.as_ref().map(|_| first))
    }

    fn page(&self, wanted: &Wanted, language: &str) -> Result<Letter> {
        let read = self.read();
        let readings = match &wanted.visit {
            Some(visit) => judged(&tries_of(&read.readings(visit.visit_id)?)?),
            None => Readings::default(),
        };
        let site = wanted
            .visit
            .as_ref()
            .map(|v| v.site.clone())
            .or_else(|| wanted.child.site.clone())
            .unwrap_or_default();
        let site = self
            .sites()?
            .into_iter()
            .find(|(code, _)| *code == site)
            .map_or(site, |(_, name)| name);
        let steps = wanted.referral.as_ref().map_or(&[][..], |r| &r.steps);
        let class = match (&wanted.child.class, wanted.child.grade) {
            (Some(class), _) if !class.is_empty() => class.clone(),
            (_, Some(grade)) => grade.to_string(),
            _ => "—".to_owned(),
        };
        Ok(Letter {
            kind: wanted.kind,
            language: language.to_owned(),
            child: format!("{} {}", wanted.child.given_name, wanted.child.family_name),
            born: wanted.child.dob,
            class,
            site,
            written_on: self.today,
            tested_on: wanted.visit.as_ref().map(|v| v.screened_on),
            at_once: wanted
                .referral
                .as_ref()
                .is_some_and(|r| r.opened.urgency == Urgency::Emergency),
            correction: readings.correction,
            because: match wanted.visit.as_ref().map(decided) {
                Some(Some(DecidedBy::DirectReferral)) => Because::History,
                Some(Some(
                    DecidedBy::NotTestable | DecidedBy::GlassesNeverAvailable | DecidedBy::Missing,
                )) => Because::NotTested,
                Some(_) => Because::NotPassed,
                // Opened by hand: the reason is the nurse's, not a test's.
                None => Because::History,
            },
            found: found(&readings),
            by: wanted.referral.as_ref().map_or_else(
                || wanted.visit.as_ref().and_then(|v| v.due_on),
                |r| r.opened.act_by,
            ),
            wrote_on: steps
                .iter()
                .find(|s| s.step.is_letter(StepKind::LetterSent))
                .map(|s| s.step.on),
            call: steps
                .iter()
                .rev()
                .find(|s| s.step.result == Some(ContactResult::Reached))
                .map(|s| (reached(&s.step, &wanted.child), s.step.on)),
            code: wanted.referral.as_ref().map(|r| code_of(r.id)),
            doctor: self.doctor_of(&wanted.child.child_id)?,
            outcome: wanted.visit.as_ref().map(outcome_words).unwrap_or_default(),
            interpreter: wanted
                .referral
                .as_ref()
                .is_none_or(|r| r.interpreter != Some(YesNo::No)),
        })
    }

    /// Says whether values behind a letter differ between stations.
    fn differs(&self, wanted: &Wanted) -> Result<bool> {
        let Some(visit) = &wanted.visit else {
            return Ok(false);
        };
        let readings = self.read().readings(visit.visit_id)?;
        Ok(readings.iter().any(|r| r.conflict))
    }

    fn doctor_of(&self, child_id: &str) -> Result<String> {
        let history = self.read().child_history(child_id)?;
        let name = history
            .iter()
            .flat_map(|h| &h.details)
            .filter(|d| !d.superseded)
            .map(|d| d.row.doctor_name.clone())
            .find(|name| !name.is_empty());
        Ok(name.unwrap_or_else(|| "the child's doctor".to_owned()))
    }

    fn sender(&self) -> Result<Sender> {
        let setting =
            |name: &str| -> Result<String> { Ok(self.read().setting(name)?.unwrap_or_default()) };
        let approved = setting("letters_approved")?
            .split(';')
            .filter_map(|words| {
                let (code, by) = words.trim().split_once(' ')?;
                Some((code.to_owned(), by.trim().to_owned()))
            })
            .collect();
        let who = setting("letters_from")?;
        Ok(Sender {
            programme: self.programme(),
            who: if who.is_empty() {
                self.screener().unwrap_or_else(|| self.programme())
            } else {
                who
            },
            phone: setting("letters_phone")?,
            help: setting("letters_help")?,
            approved,
        })
    }
}

/// Largest file of the `letters` folder, in bytes: the longest that is shipped has a tenth of it.
const LARGEST: u64 = 96 * 1024;

/// Returns a programme's own templates and messages.
fn own_files(dir: &Path) -> Result<Vec<(String, String)>> {
    let folder = dir.join("letters");
    if !folder.is_dir() {
        return Ok(Vec::new());
    }
    let failed = |e: std::io::Error| ActionError::failed(format!("{}: {e}", folder.display()));
    let mut files = Vec::new();
    for entry in std::fs::read_dir(&folder).map_err(failed)? {
        let path = entry.map_err(failed)?.path();
        let name = path
            .file_name()
            .and_then(|n| n.to_str())
            .unwrap_or_default()
            .to_owned();
        let ours = [".ftl", ".html"].iter().any(|end| name.ends_with(end));
        let size = path.metadata().map_or(0, |m| m.len());
        if ours && (!path.is_file() || size > LARGEST) {
            return Err(ActionError::bad(format!(
                "{}: expected a plain file of at most {} KB",
                path.display(),
                LARGEST / 1024
            )));
        }
        if ours {
            let text = std::fs::read_to_string(&path)
                .map_err(|e| ActionError::bad(format!("{}: {e}", path.display())))?;
            files.push((name, text));
        }
    }
    files.sort();
    Ok(files)
}

fn reached(step: &Step, child: &ChildNow) -> String {
    if step.whom.is_empty() {
        child
            .guardian_name
            .clone()
            .unwrap_or_else(|| "you".to_owned())
    } else {
        step.whom.clone()
    }
}

fn decided(visit: &VisitNow) -> Option<DecidedBy> {
    DecidedBy::from_word(visit.decided_by.as_deref()?)
}

fn outcome_words(visit: &VisitNow) -> String {
    let mut words = visit
        .kind
        .map_or("not signed", OutcomeKind::title)
        .to_owned();
    if let Some(urgency) = visit.urgency {
        words.push_str(", ");
        words.push_str(urgency.title());
    }
    words
}
