//! Styles by meaning. A state is always a word as well, so nothing is lost without color.

use ratatui::style::{Color, Modifier, Style};

use crate::actions::QueueState;
use crate::domain::outcome::{OutcomeKind, Urgency};

/// A set of styles.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ThemeName {
    /// Dark letters on white.
    Light,
    /// Light letters on a dark ground.
    Dark,
    /// Black and white with few strong colors.
    Contrast,
    /// The terminal's own two colors: only weight, underline and reverse remain.
    Plain,
}

impl ThemeName {
    /// Every theme in the order in which they are offered.
    pub const ALL: [ThemeName; 4] = [
        ThemeName::Light,
        ThemeName::Dark,
        ThemeName::Contrast,
        ThemeName::Plain,
    ];

    /// Returns the word of a theme.
    pub fn word(self) -> &'static str {
        match self {
            ThemeName::Light => "light",
            ThemeName::Dark => "dark",
            ThemeName::Contrast => "contrast",
            ThemeName::Plain => "plain",
        }
    }

    /// Returns what a theme is for.
    pub fn help(self) -> &'static str {
        match self {
            ThemeName::Light => "dark letters on white, for a bright room",
            ThemeName::Dark => "light letters on a dark ground",
            ThemeName::Contrast => "black, white and few strong colors",
            ThemeName::Plain => "no color: the terminal's own letters and ground",
        }
    }

    /// Returns the theme of a word.
    pub fn from_word(word: &str) -> Option<ThemeName> {
        ThemeName::ALL.into_iter().find(|t| t.word() == word)
    }
}

/// The colors of a theme by meaning, from the 240 of the 256-color palette that every terminal shows
/// alike; the first sixteen are the terminal's own and say nothing about contrast.
#[derive(Debug, Clone, Copy)]
struct Palette {
    ground: u8,
    text: u8,
    focus: u8,
    pass: u8,
    attention: u8,
    refer: u8,
    muted: u8,
    error: u8,
    /// Letters and ground of an emergency.
    emergency: (u8, u8),
}

const LIGHT: Palette = Palette {
    ground: 231,
    text: 234,
    focus: 25,
    pass: 22,
    attention: 94,
    refer: 90,
    muted: 241,
    error: 124,
    emergency: (231, 124),
};

const DARK: Palette = Palette {
    ground: 234,
    text: 252,
    focus: 80,
    pass: 114,
    attention: 221,
    refer: 213,
    muted: 246,
    error: 210,
    emergency: (231, 124),
};

const CONTRAST: Palette = Palette {
    ground: 16,
    text: 231,
    focus: 51,
    pass: 120,
    attention: 226,
    refer: 219,
    muted: 252,
    error: 217,
    emergency: (231, 88),
};

/// Which styles a meaning has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Theme {
    name: ThemeName,
}

impl Theme {
    /// Makes the usual theme; without color only weight, underline and reverse remain.
    pub fn new(color: bool) -> Theme {
        Theme::named(if color {
            ThemeName::Dark
        } else {
            ThemeName::Plain
        })
    }

    /// Makes a theme.
    pub fn named(name: ThemeName) -> Theme {
        Theme { name }
    }

    /// Returns its name.
    pub fn name(self) -> ThemeName {
        self.name
    }

    fn palette(self) -> Option<Palette> {
        match self.name {
            ThemeName::Light => Some(LIGHT),
            ThemeName::Dark => Some(DARK),
            ThemeName::Contrast => Some(CONTRAST),
            ThemeName::Plain => None,
        }
    }

    fn pick(self, color: impl Fn(Palette) -> u8) -> Style {
        self.palette().map_or_else(Style::new, |palette| {
            Style::new().fg(Color::Indexed(color(palette)))
        })
    }

    /// Letters and ground where nothing else is said; both are set, so that their contrast does not
    /// hang on the terminal's own colors.
    pub fn ground(self) -> Style {
        self.palette().map_or_else(Style::new, |palette| {
            Style::new()
                .fg(Color::Indexed(palette.text))
                .bg(Color::Indexed(palette.ground))
        })
    }

    /// What has the focus.
    pub fn focus(self) -> Style {
        self.pick(|p| p.focus).add_modifier(Modifier::BOLD)
    }

    /// The row under the cursor: reversed, so that it is seen on any background.
    pub fn selected(self) -> Style {
        Style::new().add_modifier(Modifier::REVERSED)
    }

    /// A pass: never the loudest thing on the screen.
    pub fn pass(self) -> Style {
        self.pick(|p| p.pass)
    }

    /// Rescreen, incomplete, not testable: somebody comes back to it.
    pub fn attention(self) -> Style {
        self.pick(|p| p.attention)
    }

    /// A referral.
    pub fn refer(self) -> Style {
        self.pick(|p| p.refer).add_modifier(Modifier::BOLD)
    }

    /// An emergency.
    pub fn emergency(self) -> Style {
        self.palette().map_or_else(
            || Style::new().add_modifier(Modifier::BOLD | Modifier::REVERSED),
            |palette| {
                Style::new()
                    .fg(Color::Indexed(palette.emergency.0))
                    .bg(Color::Indexed(palette.emergency.1))
                    .add_modifier(Modifier::BOLD)
            },
        )
    }

    /// Something that is there if it is looked for.
    pub fn muted(self) -> Style {
        self.pick(|p| p.muted)
            .add_modifier(if self.palette().is_some() {
                Modifier::empty()
            } else {
                Modifier::DIM
            })
    }

    /// A name, a heading.
    pub fn strong(self) -> Style {
        Style::new().add_modifier(Modifier::BOLD)
    }

    /// An error or a refused value.
    pub fn error(self) -> Style {
        self.pick(|p| p.error)
    }

    /// The style of an outcome.
    pub fn outcome(self, kind: OutcomeKind, urgency: Option<Urgency>) -> Style {
        match (kind, urgency) {
            (_, Some(Urgency::Emergency)) => self.emergency(),
            (OutcomeKind::Pass, _) => self.pass(),
            (OutcomeKind::Refer, _) => self.refer(),
            (OutcomeKind::Rescreen | OutcomeKind::Incomplete, _) => self.attention(),
            (OutcomeKind::Exempt, _) => self.muted(),
        }
    }

    /// The style of a child's state in the list.
    pub fn state(self, state: QueueState) -> Style {
        match state {
            QueueState::ToCome => Style::new(),
            QueueState::Signed(kind) => self.outcome(kind, None),
            QueueState::NotTestable | QueueState::GlassesAtHome | QueueState::LeftEarly => {
                self.attention()
            }
            _ => self.muted(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Red, green and blue of a color of the fixed part of the 256-color palette.
    fn rgb(index: u8) -> [f64; 3] {
        const CUBE: [u8; 6] = [0, 95, 135, 175, 215, 255];
        assert!(index >= 16, "{index} is the terminal's own color");
        let grey = |n: u8| 8 + 10 * n;
        let values = if index >= 232 {
            [grey(index - 232); 3]
        } else {
            let n = index - 16;
            [n / 36, n / 6 % 6, n % 6].map(|i| CUBE[usize::from(i)])
        };
        values.map(|v| f64::from(v) / 255.0)
    }

    /// Relative luminance, WCAG 2.1, "relative luminance" (W3C Recommendation, 5 June 2018).
    fn luminance(index: u8) -> f64 {
        let [r, g, b] = rgb(index).map(|c| {
            if c <= 0.03928 {
                c / 12.92
            } else {
                ((c + 0.055) / 1.055).powf(2.4)
            }
        });
        0.2126 * r + 0.7152 * g + 0.0722 * b
    }

    /// Contrast ratio, WCAG 2.1, "contrast ratio".
    fn contrast(a: u8, b: u8) -> f64 {
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    #[test]
    fn the_ratio_is_that_of_the_recommendation() {
        // White on black is 21:1; #767676 (here #808080 is the nearest grey) on white just passes AA.
        assert!((contrast(231, 16) - 21.0).abs() < 1e-9);
        assert!((contrast(244, 231) - 3.95).abs() < 0.01);
    }

    // WCAG 2.1, success criteria 1.4.3 (4.5:1) and 1.4.6 (7:1).
    #[test]
    fn every_pair_of_letters_and_ground_can_be_read() {
        for (name, palette, least) in [
            ("light", LIGHT, 4.5),
            ("dark", DARK, 4.5),
            ("contrast", CONTRAST, 7.0),
        ] {
            let Palette {
                ground,
                text,
                focus,
                pass,
                attention,
                refer,
                muted,
                error,
                emergency,
            } = palette;
            for letters in [text, focus, pass, attention, refer, muted, error] {
                let ratio = contrast(letters, ground);
                assert!(
                    ratio >= least,
                    "{name}: {letters} on {ground} is {ratio:.2}"
                );
            }
            let ratio = contrast(emergency.0, emergency.1);
            assert!(ratio >= least, "{name}: emergency is {ratio:.2}");
        }
    }

    #[test]
    fn meanings_that_stand_side_by_side_are_told_apart_without_color_too() {
        let plain = Theme::named(ThemeName::Plain);
        assert_ne!(plain.emergency(), plain.refer());
        assert_ne!(plain.refer(), plain.pass());
        assert_ne!(plain.selected(), plain.focus());
        assert_eq!(plain.ground(), Style::new());
        for name in ThemeName::ALL {
            assert_eq!(ThemeName::from_word(name.word()), Some(name));
        }
    }
}
