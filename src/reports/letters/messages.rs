//! The words of the letters, by language.

use std::collections::BTreeMap;

use chrono::{Datelike, NaiveDate};
use fluent_bundle::concurrent::FluentBundle;
use fluent_bundle::{FluentArgs, FluentResource, FluentValue};
use unic_langid::LanguageIdentifier;

use super::error::LetterError;

/// The files that are shipped.
const SHIPPED: [(&str, &str); 4] = [
    ("en.ftl", include_str!("messages/en.ftl")),
    ("es.ftl", include_str!("messages/es.ftl")),
    ("ar.ftl", include_str!("messages/ar.ftl")),
    ("vi.ftl", include_str!("messages/vi.ftl")),
];

/// One language.
pub struct Language {
    /// Its code: `es`.
    pub code: String,
    /// Its own name.
    pub name: String,
    /// Whether it is written from right to left.
    pub right_to_left: bool,
    /// Whether it is a translation, which somebody has to approve.
    pub translated: bool,
    bundle: FluentBundle<FluentResource>,
}

impl std::fmt::Debug for Language {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "Language({})", self.code)
    }
}

/// Every language there is.
#[derive(Debug)]
pub struct Messages {
    languages: BTreeMap<String, Language>,
}

impl Messages {
    /// Reads what is shipped and a programme's own files, as (file name, text). A file of a shipped
    /// language replaces single messages; one of another language has to have them all.
    ///
    /// # Errors
    /// The first file that cannot be read: the line, or the messages that it lacks.
    pub fn with(own: &[(String, String)]) -> Result<Messages, LetterError> {
        let mut languages: BTreeMap<String, Language> = BTreeMap::new();
        let shipped = SHIPPED.map(|(file, text)| (file.to_owned(), text.to_owned()));
        let ids = ids(SHIPPED[0].1);
        for (file, text) in shipped.iter().chain(own) {
            let Some(code) = file.strip_suffix(".ftl") else {
                continue;
            };
            let resource = parse(file, text)?;
            if let Some(language) = languages.get_mut(code) {
                language.bundle.add_resource_overriding(resource);
                language.describe();
                continue;
            }
            let id: LanguageIdentifier = code.parse().map_err(|_| {
                LetterError::file(
                    file,
                    "the name of the file is no language code, such as so.ftl",
                )
            })?;
            let mut bundle = FluentBundle::new_concurrent(vec![id]);
            bundle.add_resource_overriding(resource);
            let lacks: Vec<&str> = ids
                .iter()
                .copied()
                .filter(|id| !bundle.has_message(id))
                .collect();
            if !lacks.is_empty() {
                return Err(LetterError::file(
                    file,
                    format!(
                        "lacks {} of {} messages: {}",
                        lacks.len(),
                        ids.len(),
                        lacks.join(", ")
                    ),
                ));
            }
            let mut language = Language {
                code: code.to_owned(),
                name: String::new(),
                right_to_left: false,
                translated: code != "en",
                bundle,
            };
            language.describe();
            languages.insert(code.to_owned(), language);
        }
        Ok(Messages { languages })
    }

    /// Returns a language by its code.
    pub fn language(&self, code: &str) -> Option<&Language> {
        self.languages.get(code)
    }

    /// Returns a language by what a roster says: its code, a longer code (`es-MX`), or its name in
    /// English or in itself.
    pub fn spoken(&self, roster: &str) -> Option<&Language> {
        let wanted = crate::domain::text::folded(roster.trim());
        let short = wanted.split(['-', '_']).next().unwrap_or("");
        let english = match wanted.as_str() {
            "english" => "en",
            "spanish" => "es",
            "arabic" => "ar",
            "vietnamese" => "vi",
            _ => short,
        };
        self.languages.get(english).or_else(|| {
            self.languages
                .values()
                .find(|l| crate::domain::text::folded(&l.name) == wanted)
        })
    }

    /// Returns every language, by code.
    pub fn all(&self) -> impl Iterator<Item = &Language> {
        self.languages.values()
    }

    /// Returns the ids of the messages that every language has.
    pub fn ids() -> Vec<&'static str> {
        ids(SHIPPED[0].1)
    }
}

impl Language {
    fn describe(&mut self) {
        self.name = self.text("language-name", &[]).unwrap_or_default();
        self.right_to_left = self.text("direction", &[]).as_deref() == Ok("rtl");
    }

    /// Returns a message with its places filled in.
    ///
    /// # Errors
    /// In words: no such message, or a place that nothing fills.
    pub fn text(&self, id: &str, fill: &[(&str, String)]) -> Result<String, String> {
        let pattern = self
            .bundle
            .get_message(id)
            .and_then(|m| m.value())
            .ok_or_else(|| format!("{}.ftl has no message {id}", self.code))?;
        let mut args = FluentArgs::new();
        for (name, value) in fill {
            args.set(*name, FluentValue::from(value.as_str()));
        }
        let mut errors = Vec::new();
        let text = self
            .bundle
            .format_pattern(pattern, Some(&args), &mut errors)
            .into_owned();
        match errors.first() {
            None => Ok(text),
            Some(error) => Err(format!("{}.ftl, message {id}: {error}", self.code)),
        }
    }

    /// Returns a date as it is written in the language.
    ///
    /// # Errors
    /// In words: a message of the language that cannot be filled in.
    pub fn date(&self, date: NaiveDate) -> Result<String, String> {
        let month = self.text(&format!("month-{}", date.month()), &[])?;
        self.text(
            "date",
            &[
                ("day", date.day().to_string()),
                ("month", month),
                ("year", date.year().to_string()),
            ],
        )
    }
}

fn parse(file: &str, text: &str) -> Result<FluentResource, LetterError> {
    FluentResource::try_new(text.to_owned()).map_err(|(_, errors)| {
        errors.first().map_or_else(
            || LetterError::file(file, "cannot be read"),
            |e| LetterError::at(file, text, e.pos.clone(), e.to_string()),
        )
    })
}

fn ids(text: &str) -> Vec<&str> {
    text.lines()
        .filter(|line| !line.starts_with('#') && !line.starts_with(char::is_whitespace))
        .filter_map(|line| line.split_once(" = ").map(|(id, _)| id))
        .collect()
}
