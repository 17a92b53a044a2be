//! Rosters as the CSV that a school would send.

use chrono::NaiveDate;

use crate::domain::codes::{Consent, YesNo};
use crate::domain::roster::RosterChild;

/// Returns children as a roster file.
pub fn roster_csv<'a>(children: impl IntoIterator<Item = &'a RosterChild>) -> String {
    let header = "child_id family_name given_name dob grade site class teacher sex language \
                  special_education guardian_name guardian_phone guardian_email guardian_address \
                  consent wears_glasses last_exam_on under_care history";
    let mut out = row(header.split_whitespace());
    for child in children {
        let d = &child.details;
        let yes_no = |value: Option<YesNo>| value.map_or("", YesNo::word).to_owned();
        let date = |value: Option<NaiveDate>| value.map_or(String::new(), |v| v.to_string());
        out += &row([
            child.child_id.clone(),
            child.family_name.clone(),
            child.given_name.clone(),
            date(child.dob),
            child.grade.map_or(String::new(), |g| g.to_string()),
            child.site.clone(),
            d.class.clone(),
            d.teacher.clone(),
            d.sex.clone(),
            d.language.clone(),
            yes_no(d.special_education),
            d.guardian_name.clone(),
            d.guardian_phone.clone(),
            d.guardian_email.clone(),
            d.guardian_address.clone(),
            d.consent.map_or("", Consent::word).to_owned(),
            yes_no(d.wears_glasses),
            date(d.last_exam_on),
            yes_no(d.under_care),
            d.history.clone(),
        ]);
    }
    out
}

/// Writes one row by RFC 4180, with a plain line feed at its end.
pub fn row<T: AsRef<str>>(cells: impl IntoIterator<Item = T>) -> String {
    let mut out = String::new();
    for (i, cell) in cells.into_iter().enumerate() {
        if i > 0 {
            out.push(',');
        }
        let cell = cell.as_ref();
        if cell.contains(['"', ',', '\n', '\r']) {
            out.push('"');
            out += &cell.replace('"', "\"\"");
            out.push('"');
        } else {
            out += cell;
        }
    }
    out.push('\n');
    out
}
