//! Typing into the bench, and moving about on it.

use super::{Before, Bench, Checkpoint, Spot, State};
use crate::domain::acuity::{Acuity, Line, Step};
use crate::domain::codes::AcuityMethod;
use crate::domain::field::Field;
use crate::domain::readings::{ReadingContext, Readings};
use crate::tui::day::kind::{self, AcuityOf, Kind};
use crate::tui::day::path::Group;

/// The arrows go down to 20/200; what is worse is typed.
const COARSEST_BY_ARROW: i32 = 10;

impl Bench {
    pub(super) fn remember(&mut self) {
        self.undo.push(Before {
            raws: self.raws.clone(),
            at: self.at,
            swapped: self.swapped.clone(),
        });
        if self.undo.len() > 200 {
            self.undo.remove(0);
        }
    }

    /// Undoes the last edit; false when there is none.
    pub fn undo(&mut self) -> bool {
        let Some(before) = self.undo.pop() else {
            return false;
        };
        self.raws = before.raws;
        self.at = before.at;
        self.swapped = before.swapped;
        self.judge();
        true
    }

    /// Returns what the bench holds now.
    pub fn checkpoint(&self) -> Checkpoint {
        Checkpoint {
            child_id: self.child.child_id.clone(),
            raws: self.raws.clone(),
            at: self.at,
            undo: self.undo.len(),
        }
    }

    /// Goes back to what the bench held then.
    pub fn restore(&mut self, checkpoint: Checkpoint) {
        if checkpoint.child_id == self.child.child_id && !self.is_signed() {
            self.raws = checkpoint.raws;
            self.at = checkpoint.at;
            self.undo.truncate(checkpoint.undo);
            self.judge();
        }
    }

    /// Puts a text into a field as one edit.
    pub fn put(&mut self, field: Field, text: &str) {
        self.remember();
        self.write(field, text);
        self.judge();
    }

    fn write(&mut self, field: Field, text: &str) {
        match self.raws.iter_mut().find(|(f, _)| *f == field) {
            Some((_, raw)) => text.clone_into(raw),
            None => self.raws.push((field, text.to_owned())),
        }
    }

    /// Says where a number that was typed here would have gone: nowhere.
    pub fn no_number_here(&self) -> String {
        match self.field() {
            None => "a number is not taken on the line that signs: ↑ goes back".to_owned(),
            Some(field) => {
                let keys: Vec<String> = match kind::kind(field) {
                    Kind::Choice(choices) => {
                        choices.iter().map(|(k, _, _)| k.to_string()).collect()
                    }
                    _ => vec!["n".to_owned()],
                };
                format!(
                    "{} takes no number: {}, or Tab to the next field",
                    field.title(),
                    keys.join(", ")
                )
            }
        }
    }

    /// Says whether a value is shown as it was typed: what is understood of it may tell the pass line,
    /// which is kept back.
    pub fn shows_as_typed(&self, field: Field) -> bool {
        self.keeps_back()
            && kind::kind(field) == Kind::Acuity
            && !self.raw(field).starts_with("NT:")
    }

    /// Returns what was typed into a field, also where one key stood for the pass line that is kept
    /// back.
    pub fn typed(&self, field: Field) -> &str {
        let raw = self.raw(field);
        let pass = self.pass_line.as_ref().filter(|_| self.keeps_back());
        match pass.map(|pass| pass.line.to_string()) {
            Some(line) if raw.strip_prefix(">=") == Some(&line) => "+",
            Some(line) if raw.strip_prefix('<') == Some(&line) => "-",
            _ => raw,
        }
    }

    /// Types a character; says whether it changed anything.
    pub fn type_char(&mut self, c: char) -> bool {
        let Some(field) = self.field() else {
            return self.type_on_sign_line(c);
        };
        match kind::kind(field) {
            Kind::Choice(choices) => {
                let Some(choice) = choices
                    .iter()
                    .find(|(k, _, _)| *k == c.to_ascii_lowercase())
                else {
                    return false;
                };
                self.put(field, choice.1);
                self.advance();
                true
            }
            Kind::List if c.eq_ignore_ascii_case(&'n') => {
                self.put(field, "none");
                self.advance();
                true
            }
            Kind::List => false,
            Kind::Acuity | Kind::Text => {
                if self.raw(field).is_empty()
                    && (self.critical_key(field, c) || self.no_reading_key(field, c))
                {
                    return true;
                }
                self.insert(&c.to_string());
                true
            }
        }
    }

    /// Inserts a text at the end of the field, as one edit.
    pub fn insert(&mut self, text: &str) {
        let Some(field) = self.field() else {
            return;
        };
        if matches!(kind::kind(field), Kind::Acuity | Kind::Text) {
            let clean: String = text
                .chars()
                .filter(|c| !crate::domain::text::is_unsafe(*c))
                .take(64)
                .collect();
            let joined = format!("{}{clean}", self.raw(field));
            self.put(field, &joined.chars().take(64).collect::<String>());
        }
    }

    /// `+` in an empty distance field says that the pass line was passed and nothing smaller was
    /// shown; on a critical-line day `-` says that it was not passed (elsewhere a minus may begin a
    /// logMAR value).
    fn critical_key(&mut self, field: Field, c: char) -> bool {
        let distance = matches!(field, Field::DistanceRight | Field::DistanceLeft);
        let (true, Some(pass)) = (distance, &self.pass_line) else {
            return false;
        };
        let text = match c {
            '+' => format!(">={}", pass.line),
            '-' if self.given.day.method == AcuityMethod::CriticalLine => {
                format!("<{}", pass.line)
            }
            _ => return false,
        };
        self.put(field, &text);
        true
    }

    /// `x` in an empty sphere says that the instrument gave no reading of this eye.
    fn no_reading_key(&mut self, field: Field, c: char) -> bool {
        let (result, next) = match field {
            Field::SphereRight => (Field::InstrumentRight, Some(Field::SphereLeft)),
            Field::SphereLeft => (Field::InstrumentLeft, None),
            _ => return false,
        };
        if !c.eq_ignore_ascii_case(&'x') {
            return false;
        }
        self.put(
            result,
            crate::domain::codes::InstrumentResult::NoReading.word(),
        );
        if let Some(next) = next {
            self.go_to(next);
        } else {
            self.at = Spot::Field(Field::InstrumentLeft);
            self.advance();
        }
        true
    }

    /// On the line that signs, the offered choices have their keys.
    fn type_on_sign_line(&mut self, c: char) -> bool {
        let c = c.to_ascii_lowercase();
        if c == 'n' && self.path.contains(&Field::Signs) && self.raw(Field::Signs).is_empty() {
            self.put(Field::Signs, "none");
            return true;
        }
        if self.path.contains(&Field::PlusLens)
            && let Kind::Choice(choices) = kind::kind(Field::PlusLens)
            && let Some(choice) = choices.iter().find(|(k, _, _)| *k == c)
        {
            self.put(Field::PlusLens, choice.1);
            return true;
        }
        false
    }

    /// Erases the last character, or a chosen value; on the line that signs, the status.
    pub fn erase(&mut self) {
        let Some(field) = self.field() else {
            if !self.raw(Field::Status).is_empty() {
                self.put(Field::Status, "");
            }
            return;
        };
        if self.raw(field).is_empty() {
            return;
        }
        let text = match kind::kind(field) {
            Kind::Acuity | Kind::Text if !self.raw(field).starts_with("NT:") => {
                let mut raw = self.typed(field).to_owned();
                raw.pop();
                raw
            }
            _ => String::new(),
        };
        self.put(field, &text);
    }

    /// Empties the field.
    pub fn clear_field(&mut self) {
        if let Some(field) = self.field()
            && !self.raw(field).is_empty()
        {
            self.put(field, "");
        }
    }

    /// Moves along the ladder or the choices: `better` is up.
    pub fn step(&mut self, better: bool) {
        let Some(field) = self.field() else {
            if better {
                self.back();
            }
            return;
        };
        match kind::kind(field) {
            Kind::Acuity => {
                let line = self.ladder_line(field, better);
                self.put(field, &line.to_string());
            }
            Kind::Choice(choices) => {
                let at = choices
                    .iter()
                    .position(|(_, word, _)| *word == self.raw(field));
                let next = match (at, better) {
                    (None, true) => choices.len() - 1,
                    (None, false) => 0,
                    (Some(i), true) => i.saturating_sub(1),
                    (Some(i), false) => (i + 1).min(choices.len() - 1),
                };
                self.put(field, choices[next].1);
            }
            Kind::List | Kind::Text => {
                if better {
                    self.back();
                } else {
                    self.forward();
                }
            }
        }
    }

    /// Returns the line that was typed, whatever the method of the day makes of it.
    fn line_typed(&self, field: Field) -> Option<Line> {
        let mut plain = Readings::default();
        let context = ReadingContext {
            bare: Some(self.given.bare),
            critical_line: None,
        };
        plain.set(field, self.raw(field), context).ok()?;
        match plain.acuity_of(field)?.acuity()? {
            Acuity::Read { line, .. } => Some(line),
            _ => None,
        }
    }

    /// The first arrow starts from the pass line: down stands on it, up on the line above it. Where
    /// the chart is known the arrows go along its own lines. A masked station begins at the line that
    /// every chart has, so that the first arrow tells nothing.
    fn ladder_line(&self, field: Field, better: bool) -> Line {
        let here = match self.state(field) {
            State::Valid { .. } if self.keeps_back() => self.line_typed(field),
            State::Valid { .. } => self
                .readings
                .acuity_of(field)
                .and_then(|r| r.acuity()?.line()),
            _ => None,
        };
        let pass = self.pass_line.as_ref().filter(|_| !self.keeps_back());
        let start = pass.map_or(0, |p| p.line.step().0);
        let step = match here {
            Some(line) => line.step().0 + if better { -1 } else { 1 },
            None if better => start - 1,
            None => start,
        };
        let step = step.clamp(Step::FINEST.0, COARSEST_BY_ARROW);
        let mut lines: Vec<Line> = self.chart().to_vec();
        lines.sort_by_key(|l| l.step());
        let on_chart = if better {
            lines.iter().rfind(|l| l.step().0 <= step).or(lines.first())
        } else {
            lines.iter().find(|l| l.step().0 >= step).or(lines.last())
        };
        on_chart
            .copied()
            .unwrap_or_else(|| Line::at(Step(step), self.given.bare))
    }

    /// Swaps right and left of the test that has the focus, or that is asked about; elsewhere of both
    /// acuities. Returns the tests that were swapped; each leaves its trail with the signature.
    pub fn swap(&mut self) -> Vec<Group> {
        let groups: Vec<Group> = self
            .swap_groups()
            .into_iter()
            .filter(|g| g.fields().iter().any(|f| !self.raw(*f).is_empty()))
            .collect();
        if groups.is_empty() {
            return groups;
        }
        self.remember();
        for group in &groups {
            for (right, left) in pairs(*group) {
                let (r, l) = (self.raw(right).to_owned(), self.raw(left).to_owned());
                self.write(right, &l);
                self.write(left, &r);
            }
            match self.swapped.iter().position(|g| g == group) {
                Some(i) => drop(self.swapped.remove(i)),
                None => self.swapped.push(*group),
            }
        }
        self.judge();
        groups
    }

    /// Returns the tests that a swap is about.
    pub fn swap_groups(&self) -> Vec<Group> {
        let about = self
            .asking
            .as_ref()
            .and_then(|d| d.fields.first().copied())
            .or(self.field());
        match about.and_then(Group::of) {
            Some(group) if pairs(group).next().is_some() => vec![group],
            _ => vec![Group::Distance, Group::Near],
        }
    }

    /// Goes where Enter leads after the field that has the focus: through the rest of its test, then
    /// to the next test that is needed.
    pub fn advance(&mut self) {
        self.canonical();
        let Some(here) = self.field() else {
            return;
        };
        let rest = self.path.iter().skip_while(|f| **f != here).skip(1);
        self.at = rest
            .copied()
            .find(|f| self.plan.leads_to(here, *f))
            .map_or(Spot::Sign, Spot::Field);
    }

    /// Goes to the next field of the path.
    pub fn forward(&mut self) {
        self.walk(1);
    }

    /// Goes to the field before.
    pub fn back(&mut self) {
        self.walk(-1);
    }

    /// The line that signs stands behind the last field and before the first.
    fn walk(&mut self, by: isize) {
        self.canonical();
        let n = self.path.len() as isize;
        let here = match self.at {
            Spot::Sign => n,
            Spot::Field(field) => self
                .path
                .iter()
                .position(|f| *f == field)
                .map_or(n, |i| i as isize),
        };
        let to = (here + by).rem_euclid(n + 1);
        self.at = self
            .path
            .get(to as usize)
            .map_or(Spot::Sign, |f| Spot::Field(*f));
        self.arrange();
    }

    /// Goes to the field of the other eye: the right eye is on the left-hand side.
    pub fn across(&mut self, to_left_eye: bool) {
        let Some((right, left)) = self.field().and_then(kind::pair) else {
            return;
        };
        self.canonical();
        self.go_to(if to_left_eye { left } else { right });
    }

    /// Puts the focus into a field of the path.
    pub fn go_to(&mut self, field: Field) {
        if self.path.contains(&field) {
            self.at = Spot::Field(field);
        }
    }

    /// Writes a valid field as it was understood; while the pass line is kept back it stays as typed.
    fn canonical(&mut self) {
        if let Some(field) = self.field()
            && !self.shows_as_typed(field)
            && matches!(self.state(field), State::Valid { .. })
            && let Some(text) = self.readings.get(field)
        {
            self.write(field, &text);
            self.judge();
        }
    }
}

/// Returns the pairs of fields, right and left, of a test.
pub fn pairs(group: Group) -> impl Iterator<Item = (Field, Field)> {
    group
        .fields()
        .iter()
        .filter_map(|f| kind::pair(*f).filter(|(right, _)| right == f))
}
