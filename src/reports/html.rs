//! Pages that print: one file, nothing beside it, no network.

use std::fmt::Write;

use crate::domain::text::shown;

const STYLE: &str = "body{font:10.5pt/1.35 sans-serif;margin:1.5em;color:#000;background:#fff}\
h1{font-size:1.3em;margin:0 0 .2em}h2{font-size:1.05em;margin:1em 0 .2em}p{margin:.2em 0}\
table{border-collapse:collapse;margin:.3em 0;width:100%}\
th,td{border:1px solid #555;padding:.2em .35em;text-align:left;vertical-align:top}\
th{font-weight:bold;background:#eee}ul{margin:.3em 0;padding-left:1.2em}\
.cautions{font-size:.85em}\
@media print{@page{margin:12mm}body{margin:0}thead{display:table-header-group}tr,li{break-inside:avoid}}";

/// Returns text as HTML shows it, with what must not reach a page made visible.
pub fn esc(text: &str) -> String {
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

/// Returns `Family, Given`, each in the direction of its own script, so that a name written from the
/// right does not pull its neighbours with it.
pub fn named(family: &str, given: &str) -> String {
    format!("<bdi>{}</bdi>, <bdi>{}</bdi>", esc(family), esc(given))
}

/// Returns a whole page with the cautions at its end; `style` comes after the common one.
pub fn page(title: &str, style: &str, body: &str, cautions: &[&str]) -> String {
    let mut list = String::new();
    for caution in cautions {
        let _ = write!(list, "<li>{}</li>", esc(caution));
    }
    format!(
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <title>{}</title>\n<style>{STYLE}{style}</style>\n</head>\n<body>\n{body}\
         <ul class=\"cautions\">{list}</ul>\n</body>\n</html>\n",
        esc(title)
    )
}
