//! Letters through their templates into one file.

use std::fmt::Write as _;
use std::path::Path;
use std::sync::Arc;

use chrono::NaiveDate;
use minijinja::value::{Kwargs, Value};
use minijinja::{AutoEscape, Environment, Error, ErrorKind, State, UndefinedBehavior, context};
use qrcode::QrCode;
use qrcode::render::svg;

use super::error::LetterError;
use super::messages::{Language, Messages};
use super::{Because, Found, FoundValue, FoundValues, Letter, Sender};
use crate::domain::codes::Correction;
use crate::domain::form_code::FormCode;
use crate::domain::referral::LetterKind;
use crate::domain::screening_test::ScreeningTest;

/// The templates that are shipped.
const SHIPPED: [(&str, &str); 15] = [
    ("head.html", include_str!("templates/head.html")),
    ("todo.html", include_str!("templates/todo.html")),
    ("foot.html", include_str!("templates/foot.html")),
    ("page.html", include_str!("templates/page.html")),
    ("found.html", include_str!("templates/found.html")),
    ("answer.html", include_str!("templates/answer.html")),
    ("referral.html", include_str!("templates/referral.html")),
    ("urgent.html", include_str!("templates/urgent.html")),
    ("rescreen.html", include_str!("templates/rescreen.html")),
    (
        "glasses_at_home.html",
        include_str!("templates/glasses_at_home.html"),
    ),
    (
        "second_notice.html",
        include_str!("templates/second_notice.html"),
    ),
    ("passed.html", include_str!("templates/passed.html")),
    ("color.html", include_str!("templates/color.html")),
    ("to_doctor.html", include_str!("templates/to_doctor.html")),
    ("exam_form.html", include_str!("templates/exam_form.html")),
];

/// What a template may use, beside `t(message, …)`.
const FIELDS: [&str; 27] = [
    "written_on",
    "at_once",
    "kind",
    "title",
    "child",
    "born",
    "class",
    "site",
    "tested_on",
    "result",
    "found",
    "test",
    "values",
    "worn",
    "by",
    "wrote_on",
    "call",
    "whom",
    "on",
    "code",
    "qr",
    "doctor",
    "outcome",
    "interpreter",
    "sender",
    "draft",
    "letters",
];

/// Templates and messages, ready to print.
pub struct Letters {
    environment: Environment<'static>,
    messages: Arc<Messages>,
}

impl std::fmt::Debug for Letters {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "Letters({:?})", self.messages)
    }
}

impl Letters {
    /// Takes what is shipped and a programme's own files, as (file name, text).
    ///
    /// # Errors
    /// A file that cannot be read, with line and caret.
    pub fn with(own: &[(String, String)]) -> Result<Letters, LetterError> {
        let messages = Arc::new(Messages::with(own)?);
        let mut environment = Environment::new();
        environment.set_undefined_behavior(UndefinedBehavior::Strict);
        // A page takes some hundred steps; a template that never ends is stopped.
        environment.set_fuel(Some(100_000));
        environment.set_auto_escape_callback(|_| AutoEscape::Html);
        let words = Arc::clone(&messages);
        environment.add_function("t", move |state: &State<'_, '_>, id: &str, fill: Kwargs| {
            translated(&words, state, id, &fill)
        });
        let shipped = SHIPPED.map(|(file, text)| (file.to_owned(), text.to_owned()));
        for (file, text) in shipped.iter().chain(own) {
            if Path::new(file).extension().is_some_and(|end| end == "html") {
                environment
                    .add_template_owned(file.clone(), text.clone())
                    .map_err(|e| {
                        let place = e.range().unwrap_or(0..0);
                        let words = e.detail().map_or_else(|| e.to_string(), str::to_owned);
                        LetterError::at(file, text, place, words)
                    })?;
            }
        }
        Ok(Letters {
            environment,
            messages,
        })
    }

    /// Returns the words.
    pub fn messages(&self) -> &Messages {
        &self.messages
    }

    /// Prints letters, each on its own page, as one HTML file.
    ///
    /// # Errors
    /// A language without a file, a template with an unknown field, a message that cannot be filled.
    pub fn print(&self, letters: &[Letter], sender: &Sender) -> Result<String, LetterError> {
        let pages = letters
            .iter()
            .map(|letter| self.page(letter, sender))
            .collect::<Result<Vec<_>, _>>()?;
        self.environment
            .get_template("page.html")
            .and_then(|t| {
                t.render(context! {
                    letters => pages,
                    sender => sender_value(sender),
                    language => "en",
                })
            })
            .map_err(|e| LetterError::template(&e, &FIELDS))
    }

    fn page(&self, letter: &Letter, sender: &Sender) -> Result<Value, LetterError> {
        let language = self.messages.language(&letter.language).ok_or_else(|| {
            LetterError::file(
                &format!("{}.ftl", letter.language),
                format!(
                    "there is no such language file; there are {}",
                    self.messages
                        .all()
                        .map(|l| l.code.as_str())
                        .collect::<Vec<_>>()
                        .join(", ")
                ),
            )
        })?;
        let file = format!("{}.html", letter.kind.word());
        let spoken = |date: Option<NaiveDate>| -> Result<Option<String>, LetterError> {
            date.map(|d| language.date(d))
                .transpose()
                .map_err(|e| LetterError::file(&file, e))
        };
        let title = language
            .text(title(letter), &[])
            .map_err(|e| LetterError::file(&file, e))?;
        let fields = context! {
            kind => letter.kind.word(),
            language => &letter.language,
            title => title,
            child => &letter.child,
            born => spoken(letter.born)?,
            class => &letter.class,
            site => &letter.site,
            written_on => spoken(Some(letter.written_on))?,
            tested_on => spoken(letter.tested_on)?,
            at_once => letter.at_once,
            found => letter.found.iter().map(|f| found(f, language)).collect::<Vec<_>>(),
            worn => worn(letter.correction),
            result => match letter.because {
                Because::NotPassed => "result-referral",
                Because::History => "result-history",
                Because::NotTested => "result-untested",
            },
            by => spoken(letter.by)?,
            wrote_on => spoken(letter.wrote_on)?,
            call => match &letter.call {
                Some((whom, on)) => Some(context! { whom => whom, on => spoken(Some(*on))? }),
                None => None,
            },
            code => letter.code.map(|c| c.to_string()),
            qr => letter.code.map(qr),
            doctor => &letter.doctor,
            outcome => &letter.outcome,
            interpreter => letter.interpreter,
            sender => sender_value(sender),
        };
        let body = self
            .environment
            .get_template(&file)
            .and_then(|t| t.render(fields))
            .map_err(|e| LetterError::template(&e, &FIELDS))?;
        let draft = language.translated && !sender.approved.contains_key(&letter.language);
        Ok(context! {
            language => &letter.language,
            direction => if language.right_to_left { "rtl" } else { "ltr" },
            draft => draft,
            body => Value::from_safe_string(body),
        })
    }
}

fn translated(
    messages: &Messages,
    state: &State<'_, '_>,
    id: &str,
    fill: &Kwargs,
) -> Result<String, Error> {
    let wrong = |words: String| Error::new(ErrorKind::InvalidOperation, words);
    let code = state
        .lookup("language")
        .and_then(|v| v.as_str().map(str::to_owned))
        .unwrap_or_default();
    let language = messages
        .language(&code)
        .ok_or_else(|| wrong(format!("no language {code}")))?;
    let mut filled = Vec::new();
    for name in fill.args() {
        let value: Value = fill.get(name)?;
        if value.is_undefined() {
            return Err(Error::from(ErrorKind::UndefinedError));
        }
        filled.push((name, value.to_string()));
    }
    language.text(id, &filled).map_err(wrong)
}

fn sender_value(sender: &Sender) -> Value {
    context! {
        programme => &sender.programme,
        who => &sender.who,
        phone => &sender.phone,
        help => &sender.help,
    }
}

fn title(letter: &Letter) -> &'static str {
    match letter.kind {
        LetterKind::Urgent if letter.at_once => "title-emergency",
        LetterKind::Referral => "title-referral",
        LetterKind::Urgent => "title-urgent",
        LetterKind::Rescreen => "title-rescreen",
        LetterKind::GlassesAtHome => "title-glasses",
        LetterKind::Second => "title-second",
        LetterKind::Passed => "title-passed",
        LetterKind::Color => "title-color",
        LetterKind::ToDoctor => "title-doctor",
        LetterKind::ExamForm => "title-form",
    }
}

/// The message that says whether glasses were worn.
fn worn(correction: Option<Correction>) -> &'static str {
    match correction {
        Some(Correction::Worn) => "glasses-worn",
        Some(Correction::ContactLenses) => "contacts-worn",
        Some(Correction::None) => "glasses-none",
        Some(Correction::NotWorn | Correction::LeftAtHome | Correction::BrokenOrLost) => {
            "glasses-not-worn"
        }
        None => "glasses-unknown",
    }
}

fn found(found: &Found, language: &Language) -> Value {
    let test = match found.test {
        ScreeningTest::Distance => "test-distance",
        ScreeningTest::Near => "test-near",
        ScreeningTest::PlusLens => "test-plus",
        ScreeningTest::Stereo => "test-stereo",
        ScreeningTest::Cover => "test-cover",
        ScreeningTest::RedReflex => "test-reflex",
        ScreeningTest::ColorPlates => "test-color",
        ScreeningTest::Instrument => "test-instrument",
    };
    let shown = |one: &FoundValue| {
        let id = match one {
            FoundValue::Value(value) => return value.clone(),
            FoundValue::Fine => "value-fine",
            FoundValue::Look => "value-look",
            FoundValue::NotTestable => "not-testable",
            FoundValue::NotDone => "not-done",
        };
        language.text(id, &[]).unwrap_or_default()
    };
    context! {
        test => test,
        values => match &found.values {
            FoundValues::Eyes(eyes) => eyes.iter().map(shown).collect::<Vec<_>>(),
            FoundValues::Together(value) => vec![shown(value)],
        },
    }
}

/// Draws a code as a QR code of its ten digits.
fn qr(code: FormCode) -> Value {
    QrCode::new(code.digits()).map_or_else(
        |_| Value::from(""),
        |drawn| {
            let mut out = String::new();
            let svg = drawn
                .render::<svg::Color<'_>>()
                .min_dimensions(96, 96)
                .build();
            // The XML declaration has no place inside a page.
            let _ = write!(
                out,
                "{}",
                svg.trim_start_matches(|c| c != '>').trim_start_matches('>')
            );
            Value::from_safe_string(out)
        },
    )
}
