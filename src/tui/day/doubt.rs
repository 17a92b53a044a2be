//! Values that would be rare: each is asked about once, quietly, and never changed.
//!
//! The limits are common practice (basis: practice) and decide nothing but whether a person is asked
//! to look again; no rule reads them.

use crate::actions::DayChild;
use crate::domain::field::Field;
use crate::domain::readings::{Eyes, Readings};
use crate::domain::refraction::Power;
use crate::tui::day::kind::AcuityOf;

/// More than so many lines between the eyes is asked about (practice).
pub const LINES_BETWEEN_EYES: i32 = 3;

/// Spheres of opposite sign are asked about from this size on in both eyes, in thousandths of a
/// dioptre (practice).
pub const OPPOSITE_SPHERES: i32 = 500;

/// Axes are compared from this size of both cylinders on, in thousandths of a dioptre (practice).
pub const CYLINDER_FOR_AXIS: i32 = 1_000;

/// Axes that are farther apart than this, and from mirroring each other, are asked about, in degrees
/// (practice).
pub const AXES_APART: u8 = 30;

/// Ages from and up to but not including which a birth date is not asked about, in completed months:
/// 2 to 20 years (practice).
pub const SCHOOL_AGES: (u32, u32) = (24, 252);

/// A value to look at again.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Doubt {
    /// The fields it is about; none for the birth date.
    pub fields: Vec<Field>,
    /// What is asked, short enough for one line at the smallest size.
    pub words: String,
    /// From where on it is asked, and that this is common practice.
    pub limit: String,
}

/// Returns everything that would be rare in what was entered.
pub fn doubts(readings: &Readings, child: &DayChild) -> Vec<Doubt> {
    let mut out = Vec::new();
    for (right, left) in [
        (Field::DistanceRight, Field::DistanceLeft),
        (Field::NearRight, Field::NearLeft),
    ] {
        out.extend(lines_between(readings, right, left));
    }
    out.extend(refraction(readings));
    out.extend(age(child));
    out
}

/// Returns the question about an age outside school ages.
pub fn age(child: &DayChild) -> Option<Doubt> {
    let age = child.age?;
    let (from, to) = SCHOOL_AGES;
    (!(from..to).contains(&age.0)).then(|| Doubt {
        fields: Vec::new(),
        words: format!("{age} old: is the birth date right?"),
        limit: format!(
            "asked outside {} to {} years, common practice",
            from / 12,
            to / 12 - 1
        ),
    })
}

fn lines_between(readings: &Readings, right: Field, left: Field) -> Option<Doubt> {
    let step = |field| Some(readings.acuity_of(field)?.acuity()?.line()?.step().0);
    let apart = (step(right)? - step(left)?).abs();
    (apart > LINES_BETWEEN_EYES).then(|| Doubt {
        fields: vec![right, left],
        words: format!("{apart} lines between the eyes: is that so?"),
        limit: format!("asked above {LINES_BETWEEN_EYES} lines, common practice"),
    })
}

fn refraction(readings: &Readings) -> Vec<Doubt> {
    let both = |of: fn(&crate::domain::readings::InstrumentEye) -> Option<Power>| {
        let Eyes { right, left } = &readings.instrument;
        Some((of(right)?.written().0, of(left)?.written().0))
    };
    let mut out = Vec::new();
    let mut ask = |fields: [Field; 2], words: String, limit: String| {
        out.push(Doubt {
            fields: fields.to_vec(),
            words,
            limit,
        });
    };
    if let Some((right, left)) = both(|eye| eye.sphere)
        && right.signum() * left.signum() < 0
        && right.abs().min(left.abs()) >= OPPOSITE_SPHERES
    {
        ask(
            [Field::SphereRight, Field::SphereLeft],
            "spheres of opposite sign: is that so?".to_owned(),
            format!(
                "asked from {} on, common practice",
                dioptres(OPPOSITE_SPHERES)
            ),
        );
    }
    let cylinders = both(|eye| eye.cylinder);
    if let Some((right, left)) = cylinders
        && right.signum() * left.signum() < 0
    {
        ask(
            [Field::CylinderRight, Field::CylinderLeft],
            "cylinders of opposite sign: is that so?".to_owned(),
            "one instrument writes one sign, common practice".to_owned(),
        );
    }
    let axes = readings
        .instrument
        .right
        .axis
        .zip(readings.instrument.left.axis);
    if let Some((right, left)) = axes
        && cylinders.is_some_and(|(r, l)| r.abs().min(l.abs()) >= CYLINDER_FOR_AXIS)
    {
        let (right, left) = (i32::from(right.degrees()), i32::from(left.degrees()));
        let apart = |a: i32, b: i32| {
            let d = (a - b).rem_euclid(180);
            d.min(180 - d)
        };
        if apart(right, left).min(apart(right, 180 - left)) > i32::from(AXES_APART) {
            ask(
                [Field::AxisRight, Field::AxisLeft],
                format!("axes {right}° and {left}°: is that so?"),
                format!("asked when {AXES_APART}° from alike and mirrored, common practice"),
            );
        }
    }
    out
}

fn dioptres(thousandths: i32) -> String {
    format!(
        "{} D",
        crate::domain::refraction::Diopters(thousandths).unsigned()
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::readings::ReadingContext;

    fn asked(values: &[(Field, &str)]) -> Vec<String> {
        let mut readings = Readings::default();
        for (field, text) in values {
            assert!(
                readings
                    .set(*field, text, ReadingContext::default())
                    .is_ok()
            );
        }
        let mut out: Vec<Doubt> =
            lines_between(&readings, Field::DistanceRight, Field::DistanceLeft)
                .into_iter()
                .collect();
        out.extend(refraction(&readings));
        out.into_iter().map(|d| d.words).collect()
    }

    // Basis of every limit here: practice.
    #[test]
    fn each_limit_asks_above_it_and_not_at_it() {
        use Field as F;
        let acuity = |left| asked(&[(F::DistanceRight, "20/20"), (F::DistanceLeft, left)]);
        assert!(acuity("20/40").is_empty());
        assert_eq!(acuity("20/50"), ["4 lines between the eyes: is that so?"]);
        let spheres = |right, left| asked(&[(F::SphereRight, right), (F::SphereLeft, left)]);
        assert!(spheres("+0.49", "-2.00").is_empty());
        assert_eq!(spheres("+0.50", "-2.00").len(), 1);
        assert_eq!(spheres(">7.50", "-2.00").len(), 1);
        assert!(spheres("+0.50", "+9.00").is_empty());
        let cylinder = |r, ra, l, la| {
            asked(&[
                (F::CylinderRight, r),
                (F::AxisRight, ra),
                (F::CylinderLeft, l),
                (F::AxisLeft, la),
            ])
        };
        assert_eq!(
            cylinder("-0.50", "90", "+0.50", "90"),
            ["cylinders of opposite sign: is that so?"]
        );
        assert!(
            cylinder("-1.00", "10", "-1.00", "170").is_empty(),
            "mirrored"
        );
        assert!(cylinder("-1.00", "90", "-1.00", "120").is_empty());
        assert_eq!(
            cylinder("-1.00", "90", "-1.00", "121"),
            ["axes 90° and 121°: is that so?"]
        );
        assert!(cylinder("-0.75", "90", "-1.00", "180").is_empty(), "small");
    }
}
