//! A child as the roster knows them.

use chrono::NaiveDate;

use crate::domain::age::Grade;
use crate::domain::codes::{Consent, YesNo};

/// One row of a roster: required columns first, then what is known before the day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RosterChild {
    /// The district's own id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date; unknown when the roster leaves it blank.
    pub dob: Option<NaiveDate>,
    /// Grade.
    pub grade: Option<Grade>,
    /// Site code.
    pub site: String,
    /// Everything optional.
    pub details: RosterDetails,
}

/// The optional columns of a roster, empty when the column or cell is empty.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
#[allow(missing_docs)]
pub struct RosterDetails {
    pub class: String,
    pub teacher: String,
    pub sex: String,
    pub language: String,
    pub ethnicity: String,
    pub insurance: String,
    pub special_education: Option<YesNo>,
    pub state_id: String,
    pub guardian_name: String,
    pub guardian_phone: String,
    pub guardian_email: String,
    pub guardian_address: String,
    pub guardian2_name: String,
    pub guardian2_phone: String,
    pub guardian2_email: String,
    pub consent: Option<Consent>,
    pub wears_glasses: Option<YesNo>,
    pub last_exam_on: Option<NaiveDate>,
    pub under_care: Option<YesNo>,
    pub known_condition: String,
    pub doctor_name: String,
    pub doctor_phone: String,
    pub history: String,
    pub notes: String,
}
