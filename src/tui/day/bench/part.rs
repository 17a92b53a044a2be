//! What is entered after a signature: another try of the visit, or this station's part of a visit that
//! others have signed parts of.

use uuid::Uuid;

use super::{Bench, entered_before, swapped_before};
use crate::actions::VisitView;
use crate::domain::codes::{Correction, Status};
use crate::domain::field::Field;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::screening_test::ScreeningTest;
use crate::tui::day::bench::Spot;
use crate::tui::day::bench_view::value_words;
use crate::tui::judging::{self, Draft};

impl Bench {
    /// Says whether the signed visit may be followed by another try on the same day.
    pub fn may_try_again(&self) -> bool {
        self.is_signed() && self.readings.any_eye_not_testable()
    }

    /// Says whether this is another try of a signed visit.
    pub fn is_further_try(&self) -> bool {
        !self.is_signed() && !self.earlier.is_empty()
    }

    /// Begins another try of the signed visit, with its draft if there is one. What was tested before
    /// stays; nothing of it is filled in again.
    pub fn try_again(&mut self, id: Uuid, draft: Option<&Draft>) {
        let Some(visit) = self.signed.take() else {
            return;
        };
        self.earlier.push(visit.readings);
        self.visit = draft.map_or(id, |d| d.visit);
        self.begin_entry(draft);
    }

    /// Says whether the signed visit lacks what is tested here: the one test of this station, or all
    /// that the protocol asks for.
    pub fn may_add_part(&self) -> bool {
        let Some(visit) = self.signed.as_ref().or(self.elsewhere.as_ref()) else {
            return false;
        };
        let tests = self.task().map_or_else(
            || judging::bench_tests(&self.given.library, &self.given.day, &self.child).needed,
            |task| vec![task],
        );
        let recorded = |test: &ScreeningTest| {
            test.is_touched(&visit.readings)
                || visit
                    .unsettled
                    .iter()
                    .any(|differs| test.fields().contains(&differs.field))
        };
        let present = matches!(visit.readings.status, None | Some(Status::Present));
        present && !tests.is_empty() && !tests.iter().any(recorded)
    }

    /// Shows a signed visit: as it was signed, or with this station's part to be entered beside it. A
    /// draft of one's own that says something else is shown in any case.
    pub fn show_visit(&mut self, visit: VisitView, draft: Option<&Draft>) {
        self.show_signed(visit);
        match draft {
            // A draft beside a signed visit is another try that was begun, or another part.
            Some(draft) if self.may_try_again() => self.try_again(draft.visit, Some(draft)),
            Some(draft) => {
                self.begin_part(draft.visit, Some(draft));
                if self.says_nothing_new()
                    && let Some(visit) = self.elsewhere.take()
                {
                    self.show_signed(visit);
                }
            }
            None if self.task().is_some() && self.may_add_part() => {
                self.begin_part((self.given.new_id)(), None);
            }
            None => {}
        }
    }

    /// Begins this station's part of the signed visit, with its draft if there is one.
    pub fn begin_part(&mut self, id: Uuid, draft: Option<&Draft>) {
        let Some(visit) = self.signed.take() else {
            return;
        };
        self.visit = draft.map_or(id, |d| d.visit);
        self.earlier.clear();
        self.elsewhere = Some(visit);
        self.begin_entry(draft);
    }

    fn begin_entry(&mut self, draft: Option<&Draft>) {
        self.raws = draft.map_or_else(Vec::new, entered_before);
        self.swapped = draft.map_or_else(Vec::new, swapped_before);
        self.undo.clear();
        self.at = Spot::Sign;
        self.judge();
        self.at = draft
            .and_then(|d| self.spot_of(&d.cursor))
            .unwrap_or_else(|| self.first_spot());
    }

    /// Says whether all that was entered here stands in the signed visit already.
    fn says_nothing_new(&self) -> bool {
        self.elsewhere.as_ref().is_some_and(|visit| {
            self.raws
                .iter()
                .filter(|(_, raw)| !raw.trim().is_empty())
                .all(|(field, _)| {
                    let here = self.readings.get(*field);
                    here.is_some() && here == visit.readings.get(*field)
                })
        })
    }

    /// Returns what is known of glasses before anybody asks: another station's part, or the roster
    /// where it says that there are none.
    pub(super) fn correction_known(&self) -> Option<Correction> {
        self.elsewhere
            .as_ref()
            .and_then(|visit| visit.readings.correction)
            .or_else(|| self.roster_correction())
    }

    /// Returns what another station signed in a field, in words.
    pub fn signed_elsewhere(&self, field: Field) -> Option<String> {
        let visit = self.elsewhere.as_ref()?;
        let raw = visit.readings.get(field)?;
        Some(value_words(&visit.readings, field, &raw))
    }

    /// Returns the signed parts together with what is entered here.
    pub(super) fn with_elsewhere(&self, context: ReadingContext) -> Option<Readings> {
        let mut all = self.elsewhere.as_ref()?.readings.clone();
        for (field, value) in self.readings.recorded() {
            // What contradicts a signed part shows when it is signed.
            let _ = all.set(field, &value, context);
        }
        Some(all)
    }
}
