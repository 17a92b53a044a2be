//! The shipped rule files and the programme's own.

use std::sync::OnceLock;

use include_dir::{Dir, include_dir};

use crate::rules::error::{RuleError, RuleErrors};
use crate::rules::grading::Grading;
use crate::rules::load::{Loaded, load};
use crate::rules::{Criterion, Protocol, RuleSet};

static SHIPPED_FILES: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/referral_rules");

/// Every rule set and protocol that can be named.
#[derive(Debug, Clone, Default)]
pub struct Library {
    sets: Vec<RuleSet>,
    protocols: Vec<Protocol>,
    gradings: Vec<Grading>,
}

impl Library {
    /// Returns what is shipped inside the program.
    pub fn shipped() -> &'static Library {
        static SHIPPED: OnceLock<Library> = OnceLock::new();
        // What does not load is left out here and fails the test that loads it strictly.
        SHIPPED.get_or_init(|| Library::default().extended(&shipped_files(), false).0)
    }

    /// Returns everything wrong in the shipped files; nothing in a sound build.
    pub fn shipped_faults() -> RuleErrors {
        RuleErrors(Library::default().extended(&shipped_files(), false).1)
    }

    /// Returns this library with local files (name and text of each) beside what it has.
    pub fn with_local(
        &self,
        files: impl IntoIterator<Item = (String, String)>,
    ) -> Result<Library, RuleErrors> {
        let files: Vec<(String, String)> = files.into_iter().collect();
        let (library, faults) = self.extended(&files, true);
        if faults.is_empty() {
            Ok(library)
        } else {
            Err(RuleErrors(faults))
        }
    }

    /// Adds files, rule sets before the protocols that use them.
    fn extended(&self, files: &[(String, String)], local: bool) -> (Library, Vec<RuleError>) {
        let mut library = self.clone();
        let mut faults = Vec::new();
        let (protocols, sets): (Vec<_>, Vec<_>) =
            files.iter().partition(|(_, text)| says_protocol(text));
        for (file, text) in sets.into_iter().chain(protocols) {
            match load(file, text, local, &library) {
                Err(errors) => faults.extend(errors),
                Ok(loaded) => {
                    let id = match &loaded {
                        Loaded::Set(set) => set.id.clone(),
                        Loaded::Protocol(protocol) => protocol.id.clone(),
                        Loaded::Grading(grading) => grading.id.clone(),
                    };
                    if library.has(&id) {
                        let at = text.find(&format!("\"{id}\"")).unwrap_or(0);
                        faults.push(RuleError::at(
                            file,
                            text,
                            at..at + id.len() + 2,
                            format!("the id `{id}` is taken"),
                            "an id of its own",
                            "nothing shipped is edited in place: give the local file another id",
                        ));
                        continue;
                    }
                    match loaded {
                        Loaded::Set(set) => library.sets.push(*set),
                        Loaded::Protocol(protocol) => library.protocols.push(*protocol),
                        Loaded::Grading(grading) => library.gradings.push(*grading),
                    }
                }
            }
        }
        library.sets.sort_by(|a, b| {
            (a.local.is_some(), a.kind, &a.id).cmp(&(b.local.is_some(), b.kind, &b.id))
        });
        library
            .protocols
            .sort_by(|a, b| (a.local.is_some(), &a.id).cmp(&(b.local.is_some(), &b.id)));
        library.gradings.sort_by(|a, b| {
            (a.local.is_some(), a.kind, &a.id).cmp(&(b.local.is_some(), b.kind, &b.id))
        });
        (library, faults)
    }

    fn has(&self, id: &str) -> bool {
        self.rule_set(id).is_some() || self.protocol(id).is_some() || self.grading(id).is_some()
    }

    /// Returns a table of condition groups or clinic bands by its id.
    pub fn grading(&self, id: &str) -> Option<&Grading> {
        self.gradings.iter().find(|g| &*g.id == id)
    }

    /// Returns every table of condition groups or clinic bands in list order.
    pub fn gradings(&self) -> impl Iterator<Item = &Grading> {
        self.gradings.iter()
    }

    /// Returns a rule set by its id.
    pub fn rule_set(&self, id: &str) -> Option<&RuleSet> {
        self.sets.iter().find(|s| &*s.id == id)
    }

    /// Returns a criterion of a rule set.
    pub fn criterion(&self, set: &str, id: &str) -> Option<&Criterion> {
        self.rule_set(set)?.criteria.iter().find(|c| &*c.id == id)
    }

    /// Returns a protocol by its id.
    pub fn protocol(&self, id: &str) -> Option<&Protocol> {
        self.protocols.iter().find(|p| &*p.id == id)
    }

    /// Returns every rule set in list order.
    pub fn rule_sets(&self) -> impl Iterator<Item = &RuleSet> {
        self.sets.iter()
    }

    /// Returns every protocol in list order.
    pub fn protocols(&self) -> impl Iterator<Item = &Protocol> {
        self.protocols.iter()
    }
}

/// Says whether a text is meant as a protocol, so that rule sets are read before it.
fn says_protocol(text: &str) -> bool {
    text.lines().any(|line| {
        line.split_once('=').is_some_and(|(key, value)| {
            key.trim() == "kind"
                && value
                    .trim()
                    .trim_matches(['"', '\''])
                    .starts_with("protocol")
        })
    })
}

fn shipped_files() -> Vec<(String, String)> {
    let mut out = Vec::new();
    collect(&SHIPPED_FILES, &mut out);
    out.sort();
    out
}

fn collect(dir: &Dir<'_>, out: &mut Vec<(String, String)>) {
    for file in dir.files() {
        if file.path().extension().is_some_and(|e| e == "toml") {
            let text = String::from_utf8_lossy(file.contents()).into_owned();
            out.push((format!("referral_rules/{}", file.path().display()), text));
        }
    }
    for sub in dir.dirs() {
        collect(sub, out);
    }
}
