//! Several laptops, one programme: packets, joining, restoring, and children who are one.

use std::collections::BTreeMap;
use std::path::Path;

use super::desk::{Desk, DeskOptions};
use super::error::{ActionError, Result};
use super::setup::named;
use super::united::unsettled;
use super::views::{FoundChild, OpenUrgent};
use super::visit_rows::{judged, tries_of};
use crate::clock;
use crate::store::read::ChildNow;
use crate::store::row::SameChild;
use crate::store::{
    Author, ForJoin, Head, Joining, Kdf, Merged, PacketInfo, RecoveryKey, Secret, Store, new_id,
    packet_info as info_of,
};

/// Returns what a packet says of itself.
pub fn packet_info(path: &Path) -> Result<PacketInfo> {
    Ok(info_of(path)?)
}

/// Makes a store of a packet, a further station of its programme, and sits down at it.
///
/// The recovery key is returned once and kept nowhere.
pub fn join(
    dir: &Path,
    packet: &Path,
    packet_secret: &Secret,
    (station, secret, kdf): (&str, Secret, Kdf),
    options: &DeskOptions,
) -> Result<(Desk, Option<RecoveryKey>, Merged)> {
    let joining = Joining {
        packet,
        packet_secret,
        station: named("station", station)?,
        secret,
        kdf,
    };
    let (store, recovery, merged) = Store::join(dir, joining)?;
    Ok((Desk::around(store, options)?, recovery, merged))
}

/// Makes a store of a backup and sits down at it; returns also the head of the backup.
pub fn restore(
    from: &Path,
    dir: &Path,
    secret: &Secret,
    options: &DeskOptions,
) -> Result<(Desk, Head)> {
    let author = Author {
        screener: None,
        at: clock::now(),
    };
    let (store, head) = Store::restore(from, dir, secret, &author)?;
    Ok((Desk::around(store, options)?, head))
}

impl Desk {
    /// Writes all that this store holds as a packet.
    pub fn write_packet(&self, to: &Path, join: &ForJoin, replace: bool) -> Result<Head> {
        Ok(self.store.write_packet(to, join, replace)?)
    }

    /// Takes over what a packet holds and this store does not; `progress` gets entries done and in all.
    ///
    /// Emergencies that only the readings of several stations together make are raised then, in a
    /// transaction of this store; they are returned beside what the packet brought.
    pub fn read_packet(
        &mut self,
        from: &Path,
        progress: impl FnMut(u64, u64),
    ) -> Result<(Merged, Vec<OpenUrgent>)> {
        let author = self.author();
        let mut merged = self.store.read_packet(from, &author, progress)?;
        let raised = self.raise_united()?;
        if !raised.is_empty() {
            merged.head = self.head()?;
        }
        Ok((merged, raised))
    }

    /// Raises the emergencies of visits of several parts that have no running line yet.
    fn raise_united(&mut self) -> Result<Vec<OpenUrgent>> {
        let mut rows = Vec::new();
        for (_, visit) in self.read().several()? {
            let Some(together) = self.together(&visit)? else {
                continue;
            };
            let (now, day) = self.visit_and_day(visit.visit_id)?;
            let child = self.child_on(&day, &now)?;
            let readings = judged(&tries_of(&self.read().readings(visit.visit_id)?)?);
            rows.extend(self.emergency(visit.visit_id, &child, &readings, &together.now)?);
        }
        if rows.is_empty() {
            return Ok(Vec::new());
        }
        let author = self.author();
        self.store
            .append(&author, |tx| rows.iter().try_for_each(|row| tx.add(row)))?;
        let mut open = self.urgent_open()?;
        open.retain(|u| rows.iter().any(|row| row.visit_id == Some(u.visit)));
        Ok(open)
    }

    /// Returns in words what differs between stations and nobody has settled, a line each.
    ///
    /// Of readings none counts until one is chosen; of anything else the latest stands meanwhile.
    pub fn in_conflict(&self) -> Result<Vec<String>> {
        let mut lines = Vec::new();
        for (child, visit) in self.read().several()? {
            for differs in unsettled(&self.read().readings(visit.visit_id)?) {
                lines.push(format!(
                    "{}, {} ({}), {}: {} is {}",
                    child.family_name,
                    child.given_name,
                    child.child_id,
                    visit.screened_on,
                    differs.field.title(),
                    differs.values.join(" or ")
                ));
            }
        }
        let mut others: BTreeMap<&str, usize> = BTreeMap::new();
        for conflict in self.read().conflicts()? {
            if conflict.table != "reading" {
                *others.entry(conflict.table).or_default() += 1;
            }
        }
        for (table, n) in others {
            lines.push(format!(
                "{}: {n} said differently by two stations; the latest stands, saying it again settles it",
                table.replace('_', " ")
            ));
        }
        Ok(lines)
    }

    /// Returns pairs of children who are probably one: at least one was added at a table, the names
    /// are the same, no birth date says otherwise, and nobody has said that they are one.
    pub fn probably_same(&self) -> Result<Vec<(FoundChild, FoundChild)>> {
        let said = self.read().same_children()?;
        let is_said = |a: &str, b: &str| {
            said.iter()
                .any(|s| (s.a == a && s.b == b) || (s.a == b && s.b == a))
        };
        let mut out = Vec::new();
        for (one, other) in self.read().same_names_as_provisional()? {
            let born_otherwise = one.dob.zip(other.dob).is_some_and(|(a, b)| a != b);
            if !born_otherwise && !is_said(&one.child_id, &other.child_id) {
                out.push((found(one), found(other)));
            }
        }
        Ok(out)
    }

    /// Records that two ids are one child: `stays` is the one to go on with.
    ///
    /// The visits of both stay where they were recorded; a person moves them.
    pub fn same_child(&mut self, stays: &str, same: &str) -> Result<()> {
        if stays == same {
            return Err(ActionError::bad("these are the same id"));
        }
        for id in [stays, same] {
            if self.read().child(id)?.is_none() {
                return Err(ActionError::bad(format!("no child has the id {id:?}")));
            }
        }
        let row = SameChild {
            id: new_id(),
            a: stays.to_owned(),
            b: same.to_owned(),
        };
        let author = self.author();
        self.store.append(&author, |tx| tx.put(row, ""))?;
        Ok(())
    }
}

fn found(child: ChildNow) -> FoundChild {
    FoundChild {
        child_id: child.child_id,
        family_name: child.family_name,
        given_name: child.given_name,
        dob: child.dob,
        site: child.site.unwrap_or_default(),
        class: child.class.unwrap_or_default(),
        why: String::new(),
    }
}
