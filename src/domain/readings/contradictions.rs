//! What must hold between the fields of a visit.

use super::{AcuityResult, InstrumentEye, Readings};
use crate::domain::acuity::Acuity;
use crate::domain::codes::{InstrumentResult, YesNo};
use crate::domain::field::{Field, FieldError};
use crate::domain::refraction::{Diopters, Power};

impl Readings {
    /// Checks what must hold between fields and returns everything that does not.
    pub fn contradictions(&self) -> Vec<FieldError> {
        let mut out = Vec::new();
        axis_beside_cylinder(
            &self.instrument.right,
            Field::CylinderRight,
            Field::AxisRight,
            &mut out,
        );
        axis_beside_cylinder(
            &self.instrument.left,
            Field::CylinderLeft,
            Field::AxisLeft,
            &mut out,
        );
        self.both_distances(&mut out);
        self.acuities(&mut out);
        part_of_whole(
            (Field::StereoCorrect, self.stereo_correct),
            (Field::StereoShown, self.stereo_shown),
            &mut out,
        );
        part_of_whole(
            (Field::PlatesMissed, self.plates_missed),
            (Field::PlatesShown, self.plates_shown),
            &mut out,
        );
        no_reading_has_no_values(
            &self.instrument.right,
            Field::InstrumentRight,
            Field::SphereRight,
            &mut out,
        );
        no_reading_has_no_values(
            &self.instrument.left,
            Field::InstrumentLeft,
            Field::SphereLeft,
            &mut out,
        );
        out
    }

    fn both_distances(&self, out: &mut Vec<FieldError>) {
        let (field, expected) = match (self.chart_distance, self.used_distance) {
            (Some(chart), None) => (
                if chart.in_feet {
                    Field::UsedDistanceFt
                } else {
                    Field::UsedDistanceM
                },
                "the distance used beside the chart's distance",
            ),
            (None, Some(used)) => (
                if used.in_feet {
                    Field::ChartDistanceFt
                } else {
                    Field::ChartDistanceM
                },
                "the chart's distance beside the distance used",
            ),
            _ => return,
        };
        out.push(FieldError::new(field, "", expected));
    }

    /// No distance acuity beside `testable=no`, and no more letters than a line has.
    fn acuities(&self, out: &mut Vec<FieldError>) {
        let per_line = self.letters_per_line.unwrap_or(5);
        for (field, value, is_distance) in [
            (Field::DistanceRight, self.distance.right, true),
            (Field::DistanceLeft, self.distance.left, true),
            (Field::DistanceBoth, self.distance_both, true),
            (Field::NearRight, self.near.right, false),
            (Field::NearLeft, self.near.left, false),
            (Field::NearBoth, self.near_both, false),
        ] {
            let Some(AcuityResult::Read(acuity)) = value else {
                continue;
            };
            if is_distance && self.testable == Some(YesNo::No) {
                out.push(FieldError::new(
                    field,
                    &acuity.to_string(),
                    "no distance acuity beside testable=no",
                ));
            }
            if let Acuity::Read { letters, .. } = acuity
                && letters.unsigned_abs() > per_line
            {
                out.push(FieldError::new(
                    field,
                    &acuity.to_string(),
                    format!("no more letters than the {per_line} on a line"),
                ));
            }
        }
    }
}

fn axis_beside_cylinder(
    eye: &InstrumentEye,
    cylinder: Field,
    axis: Field,
    out: &mut Vec<FieldError>,
) {
    let has_cylinder = eye.cylinder.is_some_and(|c| c != Power::Value(Diopters(0)));
    if has_cylinder && eye.axis.is_none() {
        let expected = format!("an axis from 1 to 180 beside {}", cylinder.word());
        out.push(FieldError::new(axis, "", expected));
    }
    if eye.axis.is_some() && eye.cylinder.is_none() {
        let expected = format!("a cylinder beside {}", axis.word());
        out.push(FieldError::new(cylinder, "", expected));
    }
}

fn part_of_whole(
    (field, part): (Field, Option<u8>),
    (whole_field, whole): (Field, Option<u8>),
    out: &mut Vec<FieldError>,
) {
    if let (Some(part), Some(whole)) = (part, whole)
        && part > whole
    {
        let expected = format!("no more than {}", whole_field.word());
        out.push(FieldError::new(field, &part.to_string(), expected));
    }
}

fn no_reading_has_no_values(
    eye: &InstrumentEye,
    result: Field,
    sphere: Field,
    out: &mut Vec<FieldError>,
) {
    if eye.result == Some(InstrumentResult::NoReading)
        && (eye.sphere.is_some() || eye.cylinder.is_some())
    {
        out.push(FieldError::new(
            result,
            InstrumentResult::NoReading.word(),
            format!("ok, or no values in {} and its cylinder", sphere.word()),
        ));
    }
}
