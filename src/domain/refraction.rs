//! Refraction in thousandths of a dioptre.
//!
//! Sphere S, cylinder C, axis A (1–180). Spherical equivalent M = S + C/2, J0 = −(C/2) cos 2A,
//! J45 = −(C/2) sin 2A (Thibos, Wheeler, Horner. Optom Vis Sci 1997;74:367–375; basis: primary).
//! Powers are integers, so that −0.25/2 is exact and no threshold is compared as a float.

use std::fmt;

/// A power in thousandths of a dioptre.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Diopters(pub i32);

impl Diopters {
    /// Reads a power such as `-2.50`, `+1.25`, `0` or `DS` (no cylinder), with up to three decimals.
    pub fn parse(text: &str) -> Option<Diopters> {
        let text = text.trim();
        if text.eq_ignore_ascii_case("ds") || text.eq_ignore_ascii_case("plano") {
            return Some(Diopters(0));
        }
        super::number::signed(text, 3)
            .and_then(|v| i32::try_from(v).ok())
            .map(Diopters)
    }

    /// Returns the size without its sign.
    #[must_use]
    pub fn magnitude(self) -> Diopters {
        Diopters(self.0.abs())
    }

    /// Writes the power without a plus sign, as thresholds are printed: `4.00`.
    pub fn unsigned(self) -> String {
        let text = self.to_string();
        text.strip_prefix('+').map_or(text.clone(), str::to_owned)
    }
}

impl fmt::Display for Diopters {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let v = self.0.unsigned_abs();
        f.write_str(match self.0.signum() {
            -1 => "-",
            1 => "+",
            _ => "",
        })?;
        if v.is_multiple_of(10) {
            write!(f, "{}.{:02}", v / 1000, v % 1000 / 10)
        } else {
            write!(f, "{}.{:03}", v / 1000, v % 1000)
        }
    }
}

/// An axis in whole degrees, 1 to 180.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Axis(u8);

impl Axis {
    /// Returns the axis, or nothing outside 1 to 180.
    pub fn new(degrees: i64) -> Option<Axis> {
        u8::try_from(degrees)
            .ok()
            .filter(|d| (1..=180).contains(d))
            .map(Axis)
    }

    /// Returns the axis in degrees.
    pub fn degrees(self) -> u8 {
        self.0
    }

    /// Returns the axis at right angles.
    #[must_use]
    pub fn perpendicular(self) -> Axis {
        Axis(if self.0 > 90 {
            self.0 - 90
        } else {
            self.0 + 90
        })
    }

    /// Returns the distance in degrees to the nearer of 90 and 180.
    pub fn from_the_main_meridians(self) -> u8 {
        let a = self.0 % 90;
        a.min(90 - a)
    }
}

impl fmt::Display for Axis {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.0)
    }
}

/// A refraction with all three values known. The axis of a zero cylinder is 180.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Refraction {
    /// Sphere.
    pub sphere: Diopters,
    /// Cylinder, of either sign.
    pub cylinder: Diopters,
    /// Axis.
    pub axis: Axis,
}

impl Refraction {
    /// Returns twice the spherical equivalent in thousandths, which is always whole.
    pub fn twice_equivalent(self) -> i32 {
        2 * self.sphere.0 + self.cylinder.0
    }

    /// Returns J0 in dioptres.
    pub fn j0(self) -> f64 {
        -(f64::from(self.cylinder.0) / 2000.0) * (2.0 * f64::from(self.axis.0)).to_radians().cos()
    }

    /// Returns J45 in dioptres.
    pub fn j45(self) -> f64 {
        -(f64::from(self.cylinder.0) / 2000.0) * (2.0 * f64::from(self.axis.0)).to_radians().sin()
    }

    /// Returns the power along a meridian in dioptres: S + C sin²(θ − A).
    pub fn along(self, meridian_degrees: f64) -> f64 {
        let s = (meridian_degrees - f64::from(self.axis.0))
            .to_radians()
            .sin();
        f64::from(self.sphere.0) / 1000.0 + f64::from(self.cylinder.0) / 1000.0 * s * s
    }

    /// Returns the same lens written with the other sign of cylinder.
    #[must_use]
    pub fn transposed(self) -> Refraction {
        Refraction {
            sphere: Diopters(self.sphere.0 + self.cylinder.0),
            cylinder: Diopters(-self.cylinder.0),
            axis: self.axis.perpendicular(),
        }
    }

    /// Returns the largest difference in power along any one meridian, |ΔM| + √(ΔJ0² + ΔJ45²), in
    /// thousandths of a dioptre. Shown as a note only, hence a rounded float.
    pub fn meridional_difference(self, other: Refraction) -> Diopters {
        let m = f64::from((self.twice_equivalent() - other.twice_equivalent()).abs()) / 2000.0;
        let j = (self.j0() - other.j0()).hypot(self.j45() - other.j45());
        Diopters(((m + j) * 1000.0).round() as i32)
    }
}

/// A measured power: a value, or beyond what the instrument can measure.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Power {
    /// Measured.
    Value(Diopters),
    /// More than this (`>7.50`).
    Above(Diopters),
    /// Less than this (`<-7.50`).
    Below(Diopters),
}

impl Power {
    /// Reads `-2.50`, `>7.50`, `<-7.50`.
    pub fn parse(text: &str) -> Option<Power> {
        let text = text.trim();
        if let Some(rest) = text.strip_prefix('>') {
            Diopters::parse(rest).map(Power::Above)
        } else if let Some(rest) = text.strip_prefix('<') {
            Diopters::parse(rest).map(Power::Below)
        } else {
            Diopters::parse(text).map(Power::Value)
        }
    }

    /// Returns the value, if one was measured.
    pub fn value(self) -> Option<Diopters> {
        match self {
            Power::Value(v) => Some(v),
            _ => None,
        }
    }

    /// Returns the number written, whatever the comparator.
    pub fn written(self) -> Diopters {
        match self {
            Power::Value(v) | Power::Above(v) | Power::Below(v) => v,
        }
    }

    /// Returns the possible values in thousandths: open ends are moved by one thousandth.
    pub fn range(self) -> Range {
        match self {
            Power::Value(v) => Range {
                low: Some(v.0),
                high: Some(v.0),
            },
            Power::Above(v) => Range {
                low: Some(v.0 + 1),
                high: None,
            },
            Power::Below(v) => Range {
                low: None,
                high: Some(v.0 - 1),
            },
        }
    }
}

impl fmt::Display for Power {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Power::Value(v) => write!(f, "{v}"),
            Power::Above(v) => write!(f, ">{}", v.unsigned()),
            Power::Below(v) => write!(f, "<{}", v.unsigned()),
        }
    }
}

/// A closed range of whole numbers with open ends allowed: the arithmetic of half-known powers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Range {
    /// The smallest possible value.
    pub low: Option<i32>,
    /// The largest possible value.
    pub high: Option<i32>,
}

impl Range {
    /// Nothing is known.
    pub const UNKNOWN: Range = Range {
        low: None,
        high: None,
    };

    /// Returns the range of one known value.
    pub fn exactly(value: i32) -> Range {
        Range {
            low: Some(value),
            high: Some(value),
        }
    }

    /// Returns the range of a × `factor`, for a positive factor.
    #[must_use]
    pub fn times(self, factor: i32) -> Range {
        Range {
            low: self.low.map(|v| v * factor),
            high: self.high.map(|v| v * factor),
        }
    }

    /// Returns the range of the sum.
    #[must_use]
    pub fn plus(self, other: Range) -> Range {
        Range {
            low: self.low.zip(other.low).map(|(a, b)| a + b),
            high: self.high.zip(other.high).map(|(a, b)| a + b),
        }
    }

    /// Returns the range of the negative.
    #[must_use]
    pub fn negated(self) -> Range {
        Range {
            low: self.high.map(|v| -v),
            high: self.low.map(|v| -v),
        }
    }

    /// Returns the range of the larger of two values.
    #[must_use]
    pub fn larger(self, other: Range) -> Range {
        Range {
            low: match (self.low, other.low) {
                (Some(a), Some(b)) => Some(a.max(b)),
                (a, b) => a.or(b),
            },
            high: self.high.zip(other.high).map(|(a, b)| a.max(b)),
        }
    }

    /// Returns the range of the size without sign.
    #[must_use]
    pub fn magnitude(self) -> Range {
        let low = match (self.low, self.high) {
            (Some(low), _) if low > 0 => low,
            (_, Some(high)) if high < 0 => -high,
            _ => 0,
        };
        let high = self.low.zip(self.high).map(|(l, h)| l.abs().max(h.abs()));
        Range {
            low: Some(low),
            high,
        }
    }
}
