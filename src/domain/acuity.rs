//! Acuity as an interval on the chart.
//!
//! A screener never measures a point. `20/40` says which line was read, `>=20/32` that this line
//! was passed and nothing smaller was shown, `<20/50` that this line was not read. Rules therefore
//! ask an interval, and may get "unknown" for an answer.
//!
//! Line table and rounding: ICO Visual Acuity Measurement Standard 1984; Holladay, J Cataract
//! Refract Surg 2004;30:287–290 (basis: primary). One line is 0.1 logMAR.

mod parse;

use std::fmt;

pub use parse::{AcuityContext, ChartLetters, Understood, parse_acuity};

/// The logarithm of the minimum angle of resolution, in thousandths (20/40 is 300).
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct LogMar(pub i32);

impl LogMar {
    /// Returns the nearest chart step of 0.1 logMAR; a tie goes to the worse line.
    pub fn nearest_step(self) -> Step {
        Step((self.0 + 50).div_euclid(100))
    }
}

impl fmt::Display for LogMar {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let sign = if self.0 < 0 { "-" } else { "" };
        let t = self.0.abs();
        if t % 10 == 0 {
            write!(f, "{sign}{}.{:02}", t / 1000, t % 1000 / 10)
        } else {
            write!(f, "{sign}{}.{:03}", t / 1000, t % 1000)
        }
    }
}

/// A line of the chart, counted in steps of 0.1 logMAR from 20/20 (larger is worse).
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Step(pub i32);

impl Step {
    /// The finest line a reading may name: 20/10.
    pub const FINEST: Step = Step(-3);
    /// The coarsest line a reading may name: 20/2000. Beyond it vision is described in words.
    pub const COARSEST: Step = Step(20);

    /// Returns the nominal value of the step.
    pub fn logmar(self) -> LogMar {
        LogMar(self.0 * 100)
    }
}

/// How a line is written: which numerator or scale.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Notation {
    /// `20/40`
    Feet,
    /// `6/12`
    Metres,
    /// `0.5d`
    Decimal,
    /// `0.30l`
    LogMar,
}

/// Denominators of the standard chart in thousandths, with the step each stands for. Below 20/200
/// the series of the chart repeats at ten times the size (1.1 to 1.5 so printed in DICOM PS3.17,
/// table RR-1; basis: secondary).
const CHART: [(i32, i32, i32, i32); 24] = [
    // step, 20/x, 6/x, decimal
    (-3, 10_000, 3_000, 2_000),
    (-2, 12_500, 3_800, 1_600),
    (-1, 16_000, 4_800, 1_250),
    (0, 20_000, 6_000, 1_000),
    (1, 25_000, 7_500, 800),
    (2, 32_000, 9_500, 630),
    (3, 40_000, 12_000, 500),
    (4, 50_000, 15_000, 400),
    (5, 63_000, 19_000, 320),
    (6, 80_000, 24_000, 250),
    (7, 100_000, 30_000, 200),
    (8, 125_000, 38_000, 160),
    (9, 160_000, 48_000, 125),
    (10, 200_000, 60_000, 100),
    (11, 250_000, 75_000, 80),
    (12, 320_000, 95_000, 63),
    (13, 400_000, 120_000, 50),
    (14, 500_000, 150_000, 40),
    (15, 630_000, 190_000, 32),
    (16, 800_000, 240_000, 25),
    (17, 1_000_000, 300_000, 20),
    (18, 1_250_000, 380_000, 16),
    (19, 1_600_000, 480_000, 13),
    (20, 2_000_000, 600_000, 10),
];

/// Lines of older charts that lie between two steps: they keep their name, are compared by line at
/// the nearest step, and by letter at log10 of their ratio.
const TRADITIONAL: [(Notation, i32); 6] = [
    (Notation::Feet, 30_000),
    (Notation::Feet, 60_000),
    (Notation::Feet, 70_000),
    (Notation::Metres, 9_000),
    (Notation::Metres, 18_000),
    (Notation::Metres, 36_000),
];

/// One line of a chart as it was written down.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Line {
    notation: Notation,
    thousandths: i32,
    step: Step,
    logmar: LogMar,
}

impl Line {
    /// Returns the line for a written value in thousandths (`20/40` is `Feet, 40_000`), or nothing
    /// when it lies outside 20/10 to 20/2000.
    pub fn new(notation: Notation, thousandths: i32) -> Option<Line> {
        let (step, logmar) = match notation {
            Notation::LogMar => {
                let exact = LogMar(thousandths);
                (exact.nearest_step(), exact)
            }
            _ if thousandths <= 0 => return None,
            _ => {
                let nominal = CHART.iter().find(|row| {
                    thousandths
                        == match notation {
                            Notation::Feet => row.1,
                            Notation::Metres => row.2,
                            Notation::Decimal | Notation::LogMar => row.3,
                        }
                });
                if let Some(row) = nominal {
                    (Step(row.0), Step(row.0).logmar())
                } else {
                    let value = f64::from(thousandths);
                    let log = match notation {
                        Notation::Feet => (value / 20_000.0).log10(),
                        Notation::Metres => (value / 6_000.0).log10(),
                        Notation::Decimal | Notation::LogMar => -(value / 1_000.0).log10(),
                    };
                    let step = Step((log * 10.0 + 0.5).floor() as i32);
                    if TRADITIONAL.contains(&(notation, thousandths)) {
                        (step, LogMar((log * 1000.0).round() as i32))
                    } else {
                        (step, step.logmar())
                    }
                }
            }
        };
        (Step::FINEST..=Step::COARSEST)
            .contains(&step)
            .then_some(Line {
                notation,
                thousandths,
                step,
                logmar,
            })
    }

    /// Returns the standard line of a step, written in the given notation.
    pub fn at(step: Step, notation: Notation) -> Line {
        let row = CHART.iter().find(|row| row.0 == step.0);
        let thousandths = match (notation, row) {
            (Notation::LogMar, _) => step.0 * 100,
            (Notation::Feet, Some(row)) => row.1,
            (Notation::Metres, Some(row)) => row.2,
            (Notation::Decimal, Some(row)) => row.3,
            // Steps beyond the table, reached by a shorter distance, are named by their ratio.
            (_, None) => {
                let ratio = 10f64.powf(f64::from(step.0) / 10.0);
                let exact = match notation {
                    Notation::Feet => 20_000.0 * ratio,
                    Notation::Metres => 6_000.0 * ratio,
                    _ => 1_000.0 / ratio,
                };
                if notation == Notation::Decimal {
                    exact.round() as i32
                } else {
                    ((exact / 1_000.0).round() * 1_000.0) as i32
                }
            }
        };
        Line {
            notation,
            thousandths,
            step,
            logmar: step.logmar(),
        }
    }

    /// Returns the step by which lines are compared.
    pub fn step(self) -> Step {
        self.step
    }

    /// Returns the value by which letter scores are compared.
    pub fn logmar(self) -> LogMar {
        self.logmar
    }

    /// Returns how the line was written.
    pub fn notation(self) -> Notation {
        self.notation
    }

    /// Says whether a chart prints this line; other denominators were taken at their nearest step.
    pub fn is_on_a_chart(self) -> bool {
        // Charts in metres print the exact twin of a 20 ft line (6/9.6) or its rounded name (6/9.5).
        let twin = || {
            self.notation == Notation::Metres
                && self.thousandths * 10 == Line::at(self.step, Notation::Feet).thousandths * 3
        };
        self.notation == Notation::LogMar
            || Line::at(self.step, self.notation).thousandths == self.thousandths
            || TRADITIONAL.contains(&(self.notation, self.thousandths))
            || twin()
    }
}

impl fmt::Display for Line {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.notation {
            Notation::Feet => write!(f, "20/{}", Plain(self.thousandths)),
            Notation::Metres => write!(f, "6/{}", Plain(self.thousandths)),
            Notation::Decimal => write!(f, "{}d", Plain(self.thousandths)),
            Notation::LogMar => write!(f, "{}l", LogMar(self.thousandths)),
        }
    }
}

/// Thousandths without needless zeros: 9500 is `9.5`, 40000 is `40`.
struct Plain(i32);

impl fmt::Display for Plain {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (whole, part) = (self.0 / 1000, self.0 % 1000);
        if part == 0 {
            return write!(f, "{whole}");
        }
        let digits = format!("{part:03}");
        write!(f, "{whole}.{}", digits.trim_end_matches('0'))
    }
}

/// What one eye could read.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Acuity {
    /// The smallest line read, with letters missed on it (negative) or read beyond it (positive).
    Read {
        /// The line.
        line: Line,
        /// Letters missed (`-2`) or read on the next line (`+2`).
        letters: i8,
    },
    /// This line or better: it was passed and nothing smaller was shown.
    AtLeast(Line),
    /// Worse than this line: it was shown and not passed.
    WorseThan(Line),
    /// Counts fingers only.
    CountsFingers,
    /// Sees a moving hand only.
    HandMovement,
    /// Perceives light only.
    LightPerception,
    /// Perceives no light.
    NoLightPerception,
    /// A near value in a notation without an agreed equivalent, kept as written.
    AsWritten(NearText),
}

/// A Jaeger, N or M value, kept as it was written (`J3`, `N8`, `M1.25`).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct NearText {
    /// `J`, `N` or `M`.
    pub scale: char,
    /// The value in hundredths.
    pub hundredths: u32,
}

impl fmt::Display for NearText {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.scale, Plain(self.hundredths as i32 * 10))
    }
}

impl Acuity {
    /// Says whether the eye saw no line of any chart.
    pub fn is_off_the_chart(self) -> bool {
        matches!(
            self,
            Acuity::CountsFingers
                | Acuity::HandMovement
                | Acuity::LightPerception
                | Acuity::NoLightPerception
        )
    }

    /// Returns the line that was written, if a line was.
    pub fn line(self) -> Option<Line> {
        match self {
            Acuity::Read { line, .. } | Acuity::AtLeast(line) | Acuity::WorseThan(line) => {
                Some(line)
            }
            _ => None,
        }
    }

    /// Returns the value in words ("20/32 or better").
    pub fn in_words(self) -> String {
        match self {
            Acuity::Read { line, letters: 0 } => line.to_string(),
            Acuity::Read { line, letters } if letters < 0 => {
                format!("{line}, {} missed", -i32::from(letters))
            }
            Acuity::Read { line, letters } => format!("{line}, {letters} of the next line"),
            Acuity::AtLeast(line) => format!("{line} or better"),
            Acuity::WorseThan(line) => format!("worse than {line}"),
            Acuity::CountsFingers => "counts fingers".into(),
            Acuity::HandMovement => "hand movement".into(),
            Acuity::LightPerception => "light perception".into(),
            Acuity::NoLightPerception => "no light perception".into(),
            Acuity::AsWritten(text) => format!("{text}, as written"),
        }
    }
}

impl fmt::Display for Acuity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Acuity::Read { line, letters: 0 } => write!(f, "{line}"),
            Acuity::Read { line, letters } => write!(f, "{line}{letters:+}"),
            Acuity::AtLeast(line) => write!(f, ">={line}"),
            Acuity::WorseThan(line) => write!(f, "<{line}"),
            Acuity::CountsFingers => f.write_str("CF"),
            Acuity::HandMovement => f.write_str("HM"),
            Acuity::LightPerception => f.write_str("LP"),
            Acuity::NoLightPerception => f.write_str("NLP"),
            Acuity::AsWritten(text) => write!(f, "{text}"),
        }
    }
}

/// A chart used at another distance than its own, both in millimetres.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Distances {
    /// The distance the chart is made for.
    pub chart_mm: u32,
    /// The distance it was used at.
    pub used_mm: u32,
}

impl Distances {
    /// Returns the shift in thousandths of logMAR: log10(chart ÷ used), more is worse.
    pub fn shift(self) -> i32 {
        if self.chart_mm == self.used_mm || self.used_mm == 0 || self.chart_mm == 0 {
            return 0;
        }
        ((f64::from(self.chart_mm) / f64::from(self.used_mm)).log10() * 1000.0).round() as i32
    }
}

/// The steps a reading may lie at: none means unbounded on that side.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct StepRange {
    /// The best possible step.
    pub best: Option<i32>,
    /// The worst possible step.
    pub worst: Option<i32>,
}

/// A step that lies beyond every line of every chart (counts fingers and less).
const BEYOND_EVERY_LINE: i32 = 1_000;

impl StepRange {
    /// Returns the smallest and the largest possible difference to another range, in steps.
    pub fn difference(self, other: StepRange) -> (i32, Option<i32>) {
        let above = |a: StepRange, b: StepRange| match (a.best, b.worst) {
            (Some(best), Some(worst)) => (best - worst).max(0),
            _ => 0,
        };
        let reach = |a: StepRange, b: StepRange| match (a.worst, b.best) {
            (Some(worst), Some(best)) => Some(worst - best),
            _ => None,
        };
        let least = above(self, other).max(above(other, self));
        let most = match (reach(self, other), reach(other, self)) {
            (Some(a), Some(b)) => Some(a.max(b)),
            _ => None,
        };
        (least, most)
    }

    /// Says whether every step in the range is a line of some chart.
    pub fn is_on_the_chart(self) -> bool {
        self.best.is_none_or(|best| best < BEYOND_EVERY_LINE)
    }
}

/// The share of a line's letters that must be read for the line to count.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LineCredit {
    /// More than half of the letters.
    Majority,
    /// This many of so many, as a ratio that any line length must meet.
    Ratio {
        /// Letters read.
        correct: u32,
        /// Letters on the line that the guidance speaks of.
        of: u32,
    },
}

impl LineCredit {
    /// Says whether a line with `missed` of `letters` missed still counts as read.
    pub fn grants(self, missed: u32, letters: u32) -> bool {
        let correct = letters.saturating_sub(missed);
        match self {
            LineCredit::Majority => correct * 2 > letters,
            LineCredit::Ratio { correct: need, of } => correct * of >= need * letters,
        }
    }
}

impl Acuity {
    /// Returns the steps this reading may lie at, by line, after line credit and distance.
    ///
    /// Nothing is returned for a value without an agreed equivalent.
    pub fn steps(self, credit: LineCredit, letters_per_line: u8, shift: i32) -> Option<StepRange> {
        let moved = |line: Line| {
            if shift == 0 {
                line.step().0
            } else {
                LogMar(line.logmar().0 + shift).nearest_step().0
            }
        };
        Some(match self {
            Acuity::Read { line, letters } => {
                let missed = u32::from(letters.min(0).unsigned_abs());
                let kept = credit.grants(missed, u32::from(letters_per_line));
                let step = moved(line) + i32::from(!kept);
                StepRange {
                    best: Some(step),
                    worst: Some(step),
                }
            }
            Acuity::AtLeast(line) => StepRange {
                best: None,
                worst: Some(moved(line)),
            },
            Acuity::WorseThan(line) => StepRange {
                best: Some(moved(line) + 1),
                worst: None,
            },
            Acuity::AsWritten(_) => return None,
            _ => StepRange {
                best: Some(BEYOND_EVERY_LINE),
                worst: None,
            },
        })
    }

    /// Returns the range by letter score, in thousandths of logMAR times `letters_per_line` so
    /// that a letter of any line length stays exact: the best and the worst possible value.
    ///
    /// A bound that is open (`<20/32` is above its line, not at it) is moved by one unit.
    pub fn letter_score(self, letters_per_line: u8, shift: i32) -> Option<StepRange> {
        let per_line = i32::from(letters_per_line.max(1));
        let scaled = |line: Line| (line.logmar().0 + shift) * per_line;
        Some(match self {
            Acuity::Read { line, letters } => {
                let score = scaled(line) - i32::from(letters) * 100;
                StepRange {
                    best: Some(score),
                    worst: Some(score),
                }
            }
            Acuity::AtLeast(line) => StepRange {
                best: None,
                worst: Some(scaled(line)),
            },
            Acuity::WorseThan(line) => StepRange {
                best: Some(scaled(line) + 1),
                worst: None,
            },
            Acuity::AsWritten(_) => return None,
            _ => StepRange {
                best: Some(BEYOND_EVERY_LINE * 100 * per_line),
                worst: None,
            },
        })
    }
}
