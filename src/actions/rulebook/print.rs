//! A rule set as a page that prints, and as a table for a spreadsheet.

use std::fmt::Write;

use crate::domain::text::shown;
use crate::reports::csv::{Form, Kind, Table};
use crate::rules::show::RuleSheet;
use crate::rules::{CAUTIONS, RuleSet, explain};

const STYLE: &str = "body{font:11pt/1.4 serif;max-width:60em;margin:2em auto;padding:0 1em;color:#000;background:#fff}\
h1{font-size:1.4em;margin-bottom:0}p{margin:.4em 0}\
table{border-collapse:collapse;margin:1em 0;width:100%}\
th,td{border:1px solid #666;padding:.3em .5em;text-align:left;vertical-align:top}\
thead th,tbody th{font-weight:bold}.local,.status{font-weight:bold}\
@media print{@page{margin:18mm}body{margin:0;max-width:none}thead{display:table-header-group}tr,li{break-inside:avoid}}";

/// Returns text as HTML shows it.
fn esc(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in shown(text, 10_000).chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            c => out.push(c),
        }
    }
    out
}

fn page(title: &str, body: &str) -> String {
    let mut cautions = String::new();
    for caution in CAUTIONS {
        let _ = write!(cautions, "<li>{}</li>", esc(caution));
    }
    format!(
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <title>{}</title>\n<style>{STYLE}</style>\n</head>\n<body>\n{body}\
         <h2>Cautions</h2>\n<ul>{cautions}</ul>\n</body>\n</html>\n",
        esc(title)
    )
}

/// Returns a rule sheet as a page of its own: no file beside it, no network, print rules inside.
pub(super) fn html(sheet: &RuleSheet) -> String {
    let mut body = format!(
        "<h1>{}</h1>\n<p>{} · <span class=\"status\">{}</span></p>\n",
        esc(&sheet.title),
        esc(&sheet.id),
        esc(&sheet.edition)
    );
    if !sheet.approval.is_empty() {
        let _ = writeln!(body, "<p class=\"local\">{}</p>", esc(&sheet.approval));
    }
    body.push_str("<table>\n<thead><tr><th scope=\"col\">finding</th>");
    for column in &sheet.columns {
        let _ = write!(body, "<th scope=\"col\">{}</th>", esc(column));
    }
    body.push_str("</tr></thead>\n<tbody>\n");
    for (finding, cells) in &sheet.rows {
        let _ = write!(body, "<tr><th scope=\"row\">{}</th>", esc(finding));
        for cell in cells {
            let _ = write!(body, "<td>{}</td>", esc(cell));
        }
        body.push_str("</tr>\n");
    }
    body.push_str("</tbody>\n</table>\n");
    if !sheet.line_credit.is_empty() {
        let _ = writeln!(body, "<p>Line credit: {}</p>", esc(&sheet.line_credit));
    }
    for (title, items) in [("Sources", &sheet.sources), ("Notes", &sheet.notes)] {
        if items.is_empty() {
            continue;
        }
        let _ = write!(body, "<h2>{title}</h2>\n<ul>\n");
        for item in items {
            let _ = writeln!(body, "<li>{}</li>", esc(item));
        }
        body.push_str("</ul>\n");
    }
    page(&sheet.title, &body)
}

/// Returns lines as a page of its own.
pub(super) fn lines_html(title: &str, lines: &[String]) -> String {
    let mut body = format!("<h1>{}</h1>\n", esc(title));
    for line in lines {
        let _ = writeln!(body, "<p>{}</p>", esc(line));
    }
    page(title, &body)
}

fn table(
    columns: &[(&str, Kind)],
    rows: impl Iterator<Item = Vec<String>>,
) -> std::io::Result<String> {
    let mut table = Table::new(Vec::new(), Form::SPREADSHEET, columns.iter().copied())?;
    for row in rows {
        for cell in row {
            table.cell(&cell)?;
        }
        table.end_row()?;
    }
    Ok(String::from_utf8_lossy(&table.finish()?).into_owned())
}

/// Returns a rule set as a table: one row for each threshold, with source and basis.
pub(super) fn csv(set: &RuleSet) -> String {
    const COLUMNS: [(&str, Kind); 12] = [
        ("rule_set", Kind::Code),
        ("edition", Kind::Text),
        ("criterion", Kind::Code),
        ("ages", Kind::Text),
        ("finding", Kind::Text),
        ("refer", Kind::Text),
        ("urgency", Kind::Code),
        ("act_within_days", Kind::Number),
        ("source", Kind::Text),
        ("basis", Kind::Text),
        ("note", Kind::Text),
        ("approval", Kind::Text),
    ];
    let approval = set.approval_words().unwrap_or_default();
    let rows = set.criteria.iter().map(|c| {
        vec![
            set.id.to_string(),
            set.edition.to_string(),
            c.id.to_string(),
            c.applies.to_string(),
            c.measure.title().to_owned(),
            c.threshold.to_string(),
            c.urgency.word().to_owned(),
            c.act_within_days.map_or(String::new(), |d| d.to_string()),
            c.source.citation.clone(),
            explain::basis_words(&c.source),
            c.note.to_string(),
            approval.clone(),
        ]
    });
    // Writing to memory does not fail.
    table(&COLUMNS, rows).unwrap_or_default()
}

/// Returns lines as a table of one column.
pub(super) fn lines_csv(lines: &[String]) -> String {
    let rows = lines.iter().map(|line| vec![line.clone()]);
    table(&[("line", Kind::Text)], rows).unwrap_or_default()
}
