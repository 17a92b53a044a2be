//! What an examiner reported of one child, typed.
//!
//! Acuity, refraction and cover test are the same quantities as in a screening and live in
//! [`Readings`]; the rest is the report's own.

mod text;

use chrono::NaiveDate;

use super::codes::{Cover, YesNo, code_list};
use super::diagnosis::{Diagnosis, FindingKind};
use super::field::Field;
use super::readings::{Eye, Eyes, Readings};

pub use text::{ExamError, contradictions};

code_list! {
    /// How a refraction was found.
    RefractionMethod {
        Retinoscopy = "retinoscopy", "retinoscopy";
        Autorefraction = "autorefraction", "autorefraction";
        Subjective = "subjective", "subjective refraction";
    }
}

code_list! {
    /// Whether accommodation was relaxed, and with what.
    Cycloplegia {
        None = "none", "without cycloplegia";
        Cyclopentolate = "cyclopentolate", "cyclopentolate";
        Tropicamide = "tropicamide", "tropicamide";
        Atropine = "atropine", "atropine";
        Other = "other", "another agent";
    }
}

code_list! {
    /// What was seen of the fundus of an eye.
    Fundus {
        Normal = "normal", "seen, normal";
        Abnormal = "abnormal", "seen, abnormal";
        NotSeen = "not_seen", "not seen";
    }
}

code_list! {
    /// Amblyopia of one eye.
    Amblyopia {
        None = "none", "no amblyopia";
        Suspect = "suspect", "amblyopia suspected";
        Present = "present", "amblyopia";
    }
}

code_list! {
    /// What was begun or advised.
    Treatment {
        None = "none", "no treatment";
        Glasses = "glasses", "glasses";
        ContactLenses = "contact_lenses", "contact lenses";
        Patching = "patching", "patching";
        Drops = "drops", "drops";
        SurgeryAdvised = "surgery_advised", "surgery advised";
        Observation = "observation", "observation";
        OnwardReferral = "onward_referral", "referred onward";
    }
}

code_list! {
    /// When glasses are worn.
    GlassesWear {
        FullTime = "full_time", "all the time";
        Distance = "distance", "for distance";
        Near = "near", "for near work";
        Classroom = "classroom", "in the classroom";
    }
}

code_list! {
    /// How well a result is known; counted apart.
    Evidence {
        Form = "form", "examiner's form";
        ParentsWord = "parents_word", "parent's word";
        SeenByNurse = "seen_by_nurse", "seen by the nurse";
    }
}

code_list! {
    /// A value of an examination report: one column of the reports file, one box on a screen.
    ExamField {
        ExaminedOn = "examined_on", "examined on";
        ReceivedOn = "received_on", "report received on";
        Evidence = "evidence", "known from";
        Examiner = "examiner", "examiner";
        ExaminerPhone = "examiner_phone", "examiner's telephone";
        UncorrectedRight = "uncorrected_right", "without glasses, right eye";
        UncorrectedLeft = "uncorrected_left", "without glasses, left eye";
        PresentingRight = "presenting_right", "with the glasses worn, right eye";
        PresentingLeft = "presenting_left", "with the glasses worn, left eye";
        SphereRight = "sphere_right", "sphere, right eye";
        CylinderRight = "cylinder_right", "cylinder, right eye";
        AxisRight = "axis_right", "axis, right eye";
        SphereLeft = "sphere_left", "sphere, left eye";
        CylinderLeft = "cylinder_left", "cylinder, left eye";
        AxisLeft = "axis_left", "axis, left eye";
        RefractionMethod = "refraction_method", "refraction found by";
        Cycloplegia = "cycloplegia", "cycloplegia";
        BestRight = "best_right", "best-corrected, right eye";
        BestLeft = "best_left", "best-corrected, left eye";
        Cover = "cover", "cover test";
        DeviationPd = "deviation_pd", "deviation (prism dioptres)";
        DeviatingEye = "deviating_eye", "deviating eye";
        DeviationDirection = "deviation_direction", "deviation direction";
        StereoSeconds = "stereo_seconds", "stereo (seconds of arc)";
        FundusRight = "fundus_right", "fundus, right eye";
        FundusLeft = "fundus_left", "fundus, left eye";
        AmblyopiaRight = "amblyopia_right", "amblyopia, right eye";
        AmblyopiaLeft = "amblyopia_left", "amblyopia, left eye";
        NoAbnormality = "no_abnormality", "no abnormality found";
        Findings = "findings", "findings (ICD-10-CM)";
        Treatment = "treatment", "treatment";
        GlassesWear = "glasses_wear", "glasses worn when";
        GlassesSphereRight = "glasses_sphere_right", "glasses, sphere, right eye";
        GlassesCylinderRight = "glasses_cylinder_right", "glasses, cylinder, right eye";
        GlassesAxisRight = "glasses_axis_right", "glasses, axis, right eye";
        GlassesSphereLeft = "glasses_sphere_left", "glasses, sphere, left eye";
        GlassesCylinderLeft = "glasses_cylinder_left", "glasses, cylinder, left eye";
        GlassesAxisLeft = "glasses_axis_left", "glasses, axis, left eye";
        ReturnOn = "return_on", "next visit on";
        ClassroomAdvice = "classroom_advice", "advice for the classroom";
        ReleaseConsent = "release_consent", "consent to release the report";
    }
}

/// Under which of a report's conditions something was measured.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum With {
    /// Without glasses.
    Nothing,
    /// With the glasses the child came with.
    OwnGlasses,
    /// With the best correction; refraction and cover test too.
    Best,
    /// The glasses that were prescribed.
    Prescribed,
}

impl ExamField {
    /// Returns the field of a screening that is the same quantity, and how it was measured.
    pub(super) fn reading(self) -> Option<(With, Field)> {
        use ExamField as E;
        Some(match self {
            E::UncorrectedRight => (With::Nothing, Field::DistanceRight),
            E::UncorrectedLeft => (With::Nothing, Field::DistanceLeft),
            E::PresentingRight => (With::OwnGlasses, Field::DistanceRight),
            E::PresentingLeft => (With::OwnGlasses, Field::DistanceLeft),
            E::BestRight => (With::Best, Field::DistanceRight),
            E::BestLeft => (With::Best, Field::DistanceLeft),
            E::SphereRight => (With::Best, Field::SphereRight),
            E::CylinderRight => (With::Best, Field::CylinderRight),
            E::AxisRight => (With::Best, Field::AxisRight),
            E::SphereLeft => (With::Best, Field::SphereLeft),
            E::CylinderLeft => (With::Best, Field::CylinderLeft),
            E::AxisLeft => (With::Best, Field::AxisLeft),
            E::Cover => (With::Best, Field::Cover),
            E::DeviationPd => (With::Best, Field::DeviationPd),
            E::DeviatingEye => (With::Best, Field::DeviatingEye),
            E::DeviationDirection => (With::Best, Field::DeviationDirection),
            E::GlassesSphereRight => (With::Prescribed, Field::SphereRight),
            E::GlassesCylinderRight => (With::Prescribed, Field::CylinderRight),
            E::GlassesAxisRight => (With::Prescribed, Field::AxisRight),
            E::GlassesSphereLeft => (With::Prescribed, Field::SphereLeft),
            E::GlassesCylinderLeft => (With::Prescribed, Field::CylinderLeft),
            E::GlassesAxisLeft => (With::Prescribed, Field::AxisLeft),
            _ => return None,
        })
    }
}

/// An examination report; what the examiner did not say stays none.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct ExamReport {
    /// Date of the examination.
    pub examined_on: Option<NaiveDate>,
    /// Date on which it became known.
    pub received_on: Option<NaiveDate>,
    /// How it is known.
    pub evidence: Option<Evidence>,
    /// Who examined.
    pub examiner: String,
    /// Telephone of the examiner.
    pub examiner_phone: String,
    /// Distance acuity without glasses.
    pub uncorrected: Readings,
    /// Distance acuity with the glasses the child came with.
    pub presenting: Readings,
    /// Best-corrected distance acuity, refraction, cover test.
    pub readings: Readings,
    /// Sphere, cylinder and axis of the glasses that were prescribed.
    pub glasses: Readings,
    /// How the refraction was found.
    pub refraction_method: Option<RefractionMethod>,
    /// Whether accommodation was relaxed.
    pub cycloplegia: Option<Cycloplegia>,
    /// Stereo in seconds of arc.
    pub stereo_seconds: Option<u16>,
    /// The fundus of each eye.
    pub fundus: Eyes<Option<Fundus>>,
    /// Amblyopia of each eye.
    pub amblyopia: Eyes<Option<Amblyopia>>,
    /// Whether the examiner said that nothing was abnormal.
    pub no_abnormality: Option<YesNo>,
    /// Findings as codes.
    pub findings: Vec<Diagnosis>,
    /// What was begun or advised; none when nothing was said.
    pub treatment: Option<Vec<Treatment>>,
    /// When the glasses are worn.
    pub glasses_wear: Option<GlassesWear>,
    /// The next visit.
    pub return_on: Option<NaiveDate>,
    /// Advice for the classroom.
    pub classroom_advice: String,
    /// Whether the family agreed to release the report to the school.
    pub release_consent: Option<YesNo>,
}

/// Why a report confirms a finding, or does not.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Confirmed {
    /// It does, with every reason in words.
    Yes(Vec<String>),
    /// The examiner found nothing of the kind.
    No,
    /// The report does not say enough.
    NotKnown,
}

/// What "confirmed" means, printed wherever the word is used.
pub const CONFIRMED: &str = "Confirmed: the examiner reported amblyopia, strabismus, media or organic \
     disease, a refractive finding of condition group 1 to 3, or treatment was started.";

impl ExamReport {
    /// Says whether the report confirms a finding; `group` is the condition group that its values
    /// fall in by the programme's severity table, where one is known.
    pub fn confirmed(&self, group: Option<u32>) -> Confirmed {
        let mut why: Vec<String> = Vec::new();
        for eye in Eye::BOTH {
            if self.amblyopia.of(eye) == Some(Amblyopia::Present) {
                why.push(format!("amblyopia, {}", eye.title()));
            }
            if self.fundus.of(eye) == Some(Fundus::Abnormal) {
                why.push(format!("fundus abnormal, {}", eye.title()));
            }
        }
        if let Some(cover @ (Cover::Intermittent | Cover::Constant)) = self.readings.cover {
            why.push(cover.title().to_owned());
        }
        for finding in &self.findings {
            let counts = matches!(
                finding.kind(),
                FindingKind::Amblyopia | FindingKind::Strabismus | FindingKind::Organic
            );
            if let Some(listed) = finding.listed().filter(|_| counts) {
                why.push(format!("{} ({})", listed.title, listed.code));
            }
        }
        if let Some(group @ 1..=3) = group {
            why.push(format!("condition group {group}"));
        }
        for treatment in self.treatment.iter().flatten() {
            if treatment.is_started() {
                why.push(format!("treatment started: {}", treatment.title()));
            }
        }
        if !why.is_empty() {
            Confirmed::Yes(why)
        } else if self.no_abnormality == Some(YesNo::Yes) || self.says_enough() {
            Confirmed::No
        } else {
            Confirmed::NotKnown
        }
    }

    /// Says whether findings of every kind were asked about and none was left open.
    fn says_enough(&self) -> bool {
        self.amblyopia
            .both()
            .iter()
            .all(|a| *a == Some(Amblyopia::None))
            && self.readings.cover.is_some()
            && self
                .fundus
                .both()
                .iter()
                .all(|f| *f == Some(Fundus::Normal))
            && self.treatment.is_some()
            && self
                .readings
                .instrument
                .both()
                .iter()
                .all(|eye| eye.sphere.is_some() && eye.cylinder.is_some())
    }

    /// Returns whether glasses are part of the treatment.
    pub fn prescribes_glasses(&self) -> bool {
        self.treatment
            .iter()
            .flatten()
            .any(|t| *t == Treatment::Glasses)
    }
}

impl Treatment {
    /// Says whether it is a treatment that was started, not only advice or watching.
    pub fn is_started(self) -> bool {
        matches!(
            self,
            Treatment::Glasses | Treatment::ContactLenses | Treatment::Patching | Treatment::Drops
        )
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;
