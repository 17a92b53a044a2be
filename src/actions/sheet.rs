//! Class lists and blank forms on paper, to be entered later.

use std::collections::BTreeSet;

use super::desk::Desk;
use super::door::AtTheDoor;
use super::error::{ActionError, Result};
use super::judging::{bench_tests, pass_line_for};
use super::report::Report;
use super::views::DayInfo;
use crate::domain::age::spoken;
use crate::domain::codes::Attempt;
use crate::domain::screening_test::ScreeningTest;
use crate::reports::csv::Form;
use crate::reports::day::{self, About, StoreState};
use crate::reports::sheet::{self, ClassPage, SheetChild, SheetHead};
use crate::rules::CAUTIONS;

/// What is printed.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct SheetRequest {
    /// One class only.
    pub class: Option<String>,
    /// Rows of blank forms for children who are not on the roster.
    pub blank: usize,
    /// A page that prints, or a table to fill in.
    pub html: bool,
    /// Text of the table as it is.
    pub exact: bool,
}

impl Desk {
    /// Returns the class lists of a day: who is screened today with a blank box for each thing that
    /// the protocol needs at this age, one class a page. The pass line stands beside each child,
    /// except at a masked station. What is entered from it after the day is marked late.
    ///
    /// # Errors
    /// Bad input when no child of the day is in the class.
    pub fn sheet(&self, day: &DayInfo, request: &SheetRequest) -> Result<Report> {
        let mut list = self.at_the_door(day)?;
        if let Some(class) = &request.class {
            let known: BTreeSet<String> = list.iter().map(|at| at.child.class.clone()).collect();
            list.retain(|at| at.child.class == *class);
            if list.is_empty() {
                let known: Vec<String> = known.into_iter().filter(|c| !c.is_empty()).collect();
                return Err(ActionError::bad(format!(
                    "no child of this day is in a class {:?}",
                    crate::domain::text::shown(class, 60)
                ))
                .hint(format!("known: {}", known.join(", "))));
            }
        }
        list.sort_by_cached_key(|at| {
            let child = &at.child;
            let name = format!("{} {}", child.family_name, child.given_name);
            (
                child.grade,
                child.class.clone(),
                crate::domain::text::folded(&name),
            )
        });
        let masked = self.is_masked();
        let mut pages: Vec<ClassPage> = Vec::new();
        for at in &list {
            let title = class_title(at);
            if pages.last().is_none_or(|page| page.title != title) {
                pages.push(ClassPage {
                    title,
                    ..ClassPage::default()
                });
            }
            let Some(page) = pages.last_mut() else {
                continue;
            };
            if at.door.is_today() {
                page.children.push(self.sheet_child(day, at, masked));
            } else {
                page.not_today.push((
                    at.child.family_name.clone(),
                    at.child.given_name.clone(),
                    at.door.title(),
                ));
            }
        }
        let rows = pages.iter().map(|page| page.children.len()).sum();
        let title = format!("Class lists, {}, {}", day.site_name, spoken(day.date));
        let head = SheetHead {
            site: &day.site_name,
            date: day.date,
            protocol: &day.protocol,
            method: day.method.title(),
            cautions: &CAUTIONS,
        };
        let bytes = if request.html {
            sheet::html(&head, &pages, request.blank).into_bytes()
        } else {
            sheet::write(Vec::new(), Form::exact(request.exact), &head, &pages)
                .map_err(|e| ActionError::failed(e.to_string()))?
        };
        let state = self.head()?;
        let about = day::about(&About {
            title: &title,
            state: Some(&StoreState {
                head: state.whole(),
                entries: state.entries,
            }),
            rule_sets: &self.rule_sets_of(day, BTreeSet::new()),
            cautions: &CAUTIONS,
            guarded: !request.html && !request.exact,
        });
        Ok(Report {
            bytes,
            about,
            rows,
            title,
            children: list.into_iter().map(|at| at.child.child_id).collect(),
        })
    }

    fn sheet_child(&self, day: &DayInfo, at: &AtTheDoor, masked: bool) -> SheetChild {
        let child = &at.child;
        let tests = bench_tests(&self.library, day, child);
        let asked =
            |test: &ScreeningTest| tests.needed.contains(test) || tests.offered.contains(test);
        let pass_line = pass_line_for(&self.library, day, child)
            .filter(|_| !masked && asked(&ScreeningTest::Distance))
            .map_or_else(String::new, |p| format!("{} {}", p.line, p.words));
        let mut remarks = at.remarks.clone();
        if let Some(before) = &child.before {
            remarks.insert(0, format!("first visit {}", spoken(before.on)));
        }
        if child.attempt == Attempt::Rescreen {
            remarks.insert(0, "RESCREEN".to_owned());
        }
        remarks.retain(|r| r != "contact details missing");
        SheetChild {
            child_id: child.child_id.clone(),
            family_name: child.family_name.clone(),
            given_name: child.given_name.clone(),
            dob: child.dob,
            age: child.age,
            grade: child.grade,
            class: child.class.clone(),
            attempt: child.attempt,
            tests: ScreeningTest::ALL.iter().copied().filter(asked).collect(),
            pass_line,
            remarks: remarks.join(", "),
        }
    }
}

fn class_title(at: &AtTheDoor) -> String {
    match (&*at.child.class, at.child.grade) {
        ("", Some(grade)) => format!("grade {grade}, no class"),
        ("", None) => "no class".to_owned(),
        (class, _) => format!("class {class}"),
    }
}
