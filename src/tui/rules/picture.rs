//! The pass line per age as a small picture: lines of the chart down, ages across.

use std::fmt::Write;

use crate::actions::{RuleSet, pass_line_of_set};
use crate::domain::acuity::{Line, Step};
use crate::domain::age::AgeMonths;

/// Ages in whole years that are drawn.
const YEARS: std::ops::RangeInclusive<u32> = 3..=12;

/// Draws the worst line that still passes at each age; nothing where a set has no such line or
/// goes by grade.
pub(super) fn lines(set: &RuleSet) -> Vec<String> {
    let passes: Vec<Option<Line>> = YEARS
        .map(|year| pass_line_of_set(set, Some(AgeMonths(year * 12)), None).map(|p| p.line))
        .collect();
    let known = || passes.iter().flatten();
    let (Some(best), Some(worst)) = (
        known().map(|l| l.step().0).min(),
        known().map(|l| l.step().0).max(),
    ) else {
        return Vec::new();
    };
    let notation = known()
        .next()
        .map_or(crate::domain::acuity::Notation::Feet, |l| l.notation());
    let mut out = vec!["Passes, at this line or better, by age in years:".to_owned()];
    for step in best..=worst {
        let named = known().find(|l| l.step().0 == step);
        let name = named.map_or_else(
            || Line::at(Step(step), notation).to_string(),
            Line::to_string,
        );
        let mut line = format!("{name:>7} ┤");
        for pass in &passes {
            line.push_str(match pass {
                Some(pass) if pass.step().0 == step => " ══",
                _ => "   ",
            });
        }
        out.push(line.trim_end().to_owned());
    }
    let mut ages = " ".repeat(9);
    for (year, pass) in YEARS.zip(&passes) {
        match pass {
            Some(_) => _ = write!(ages, "{year:>3}"),
            None => ages.push_str("  ·"),
        }
    }
    out.push(ages);
    out
}
