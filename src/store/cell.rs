//! One value of an entry, as it is stored and as it is hashed.

use std::borrow::Cow;

use chrono::{NaiveDate, NaiveTime};
use rusqlite::types::{ToSql, ToSqlOutput, ValueRef};
use uuid::Uuid;

use crate::domain::age::Grade;
use crate::domain::codes::{AcuityMethod, Attempt, Consent, Status, YesNo};
use crate::domain::exam::{Evidence, ExamField};
use crate::domain::field::Field;
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::domain::referral::{Channel, Closing, ContactResult, LetterKind, StepKind};
use crate::domain::screening_test::ScreeningTest;

/// A value as the engine keeps it; there are no reals.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Cell<'a> {
    /// Unknown or not applicable.
    Null,
    /// A whole number.
    Int(i64),
    /// Text.
    Text(Cow<'a, str>),
    /// Bytes.
    Blob(Cow<'a, [u8]>),
}

impl Cell<'_> {
    /// Appends the bytes that are hashed: a tag, then the value with its length where it has one.
    pub fn write(&self, out: &mut Vec<u8>) {
        match self {
            Cell::Null => out.push(0),
            Cell::Int(value) => {
                out.push(1);
                out.extend_from_slice(&value.to_be_bytes());
            }
            Cell::Text(text) => sized(out, 3, text.as_bytes()),
            Cell::Blob(bytes) => sized(out, 4, bytes),
        }
    }

    /// Returns the cell of a stored value; nothing for a real, which no table holds.
    pub fn from_stored(value: ValueRef<'_>) -> Option<Cell<'_>> {
        match value {
            ValueRef::Null => Some(Cell::Null),
            ValueRef::Integer(value) => Some(Cell::Int(value)),
            ValueRef::Text(bytes) => std::str::from_utf8(bytes)
                .ok()
                .map(|text| Cell::Text(Cow::Borrowed(text))),
            ValueRef::Blob(bytes) => Some(Cell::Blob(Cow::Borrowed(bytes))),
            ValueRef::Real(_) => None,
        }
    }
}

fn sized(out: &mut Vec<u8>, tag: u8, bytes: &[u8]) {
    out.push(tag);
    out.extend_from_slice(&(bytes.len() as u32).to_be_bytes());
    out.extend_from_slice(bytes);
}

impl ToSql for Cell<'_> {
    fn to_sql(&self) -> rusqlite::Result<ToSqlOutput<'_>> {
        Ok(ToSqlOutput::Borrowed(match self {
            Cell::Null => ValueRef::Null,
            Cell::Int(value) => ValueRef::Integer(*value),
            Cell::Text(text) => ValueRef::Text(text.as_bytes()),
            Cell::Blob(bytes) => ValueRef::Blob(bytes),
        }))
    }
}

/// A type a field of an entry may have.
pub trait Value: Sized {
    /// Returns the value as it is stored.
    fn cell(&self) -> Cell<'_>;
    /// Reads it back; nothing when the stored value is not one of this type.
    fn from_stored(value: ValueRef<'_>) -> Option<Self>;
}

impl Value for i64 {
    fn cell(&self) -> Cell<'_> {
        Cell::Int(*self)
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        value.as_i64().ok()
    }
}

impl Value for bool {
    fn cell(&self) -> Cell<'_> {
        Cell::Int(i64::from(*self))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        match value.as_i64() {
            Ok(0) => Some(false),
            Ok(1) => Some(true),
            _ => None,
        }
    }
}

impl Value for String {
    fn cell(&self) -> Cell<'_> {
        Cell::Text(Cow::Borrowed(self))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        value.as_str().ok().map(str::to_owned)
    }
}

impl Value for Vec<u8> {
    fn cell(&self) -> Cell<'_> {
        Cell::Blob(Cow::Borrowed(self))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        value.as_blob().ok().map(<[u8]>::to_vec)
    }
}

impl Value for Uuid {
    fn cell(&self) -> Cell<'_> {
        Cell::Blob(Cow::Borrowed(self.as_bytes()))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        Uuid::from_slice(value.as_blob().ok()?).ok()
    }
}

impl Value for NaiveDate {
    fn cell(&self) -> Cell<'_> {
        Cell::Text(Cow::Owned(self.to_string()))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        value.as_str().ok()?.parse().ok()
    }
}

impl Value for NaiveTime {
    fn cell(&self) -> Cell<'_> {
        Cell::Text(Cow::Owned(self.format("%H:%M").to_string()))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        NaiveTime::parse_from_str(value.as_str().ok()?, "%H:%M").ok()
    }
}

impl Value for Grade {
    fn cell(&self) -> Cell<'_> {
        Cell::Text(Cow::Owned(self.to_string()))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        Grade::parse(value.as_str().ok()?)
    }
}

impl<T: Value> Value for Option<T> {
    fn cell(&self) -> Cell<'_> {
        self.as_ref().map_or(Cell::Null, Value::cell)
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        match value {
            ValueRef::Null => Some(None),
            value => T::from_stored(value).map(Some),
        }
    }
}

/// A list of entry ids, stored as their bytes one after another.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Ids(pub Vec<Uuid>);

impl Value for Ids {
    fn cell(&self) -> Cell<'_> {
        Cell::Blob(Cow::Owned(
            self.0.iter().flat_map(|id| *id.as_bytes()).collect(),
        ))
    }
    fn from_stored(value: ValueRef<'_>) -> Option<Self> {
        let bytes = value.as_blob().ok()?;
        let (ids, rest) = bytes.as_chunks::<16>();
        rest.is_empty()
            .then(|| Ids(ids.iter().map(|id| Uuid::from_bytes(*id)).collect()))
    }
}

macro_rules! words {
    ($($name:ty),+) => { $(
        impl Value for $name {
            fn cell(&self) -> Cell<'_> {
                Cell::Text(Cow::Borrowed(self.word()))
            }
            fn from_stored(value: ValueRef<'_>) -> Option<Self> {
                <$name>::from_word(value.as_str().ok()?)
            }
        }
    )+ };
}
words!(
    AcuityMethod,
    Attempt,
    Channel,
    Closing,
    Consent,
    ContactResult,
    Evidence,
    ExamField,
    Field,
    LetterKind,
    OutcomeKind,
    ScreeningTest,
    Status,
    StepKind,
    Urgency,
    YesNo
);
