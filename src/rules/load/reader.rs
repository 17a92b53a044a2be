//! Reads a parsed TOML table key by key and collects what is wrong, each with its place.

use std::ops::Range;

use chrono::NaiveDate;
use toml::de::{DeTable, DeValue};

use crate::domain::text::{nearest, shown};
use crate::rules::error::RuleError;

/// A table and where it stands.
pub(super) struct Section<'a, 't> {
    pub table: &'a DeTable<'t>,
    pub span: Range<usize>,
}

/// The file being read and the faults so far.
pub(super) struct Reader<'t> {
    pub file: &'t str,
    pub text: &'t str,
    pub errors: Vec<RuleError>,
}

impl<'t> Reader<'t> {
    pub fn new(file: &'t str, text: &'t str) -> Reader<'t> {
        Reader {
            file,
            text,
            errors: Vec::new(),
        }
    }

    /// Notes a fault at a place.
    pub fn fault(
        &mut self,
        span: Range<usize>,
        what: impl Into<String>,
        expected: impl Into<String>,
        cure: impl Into<String>,
    ) {
        let what = shown(&what.into(), 200);
        let error = RuleError::at(self.file, self.text, span, what, expected, cure);
        if !self.errors.contains(&error) {
            self.errors.push(error);
        }
    }

    /// Notes every key that is not among the known ones.
    pub fn only(&mut self, section: &Section<'_, '_>, known: &[&str]) {
        for key in section.table.keys() {
            let name = key.get_ref().as_ref();
            if known.contains(&name) {
                continue;
            }
            let cure = nearest(name, known.iter().copied())
                .map(|near| format!("did you mean `{near}`?"))
                .unwrap_or_default();
            self.fault(
                key.span(),
                format!("unknown key `{name}`"),
                format!("one of {}", known.join(", ")),
                cure,
            );
        }
    }

    /// Returns a text that must be there.
    pub fn string(
        &mut self,
        section: &Section<'_, '_>,
        key: &str,
    ) -> Option<(String, Range<usize>)> {
        if !section.table.contains_key(key) {
            self.fault(
                section.span.clone(),
                format!("`{key}` is missing"),
                format!("{key} = \"…\""),
                "",
            );
            return None;
        }
        let found = self.optional(section, key)?;
        if found.0.trim().is_empty() {
            self.fault(found.1, format!("`{key}` is empty"), "a text", "");
            return None;
        }
        Some(found)
    }

    /// Returns a text that may be there.
    pub fn optional(
        &mut self,
        section: &Section<'_, '_>,
        key: &str,
    ) -> Option<(String, Range<usize>)> {
        let value = section.table.get(key)?;
        let Some(text) = value.get_ref().as_str() else {
            self.wrong_type(value.span(), key, value.get_ref(), "a text in quotes");
            return None;
        };
        Some((text.to_owned(), value.span()))
    }

    /// Returns a whole number that may be there.
    pub fn number(&mut self, section: &Section<'_, '_>, key: &str) -> Option<u32> {
        let value = section.table.get(key)?;
        let number = value
            .get_ref()
            .as_integer()
            .filter(|i| i.radix() == 10)
            .and_then(|i| i.as_str().parse::<u32>().ok())
            .filter(|n| *n <= 36_500);
        if number.is_none() {
            self.wrong_type(value.span(), key, value.get_ref(), "a whole number from 0");
        }
        number
    }

    /// Returns yes or no that may be there.
    pub fn flag(&mut self, section: &Section<'_, '_>, key: &str) -> Option<bool> {
        let value = section.table.get(key)?;
        let flag = value.get_ref().as_bool();
        if flag.is_none() {
            self.wrong_type(value.span(), key, value.get_ref(), "true or false");
        }
        flag
    }

    /// Returns a list of texts that may be there, each with its place.
    pub fn list(&mut self, section: &Section<'_, '_>, key: &str) -> Vec<(String, Range<usize>)> {
        let Some(value) = section.table.get(key) else {
            return Vec::new();
        };
        let Some(array) = value.get_ref().as_array() else {
            self.wrong_type(value.span(), key, value.get_ref(), "a list of texts");
            return Vec::new();
        };
        let mut out = Vec::new();
        for item in array {
            match item.get_ref().as_str() {
                Some(text) => out.push((text.to_owned(), item.span())),
                None => self.wrong_type(item.span(), key, item.get_ref(), "a text in quotes"),
            }
        }
        out
    }

    /// Returns a date that may be there, as a text or a TOML date.
    pub fn date(&mut self, section: &Section<'_, '_>, key: &str) -> Option<NaiveDate> {
        let value = section.table.get(key)?;
        let text = match value.get_ref() {
            DeValue::Datetime(date) => date.to_string(),
            DeValue::String(text) => text.to_string(),
            _ => String::new(),
        };
        let date = NaiveDate::parse_from_str(&text, "%Y-%m-%d")
            .ok()
            .filter(|_| text.len() == 10);
        if date.is_none() {
            self.fault(
                value.span(),
                format!("`{key}` is not a date that can be"),
                "a date such as 2026-10-14",
                "",
            );
        }
        date
    }

    /// Returns the tables of an array of tables.
    pub fn sections<'a, 'd>(
        &mut self,
        section: &Section<'a, 'd>,
        key: &str,
    ) -> Vec<Section<'a, 'd>> {
        let Some(value) = section.table.get(key) else {
            return Vec::new();
        };
        let Some(array) = value.get_ref().as_array() else {
            self.wrong_type(value.span(), key, value.get_ref(), &format!("[[{key}]]"));
            return Vec::new();
        };
        let mut out = Vec::new();
        for item in array {
            match item.get_ref().as_table() {
                Some(table) => out.push(Section {
                    table,
                    span: item.span(),
                }),
                None => self.wrong_type(item.span(), key, item.get_ref(), &format!("[[{key}]]")),
            }
        }
        out
    }

    /// Returns the value of a word, or notes that it is none.
    pub fn word<T>(
        &mut self,
        word: &str,
        span: Range<usize>,
        key: &str,
        words: &str,
        read: impl Fn(&str) -> Option<T>,
    ) -> Option<T> {
        let value = read(word);
        if value.is_none() {
            // A word may hold a comma itself, as the measures do.
            let parts: Vec<&str> = words.split(", ").collect();
            let pairs: Vec<String> = parts.windows(2).map(|w| w.join(", ")).collect();
            let known = parts
                .into_iter()
                .chain(pairs.iter().map(String::as_str))
                .filter(|candidate| read(candidate).is_some());
            let cure = nearest(word, known)
                .map(|near| format!("did you mean \"{near}\"?"))
                .unwrap_or_default();
            self.fault(
                span,
                format!("unknown {key} `{word}`"),
                format!("one of {words}"),
                cure,
            );
        }
        value
    }

    fn wrong_type(&mut self, span: Range<usize>, key: &str, found: &DeValue<'_>, expected: &str) {
        self.fault(
            span,
            format!("`{key}` is {}", described(found)),
            expected,
            "",
        );
    }
}

fn described(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) => "a number out of range or of another kind",
        DeValue::Float(_) => "a decimal number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
