//! The exact bytes that are hashed.
//!
//! A value is written as a tag and its bytes ([`Cell::write`]): null 00; integer 01 and eight bytes
//! big-endian; text 03, length in four bytes, UTF-8; blob 04, length in four bytes, bytes.
//!
//! - `canonical(row)` = `twoline-row` 00, table, version, id, salt, each field in its frozen order
//! - `row_hash` = SHA-256 of it
//! - `tx_hash` = SHA-256 of `twoline-tx` 00, chain, seq, lamport, recorded at (ms), offset
//!   (minutes), screener, program version, previous hash of the chain (null at its start), number
//!   of rows, then table, id and `row_hash` of each row
//! - `head` = SHA-256 over chain, highest seq and its `tx_hash` of each chain, in byte order

use std::borrow::Cow;
use std::fmt;

use sha2::{Digest, Sha256};
use uuid::Uuid;

use super::cell::{Cell, Value};

/// A SHA-256 hash.
pub type Hash = [u8; 32];

/// Begins the canonical bytes of a row: table, version, id, salt; the fields follow.
pub fn begin_row(out: &mut Vec<u8>, table: &str, version: i64, id: &[u8], salt: &[u8]) {
    out.clear();
    out.extend_from_slice(b"twoline-row\0");
    Cell::Text(Cow::Borrowed(table)).write(out);
    Cell::Int(version).write(out);
    Cell::Blob(Cow::Borrowed(id)).write(out);
    Cell::Blob(Cow::Borrowed(salt)).write(out);
}

/// Returns the hash of canonical bytes.
pub fn hash(bytes: &[u8]) -> Hash {
    Sha256::digest(bytes).into()
}

/// What a transaction says of itself.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct TxHeader {
    /// The chain it belongs to.
    pub chain: Uuid,
    /// Its number in the chain, from 1.
    pub seq: i64,
    /// Its place in the merge order.
    pub lamport: i64,
    /// When it was recorded, UTC milliseconds.
    pub recorded_at_ms: i64,
    /// Offset of the wall clock, minutes east.
    pub offset_minutes: i64,
    /// Who recorded it.
    pub screener: Option<Uuid>,
    /// Version of the program that wrote it.
    pub program_version: String,
    /// Hash of the one before in the chain; none at its start.
    pub prev: Option<Vec<u8>>,
}

/// Collects the rows of a transaction for its hash.
#[derive(Debug, Default)]
pub struct TxRows {
    bytes: Vec<u8>,
    count: i64,
}

impl TxRows {
    /// Adds a row.
    pub fn add(&mut self, table: &str, id: &[u8], row_hash: &Hash) {
        Cell::Text(Cow::Borrowed(table)).write(&mut self.bytes);
        Cell::Blob(Cow::Borrowed(id)).write(&mut self.bytes);
        Cell::Blob(Cow::Borrowed(row_hash)).write(&mut self.bytes);
        self.count += 1;
    }

    /// Takes the bytes as they were stored beside the transaction, with the number of rows it claims.
    pub fn from_stored(bytes: &[u8], count: i64) -> TxRows {
        TxRows {
            bytes: bytes.to_vec(),
            count,
        }
    }

    /// Returns the bytes to store: they tell later which row was changed or removed.
    pub fn bytes(&self) -> &[u8] {
        &self.bytes
    }

    /// Returns the number of rows.
    pub fn count(&self) -> i64 {
        self.count
    }

    /// Returns the hash of the transaction.
    pub fn tx_hash(&self, header: &TxHeader) -> Hash {
        let mut out = b"twoline-tx\0".to_vec();
        header.chain.cell().write(&mut out);
        header.seq.cell().write(&mut out);
        header.lamport.cell().write(&mut out);
        header.recorded_at_ms.cell().write(&mut out);
        header.offset_minutes.cell().write(&mut out);
        header.screener.cell().write(&mut out);
        header.program_version.cell().write(&mut out);
        header.prev.cell().write(&mut out);
        self.count.cell().write(&mut out);
        Sha256::new()
            .chain_update(&out)
            .chain_update(&self.bytes)
            .finalize()
            .into()
    }
}

/// A row as its transaction names it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Named<'a> {
    /// The table.
    pub table: &'a str,
    /// The id of the entry.
    pub id: &'a [u8],
    /// Its hash.
    pub row_hash: &'a [u8],
}

/// Takes the next row off the stored bytes; nothing at the end or where they are not well formed.
pub fn next_named<'a>(bytes: &mut &'a [u8]) -> Option<Named<'a>> {
    let table = std::str::from_utf8(next_sized(bytes, 3)?).ok()?;
    Some(Named {
        table,
        id: next_sized(bytes, 4)?,
        row_hash: next_sized(bytes, 4)?,
    })
}

fn next_sized<'a>(bytes: &mut &'a [u8], tag: u8) -> Option<&'a [u8]> {
    let rest = bytes.strip_prefix(&[tag])?;
    let (length, rest) = rest.split_first_chunk::<4>()?;
    let (value, rest) = rest.split_at_checked(u32::from_be_bytes(*length) as usize)?;
    *bytes = rest;
    Some(value)
}

/// The state of the whole ledger in one hash, with the number of entries.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Head {
    /// The hash.
    pub hash: Hash,
    /// How many entries it stands for.
    pub entries: u64,
}

impl Head {
    /// Computes the head of chains given as (chain, highest seq, its hash), in byte order of the chain.
    pub fn of<'a>(
        chains: impl IntoIterator<Item = (&'a Uuid, i64, &'a [u8])>,
        entries: u64,
    ) -> Head {
        let mut out = Vec::new();
        for (chain, seq, tx_hash) in chains {
            chain.cell().write(&mut out);
            seq.cell().write(&mut out);
            Cell::Blob(Cow::Borrowed(tx_hash)).write(&mut out);
        }
        Head {
            hash: hash(&out),
            entries,
        }
    }

    /// Returns the 16 hex digits that people see.
    pub fn short(&self) -> String {
        hex(&self.hash[..8])
    }

    /// Returns the whole hash in hex, for files.
    pub fn whole(&self) -> String {
        hex(&self.hash)
    }
}

impl fmt::Display for Head {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} ({} entries)", self.short(), self.entries)
    }
}

/// A head printed earlier: at least 16 hex digits, and the number of entries where it is known.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ExpectedHead {
    /// The first hex digits, lower case.
    pub prefix: String,
    /// The number of entries beside it.
    pub entries: Option<u64>,
}

impl ExpectedHead {
    /// Reads `0123456789abcdef` or `0123456789abcdef (12 entries)`; nothing for anything else.
    pub fn parse(text: &str) -> Option<ExpectedHead> {
        let (hash, rest) = text
            .trim()
            .split_once(char::is_whitespace)
            .unwrap_or((text.trim(), ""));
        let prefix = hash.to_ascii_lowercase();
        if !(16..=64).contains(&prefix.len()) || !prefix.bytes().all(|b| b.is_ascii_hexdigit()) {
            return None;
        }
        let rest = rest.trim().trim_start_matches('(').trim_end_matches(')');
        let entries = match rest.split_whitespace().next() {
            None => None,
            Some(number) => Some(number.parse().ok()?),
        };
        Some(ExpectedHead { prefix, entries })
    }

    /// Says whether a head is the printed one.
    pub fn matches(&self, head: &Head) -> bool {
        self.entries.is_none_or(|n| n == head.entries) && head.whole().starts_with(&self.prefix)
    }
}

/// Returns bytes in lower-case hex.
pub fn hex(bytes: &[u8]) -> String {
    use fmt::Write as _;
    bytes.iter().fold(String::new(), |mut out, byte| {
        let _ = write!(out, "{byte:02x}");
        out
    })
}

/// Reads hex; nothing for anything else.
pub fn unhex(text: &str) -> Option<Vec<u8>> {
    let bytes = text.as_bytes();
    if !bytes.len().is_multiple_of(2) || !bytes.iter().all(u8::is_ascii_hexdigit) {
        return None;
    }
    (0..bytes.len() / 2)
        .map(|i| u8::from_str_radix(text.get(2 * i..2 * i + 2)?, 16).ok())
        .collect()
}
