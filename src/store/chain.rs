//! Chains: each belongs to one installation of one store.

use rusqlite::{Connection, params};
use uuid::Uuid;

use super::cell::Value;
use super::error::{Error, ErrorKind, Result};
use super::key::RawKey;
use super::row::Chain;
use super::{Author, Store, new_id, write};

/// Why a chain begins.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ChainStart {
    /// The store was restored from a backup.
    Restore,
    /// The store lies on another installation now.
    Installation,
    /// Two transactions stood at one chain and number: a cloned store.
    Fork,
}

impl ChainStart {
    fn word(self) -> &'static str {
        match self {
            ChainStart::Restore => "restore",
            ChainStart::Installation => "installation",
            ChainStart::Fork => "fork",
        }
    }
}

impl Store {
    /// Begins a new chain that names what it follows; this store writes it from now on.
    pub fn begin_chain(&mut self, why: ChainStart, author: &Author) -> Result<Uuid> {
        if !self.is_writable() {
            return Err(Error::read_only(&self.dir));
        }
        let follows = tip(&self.conn, self.chain)?;
        let chain = new_id();
        let old = self.chain;
        write::append(&mut self.conn, chain, author, |tx| {
            tx.add(&Chain {
                id: new_id(),
                chain_id: chain,
                why: why.word().to_owned(),
                follows_chain: Some(old),
                follows_seq: Some(follows.0),
                follows_hash: Some(follows.1),
            })?;
            tx.write_here(chain)
        })?;
        self.chain = chain;
        Ok(chain)
    }
}

/// Returns the end of a store's own chain: its number and hash.
pub(super) fn tip(conn: &Connection, chain: Uuid) -> Result<(i64, Vec<u8>)> {
    conn.query_row(
        "SELECT seq, tx_hash FROM chain_current WHERE chain = ?1",
        [chain.cell()],
        |r| Ok((r.get(0)?, r.get(1)?)),
    )
    .map_err(|_| Error::new(ErrorKind::Damaged, "this store's own chain is not in it"))
}

impl write::Tx<'_> {
    /// Notes which chain this installation writes.
    pub(super) fn write_here(&self, chain: Uuid) -> Result<()> {
        self.conn()
            .execute("UPDATE here SET chain = ?1", params![chain.cell()])?;
        Ok(())
    }

    /// Notes what this installation is, once.
    pub(super) fn write_first_here(
        &self,
        programme: Uuid,
        station: Uuid,
        chain: Uuid,
        packet_key: &RawKey,
    ) -> Result<()> {
        self.conn().execute(
            "INSERT INTO here (one, programme, station, chain, packet_key) VALUES (1, ?1, ?2, ?3, ?4)",
            params![
                programme.cell(),
                station.cell(),
                chain.cell(),
                &packet_key[..]
            ],
        )?;
        Ok(())
    }
}
