//! An open store with the rule library beside it: what a nurse sits down at.

use std::collections::HashMap;
use std::path::Path;
use std::sync::Arc;
use std::time::Duration;

use chrono::NaiveDate;
use uuid::Uuid;

use super::error::{ActionError, Result};
use super::rulebook::library_with;
use crate::clock::{self, Moment};
use crate::domain::acuity::Notation;
use crate::domain::age::spoken;
use crate::rules::Library;
use crate::store::row::{Screener, Station};
use crate::store::{Access, Author, Drafts, Reads, Secret, Store, new_id};

/// How long a writing command waits for another process to let go of the store.
const WAIT: Duration = Duration::from_secs(5);

/// An open store, who works at it and on which day.
pub struct Desk {
    pub(super) store: Store,
    pub(super) library: Arc<Library>,
    pub(super) today: NaiveDate,
    pub(super) screener: Option<Screener>,
    /// Where and when entries of the demo are made out to be made.
    as_if: Option<(Uuid, Moment)>,
    rules_refused: Option<String>,
}

/// How a desk is opened.
#[derive(Debug, Clone, Default)]
pub struct DeskOptions {
    /// The civil date for ages and due dates, where it is not the clock's.
    pub today: Option<NaiveDate>,
    /// The person who records, by name or initials.
    pub screener: Option<String>,
    /// Whether nothing will be written.
    pub read_only: bool,
    /// Whether the shipped rules do where a rule file of the store is wrong: nothing is judged.
    pub judges_nothing: bool,
}

impl Desk {
    /// Opens the store in a folder.
    pub fn open(dir: &Path, secret: &Secret, options: &DeskOptions) -> Result<Desk> {
        let access = if options.read_only {
            Access::ReadOnly
        } else {
            Access::Write { wait: WAIT }
        };
        Desk::around(Store::open(dir, secret, access)?, options)
    }

    /// Sits down at a store that is open already.
    pub fn around(store: Store, options: &DeskOptions) -> Result<Desk> {
        let (library, rules_refused) = match library_of(store.dir()) {
            Err(refused) if options.judges_nothing => {
                (Library::shipped().clone(), Some(refused.message))
            }
            library => (library?, None),
        };
        let mut desk = Desk {
            store,
            library: Arc::new(library),
            today: options.today.unwrap_or_else(clock::today),
            screener: None,
            as_if: None,
            rules_refused,
        };
        if let Some(name) = &options.screener {
            desk.set_screener(name)?;
        } else if let [only] = &desk.read().screeners()?[..] {
            desk.screener = Some(only.clone());
        }
        Ok(desk)
    }

    /// Returns the civil date that ages and due dates go by.
    pub fn today(&self) -> NaiveDate {
        self.today
    }

    /// Returns the name of the programme.
    pub fn programme(&self) -> String {
        self.store.key_info().programme.clone()
    }

    /// Returns the name of this station.
    pub fn station(&self) -> String {
        self.stations()
            .ok()
            .and_then(|all| all.get(&self.store.station_id()).map(|s| s.name.clone()))
            .unwrap_or_default()
    }

    /// Says whether this station is masked: no contact data there, no history.
    pub fn is_masked(&self) -> bool {
        self.stations()
            .ok()
            .and_then(|all| all.get(&self.store.station_id()).and_then(|s| s.masked))
            .unwrap_or(false)
    }

    /// Says whether this is the demo, which nothing protects.
    pub fn is_demo(&self) -> bool {
        !self.store.key_info().protected
    }

    /// Returns who writes the store, when this desk can only read.
    pub fn is_read_only(&self) -> Option<String> {
        if self.store.is_writable() {
            return None;
        }
        Some(
            self.store
                .holder()
                .map_or_else(|| "read only".to_owned(), |h| h.to_string()),
        )
    }

    /// Returns what a bare acuity is the denominator of.
    pub fn notation(&self) -> Notation {
        match self.read().setting("notation").ok().flatten().as_deref() {
            Some("metres") => Notation::Metres,
            _ => Notation::Feet,
        }
    }

    /// Returns what a barcode reader types before an id, where the programme has set it.
    pub fn scan_prefix(&self) -> Option<String> {
        self.read()
            .setting("scan_prefix")
            .ok()
            .flatten()
            .filter(|p| !p.is_empty())
    }

    /// Returns the rule library: what is shipped and the programme's own files.
    pub fn library(&self) -> Arc<Library> {
        Arc::clone(&self.library)
    }

    /// Returns why the store's own rule files were left out, where nothing is judged.
    pub fn rules_refused(&self) -> Option<&str> {
        self.rules_refused.as_deref()
    }

    /// Returns who records.
    pub fn screener(&self) -> Option<String> {
        self.screener.as_ref().map(|s| s.name.clone())
    }

    /// Returns everybody who may record.
    pub fn screeners(&self) -> Result<Vec<String>> {
        Ok(self
            .read()
            .screeners()?
            .into_iter()
            .map(|s| s.name)
            .collect())
    }

    /// Sets who records, by name or initials.
    ///
    /// # Errors
    /// Bad input when nobody, or more than one person, is meant.
    pub fn set_screener(&mut self, name: &str) -> Result<()> {
        let all = self.read().screeners()?;
        let found = all.iter().find(|s| s.name == name).or_else(|| {
            let mut by_initials = all.iter().filter(|s| s.initials.eq_ignore_ascii_case(name));
            by_initials.next().filter(|_| by_initials.next().is_none())
        });
        let Some(found) = found else {
            let known: Vec<&str> = all.iter().map(|s| s.name.as_str()).collect();
            return Err(
                ActionError::bad(format!("no screener is called {name:?}")).hint(
                    if known.is_empty() {
                        "add one: twoline screener add --name NAME --initials XX".to_owned()
                    } else {
                        format!("known: {}; or twoline screener add", known.join(", "))
                    },
                ),
            );
        };
        self.screener = Some(found.clone());
        Ok(())
    }

    /// Opens the drafts beside the store.
    pub fn drafts(&self) -> Result<Drafts> {
        Ok(self.store.drafts()?)
    }

    /// Returns the head of the ledger.
    pub fn head(&self) -> Result<crate::store::Head> {
        Ok(self.read().head()?)
    }

    /// Says what is odd about the clock: behind the newest entry, or a day or more ahead of it.
    pub fn clock_warning(&self) -> Result<Option<String>> {
        Ok(self
            .read()
            .newest_entry_ms()?
            .and_then(|newest| oddity(clock::now(), newest)))
    }

    pub(super) fn read(&self) -> Reads<'_> {
        self.store.read()
    }

    pub(super) fn author(&self) -> Author {
        Author {
            screener: self.screener.as_ref().map(|s| s.screener_id),
            at: self.moment(),
        }
    }

    /// Returns the moment that entries carry.
    pub(super) fn moment(&self) -> Moment {
        self.as_if.map_or_else(clock::now, |(_, at)| at)
    }

    /// Returns the station that entries carry.
    pub(super) fn here(&self) -> Uuid {
        self.as_if
            .map_or_else(|| self.store.station_id(), |(station, _)| station)
    }

    /// Makes out that what follows is entered at this station and moment, as the demo needs it; none
    /// goes back to the truth.
    ///
    /// # Errors
    /// Refused in a store that is not the demo.
    pub fn as_if(&mut self, there: Option<(&str, Moment)>) -> Result<()> {
        if !self.is_demo() {
            return Err(ActionError::bad("only the demo has invented stations"));
        }
        self.as_if = None;
        let Some((name, at)) = there else {
            return Ok(());
        };
        let known = self.stations()?.into_values().find(|s| s.name == name);
        let station = match known {
            Some(station) => station.station_id,
            None => self.add_station(name)?,
        };
        self.as_if = Some((station, at));
        Ok(())
    }

    fn add_station(&mut self, name: &str) -> Result<Uuid> {
        let station = Station {
            id: new_id(),
            station_id: new_id(),
            name: name.to_owned(),
            chart_id: None,
            task: None,
            masked: None,
        };
        let author = self.author();
        self.store.append(&author, |tx| tx.add(&station))?;
        Ok(station.station_id)
    }

    pub(super) fn screener_names(&self) -> Result<HashMap<Uuid, String>> {
        Ok(self
            .read()
            .screeners()?
            .into_iter()
            .map(|s| (s.screener_id, s.name))
            .collect())
    }

    pub(super) fn stations(&self) -> Result<HashMap<Uuid, Station>> {
        Ok(self
            .read()
            .stations()?
            .into_iter()
            .map(|s| (s.station_id, s))
            .collect())
    }
}

fn oddity(now: Moment, newest_ms: i64) -> Option<String> {
    const HOUR_MS: i64 = 3_600_000;
    const DAY_MS: i64 = 24 * HOUR_MS;
    let ahead = now.utc_ms - newest_ms;
    if ahead < 0 {
        let hours = -ahead / HOUR_MS + 1;
        return Some(format!(
            "this computer's clock is {hours} h behind the newest entry; check it before you go on"
        ));
    }
    let days = ahead / DAY_MS;
    let plural = if days == 1 { "" } else { "s" };
    (days > 0).then(|| {
        format!(
            "the newest entry is {days} day{plural} old and this computer's clock says {}; is that right?",
            now.date().map(spoken).unwrap_or_default()
        )
    })
}

/// Returns the shipped rules with the `*.toml` files of the store's `rules` folder beside them.
fn library_of(dir: &Path) -> Result<Library> {
    let folder = dir.join("rules");
    let mut files = Vec::new();
    if folder.is_dir() {
        let read = std::fs::read_dir(&folder)
            .map_err(|e| ActionError::failed(format!("{}: {e}", folder.display())))?;
        files.extend(
            read.flatten()
                .map(|entry| entry.path())
                .filter(|path| path.extension().is_some_and(|e| e == "toml")),
        );
        files.sort();
    }
    library_with(&files).map_err(|e| {
        ActionError::bad(format!("a rule file of this store was not taken\n{e}")).hint(format!(
            "correct it, or take it out of {}, then start again",
            folder.display()
        ))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    // Practice: the wall clock is shown and asked about, never compared to order entries.
    #[test]
    fn a_clock_behind_the_newest_entry_or_a_day_ahead_of_it_is_odd() {
        const HOUR_MS: i64 = 3_600_000;
        let newest = 1_791_972_000_000; // 14 October 2026, 10:00 UTC
        let at = |hours: i64| {
            let now = Moment {
                utc_ms: newest + hours * HOUR_MS,
                offset_minutes: 0,
            };
            oddity(now, newest)
        };
        assert_eq!(at(0), None);
        assert_eq!(at(23), None);
        assert!(at(-1).is_some_and(|w| w.contains("behind")));
        let ahead = at(24).expect("a day ahead");
        assert!(ahead.contains("1 day old"), "{ahead}");
        assert!(ahead.contains("15 Oct 2026"), "{ahead}");
    }
}
