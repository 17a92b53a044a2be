//! Class lists on paper, and the same as a table that is filled in and read back as results.

use std::fmt::Write as _;
use std::io::{self, Write};

use chrono::NaiveDate;

use super::csv::{Form, Kind, Table};
use super::day::field_kind;
use super::html::{esc, named, page};
use crate::domain::age::{AgeMonths, Grade, spoken};
use crate::domain::codes::Attempt;
use crate::domain::field::Field;
use crate::domain::screening_test::ScreeningTest;

/// One child of a class list.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct SheetChild {
    pub child_id: String,
    pub family_name: String,
    pub given_name: String,
    pub dob: Option<NaiveDate>,
    pub age: Option<AgeMonths>,
    pub grade: Option<Grade>,
    pub class: String,
    pub attempt: Attempt,
    /// What is asked at this age.
    pub tests: Vec<ScreeningTest>,
    /// "20/32 passes at 6 years"; empty where it is not shown.
    pub pass_line: String,
    pub remarks: String,
}

/// One page.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct ClassPage {
    /// "class 1B"
    pub title: String,
    /// Who is screened.
    pub children: Vec<SheetChild>,
    /// Who is not, with the reason.
    pub not_today: Vec<(String, String, &'static str)>,
}

/// What stands at the head of each page.
#[derive(Debug, Clone, Copy)]
#[allow(missing_docs)]
pub struct SheetHead<'a> {
    pub site: &'a str,
    pub date: NaiveDate,
    pub protocol: &'a str,
    pub method: &'a str,
    pub cautions: &'a [&'a str],
}

const STYLE: &str = "@page{size:A4 landscape}.page{break-after:page}.page:last-of-type{break-after:auto}\
table{table-layout:auto}td.box{min-width:15mm;height:10mm}td.none{background:#ddd}\
td.ticks{white-space:nowrap;font-size:.85em}.small{font-size:.85em}.who{min-width:38mm}";

/// What is written on paper for a test: the heading of each column, right eye first.
fn columns(test: ScreeningTest) -> &'static [&'static str] {
    match test {
        ScreeningTest::Distance => &["distance, right eye", "distance, left eye"],
        ScreeningTest::Near => &["near, right eye", "near, left eye"],
        ScreeningTest::PlusLens => &["plus lens"],
        ScreeningTest::Stereo => &["stereo, correct of shown"],
        ScreeningTest::Cover => &["cover test"],
        ScreeningTest::RedReflex => &["red reflex, right eye", "red reflex, left eye"],
        ScreeningTest::ColorPlates => &["color plates, missed of shown"],
        ScreeningTest::Instrument => &[
            "instrument, right eye: sphere, cylinder, axis",
            "instrument, left eye: sphere, cylinder, axis",
        ],
    }
}

/// What may be ticked in a column of a test; empty where something is written.
fn ticks(test: ScreeningTest) -> &'static [&'static str] {
    match test {
        ScreeningTest::PlusLens => &["read", "blurred"],
        ScreeningTest::Cover => &["none", "phoria", "intermittent", "constant"],
        _ => &[],
    }
}

/// The columns of a results file for a test, without those that a whole day has alike.
fn fields(test: ScreeningTest) -> &'static [Field] {
    match test {
        ScreeningTest::Distance => &[Field::DistanceRight, Field::DistanceLeft],
        ScreeningTest::Near => &[Field::NearRight, Field::NearLeft],
        ScreeningTest::Instrument => &[
            Field::SphereRight,
            Field::CylinderRight,
            Field::AxisRight,
            Field::SphereLeft,
            Field::CylinderLeft,
            Field::AxisLeft,
        ],
        other => other.fields(),
    }
}

/// Returns the tests of a page, in the order of the declaration.
fn tests_of<'p>(pages: impl IntoIterator<Item = &'p ClassPage>) -> Vec<ScreeningTest> {
    let pages: Vec<&ClassPage> = pages.into_iter().collect();
    ScreeningTest::ALL
        .iter()
        .copied()
        .filter(|test| {
            pages
                .iter()
                .flat_map(|page| &page.children)
                .any(|child| child.tests.contains(test))
        })
        .collect()
}

fn boxes(words: &[&str]) -> String {
    let ticked: Vec<String> = words.iter().map(|word| format!("☐ {word}")).collect();
    ticked.join("<br>")
}

const GLASSES: [&str; 4] = ["owns none", "worn", "at home", "broken, lost"];
const STATES: [&str; 4] = ["referred", "not testable", "not attempted", "absent"];

/// Returns the class lists as pages that print, with a page of blank forms for children who are not
/// on the roster.
pub fn html(head: &SheetHead<'_>, pages: &[ClassPage], blank: usize) -> String {
    let title = format!("Class lists, {}, {}", head.site, spoken(head.date));
    let mut body = String::new();
    for class in pages {
        open(&mut body, head, &class.title);
        let tests = tests_of([class]);
        if class.children.is_empty() {
            body.push_str("<p>Nobody of this class is screened today.</p>\n");
        } else {
            head_row(&mut body, &tests);
            for child in &class.children {
                child_row(&mut body, child, &tests);
            }
            body.push_str("</tbody></table>\n");
        }
        if !class.not_today.is_empty() {
            let names: Vec<String> = class
                .not_today
                .iter()
                .map(|(family, given, why)| format!("{} ({})", named(family, given), esc(why)))
                .collect();
            let _ = writeln!(
                body,
                "<p class=\"small\">Not today: {}</p>",
                names.join("; ")
            );
        }
        close(&mut body);
    }
    if blank > 0 {
        open(&mut body, head, "children who are not on the roster");
        let tests = match tests_of(pages) {
            none if none.is_empty() => vec![ScreeningTest::Distance],
            some => some,
        };
        head_row(&mut body, &tests);
        for _ in 0..blank {
            blank_row(&mut body, &tests);
        }
        body.push_str("</tbody></table>\n");
        close(&mut body);
    }
    page(&title, STYLE, &body, head.cautions)
}

fn open(body: &mut String, head: &SheetHead<'_>, title: &str) {
    let _ = write!(
        body,
        "<section class=\"page\">\n<h1>{} · {}</h1>\n<p>{} · {} · acuity by {}</p>\n\
         <p class=\"small\">Screener ______________________ Station ______________ \
         Chart and distance ______________________ Right eye first, then left.</p>\n",
        esc(head.site),
        esc(title),
        esc(&spoken(head.date)),
        esc(head.protocol),
        esc(head.method)
    );
}

fn close(body: &mut String) {
    body.push_str(
        "<p class=\"small\">Enter it on the computer the same day, or later as a late entry. \
         A white pupil, a sudden loss of vision, an injury: fetch the nurse at once.</p>\n</section>\n",
    );
}

fn head_row(body: &mut String, tests: &[ScreeningTest]) {
    body.push_str("<table>\n<thead><tr><th class=\"who\">child</th><th>glasses</th>");
    for test in tests {
        for column in columns(*test) {
            let _ = write!(body, "<th>{column}</th>");
        }
    }
    body.push_str("<th>signs seen</th><th>not passed</th></tr></thead>\n<tbody>\n");
}

fn test_cells(body: &mut String, test: ScreeningTest, asked: bool) {
    for _ in columns(test) {
        if !asked {
            body.push_str("<td class=\"box none\">not asked</td>");
        } else if ticks(test).is_empty() {
            body.push_str("<td class=\"box\"></td>");
        } else {
            let _ = write!(body, "<td class=\"ticks\">{}</td>", boxes(ticks(test)));
        }
    }
}

fn end_cells(body: &mut String) {
    let _ = writeln!(
        body,
        "<td class=\"ticks\">☐ none<br>which: ______</td><td class=\"ticks\">{}</td></tr>",
        boxes(&STATES)
    );
}

fn child_row(body: &mut String, child: &SheetChild, tests: &[ScreeningTest]) {
    let born = child
        .dob
        .map_or_else(|| "birth date unknown".to_owned(), spoken);
    let age = child.age.map_or(String::new(), |a| format!(", {a}"));
    let _ = write!(
        body,
        "<tr><td><b>{}</b><br><span class=\"small\">{} · {}{}",
        named(&child.family_name, &child.given_name),
        esc(&child.child_id),
        esc(&born),
        esc(&age)
    );
    for words in [&child.pass_line, &child.remarks] {
        if !words.is_empty() {
            let _ = write!(body, "<br>{}", esc(words));
        }
    }
    let _ = write!(
        body,
        "</span></td><td class=\"ticks\">{}</td>",
        boxes(&GLASSES)
    );
    for test in tests {
        test_cells(body, *test, child.tests.contains(test));
    }
    end_cells(body);
}

fn blank_row(body: &mut String, tests: &[ScreeningTest]) {
    let _ = write!(
        body,
        "<tr><td class=\"small\">family name<br>given name<br>born<br>class</td>\
         <td class=\"ticks\">{}</td>",
        boxes(&GLASSES)
    );
    for test in tests {
        test_cells(body, *test, true);
    }
    end_cells(body);
}

/// Writes the list as a table to fill in: `results add` reads it back, and leaves out rows in which
/// nothing was entered.
///
/// # Errors
/// What the writer says.
pub fn write<W: Write>(
    out: W,
    form: Form,
    head: &SheetHead<'_>,
    pages: &[ClassPage],
) -> io::Result<W> {
    let mut columns = vec![
        ("child_id", Kind::Text),
        ("family_name", Kind::Text),
        ("given_name", Kind::Text),
        ("class", Kind::Text),
        ("dob", Kind::Date),
        ("grade", Kind::Code),
        ("screened_on", Kind::Date),
        ("attempt", Kind::Code),
        (Field::Status.word(), Kind::Code),
        (Field::CorrectionWorn.word(), Kind::Code),
    ];
    for test in tests_of(pages) {
        columns.extend(fields(test).iter().map(|f| (f.word(), field_kind(*f))));
    }
    columns.push((Field::Signs.word(), Kind::Code));
    let mut table = Table::new(out, form, columns)?;
    for child in pages.iter().flat_map(|page| &page.children) {
        for cell in [
            &child.child_id,
            &child.family_name,
            &child.given_name,
            &child.class,
            &child.dob.map(|d| d.to_string()).unwrap_or_default(),
            &child.grade.map(|g| g.to_string()).unwrap_or_default(),
            &head.date.to_string(),
            child.attempt.word(),
        ] {
            table.cell(cell)?;
        }
        table.end_row()?;
    }
    table.finish()
}
