//! The quick card: one page beside the laptop, made from the key declaration.

use std::fmt::Write as _;

use crate::actions::CAUTIONS;
use crate::domain::codes::{Correction, Status};
use crate::domain::outcome::OutcomeKind;
use crate::keys::{Context, TABLE, keys_text};

/// What an acuity field takes: what is typed, and what it means.
const ACUITY: &[(&str, &str)] = &[
    (
        "20/40 or 6/12",
        "this line; 40 or 12 alone where the store says so",
    ),
    ("20/40-2", "this line, two letters missed"),
    (
        "\u{2191} \u{2193}",
        "the ladder, from the pass line; Enter takes it",
    ),
    ("+", "critical line passed: this line or better"),
    (">=20/32", "this line or better, nothing smaller was shown"),
    ("<20/50", "worse than this line"),
    ("0.5d, 0.30l", "decimal, logMAR"),
    (
        "CF HM LP NLP",
        "counts fingers, hand movement, light, no light",
    ),
    ("NT or F2", "not testable, with the reason"),
];

/// Which parts of the table stand on the card.
const PARTS: &[Context] = &[Context::Bench, Context::List, Context::Day, Context::Places];

/// Returns the card as one HTML page.
pub(super) fn html() -> String {
    let mut out = String::from(HEAD);
    for context in PARTS {
        let _ = write!(out, "<section><h2>{}</h2><table>", escaped(context.title()));
        for binding in TABLE.iter().filter(|b| b.context == *context) {
            let _ = write!(
                out,
                "<tr><th>{}</th><td>{}</td></tr>",
                escaped(&keys_text(binding)),
                escaped(binding.help)
            );
        }
        out.push_str("</table></section>\n");
    }
    out.push_str("<section><h2>What to type for an acuity</h2><table>");
    for (typed, means) in ACUITY {
        let _ = write!(
            out,
            "<tr><th>{}</th><td>{}</td></tr>",
            escaped(typed),
            escaped(means)
        );
    }
    out.push_str("</table></section>\n<section><h2>The words of the states</h2><p>");
    let outcomes = [
        OutcomeKind::Pass,
        OutcomeKind::Rescreen,
        OutcomeKind::Refer,
        OutcomeKind::Incomplete,
        OutcomeKind::Exempt,
    ];
    let words = outcomes
        .iter()
        .map(|k| k.title())
        .chain(
            Status::ALL
                .iter()
                .filter(|s| **s != Status::Present)
                .map(|s| s.title()),
        )
        .chain([
            Correction::LeftAtHome.title(),
            Correction::BrokenOrLost.title(),
        ])
        .collect::<Vec<_>>()
        .join(" \u{b7} ");
    let _ = write!(
        out,
        "{}</p><p>Unknown is never a pass.</p></section>\n<section><h2>Cautions</h2><ul>",
        escaped(&words)
    );
    for caution in CAUTIONS {
        let _ = write!(out, "<li>{}</li>", escaped(caution));
    }
    out.push_str("</ul></section>\n</main></body></html>\n");
    out
}

const HEAD: &str = "<!DOCTYPE html>
<html lang=\"en\"><head><meta charset=\"utf-8\"><title>Twoline quick card</title>
<style>
@page { margin: 10mm; }
body { font: 7.6pt/1.25 sans-serif; margin: 0; color: #000; background: #fff; }
h1 { font-size: 13pt; margin: 0 0 2mm; }
h2 { font-size: 8.6pt; margin: 0 0 .6mm; border-bottom: .3mm solid #000; }
main { columns: 2; column-gap: 6mm; }
section { margin: 0 0 2.4mm; }
h2 { break-after: avoid; }
tr { break-inside: avoid; }
table { border-collapse: collapse; width: 100%; }
th { text-align: left; vertical-align: top; width: 24mm; padding: 0 2mm 0 0; }
td { vertical-align: top; padding: 0; }
p, ul { margin: .6mm 0; }
ul { padding-left: 4mm; }
</style></head>
<body><h1>Twoline quick card</h1><main>
";

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
        .replace('"', "&quot;")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::acuity::{AcuityContext, parse_acuity};

    #[test]
    fn the_card_has_every_key_of_its_parts_and_the_cautions() {
        let page = html();
        for binding in TABLE.iter().filter(|b| PARTS.contains(&b.context)) {
            assert!(page.contains(&escaped(binding.help)), "{}", binding.help);
        }
        for caution in CAUTIONS {
            assert!(page.contains(&escaped(caution)));
        }
        assert!(!page.contains("<script") && !page.contains("http"));
    }

    #[test]
    fn what_the_card_says_of_an_acuity_is_taken_by_the_field() {
        for typed in [
            "20/40", "6/12", "20/40-2", ">=20/32", "<20/50", "0.5d", "0.30l",
        ] {
            assert!(ACUITY.iter().any(|(t, _)| t.contains(typed)), "{typed}");
            let read = parse_acuity(typed, &AcuityContext::default());
            assert!(read.is_ok(), "{typed}");
        }
        for typed in ["CF", "HM", "LP", "NLP"] {
            assert!(parse_acuity(typed, &AcuityContext::default()).is_ok());
        }
    }
}
