//! Reads what a screener typed as an acuity.

use super::{Acuity, Line, LineCredit, LogMar, NearText, Notation};
use crate::domain::readings::{AcuityResult, NotTestable};

/// How many letters the line has, for checking `-2` and `+2`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ChartLetters(pub u8);

impl Default for ChartLetters {
    fn default() -> Self {
        ChartLetters(5)
    }
}

/// What surrounds an acuity field: it decides what a bare number means.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct AcuityContext {
    /// What a bare `40` or `12` is the denominator of; without it a bare number is refused.
    pub bare: Option<Notation>,
    /// Near fields also take Jaeger, N and M values.
    pub near: bool,
    /// Letters on a line.
    pub letters: ChartLetters,
    /// On a critical-line day: the pass line for this child. A bare pass line is stored as "this
    /// line or better" and anything worse as "worse than the pass line".
    pub critical_line: Option<Line>,
}

/// What an acuity text was taken for, and what to say about it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Understood {
    /// The value.
    pub value: AcuityResult,
    /// Something the screener should see: a denominator that no chart has, a value between lines.
    pub echo: Option<String>,
}

/// Reads an acuity; spaces, case and the typographic minus do not matter.
///
/// # Errors
/// What was expected, naming the nearest things the text could mean.
pub fn parse_acuity(text: &str, context: &AcuityContext) -> Result<Understood, String> {
    let clean = tidy(text);
    match clean.as_str() {
        "" => return Err("an acuity, such as 20/40, 6/12, >=20/32 or NT".into()),
        "CF" => return Ok(plain(Acuity::CountsFingers)),
        "HM" => return Ok(plain(Acuity::HandMovement)),
        "LP" => return Ok(plain(Acuity::LightPerception)),
        "NLP" => return Ok(plain(Acuity::NoLightPerception)),
        "NT" => {
            return Ok(Understood {
                value: AcuityResult::NotTestable(NotTestable::Other),
                echo: None,
            });
        }
        _ => {}
    }
    if let Some(reason) = clean.strip_prefix("NT:") {
        return NotTestable::from_word(&reason.to_lowercase())
            .map(|why| Understood {
                value: AcuityResult::NotTestable(why),
                echo: None,
            })
            .ok_or_else(|| format!("NT: and one of {}", NotTestable::words()));
    }
    if context.near
        && let Some(value) = near_text(&clean)
    {
        return Ok(plain(Acuity::AsWritten(value)));
    }
    if !context.near && near_text(&clean).is_some() {
        return Err("a distance acuity; J, N and M values belong to near acuity".into());
    }
    if let Some(rest) = clean.strip_prefix(">=") {
        let line = bound(rest, context)?;
        return Ok(Understood {
            echo: echo(line),
            value: Acuity::AtLeast(line).into(),
        });
    }
    if let Some(rest) = clean.strip_prefix("<=").or_else(|| clean.strip_prefix('>')) {
        return Err(match read_line(rest, context) {
            Ok((line, 0)) => format!(
                "one of two readings: >={line} ({line} or better) or <{line} (worse than {line})"
            ),
            _ => "an acuity such as >=20/32 (this line or better) or <20/50 (worse than it)".into(),
        });
    }
    if let Some(rest) = clean.strip_prefix('<') {
        let line = bound(rest, context)?;
        return Ok(Understood {
            echo: echo(line),
            value: Acuity::WorseThan(line).into(),
        });
    }
    let (line, letters) = read_line(&clean, context)?;
    if let Some(pass) = context.critical_line {
        return Ok(on_critical_line(line, letters, pass, context.letters));
    }
    Ok(Understood {
        echo: echo(line),
        value: Acuity::Read { line, letters }.into(),
    })
}

fn plain(value: Acuity) -> Understood {
    Understood {
        value: value.into(),
        echo: None,
    }
}

/// Bare values on a critical-line day: at the pass line or better is "or better", else "worse".
fn on_critical_line(line: Line, letters: i8, pass: Line, per_line: ChartLetters) -> Understood {
    let missed = u32::from(letters.min(0).unsigned_abs());
    let read = LineCredit::Majority.grants(missed, u32::from(per_line.0));
    let step = line.step().0 + i32::from(!read);
    if letters == 0 && step == pass.step().0 {
        Understood {
            value: Acuity::AtLeast(line).into(),
            echo: Some(format!("critical line passed: {line} or better")),
        }
    } else if letters == 0 && step > pass.step().0 {
        Understood {
            value: Acuity::WorseThan(pass).into(),
            echo: Some(format!("critical line not passed: worse than {pass}")),
        }
    } else {
        Understood {
            echo: echo(line),
            value: Acuity::Read { line, letters }.into(),
        }
    }
}

/// Removes spaces, unifies signs and letters.
fn tidy(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars().filter(|c| !c.is_whitespace()).take(64) {
        match c {
            '\u{2212}' | '\u{2013}' | '\u{2010}' | '\u{2011}' => out.push('-'),
            '≥' => out.push_str(">="),
            '≤' => out.push_str("<="),
            '\u{2044}' | '\u{2215}' => out.push('/'),
            other => out.extend(other.to_uppercase()),
        }
    }
    out
}

fn near_text(clean: &str) -> Option<NearText> {
    let scale = clean
        .chars()
        .next()
        .filter(|c| matches!(c, 'J' | 'N' | 'M'))?;
    let value = decimal(&clean[1..], 2)?;
    (1..=10_000).contains(&value).then_some(NearText {
        scale,
        hundredths: value as u32,
    })
}

fn echo(line: Line) -> Option<String> {
    if line.notation() == Notation::LogMar {
        let exact = line.logmar();
        return (exact != line.step().logmar()).then(|| {
            format!(
                "{line} lies between lines: compared as {}",
                Line::at(line.step(), Notation::Feet)
            )
        });
    }
    (!line.is_on_a_chart()).then(|| {
        format!(
            "no chart has {line}: taken as {}",
            Line::at(line.step(), line.notation())
        )
    })
}

fn bound(text: &str, context: &AcuityContext) -> Result<Line, String> {
    match read_line(text, context)? {
        (line, 0) => Ok(line),
        (line, _) => Err(format!(
            "a whole line after >= or <, such as >={line}, without letters"
        )),
    }
}

/// Reads a line and its letters: `20/40-2`.
fn read_line(clean: &str, context: &AcuityContext) -> Result<(Line, i8), String> {
    let (body, letters) = split_letters(clean, context.letters)?;
    let line = line_value(body, context.bare)?;
    Ok((line, letters))
}

fn split_letters(clean: &str, per_line: ChartLetters) -> Result<(&str, i8), String> {
    // A sign at the start belongs to a logMAR value; one after the first character is a suffix.
    let Some(at) = clean
        .char_indices()
        .skip(1)
        .find(|(_, c)| matches!(c, '+' | '-'))
        .map(|(i, _)| i)
    else {
        return Ok((clean, 0));
    };
    let (body, suffix) = clean.split_at(at);
    let wrong = || {
        format!(
            "letters after the line as -1 to -{0} or +1 to +{0}",
            per_line.0
        )
    };
    let count: i8 = suffix[1..].parse().map_err(|_| wrong())?;
    if !suffix[1..].chars().all(|c| c.is_ascii_digit()) || count < 1 || count as u8 > per_line.0 {
        return Err(wrong());
    }
    Ok((
        body,
        if suffix.starts_with('-') {
            -count
        } else {
            count
        },
    ))
}

fn line_value(body: &str, bare: Option<Notation>) -> Result<Line, String> {
    if let Some((top, bottom)) = body.split_once('/') {
        let notation = match top {
            "20" => Notation::Feet,
            "6" => Notation::Metres,
            "40" if bottom == "20" => return Err("20/40 (the 20 comes first)".into()),
            _ => return Err("a line written over 20 or over 6, such as 20/40 or 6/12".into()),
        };
        let value = decimal(bottom, 3)
            .ok_or_else(|| "a number under the line, such as 20/40 or 6/9.5".to_owned())?;
        return ranged(notation, value);
    }
    if let Some(value) = body.strip_suffix('D') {
        let value = decimal(value, 3).ok_or("a decimal acuity such as 0.5d")?;
        return ranged(Notation::Decimal, value);
    }
    if let Some(value) = body.strip_suffix('L') {
        let value = signed_decimal(value).ok_or("a logMAR value such as 0.30l")?;
        return ranged(Notation::LogMar, value);
    }
    let Some(value) = signed_decimal(body) else {
        return Err(match body.chars().next() {
            Some('C') => "CF (counts fingers) or an acuity such as 20/40".into(),
            Some('H') => "HM (hand movement) or an acuity such as 20/40".into(),
            Some('L') => "LP (light perception) or an acuity such as 20/40".into(),
            Some('N') => "NT (not testable), NLP (no light perception) or an acuity such as 20/40".into(),
            _ => "an acuity, such as 20/40, 6/12, 0.5d, 0.30l, >=20/32, <20/50, CF, HM, LP, NLP or NT".into(),
        });
    };
    if value <= 2_000 {
        let shown = LogMar(value);
        let decimal = Line::new(Notation::Decimal, value);
        let logmar = Line::new(Notation::LogMar, value);
        return Err(match (decimal, logmar) {
            (Some(d), Some(l)) => format!(
                "one of two readings: {d} (decimal, {}) or {l} (logMAR, {})",
                Line::at(d.step(), Notation::Feet),
                Line::at(l.step(), Notation::Feet)
            ),
            (None, Some(l)) => {
                format!(
                    "{l} if this is logMAR ({})",
                    Line::at(l.step(), Notation::Feet)
                )
            }
            _ => format!("a suffix: {shown}d (decimal) or {shown}l (logMAR)"),
        });
    }
    match bare {
        Some(notation) => ranged(notation, value),
        None => Err(format!("a whole line: 20/{body} or 6/{body}")),
    }
}

fn ranged(notation: Notation, thousandths: i32) -> Result<Line, String> {
    Line::new(notation, thousandths).ok_or_else(|| {
        let end = |step| Line::at(step, notation);
        format!(
            "a line between {} and {}; beyond it CF, HM, LP or NLP",
            end(super::Step::FINEST),
            end(super::Step::COARSEST)
        )
    })
}

fn signed_decimal(text: &str) -> Option<i32> {
    match text.strip_prefix('-') {
        Some(rest) => decimal(rest, 3).map(|v| -v),
        None => decimal(text.strip_prefix('+').unwrap_or(text), 3),
    }
}

/// Reads digits with at most `places` after the point, as an integer of that many places.
fn decimal(text: &str, places: u32) -> Option<i32> {
    crate::domain::number::fixed(text, places).and_then(|v| i32::try_from(v).ok())
}
