//! The bench: one child, the fields that the protocol asks for, and what they come to.

mod edit;
mod part;
mod signing;

pub use edit::pairs;

use std::sync::Arc;

use chrono::NaiveDate;
use uuid::Uuid;

use crate::actions::{DayChild, DayInfo, StationRole, Unsettled, VisitView};
use crate::domain::acuity::{Line, Notation};
use crate::domain::codes::{Attempt, Correction, Status};
use crate::domain::field::Field;
use crate::domain::outcome::{Outcome, Urgency};
use crate::domain::readings::{Distance, ReadingContext, Readings};
use crate::domain::screening_test::ScreeningTest;
use crate::tui::app::Session;
use crate::tui::day::doubt::{self, Doubt};
use crate::tui::day::path::{Group, Plan};
use crate::tui::judging::{self, Draft, Library, PassLine};

/// What a field holds.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum State {
    /// Nobody entered anything.
    Empty,
    /// What was typed is no value of this field.
    Invalid {
        /// What would have been taken.
        expected: String,
    },
    /// A value, and what a screener should see about it.
    Valid {
        /// A remark ("critical line passed: 20/32 or better").
        echo: Option<String>,
    },
}

/// Where the focus is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Spot {
    /// In a field of the path.
    Field(Field),
    /// On the line that signs.
    Sign,
}

/// Fields with what was typed into them.
pub(super) type Raws = Vec<(Field, String)>;

/// One child on the bench.
#[derive(Debug)]
pub struct Bench {
    /// The child.
    pub child: DayChild,
    /// The visit's id, given when the child came to the bench.
    pub visit: Uuid,
    /// The fields in their order.
    pub path: Vec<Field>,
    plan: Plan,
    /// Where the focus is.
    pub at: Spot,
    /// What is understood of what was typed.
    pub readings: Readings,
    /// What it comes to.
    pub outcome: Outcome,
    /// The worst line that passes at this age.
    pub pass_line: Option<PassLine>,
    /// The visit as it was signed; then nothing is typed over it.
    pub signed: Option<VisitView>,
    /// What other stations signed of this visit, while a further part is entered here.
    pub elsewhere: Option<VisitView>,
    /// Tries of this visit before the one that is shown, oldest first.
    pub earlier: Vec<Readings>,
    raws: Raws,
    states: Vec<(Field, State)>,
    undo: Vec<Before>,
    /// Tests whose right and left were swapped since the child came to the bench.
    swapped: Vec<Group>,
    /// What was asked about already.
    asked: Vec<Doubt>,
    /// What is asked now.
    asking: Option<Doubt>,
    given: Given,
}

/// What an edit changes: for undoing it.
#[derive(Debug, Clone)]
struct Before {
    raws: Raws,
    at: Spot,
    swapped: Vec<Group>,
}

/// What a bench held at one moment.
#[derive(Debug, Clone)]
pub struct Checkpoint {
    child_id: String,
    raws: Raws,
    at: Spot,
    undo: usize,
}

/// What surrounds a bench.
#[derive(Debug, Clone)]
struct Given {
    day: Arc<DayInfo>,
    library: Arc<Library>,
    bare: Notation,
    role: StationRole,
    new_id: fn() -> Uuid,
}

impl Bench {
    /// Brings a child to the bench, with the draft if there is one.
    pub fn new(
        session: &Session,
        day: &Arc<DayInfo>,
        child: DayChild,
        draft: Option<&Draft>,
    ) -> Bench {
        let given = Given {
            day: Arc::clone(day),
            library: Arc::clone(&session.library),
            bare: session.notation,
            role: session.role.clone(),
            new_id: session.new_id,
        };
        let tests = judging::bench_tests(&given.library, day, &child);
        let mut plan = Plan::new(&tests, given.role.task, child.wears_glasses != Some(false));
        if given.role.chart.is_some() {
            plan.with_chart();
        }
        let pass_line = judging::pass_line_for(&given.library, day, &child);
        let readings = Readings::default();
        let outcome = judging::preview(&given.library, day, &child, &readings);
        let mut bench = Bench {
            visit: draft.map_or_else(session.new_id, |d| d.visit),
            at: Spot::Sign,
            raws: Vec::new(),
            states: Vec::new(),
            undo: Vec::new(),
            swapped: Vec::new(),
            asked: Vec::new(),
            asking: None,
            signed: None,
            elsewhere: None,
            earlier: Vec::new(),
            child,
            path: Vec::new(),
            plan,
            readings,
            outcome,
            pass_line,
            given,
        };
        if let Some(draft) = draft {
            bench.raws = entered_before(draft);
            bench.swapped = swapped_before(draft);
        }
        bench.judge();
        bench.at = draft
            .and_then(|d| bench.spot_of(&d.cursor))
            .unwrap_or_else(|| bench.first_spot());
        bench
    }

    /// Returns where the draft's cursor stood.
    fn spot_of(&self, cursor: &str) -> Option<Spot> {
        if cursor == "sign" {
            return Some(Spot::Sign);
        }
        let field = Field::from_word(cursor)?;
        self.path.contains(&field).then_some(Spot::Field(field))
    }

    /// Returns where a fresh child begins: at the glasses unless the roster says there are none,
    /// else at the first test that is needed.
    fn first_spot(&self) -> Spot {
        if self.readings.correction.is_none() && self.path.contains(&Field::CorrectionWorn) {
            return Spot::Field(Field::CorrectionWorn);
        }
        self.path
            .iter()
            .find(|f| self.plan.is_main(**f))
            .map_or(Spot::Sign, |f| Spot::Field(*f))
    }

    /// Returns what the roster alone says of glasses, where it says that there are none.
    pub fn roster_correction(&self) -> Option<Correction> {
        (self.child.wears_glasses == Some(false)).then_some(Correction::None)
    }

    /// Returns the field that has the focus.
    pub fn field(&self) -> Option<Field> {
        match self.at {
            Spot::Field(field) => Some(field),
            Spot::Sign => None,
        }
    }

    /// Returns what was typed into a field.
    pub fn raw(&self, field: Field) -> &str {
        self.raws
            .iter()
            .find(|(f, _)| *f == field)
            .map_or("", |(_, raw)| raw)
    }

    /// Returns what a field of the path holds.
    pub fn state(&self, field: Field) -> &State {
        self.states
            .iter()
            .find(|(f, _)| *f == field)
            .map_or(&State::Empty, |(_, state)| state)
    }

    /// Says whether nothing was entered.
    pub fn is_blank(&self) -> bool {
        self.raws.iter().all(|(_, raw)| raw.is_empty())
    }

    /// Returns the draft to keep.
    pub fn draft(&self) -> Draft {
        Draft {
            day: Arc::clone(&self.given.day),
            child_id: self.child.child_id.clone(),
            visit: self.visit,
            attempt: self.child.attempt,
            fields: self
                .raws
                .iter()
                .filter(|(_, raw)| !raw.is_empty())
                .map(|(f, raw)| (f.word().to_owned(), raw.clone()))
                .chain(
                    self.swapped
                        .iter()
                        .map(|g| (SWAPPED.to_owned(), g.title().to_owned())),
                )
                .collect(),
            cursor: self.field().map_or("sign", Field::word).to_owned(),
        }
    }

    /// Returns what was entered, to move it to another child.
    pub fn entered(&self) -> Raws {
        self.raws.clone()
    }

    /// Takes over what was entered for another child.
    pub fn take_over(&mut self, raws: Raws) {
        self.remember();
        self.raws = raws;
        self.judge();
    }

    // --- judging -----------------------------------------------------------------------------

    /// Returns the question that stands open, if one does.
    pub fn asking(&self) -> Option<&Doubt> {
        self.asking.as_ref()
    }

    /// Asks once about a rare value of the field that has the focus, or on the line that signs about
    /// any; says whether it asks. An emergency is never held up.
    pub fn asks(&mut self) -> bool {
        let here = self.field();
        self.asking = doubt::doubts(&self.readings, &self.child)
            .into_iter()
            .filter(|d| here.is_none_or(|field| d.fields.contains(&field)))
            .find(|d| !self.asked.contains(d))
            .filter(|_| !self.is_emergency() && !self.is_signed());
        if let Some(doubt) = &self.asking {
            self.asked.push(doubt.clone());
            if let (None, Some(last)) = (here, doubt.fields.last()) {
                self.at = Spot::Field(*last);
            }
        }
        self.asking.is_some()
    }

    /// Returns in words what was swapped since the child came to the bench.
    pub fn swapped_words(&self) -> Vec<String> {
        self.swapped
            .iter()
            .map(|g| format!("{SWAP_TRAIL}: {}", g.title()))
            .collect()
    }

    /// Says whether right and left were swapped, as the bench or the signature knows.
    pub fn was_swapped(&self) -> bool {
        let signed = self.signed.as_ref().and_then(|v| v.outcome.as_ref());
        !self.swapped.is_empty()
            || signed.is_some_and(|o| o.notes.iter().any(|note| note.starts_with(SWAP_TRAIL)))
    }

    /// Reads all fields again and asks the rules.
    pub fn judge(&mut self) {
        self.asking = None;
        if let Some(visit) = &self.signed {
            self.readings = visit.readings.clone();
            self.raws = self.readings.recorded();
        }
        let mut readings = Readings {
            acuity_method: Some(self.given.day.method),
            correction: self.correction_known(),
            ..Readings::default()
        };
        self.chart_at_the_station(&mut readings);
        let context = ReadingContext {
            bare: Some(self.given.bare),
            critical_line: self.pass_line.as_ref().map(|p| p.line),
        };
        // Letters and method decide what an acuity means: the field list has them first.
        self.raws.sort_by_key(|(field, _)| *field);
        self.states.clear();
        for (field, raw) in &self.raws {
            if raw.trim().is_empty() {
                continue;
            }
            let state = match readings.set(*field, raw, context) {
                Ok(echo) => State::Valid { echo },
                Err(error) => State::Invalid {
                    expected: error.expected,
                },
            };
            self.states.push((*field, state));
        }
        self.readings = readings;
        self.plan
            .offer_instrument(self.readings.chart_not_testable() && self.signed.is_none());
        self.arrange();
        let together = (!self.is_signed() && !self.earlier.is_empty()).then(|| {
            let mut tries = self.earlier.clone();
            tries.push(self.readings.clone());
            judging::judged(&tries)
        });
        let together = together.or_else(|| self.with_elsewhere(context));
        self.outcome = judging::preview(
            &self.given.library,
            &self.given.day,
            &self.child,
            together.as_ref().unwrap_or(&self.readings),
        );
    }

    /// The station's chart says how many letters a line has and, beside another distance, what its
    /// own is. What a person typed wins.
    fn chart_at_the_station(&self, readings: &mut Readings) {
        let Some(chart) = &self.given.role.chart else {
            return;
        };
        if chart.letters_per_line != USUAL_LETTERS {
            readings.letters_per_line = Some(chart.letters_per_line);
        }
        let used_in_feet = !self.raw(Field::UsedDistanceFt).is_empty();
        let used = used_in_feet || !self.raw(Field::UsedDistanceM).is_empty();
        let typed = [Field::ChartDistanceFt, Field::ChartDistanceM]
            .iter()
            .any(|f| !self.raw(*f).is_empty());
        if used && !typed {
            readings.chart_distance =
                Some(Distance::of_millimetres(chart.distance_mm, used_in_feet));
        }
    }

    /// Returns the one test of this station, where it has one.
    pub fn task(&self) -> Option<ScreeningTest> {
        self.given.role.task
    }

    /// Returns the lines of the station's chart, from the largest; empty where it is not known.
    pub fn chart(&self) -> &[Line] {
        &self.given.day.chart
    }

    /// Says whether outcome and pass line are kept back: the station is masked and one eye is still
    /// to be entered.
    pub fn keeps_back(&self) -> bool {
        self.given.role.masked && !self.is_signed() && !self.is_complete()
    }

    /// Says whether both eyes of the test are entered, or that there is nothing to wait for.
    fn is_complete(&self) -> bool {
        let r = &self.readings;
        let both = |eyes: [bool; 2]| eyes == [true, true];
        let instrument = both(
            r.instrument
                .both()
                .map(|eye| eye.sphere.is_some() || eye.result.is_some()),
        );
        let distance = both(r.distance.both().map(|eye| eye.is_some()));
        let task = match self.given.role.task {
            None | Some(ScreeningTest::Distance) => distance || instrument,
            Some(ScreeningTest::Instrument) => instrument,
            Some(ScreeningTest::Near) => both(r.near.both().map(|eye| eye.is_some())),
            Some(ScreeningTest::RedReflex) => both(r.red_reflex.both().map(|eye| eye.is_some())),
            Some(test) => test.fields().iter().any(|f| r.get(*f).is_some()),
        };
        task || self.status().is_some() || self.is_emergency()
    }

    /// Lists the fields of the path again; the focus stays where it is, or goes to the line that signs.
    fn arrange(&mut self) {
        self.path = self.plan.fields(
            |field| {
                self.unsettled(field).is_some()
                    || !matches!(self.state(field), State::Empty)
                    || self.at == Spot::Field(field)
            },
            &self.readings,
            self.given.bare,
        );
    }

    /// Brings a test to the bench, with the focus in its first empty field.
    pub fn open(&mut self, group: Group) {
        self.plan.open(group);
        self.arrange();
        let mut fields = self
            .path
            .iter()
            .copied()
            .filter(|f| group.fields().contains(f));
        let first = fields.next();
        let empty = first
            .into_iter()
            .chain(fields)
            .find(|f| matches!(self.state(*f), State::Empty));
        if let Some(field) = empty.or(first) {
            self.at = Spot::Field(field);
        }
    }

    /// Shows the visit as it was signed.
    pub fn show_signed(&mut self, visit: VisitView) {
        self.raws = visit.readings.recorded();
        self.visit = visit.id;
        self.earlier.clone_from(&visit.earlier_tries);
        self.signed = Some(visit);
        self.elsewhere = None;
        self.undo.clear();
        self.at = Spot::Sign;
        self.judge();
    }

    /// Returns the values of a field that differ between the parts of the signed visit.
    pub fn unsettled(&self, field: Field) -> Option<&Unsettled> {
        let visit = self.signed.as_ref()?;
        visit.unsettled.iter().find(|u| u.field == field)
    }

    /// Returns what carries over from the visit before into an empty field of a rescreen: its text
    /// and date. A test that was touched today is done again, whole.
    pub fn carried(&self, field: Field) -> Option<(String, NaiveDate)> {
        let before = self.child.before.as_ref()?;
        let text = before.passed.get(field)?;
        let whole = ScreeningTest::ALL
            .iter()
            .find(|t| t.fields().contains(&field))?;
        (!whole.is_touched(&self.readings) && self.child.attempt == Attempt::Rescreen)
            .then_some((text, before.on))
    }

    /// Says whether the child's visit of this day is signed.
    pub fn is_signed(&self) -> bool {
        self.signed.is_some()
    }

    /// Says whether what stands here is an emergency.
    pub fn is_emergency(&self) -> bool {
        self.outcome.urgency == Some(Urgency::Emergency)
    }

    /// Returns the status that was chosen, if the child does not simply take part.
    pub fn status(&self) -> Option<Status> {
        self.readings.status.filter(|s| *s != Status::Present)
    }

    /// Says whether the focus is in the history, unasked yet.
    pub fn wants_history(&self) -> bool {
        !self.is_signed()
            && self.field() == Some(Field::History)
            && self.raw(Field::History).is_empty()
    }
}

/// Letters on a line where nothing else is said.
const USUAL_LETTERS: u8 = 5;

/// What a signature says of eyes that were swapped before it.
const SWAP_TRAIL: &str = "right and left swapped before signing";

/// The word under which a draft keeps what was swapped.
const SWAPPED: &str = "swapped";

fn swapped_before(draft: &Draft) -> Vec<Group> {
    draft
        .fields
        .iter()
        .filter(|(word, _)| word == SWAPPED)
        .filter_map(|(_, title)| Group::ALL.into_iter().find(|g| g.title() == title))
        .collect()
}

/// Returns what was typed into a draft.
fn entered_before(draft: &Draft) -> Raws {
    draft
        .fields
        .iter()
        .filter_map(|(word, raw)| Some((Field::from_word(word)?, raw.clone())))
        .collect()
}
