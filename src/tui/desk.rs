//! The thread that owns the store: one request is one action.

use std::sync::Arc;

use crate::actions::compare::Comparison;
use crate::actions::{self, ActionError, DayInfo, Desk, DraftDay, Drafts, SearchIndex};
use crate::tui::app::{Answer, App, Refused, Request, Session};
use crate::tui::judging::Draft;
use crate::tui::rules::Compared;
use crate::tui::theme::{Theme, ThemeName};

/// How many children a find shows.
const FOUND: usize = 200;

/// Minutes without a key after which the screen is locked, where the installation says nothing
/// (basis: practice).
const IDLE_MINUTES: u32 = 10;

/// Answers the screens' requests at a desk.
pub struct Clerk {
    desk: Desk,
    index: Option<SearchIndex>,
    keeper: Keeper,
}

/// Keeps drafts; saving and dropping never wait, whatever the store is busy with.
#[derive(Debug, Clone)]
pub struct Keeper(Kept);

#[derive(Debug, Clone)]
enum Kept {
    /// On the drafts' own thread.
    By(Arc<Drafts>),
    /// Nothing is written here, so there is nothing to keep.
    ReadOnly,
    /// The drafts could not be opened.
    Not(Refused),
}

impl Keeper {
    /// Keeps a draft, soon.
    pub fn save(&self, draft: Draft, now_ms: i64) {
        if let Kept::By(drafts) = &self.0 {
            // A failure shows at the next flush, which is waited for.
            let _ = drafts.save(actions::Draft {
                day: draft_day(&draft.day),
                child_id: draft.child_id,
                visit_id: draft.visit,
                attempt: draft.attempt,
                fields: draft.fields,
                cursor: draft.cursor,
                updated_at_ms: now_ms,
            });
        }
    }

    /// Forgets a draft.
    pub fn drop_draft(&self, day: &DayInfo, child_id: &str) {
        if let Kept::By(drafts) = &self.0 {
            let _ = drafts.delete(&draft_day(day), child_id);
        }
    }

    /// Writes every draft, and says what went wrong if one could not be written.
    pub fn flush(&self) -> Result<(), Refused> {
        match &self.0 {
            Kept::By(drafts) => drafts.flush().map_err(|e| Refused {
                message: format!("drafts could not be written: {e}"),
                hint: String::new(),
            }),
            Kept::ReadOnly => Ok(()),
            Kept::Not(refused) => Err(refused.clone()),
        }
    }

    /// Returns why drafts are not kept here, though they should be.
    pub fn refusal(&self) -> Option<Refused> {
        match &self.0 {
            Kept::Not(refused) => Some(refused.clone()),
            _ => None,
        }
    }

    fn load(&self, day: &Arc<DayInfo>) -> Vec<Draft> {
        let Kept::By(drafts) = &self.0 else {
            return Vec::new();
        };
        drafts
            .load_all(&draft_day(day))
            .unwrap_or_default()
            .into_iter()
            .map(|d| Draft {
                day: Arc::clone(day),
                child_id: d.child_id,
                visit: d.visit_id,
                attempt: d.attempt,
                fields: d.fields,
                cursor: d.cursor,
            })
            .collect()
    }
}

/// Makes what the screens begin with: session, days, what is urgent.
pub fn session(
    desk: &Desk,
    color: bool,
    now_ms: i64,
    offset_minutes: i32,
) -> Result<App, ActionError> {
    let session = Session {
        programme: desk.programme(),
        role: desk.station_role()?,
        discreet: false,
        demo: desk.is_demo(),
        read_only: desk.is_read_only(),
        notation: desk.notation(),
        scan_prefix: desk.scan_prefix(),
        screener: desk.screener(),
        screeners: desk.screeners()?,
        sites: desk.sites()?,
        today: desk.today(),
        library: desk.library(),
        triage: desk.triage_sets(),
        theme: if color {
            desk.preference("theme")
                .and_then(|word| ThemeName::from_word(&word))
                .map_or_else(|| Theme::new(true), Theme::named)
        } else {
            Theme::new(false)
        },
        color,
        idle_minutes: desk
            .preference("idle_minutes")
            .and_then(|text| text.parse().ok())
            .unwrap_or(IDLE_MINUTES),
        new_id: actions::new_visit_id,
        now_ms,
        offset_minutes,
    };
    let mut app = App::new(session, desk.days()?, desk.urgent_open()?);
    if let Some(warning) = desk.clock_warning()? {
        app.refuse(Refused {
            message: warning,
            hint: String::new(),
        });
    }
    Ok(app)
}

impl Clerk {
    /// Sits down at a desk.
    pub fn new(desk: Desk) -> Clerk {
        Clerk {
            keeper: Keeper(match desk.drafts() {
                Ok(drafts) => Kept::By(Arc::new(drafts)),
                Err(_) if desk.is_read_only().is_some() => Kept::ReadOnly,
                Err(error) => Kept::Not(Refused {
                    message: format!("what is typed is not kept before it is signed: {error}"),
                    hint: error.hint.unwrap_or_default(),
                }),
            }),
            desk,
            index: None,
        }
    }

    /// Returns the handle on the drafts.
    pub fn keeper(&self) -> Keeper {
        self.keeper.clone()
    }

    /// Gives the desk back; every draft is written.
    pub fn into_desk(self) -> Desk {
        self.desk
    }

    /// Answers a request.
    pub fn answer(&mut self, request: Request) -> Answer {
        let signing = match &request {
            Request::Sign(sign) => Some(sign.child_id.clone()),
            _ => None,
        };
        match self.try_answer(request) {
            Ok(answer) => answer,
            Err(error) => {
                let refused = Refused {
                    message: error.message,
                    hint: error.hint.unwrap_or_default(),
                };
                match signing {
                    Some(child) => Answer::NotSigned(child, refused),
                    None => Answer::Refused(refused),
                }
            }
        }
    }

    fn try_answer(&mut self, request: Request) -> Result<Answer, ActionError> {
        Ok(match request {
            Request::Days => Answer::Days(self.desk.days()?),
            Request::NewDay(new) => {
                let day = self.desk.open_day(new)?;
                self.load_day(day)?
            }
            Request::LoadDay(day) => self.load_day(day)?,
            Request::Board(day) => Answer::Board(Box::new(self.desk.board(&day)?)),
            Request::Sign(sign) => Answer::Signed(Box::new(self.desk.sign(sign)?)),
            Request::Visit(day, child) => {
                let visit = self.desk.visit(&day, &child)?;
                Answer::Visit(child, visit.map(Box::new))
            }
            Request::Correct(visit, changes, reason) => {
                Answer::Corrected(Box::new(self.desk.correct(visit, &changes, &reason)?))
            }
            Request::MoveVisit(visit, to, reason) => {
                let (signed, from) = self.desk.move_visit(visit, &to, &reason)?;
                Answer::Moved(Box::new(signed), Box::new(from))
            }
            Request::Retract(visit, reason) => {
                Answer::Retracted(Box::new(self.desk.retract(visit, &reason)?))
            }
            Request::AddChild(child, day) => {
                self.index = None;
                Answer::Added(Box::new(self.desk.add_child(&child, &day)?))
            }
            Request::Told(answer) => {
                self.desk.urgent_answer(&answer)?;
                Answer::Told(answer.visit, self.desk.urgent_open()?)
            }
            Request::Urgent => Answer::Urgent(self.desk.urgent_open()?),
            Request::Find(text) => {
                if self.index.is_none() {
                    self.index = Some(self.desk.search_index()?);
                }
                let found = self
                    .index
                    .as_mut()
                    .map(|i| i.find(&text, FOUND))
                    .unwrap_or_default();
                Answer::Found(text, found)
            }
            Request::History(child) => Answer::History(self.desk.history(&child)?.map(Box::new)),
            Request::Referrals => Answer::Referrals(Box::new(self.desk.worklist()?)),
            Request::Term => Answer::Term(self.desk.term_table()?),
            Request::Compare(a, b) => {
                let (term, subjects) = self.desk.subjects_of_term(None)?;
                let library = self.desk.library();
                let found = |id: &str| {
                    library
                        .rule_set(id)
                        .ok_or_else(|| ActionError::bad(format!("no rule set {id}")))
                };
                let comparison = Comparison::new(found(&a)?, found(&b)?, &subjects);
                Answer::Compared(Box::new(Compared::new(term, comparison, &subjects)))
            }
            Request::SetStation(change) => {
                self.desk.set_station(&change)?;
                Answer::Station(Box::new(self.desk.station_role()?))
            }
            Request::Settle(visit, field, value, reason) => {
                Answer::Corrected(Box::new(self.desk.settle(visit, field, &value, &reason)?))
            }
            Request::ValueHistory(visit, field) => {
                Answer::ValueHistory(field, self.desk.value_history(visit, field)?)
            }
            Request::Screener(name) => {
                self.desk.set_screener(&name)?;
                Answer::Screener(name)
            }
            Request::Unlock(typed) => Answer::Unlocked(match self.desk.opens_with(typed.text()) {
                Ok(true) => None,
                Ok(false) => Some("that does not open this store; try again".into()),
                Err(error) => Some(error.message),
            }),
            Request::Prefer(name, value) => {
                self.desk.set_preference(name, &value)?;
                Answer::Preferred(name, value)
            }
        })
    }

    fn load_day(&self, day: DayInfo) -> Result<Answer, ActionError> {
        // The station's chart may have changed since the screens were told of the day.
        let days = self.desk.days()?;
        let day = days.into_iter().find(|d| d.id == day.id).unwrap_or(day);
        let children = self.desk.day_children(&day)?;
        let day = Arc::new(day);
        let drafts = self.keeper.load(&day);
        Ok(Answer::Day(day, children, drafts))
    }
}

fn draft_day(day: &DayInfo) -> DraftDay {
    DraftDay {
        site: day.site.clone(),
        screened_on: day.date,
        protocol: day.protocol.clone(),
    }
}
