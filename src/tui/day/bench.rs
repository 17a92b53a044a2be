//! The bench: one child, the fields that the protocol asks for, and what they come to.

mod edit;

use std::sync::Arc;

use uuid::Uuid;

use crate::actions::{DayChild, DayInfo, SignRequest, VisitView};
use crate::domain::acuity::Notation;
use crate::domain::codes::{Correction, Status};
use crate::domain::field::Field;
use crate::domain::outcome::{Outcome, Urgency};
use crate::domain::readings::{ReadingContext, Readings};
use crate::tui::app::Session;
use crate::tui::day::kind::{self, Kind};
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
    Field(usize),
    /// On the line that signs.
    Sign,
}

/// Offered for every child, after what the protocol asks for; judged when done.
const OFFERED: [Field; 5] = [
    Field::Signs,
    Field::History,
    Field::Cover,
    Field::RedReflexRight,
    Field::RedReflexLeft,
];

/// Offered where the chart could not be tested.
const INSTRUMENT: [Field; 8] = [
    Field::InstrumentRight,
    Field::InstrumentLeft,
    Field::SphereRight,
    Field::CylinderRight,
    Field::AxisRight,
    Field::SphereLeft,
    Field::CylinderLeft,
    Field::AxisLeft,
];

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
    raws: Raws,
    states: Vec<State>,
    undo: Vec<(Raws, Spot)>,
    given: Given,
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
        };
        let asked = judging::bench_fields(&given.library, day, &child);
        let mut path = vec![Field::CorrectionWorn];
        if asked.contains(&Field::SphereRight) {
            path.extend([Field::InstrumentRight, Field::InstrumentLeft]);
        }
        for field in asked.into_iter().chain(OFFERED) {
            if !path.contains(&field) {
                path.push(field);
            }
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
            signed: None,
            child,
            path,
            readings,
            outcome,
            pass_line,
            given,
        };
        if let Some(draft) = draft {
            bench.raws = draft
                .fields
                .iter()
                .filter_map(|(word, raw)| Some((Field::from_word(word)?, raw.clone())))
                .collect();
        }
        bench.at = draft
            .and_then(|d| bench.spot_of(&d.cursor))
            .unwrap_or_else(|| bench.first_spot());
        bench.judge();
        bench
    }

    fn spot_of(&self, cursor: &str) -> Option<Spot> {
        if cursor == "sign" {
            return Some(Spot::Sign);
        }
        let field = Field::from_word(cursor)?;
        self.path.iter().position(|f| *f == field).map(Spot::Field)
    }

    /// Returns where a fresh child begins: at the glasses unless the roster says there are none,
    /// else at the first acuity.
    fn first_spot(&self) -> Spot {
        if self.roster_correction().is_none() {
            return Spot::Field(0);
        }
        (1..self.path.len())
            .find(|i| self.is_main(*i))
            .map_or(Spot::Sign, Spot::Field)
    }

    /// Returns what the roster alone says of glasses, where it says that there are none.
    pub fn roster_correction(&self) -> Option<Correction> {
        (self.child.wears_glasses == Some(false)).then_some(Correction::None)
    }

    /// Says whether Enter stops at a field. The chart, or the instrument where there is no chart or
    /// it could not be tested, is the way through; Tab goes to every other test that is offered.
    fn is_main(&self, index: usize) -> bool {
        use Field as F;
        matches!(
            self.path[index],
            F::DistanceRight | F::DistanceLeft | F::NearRight | F::NearLeft
        ) || INSTRUMENT.contains(&self.path[index])
    }

    /// Returns the field that has the focus.
    pub fn field(&self) -> Option<Field> {
        match self.at {
            Spot::Field(index) => self.path.get(index).copied(),
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
        self.path
            .iter()
            .position(|f| *f == field)
            .and_then(|i| self.states.get(i))
            .unwrap_or(&State::Empty)
    }

    /// Says whether nothing was entered.
    pub fn is_blank(&self) -> bool {
        self.raws.iter().all(|(_, raw)| raw.is_empty())
    }

    /// Returns the draft to keep.
    pub fn draft(&self) -> Draft {
        Draft {
            day: self.given.day.id,
            child_id: self.child.child_id.clone(),
            visit: self.visit,
            attempt: self.child.attempt,
            fields: self
                .raws
                .iter()
                .filter(|(_, raw)| !raw.is_empty())
                .map(|(f, raw)| (f.word().to_owned(), raw.clone()))
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

    /// Reads all fields again and asks the rules.
    pub fn judge(&mut self) {
        if let Some(visit) = &self.signed {
            self.readings = visit.readings.clone();
            self.raws = self.readings.recorded();
        }
        let mut readings = Readings {
            acuity_method: Some(self.given.day.method),
            correction: self.roster_correction(),
            ..Readings::default()
        };
        let context = ReadingContext {
            bare: Some(self.given.bare),
            critical_line: self.pass_line.as_ref().map(|p| p.line),
        };
        if INSTRUMENT.iter().any(|f| !self.raw(*f).is_empty()) {
            self.offer_instrument();
        }
        self.states = vec![State::Empty; self.path.len()];
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
            if let Some(i) = self.path.iter().position(|f| f == field) {
                self.states[i] = state;
            }
        }
        self.readings = readings;
        if self.readings.chart_not_testable() {
            self.offer_instrument();
        }
        self.outcome = judging::preview(
            &self.given.library,
            &self.given.day,
            &self.child,
            &self.readings,
        );
    }

    fn offer_instrument(&mut self) {
        for field in INSTRUMENT {
            if !self.path.contains(&field) {
                self.path.push(field);
                self.states.push(State::Empty);
            }
        }
    }

    /// Shows the visit as it was signed.
    pub fn show_signed(&mut self, visit: VisitView) {
        self.raws = visit.readings.recorded();
        self.visit = visit.id;
        self.signed = Some(visit);
        self.undo.clear();
        self.at = Spot::Sign;
        self.judge();
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

    /// Says whether the focus is in an empty list of signs or history.
    pub fn wants_list(&self) -> bool {
        !self.is_signed()
            && self
                .field()
                .is_some_and(|f| kind::kind(f) == Kind::List && self.raw(f).is_empty())
    }

    /// Says whether signing will state "no signs seen".
    pub fn will_state_no_signs(&self) -> bool {
        self.readings.signs.is_none() && self.status().is_none()
    }

    /// Returns what to sign, or the field that stands against it and why.
    pub fn to_sign(&self) -> Result<SignRequest, (Option<Field>, String)> {
        for (field, state) in self.path.iter().zip(&self.states) {
            if let State::Invalid { expected } = state {
                return Err((
                    Some(*field),
                    format!("{}: expected {expected}", field.title()),
                ));
            }
        }
        let mut readings = self.readings.clone();
        let speaks = readings.anything_tested()
            || readings.signs.is_some()
            || self.status().is_some()
            || matches!(
                readings.correction,
                Some(Correction::LeftAtHome | Correction::BrokenOrLost | Correction::NotWorn)
            );
        if !speaks {
            let spot = self
                .path
                .iter()
                .copied()
                .find(|f| kind::kind(*f) == Kind::Acuity);
            return Err((
                spot,
                "nothing was tested yet; F3 says why a child is not tested".into(),
            ));
        }
        if let Some(error) = readings.contradictions().into_iter().next() {
            return Err((
                Some(error.field),
                format!("{}: expected {}", error.field.title(), error.expected),
            ));
        }
        if self.will_state_no_signs() {
            readings.signs = Some(Vec::new());
        }
        if readings.status.is_none() {
            readings.status = Some(Status::Present);
        }
        Ok(SignRequest {
            day: self.given.day.id,
            child_id: self.child.child_id.clone(),
            attempt: self.child.attempt,
            visit: self.visit,
            readings,
        })
    }
}
