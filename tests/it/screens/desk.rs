//! A desk with a small roster, and hands that type.

use std::cell::RefCell;

use chrono::NaiveDate;
use crossterm::event::KeyCode;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use twoline::actions::{Desk, DeskOptions, Kdf, NewDay, NewStore, Secret, init};
use twoline::domain::acuity::Notation;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;
use twoline::tui::app::{Answer, App, Effect, Message};
use twoline::tui::{Clerk, Theme, session};
use uuid::Uuid;

/// The children of the acceptance table and some more, all invented.
pub const ROSTER: &str = "\
child_id,family_name,given_name,dob,grade,class,site,wears_glasses,consent,under_care
Q-10482,Okafor,Ada,2020-09-01,1,1B,QE,no,yes,
Q-10483,Oyelaran,Tunde,2020-03-02,1,1B,QE,no,yes,
Q-10484,Petit,Léa,2020-05-11,1,1B,QE,no,yes,
Q-10485,Quiroga,Inés,2018-05-20,1,1B,QE,yes,yes,
Q-10486,Rahmani,سارا,2020-07-19,1,1B,QE,no,yes,
40,Sands,Oliver,2020-06-01,1,1C,QE,no,yes,
Q-10488,Tran,Bảo,2020-02-28,1,1C,QE,,yes,
Q-10489,王,小明,2020-08-08,1,1C,QE,no,yes,
Q-10490,Uzun,Elif,2021-01-08,KG,KA,QE,no,no,
Q-10491,Vega,Luz,2020-12-24,KG,KA,QE,no,yes,
";

/// The screening day of the acceptance table.
pub fn day() -> NaiveDate {
    NaiveDate::from_ymd_opt(2026, 10, 14).unwrap()
}

/// Half past nine UTC on that day.
pub const NOW_MS: i64 = 1_791_970_200_000;

/// Hands at the screens: keys go in, effects are carried out at once.
pub struct Hands {
    pub app: App,
    pub clerk: Clerk,
    /// How many keys were pressed.
    pub keys: usize,
    /// Requests are held back here while the store is "slow".
    pub held: Option<Vec<Effect>>,
    pub left: bool,
    pub folder: tempfile::TempDir,
}

thread_local! {
    static NEXT: RefCell<u128> = const { RefCell::new(1) };
}

/// Makes ids that are the same in each run.
fn next_id() -> Uuid {
    NEXT.with_borrow_mut(|n| {
        *n += 1;
        Uuid::from_u128(0x0199_0000_0000_7000_8000_0000_0000_0000 | *n)
    })
}

pub fn store(roster: &str, method: AcuityMethod) -> (Desk, tempfile::TempDir) {
    let folder = tempfile::tempdir().unwrap();
    let options = DeskOptions {
        today: Some(day()),
        ..DeskOptions::default()
    };
    let (mut desk, _) = init(
        &folder.path().join("store"),
        NewStore {
            programme: "Quillmere".into(),
            station: "east".into(),
            notation: Notation::Feet,
            secret: Secret::None,
            kdf: Kdf::test(),
        },
        &options,
    )
    .unwrap();
    let on = |m, d| NaiveDate::from_ymd_opt(2026, m, d).unwrap();
    desk.add_site("QE", "Quillmere East").unwrap();
    desk.add_term("2026A", "Autumn 2026", on(8, 1), on(12, 31))
        .unwrap();
    desk.add_screener("JI", "J. Imani").unwrap();
    desk.set_screener("J. Imani").unwrap();
    let plan = desk
        .plan_roster("roster.csv", roster.as_bytes(), None, None)
        .unwrap();
    desk.add_roster(&plan).unwrap();
    desk.open_day(NewDay {
        site: "QE".into(),
        date: day(),
        protocol: "us-school".into(),
        method,
    })
    .unwrap();
    (desk, folder)
}

impl Hands {
    pub fn sit() -> Hands {
        Hands::sit_at(ROSTER, AcuityMethod::Threshold)
    }

    pub fn sit_at(roster: &str, method: AcuityMethod) -> Hands {
        let (desk, folder) = store(roster, method);
        Hands::with(desk, folder)
    }

    pub fn with(desk: Desk, folder: tempfile::TempDir) -> Hands {
        let mut app = session(&desk, true, NOW_MS, 0).unwrap();
        app.session.new_id = next_id;
        let start = app.start();
        let mut hands = Hands {
            app,
            clerk: Clerk::new(desk),
            keys: 0,
            held: None,
            left: false,
            folder,
        };
        hands.carry_out(start);
        hands
    }

    /// Gets up and sits down again at the same store.
    pub fn again(self) -> Hands {
        let Hands { clerk, folder, .. } = self;
        clerk.keeper().flush().unwrap();
        Hands::with(clerk.into_desk(), folder)
    }

    fn carry_out(&mut self, effects: Vec<Effect>) {
        for effect in effects {
            match effect {
                Effect::Ask(_) if self.held.is_some() => self.held.as_mut().unwrap().push(effect),
                Effect::Ask(request) => {
                    let answer = self.clerk.answer(*request);
                    self.answer(answer);
                }
                Effect::SaveDraft(draft) => {
                    self.clerk.keeper().save(draft, self.app.session.now_ms);
                }
                Effect::DropDraft(day, child) => self.clerk.keeper().drop_draft(&day, &child),
                Effect::FlushDrafts => self.clerk.keeper().flush().unwrap(),
                Effect::Quit => self.left = true,
                Effect::Suspend | Effect::Redraw => {}
            }
        }
    }

    pub fn answer(&mut self, answer: Answer) {
        let effects = self.app.update(Message::Answer(answer));
        self.carry_out(effects);
    }

    /// Lets the store answer what was held back.
    pub fn let_store_work(&mut self) {
        if let Some(held) = self.held.take() {
            self.carry_out(held);
        }
    }

    pub fn press(&mut self, key: Key) -> &mut Hands {
        self.keys += 1;
        self.app.session.now_ms += 150;
        let effects = self.app.update(Message::Key(key));
        self.carry_out(effects);
        self
    }

    pub fn key(&mut self, code: KeyCode) -> &mut Hands {
        self.press(Key::plain(code))
    }

    pub fn enter(&mut self) -> &mut Hands {
        self.key(KeyCode::Enter)
    }

    /// Types by hand.
    pub fn typed(&mut self, text: &str) -> &mut Hands {
        for c in text.chars() {
            self.press(Key::char(c));
        }
        self
    }

    /// Types as a barcode reader does, with Enter at the end.
    pub fn scan(&mut self, text: &str) -> &mut Hands {
        self.app.session.now_ms += 500;
        for key in text
            .chars()
            .map(Key::char)
            .chain([Key::plain(KeyCode::Enter)])
        {
            self.app.session.now_ms += 3;
            let effects = self.app.update(Message::Key(key));
            self.carry_out(effects);
        }
        self
    }

    pub fn paste(&mut self, text: &str) -> &mut Hands {
        let effects = self.app.update(Message::Paste(text.into()));
        self.carry_out(effects);
        self
    }

    pub fn screen_at(&self, columns: u16, rows: u16) -> String {
        let mut terminal = Terminal::new(TestBackend::new(columns, rows)).unwrap();
        terminal.draw(|frame| self.app.draw(frame)).unwrap();
        let buffer = terminal.backend().buffer();
        let mut out = String::new();
        for y in 0..rows {
            let mut line = String::new();
            let mut skip = 0;
            for x in 0..columns {
                if skip > 0 {
                    skip -= 1;
                    continue;
                }
                let symbol = buffer[(x, y)].symbol();
                skip = unicode_width::UnicodeWidthStr::width(symbol).saturating_sub(1);
                line.push_str(symbol);
            }
            out.push_str(line.trim_end());
            out.push('\n');
        }
        out
    }

    pub fn screen(&self) -> String {
        self.screen_at(80, 24)
    }

    /// Asserts that the screen shows a text.
    #[track_caller]
    pub fn sees(&mut self, text: &str) -> &mut Hands {
        let screen = self.screen_at(120, 36);
        assert!(screen.contains(text), "not on the screen: {text}\n{screen}");
        self
    }

    #[track_caller]
    pub fn misses(&mut self, text: &str) -> &mut Hands {
        let screen = self.screen_at(120, 36);
        assert!(!screen.contains(text), "on the screen: {text}\n{screen}");
        self
    }

    pub fn without_color(&mut self) -> &mut Hands {
        self.app.session.theme = Theme::new(false);
        self
    }
}
