//! Questions: choices, forms and pages. They stand above the foot line, over the lower part of the
//! place, so that the child's name stays in sight; Esc closes them and loses nothing.

use tui_input::{Input, InputRequest};

use crate::domain::readings::Eye;
use crate::keys::Context;

/// One choice with the key that takes it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Choice {
    /// Its key.
    pub key: char,
    /// What it is in words.
    pub label: String,
    /// The word that the asker gets back.
    pub word: String,
    /// What finds it beside its words, exactly (its keys, written together: `f7`, `ctrlz`).
    pub keys: Vec<String>,
    /// Whether it is shown but cannot be done now.
    pub idle: bool,
}

/// Which eye a choice is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Scope {
    /// One eye.
    One(Eye),
    /// Both eyes.
    Both,
}

impl Scope {
    /// Returns `right eye`, `left eye` or `both eyes`.
    pub fn title(self) -> &'static str {
        match self {
            Scope::One(eye) => eye.title(),
            Scope::Both => "both eyes",
        }
    }

    /// Returns the next one.
    #[must_use]
    pub fn next(self) -> Scope {
        match self {
            Scope::One(Eye::Right) => Scope::One(Eye::Left),
            Scope::One(Eye::Left) => Scope::Both,
            Scope::Both => Scope::One(Eye::Right),
        }
    }
}

/// A list of choices.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Choices {
    /// The choices.
    pub items: Vec<Choice>,
    /// The row under the cursor.
    pub at: usize,
    /// Which eye, where that can be said.
    pub scope: Option<Scope>,
    /// A find typed so far (the palette), where typing narrows the list.
    pub find: Option<String>,
}

impl Choices {
    /// Makes a list with keys.
    pub fn new(items: Vec<Choice>) -> Choices {
        Choices {
            items,
            at: 0,
            scope: None,
            find: None,
        }
    }

    /// Returns the choices that the find leaves, in order.
    pub fn shown(&self) -> Vec<&Choice> {
        let words: Vec<String> = self
            .find
            .as_deref()
            .unwrap_or("")
            .split_whitespace()
            .map(crate::domain::text::folded)
            .collect();
        let joined: String = words
            .concat()
            .chars()
            .filter(|c| *c != '-' && *c != '+')
            .collect();
        // Who types a key wants what stands on it, first.
        let (mut first, rest): (Vec<&Choice>, Vec<&Choice>) =
            self.items.iter().partition(|c| c.keys.contains(&joined));
        let start = words.join(" ");
        let (named, other): (Vec<&Choice>, Vec<&Choice>) = rest
            .into_iter()
            .filter(|c| {
                let label = crate::domain::text::folded(&c.label);
                words.iter().all(|w| label.contains(w.as_str()))
            })
            .partition(|c| crate::domain::text::folded(&c.label).starts_with(&start));
        first.extend(named);
        first.extend(other);
        first
    }

    /// Moves the cursor.
    pub fn step(&mut self, by: isize) {
        let last = self.shown().len().saturating_sub(1);
        self.at = self.at.saturating_add_signed(by).min(last);
    }
}

/// One field of a form.
#[derive(Debug, Clone)]
pub struct FormField {
    /// What is asked.
    pub label: &'static str,
    /// An example or a remark, shown while it is empty.
    pub example: String,
    /// Whether it may stay empty.
    pub optional: bool,
    /// What was typed.
    pub input: Input,
}

/// Fields to type into.
#[derive(Debug, Clone)]
pub struct Form {
    /// The fields.
    pub fields: Vec<FormField>,
    /// The one with the focus.
    pub at: usize,
    /// What is wrong with what was typed.
    pub error: String,
    /// Lines under the fields that change while typing (matching children).
    pub hints: Vec<String>,
}

impl Form {
    /// Makes a form of (label, example, optional).
    pub fn new(fields: &[(&'static str, &str, bool)]) -> Form {
        Form {
            fields: fields
                .iter()
                .map(|(label, example, optional)| FormField {
                    label,
                    example: (*example).to_owned(),
                    optional: *optional,
                    input: Input::default(),
                })
                .collect(),
            at: 0,
            error: String::new(),
            hints: Vec::new(),
        }
    }

    /// Returns what was typed into a field, without outer blanks.
    pub fn value(&self, index: usize) -> &str {
        self.fields
            .get(index)
            .map_or("", |f| f.input.value().trim())
    }

    /// Edits the field that has the focus.
    pub fn edit(&mut self, request: InputRequest) {
        if let Some(field) = self.fields.get_mut(self.at) {
            field.input.handle(request);
            self.error.clear();
        }
    }

    /// Moves to another field.
    pub fn step(&mut self, by: isize) {
        let last = self.fields.len().saturating_sub(1);
        self.at = self.at.saturating_add_signed(by).min(last);
    }

    /// Takes Enter: true when the last field is filled and the form is done.
    pub fn enter(&mut self) -> bool {
        let Some(field) = self.fields.get(self.at) else {
            return true;
        };
        if field.input.value().trim().is_empty() && !field.optional {
            self.error = format!("{} is needed", field.label);
            return false;
        }
        if self.at + 1 < self.fields.len() {
            self.at += 1;
            return false;
        }
        match self
            .fields
            .iter()
            .position(|f| !f.optional && f.input.value().trim().is_empty())
        {
            Some(missing) => {
                self.at = missing;
                self.error = format!("{} is needed", self.fields[missing].label);
                false
            }
            None => true,
        }
    }
}

/// The list of signs with marks.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SignMarks {
    /// Marked signs.
    pub marked: Vec<crate::domain::readings::Sign>,
    /// The row under the cursor, in the order of the list of signs.
    pub at: usize,
}

/// A page of lines to read.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Page {
    /// The lines.
    pub lines: Vec<String>,
    /// The first line shown.
    pub top: usize,
}

/// The part of a question that a person works with.
#[derive(Debug, Clone)]
pub enum Body {
    /// Choices.
    Choices(Choices),
    /// A form.
    Form(Form),
    /// Signs.
    Signs(SignMarks),
    /// A page.
    Page(Page),
}

/// What is asked, and so what happens with the answer.
#[derive(Debug, Clone, PartialEq)]
pub enum Ask {
    /// Why an eye is not testable.
    NotTestable,
    /// Why a child does not take part.
    NotPresent,
    /// Which signs were seen.
    Signs,
    /// Save an emergency.
    Emergency,
    /// Which history entries (`none` or one).
    History,
    /// Which test to bring to the bench.
    Tests,
    /// The note of the visit (with a reason when it was signed).
    Note,
    /// Which of the values that differ between stations stands.
    Settle(crate::domain::field::Field),
    /// Why it stands.
    SettleWhy(crate::domain::field::Field, String),
    /// Which value to correct.
    CorrectWhat,
    /// The new value and the reason.
    Correct(crate::domain::field::Field),
    /// The reason for swapping the signed values of right and left.
    SwapSigned,
    /// Which child to move to (with a reason when it was signed).
    MoveTo,
    /// The reason for taking back the last signature.
    Retract,
    /// A child added at the table.
    AddChild,
    /// Which open emergency.
    ToldWhich,
    /// Who was told of an emergency.
    Told(crate::actions::OpenUrgent),
    /// Which command.
    Palette,
    /// Which colors.
    Theme,
    /// Who is recording.
    Screener,
    /// What this station is set to.
    Station,
    /// A new screening day.
    NewDay,
    /// Something to read.
    Read,
}

/// A question on the screen.
#[derive(Debug, Clone)]
pub struct Prompt {
    /// What is asked.
    pub ask: Ask,
    /// The heading.
    pub title: String,
    /// The part to work with.
    pub body: Body,
}

impl Prompt {
    /// Makes a question with choices.
    pub fn choices(ask: Ask, title: impl Into<String>, choices: Choices) -> Prompt {
        Prompt {
            ask,
            title: title.into(),
            body: Body::Choices(choices),
        }
    }

    /// Makes a question with fields.
    pub fn form(ask: Ask, title: impl Into<String>, form: Form) -> Prompt {
        Prompt {
            ask,
            title: title.into(),
            body: Body::Form(form),
        }
    }

    /// Makes a page.
    pub fn page(title: impl Into<String>, lines: Vec<String>) -> Prompt {
        Prompt {
            ask: Ask::Read,
            title: title.into(),
            body: Body::Page(Page { lines, top: 0 }),
        }
    }

    /// Returns the context of its keys.
    pub fn context(&self) -> Context {
        match self.body {
            Body::Choices(_) => Context::Choices,
            Body::Form(_) => Context::Form,
            Body::Signs(_) => Context::Signs,
            Body::Page(_) => Context::Page,
        }
    }
}

/// Makes choices from (key, label, word).
pub fn listed<L: Into<String>, W: Into<String>>(
    items: impl IntoIterator<Item = (char, L, W)>,
) -> Choices {
    Choices::new(
        items
            .into_iter()
            .map(|(key, label, word)| Choice {
                key,
                label: label.into(),
                word: word.into(),
                keys: Vec::new(),
                idle: false,
            })
            .collect(),
    )
}
