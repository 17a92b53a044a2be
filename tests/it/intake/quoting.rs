//! RFC 4180, section 2, against a second reading of the grammar and against the csv crate.

use proptest::prelude::*;
use twoline::intake::quoting::{Break, check};

/// The grammar of RFC 4180 (with LF also ending a row), read by characters: the rows, or nothing.
fn by_the_grammar(text: &str) -> Option<Vec<Vec<String>>> {
    let chars: Vec<char> = text.chars().collect();
    let mut rows = vec![vec![]];
    let mut i = 0;
    loop {
        let mut cell = String::new();
        if chars.get(i) == Some(&'"') {
            i += 1;
            loop {
                match (chars.get(i)?, chars.get(i + 1)) {
                    ('"', Some('"')) => {
                        cell.push('"');
                        i += 2;
                    }
                    ('"', _) => {
                        i += 1;
                        break;
                    }
                    (c, _) => {
                        cell.push(*c);
                        i += 1;
                    }
                }
            }
        } else {
            while let Some(c) = chars.get(i).filter(|c| !matches!(c, ',' | '\n' | '\r')) {
                if *c == '"' {
                    return None;
                }
                cell.push(*c);
                i += 1;
            }
        }
        rows.last_mut()?.push(cell);
        match (chars.get(i), chars.get(i + 1)) {
            (None, _) => return Some(rows),
            (Some(','), _) => i += 1,
            (Some('\n'), _) => {
                i += 1;
                rows.push(vec![]);
            }
            (Some('\r'), Some('\n')) => {
                i += 2;
                rows.push(vec![]);
            }
            _ => return None,
        }
    }
}

fn by_the_crate(text: &str) -> Vec<Vec<String>> {
    csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .from_reader(text.as_bytes())
        .records()
        .map(|r| r.expect("text").iter().map(str::to_owned).collect())
        .collect()
}

fn pieces() -> impl Strategy<Value = String> {
    let piece = prop::sample::select(vec!["a", "é", " ", ",", "\"", "\"\"", "\n", "\r\n", "\r"]);
    prop::collection::vec(piece, 0..24).prop_map(|parts| parts.concat())
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(4_000))]

    #[test]
    fn agrees_with_the_grammar_and_what_passes_is_parsed_alike(text in pieces()) {
        let grammar = by_the_grammar(&text);
        prop_assert_eq!(check(&text).is_ok(), grammar.is_some(), "{:?}", text);
        if let Some(rows) = grammar {
            // The crate skips blank lines.
            let rows: Vec<_> = rows.into_iter().filter(|r| *r != [""]).collect();
            let parsed: Vec<_> = by_the_crate(&text).into_iter().filter(|r| *r != [""]).collect();
            prop_assert_eq!(rows, parsed, "{:?}", text);
        }
    }

    #[test]
    fn takes_whatever_the_crate_writes(rows in prop::collection::vec(prop::collection::vec(any::<String>(), 1..5), 1..6)) {
        let mut writer = csv::WriterBuilder::new().flexible(true).from_writer(vec![]);
        for row in &rows {
            writer.write_record(row).expect("memory");
        }
        let text = String::from_utf8(writer.into_inner().expect("memory")).expect("text");
        prop_assert_eq!(check(&text), Ok(()), "{:?}", text);
    }

    #[test]
    fn a_quote_left_out_never_passes(cells in prop::collection::vec("[a-z,\n]{0,6}", 1..6), cut in any::<prop::sample::Index>()) {
        let quoted: Vec<String> = cells.iter().map(|c| format!("\"{c}\"")).collect();
        let text = quoted.join(",");
        let quotes: Vec<usize> = text.match_indices('"').map(|(i, _)| i).collect();
        let mut cut_text = text.clone();
        cut_text.remove(quotes[cut.index(quotes.len())]);
        prop_assert!(check(&cut_text).is_err(), "{:?}", cut_text);
    }
}

#[test]
fn the_place_is_that_of_the_fault() {
    let fault = check("a,b\r\n\"x\ny\",\"z\"q\r\n").expect_err("text after a quote");
    assert_eq!(fault.kind, Break::AfterQuote);
    assert_eq!((fault.row, fault.line, fault.field), (2, 3, 2));
    let fault = check("a\nb,\"c\nd").expect_err("never closed");
    assert_eq!(fault.kind, Break::NeverClosed);
    assert_eq!((fault.row, fault.line, fault.field), (2, 2, 2));
}
