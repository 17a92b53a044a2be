//! Reading a roster: planned and shown first, then written whole.

use std::collections::HashSet;

use sha2::{Digest, Sha256};

use super::desk::Desk;
use super::error::{ActionError, Result};
use crate::domain::roster::RosterChild;
use crate::intake::roster::{Roster, RosterUpdate, read_roster};
use crate::store::row::{Child, ChildDetail, ConsentGiven, Enrolment, Guardian, Import};
use crate::store::{Tx, new_id};

/// What a roster would change, before anything is written.
#[derive(Debug)]
pub struct RosterPlan {
    /// The term it is for.
    pub term: String,
    /// The children of the file.
    pub roster: Roster,
    /// The day from which ages are counted.
    pub today: chrono::NaiveDate,
    /// What the store knows of the same sites.
    pub known: Vec<RosterChild>,
    /// What is new, changed, unchanged and gone.
    pub update: RosterUpdate,
    file: String,
    file_hash: String,
}

impl Desk {
    /// Reads a roster and compares it with the store.
    ///
    /// Children of sites that the file does not speak of are left alone. With `site`, every row must
    /// be of that site.
    pub fn plan_roster(
        &self,
        file: &str,
        bytes: &[u8],
        site: Option<&str>,
        term: Option<&str>,
    ) -> Result<RosterPlan> {
        let roster = read_roster(file, bytes, self.today)?;
        let sites = self.sites()?;
        for (child, place) in roster.children.iter().zip(&roster.places) {
            let wrong = |expected: String| {
                ActionError::from(crate::intake::Problems::from(
                    crate::intake::Problem::of_cell(file, *place, "site", &child.site, expected),
                ))
            };
            if let Some(only) = site.filter(|only| *only != child.site) {
                return Err(wrong(format!("site {only}, as the command says")));
            }
            if !sites.iter().any(|(code, _)| *code == child.site) {
                let known: Vec<&str> = sites.iter().map(|(code, _)| code.as_str()).collect();
                return Err(wrong(if known.is_empty() {
                    "a site of this store; add it first: twoline site add CODE --name NAME"
                        .to_owned()
                } else {
                    format!("a site of this store: {}", known.join(", "))
                }));
            }
        }
        let plan = self.compare_roster(roster, term)?;
        Ok(RosterPlan {
            file: file.to_owned(),
            file_hash: crate::store::ledger::hex(&Sha256::digest(bytes)),
            ..plan
        })
    }

    /// Compares children who did not come from a file with the store.
    pub fn plan_children(
        &self,
        children: Vec<RosterChild>,
        term: Option<&str>,
    ) -> Result<RosterPlan> {
        self.compare_roster(
            Roster {
                places: Vec::new(),
                without_dob: Vec::new(),
                without_grade: Vec::new(),
                alike: Vec::new(),
                absent: Vec::new(),
                children,
            },
            term,
        )
    }

    fn compare_roster(&self, mut roster: Roster, term: Option<&str>) -> Result<RosterPlan> {
        let term = match term {
            Some(code) => self.term(code)?,
            None => self.term_on(self.today)?,
        };
        let mut known = self.read().roster(Some(&term.code))?;
        let spoken_of: HashSet<&str> = roster.children.iter().map(|c| c.site.as_str()).collect();
        let in_file: HashSet<&str> = roster
            .children
            .iter()
            .map(|c| c.child_id.as_str())
            .collect();
        known.retain(|k| spoken_of.contains(&*k.site) || in_file.contains(&*k.child_id));
        roster.keep_known(&known);
        let update = RosterUpdate::compare(&known, &roster.children);
        Ok(RosterPlan {
            term: term.code,
            today: self.today,
            roster,
            known,
            update,
            file: String::new(),
            file_hash: String::new(),
        })
    }

    /// Writes a planned roster, whole or not at all.
    pub fn add_roster(&mut self, plan: &RosterPlan) -> Result<()> {
        let today = self.today;
        let author = self.author();
        let RosterPlan {
            update,
            roster,
            known,
            term,
            ..
        } = plan;
        if update.new.is_empty() && update.changed.is_empty() && update.gone.is_empty() {
            return Ok(());
        }
        self.store.append(&author, |tx| {
            for place in &update.new {
                let child = &roster.children[*place];
                // A child of an earlier term has entries already; a new one needs no look-up.
                let is_known = tx.read().child_entry(&child.child_id)?.is_some();
                write_child(tx, child, term, today, is_known)?;
            }
            for changed in &update.changed {
                write_child(tx, &roster.children[changed.new], term, today, true)?;
            }
            for place in &update.gone {
                let gone = &known[*place];
                let row = Enrolment {
                    left_on: Some(today),
                    ..enrolment(gone, term, today)
                };
                tx.put(row, "no longer on the roster")?;
            }
            tx.add(&Import {
                id: new_id(),
                import_id: new_id(),
                kind: "roster".to_owned(),
                file_name: plan.file.clone(),
                file_hash: plan.file_hash.clone(),
                rows_new: update.new.len() as i64,
                rows_changed: update.changed.len() as i64,
                rows_unchanged: update.unchanged.len() as i64,
                rows_gone: update.gone.len() as i64,
            })
        })?;
        Ok(())
    }
}

fn write_child(
    tx: &mut Tx<'_>,
    child: &RosterChild,
    term: &str,
    today: chrono::NaiveDate,
    is_known: bool,
) -> crate::store::Result<()> {
    const REASON: &str = "roster read again";
    let d = &child.details;
    let id = &child.child_id;
    let row = Child {
        id: new_id(),
        child_id: id.clone(),
        family_name: child.family_name.clone(),
        given_name: child.given_name.clone(),
        dob: child.dob,
        provisional: false,
    };
    let detail = ChildDetail {
        id: new_id(),
        child_id: id.clone(),
        sex: d.sex.clone(),
        language: d.language.clone(),
        ethnicity: d.ethnicity.clone(),
        insurance: d.insurance.clone(),
        special_education: d.special_education,
        state_id: d.state_id.clone(),
        wears_glasses: d.wears_glasses,
        last_exam_on: d.last_exam_on,
        under_care: d.under_care,
        known_condition: d.known_condition.clone(),
        doctor_name: d.doctor_name.clone(),
        doctor_phone: d.doctor_phone.clone(),
        history: d.history.clone(),
        notes: d.notes.clone(),
    };
    let guardians = [
        Guardian {
            id: new_id(),
            child_id: id.clone(),
            place: 1,
            name: d.guardian_name.clone(),
            phone: d.guardian_phone.clone(),
            email: d.guardian_email.clone(),
            address: d.guardian_address.clone(),
        },
        Guardian {
            id: new_id(),
            child_id: id.clone(),
            place: 2,
            name: d.guardian2_name.clone(),
            phone: d.guardian2_phone.clone(),
            email: d.guardian2_email.clone(),
            address: String::new(),
        },
    ];
    let consent = d.consent.map(|consent| ConsentGiven {
        id: new_id(),
        child_id: id.clone(),
        consent,
        given_by: "roster".to_owned(),
    });
    let enrolment = enrolment(child, term, today);
    if is_known {
        tx.put(row, REASON)?;
        tx.put(detail, REASON)?;
        for guardian in guardians {
            tx.put(guardian, REASON)?;
        }
        if let Some(consent) = consent {
            tx.put(consent, REASON)?;
        }
        // The day a child came to a class is kept while the class stays the same.
        let from_on = tx
            .read()
            .current_of(&enrolment)?
            .first()
            .filter(|now| {
                (&now.site, now.grade, &now.class)
                    == (&enrolment.site, enrolment.grade, &enrolment.class)
                    && now.left_on.is_none()
            })
            .map_or(today, |now| now.from_on);
        tx.put(
            Enrolment {
                from_on,
                ..enrolment
            },
            REASON,
        )?;
        return Ok(());
    }
    tx.add(&row)?;
    tx.add(&detail)?;
    for guardian in &guardians {
        if !guardian.name.is_empty() || !guardian.phone.is_empty() || !guardian.email.is_empty() {
            tx.add(guardian)?;
        }
    }
    if let Some(consent) = consent {
        tx.add(&consent)?;
    }
    tx.add(&enrolment)
}

fn enrolment(child: &RosterChild, term: &str, today: chrono::NaiveDate) -> Enrolment {
    Enrolment {
        id: new_id(),
        child_id: child.child_id.clone(),
        term: term.to_owned(),
        site: child.site.clone(),
        grade: child.grade,
        class: child.details.class.clone(),
        teacher: child.details.teacher.clone(),
        from_on: today,
        left_on: None,
    }
}
