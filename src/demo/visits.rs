//! What has happened so far today, and on the day two weeks before.

mod stories;

use chrono::NaiveDate;

use super::random::Random;
use super::{DemoVisit, Screener};
use crate::domain::age::AgeMonths;
use crate::domain::codes::{Attempt, Consent, YesNo};
use crate::domain::roster::RosterChild;

pub use stories::Story;

/// Who records at the two tables.
pub const SCREENERS: [Screener; 2] = [
    Screener {
        initials: "ND",
        name: "Nora Dellaway",
    },
    Screener {
        initials: "TP",
        name: "Tomas Perrin",
    },
];

const STATIONS: [&str; 2] = ["east", "west"];

/// The visits of both days; those of today with the story each was made from.
pub struct Told {
    pub earlier: Vec<DemoVisit>,
    pub today: Vec<(Story, DemoVisit)>,
}

/// The classes that have come today, in order, and how many children of each.
const COME: [(&str, usize); 8] = [
    ("KA", 17),
    ("KB", 18),
    ("1A", 18),
    ("1B", 17),
    ("2A", 18),
    ("2B", 17),
    ("3A", 18),
    ("3B", 3),
];

/// Children of this class were screened two weeks before.
const EARLIER_CLASS: &str = "5B";

/// Stories that must occur today whatever chance says, each for the first child it suits.
const MUST: [Story; 22] = [
    Story::WhitePupil,
    Story::NotTestable,
    Story::InstrumentAnisometropia,
    Story::InstrumentHalf,
    Story::InstrumentClear,
    Story::ObjectsToCover,
    Story::TwoSteps,
    Story::TwoStepsPassing,
    Story::LineFails,
    Story::FarBelow,
    Story::ThreeSteps,
    Story::CountsFingers,
    Story::ConstantSquint,
    Story::UnequalReflex,
    Story::PlusLensRead,
    Story::ColorPlates,
    Story::GlassesAtHome,
    Story::GlassesBroken,
    Story::PassWithGlasses,
    Story::Absent,
    Story::LeftEarly,
    Story::CriticalLine,
];

/// Tells both days.
pub fn told(random: &mut Random, children: &[RosterChild], day: NaiveDate) -> Told {
    let site = |child: &&RosterChild| child.site == super::roster::SITES[0].code;
    let mut due: Vec<Story> = MUST.to_vec();
    let mut today = Vec::new();
    let mut to_come: usize = COME.iter().map(|(_, count)| count).sum();
    for (class, count) in COME {
        let members = children
            .iter()
            .filter(site)
            .filter(|c| c.details.class == class);
        for child in members.take(count) {
            to_come -= 1;
            // What must occur is spread over the classes, and squeezed in at the end if need be.
            let hurry = due.len() * 3 >= to_come;
            let story = story(random, child, day, &mut due, hurry);
            let visit = visit(random, child, Attempt::First, story, day);
            today.push((story, visit));
        }
    }
    let mut earlier = Vec::new();
    let chosen = children
        .iter()
        .filter(site)
        .filter(|c| c.details.class == EARLIER_CLASS && may_be_tested(c) && !owns_glasses(c));
    let before = [
        Story::Pass,
        Story::TwoSteps,
        Story::Pass,
        Story::Pass,
        Story::LineFails,
        Story::Pass,
    ];
    for (i, (child, story)) in chosen.zip(before).enumerate() {
        earlier.push(visit(random, child, Attempt::First, story, day));
        // One of the two rescreens has been done this morning, the other is still to come.
        if i == 1 {
            let visit = visit(random, child, Attempt::Rescreen, Story::Pass, day);
            today.push((Story::Pass, visit));
        }
    }
    Told { earlier, today }
}

fn visit(
    random: &mut Random,
    child: &RosterChild,
    attempt: Attempt,
    story: Story,
    day: NaiveDate,
) -> DemoVisit {
    let table = usize::from(random.percent(45));
    let months = child.dob.and_then(|born| AgeMonths::between(born, day));
    DemoVisit {
        child_id: child.child_id.clone(),
        attempt,
        readings: story.readings(random, months),
        station: STATIONS[table],
        screener: SCREENERS[table].initials,
    }
}

fn owns_glasses(child: &RosterChild) -> bool {
    child.details.wears_glasses == Some(YesNo::Yes)
}

fn may_be_tested(child: &RosterChild) -> bool {
    child.details.consent != Some(Consent::No) && child.details.under_care != Some(YesNo::Yes)
}

/// Chooses what happens to a child: what the roster settles, else what must still occur, else chance.
fn story(
    random: &mut Random,
    child: &RosterChild,
    day: NaiveDate,
    due: &mut Vec<Story>,
    hurry: bool,
) -> Story {
    if child.details.consent == Some(Consent::No) {
        return Story::OptedOut;
    }
    if child.details.under_care == Some(YesNo::Yes) {
        return Story::UnderCare;
    }
    let glasses = owns_glasses(child);
    let months = child
        .dob
        .and_then(|born| AgeMonths::between(born, day))
        .map_or(0, |m| m.0);
    if (hurry || random.percent(if glasses { 90 } else { 22 }))
        && let Some(at) = due.iter().position(|story| story.suits(glasses, months))
    {
        return due.remove(at);
    }
    if glasses {
        return random.pick([
            Story::PassWithGlasses,
            Story::PassWithGlasses,
            Story::PassWithGlasses,
            Story::GlassesAtHome,
        ]);
    }
    match random.below(100) {
        0..2 => Story::Absent,
        2..5 => Story::TwoStepsPassing,
        5..9 => Story::LineFails,
        9 => Story::NotTestable,
        10..35 => Story::OneStep,
        _ => Story::Pass,
    }
}
