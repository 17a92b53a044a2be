//! The file of a packet: header, check sums, database.

use std::fs::File;
use std::io::{self, Read, Write};
use std::path::Path;

use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

use crate::store::error::{Error, ErrorKind, Result};
use crate::store::files;
use crate::store::key::KeyFile;
use crate::store::ledger::hex;

const MAGIC: &[u8; 15] = b"twoline-packet\n";

/// The form of packet this program writes.
pub(super) const VERSION: u32 = 1;

/// A header is a few hundred bytes; no file may ask for all memory.
const LONGEST_HEADER: usize = 64 * 1024;

/// The readable part of a packet.
#[derive(Debug, Serialize, Deserialize)]
pub(super) struct Header {
    pub(super) version: u32,
    pub(super) station: String,
    pub(super) schema: usize,
    pub(super) bytes: u64,
    pub(super) sha256: String,
    pub(super) access: KeyFile,
}

fn damaged(path: &Path, what: &str) -> Error {
    Error::new(
        ErrorKind::Damaged,
        format!("the packet {} {what}", path.display()),
    )
    .with_hint("nothing was taken; write the packet again and take the stick out only when told to")
}

fn not_one(path: &Path) -> Error {
    Error::new(
        ErrorKind::NotAPacket,
        format!("{} is not a packet", path.display()),
    )
    .with_hint("nothing was taken; `twoline packet write FILE` makes one")
}

impl Header {
    /// Reads and checks the header of a packet; the rest of the file follows.
    pub(super) fn open(path: &Path) -> Result<(Header, File)> {
        // A pipe would be waited for without an end.
        if std::fs::metadata(path).is_ok_and(|found| !found.is_file()) {
            return Err(not_one(path));
        }
        let mut file = File::open(path).map_err(|e| Error::file(path, "open", e))?;
        let mut start = [0; MAGIC.len() + 4];
        let read = read_up_to(&mut file, &mut start).map_err(|e| Error::file(path, "read", e))?;
        if read < MAGIC.len() || start[..MAGIC.len()] != MAGIC[..] {
            return Err(not_one(path));
        }
        if read < start.len() {
            return Err(damaged(path, "is cut off"));
        }
        let length = start[MAGIC.len()..]
            .iter()
            .fold(0, |n, b| n << 8 | *b as usize);
        if length > LONGEST_HEADER {
            return Err(damaged(path, "was changed: its header is impossibly long"));
        }
        let mut text = vec![0; length + 32];
        let read = read_up_to(&mut file, &mut text).map_err(|e| Error::file(path, "read", e))?;
        if read < text.len() {
            return Err(damaged(path, "is cut off"));
        }
        let sum = text.split_off(length);
        let expected = Sha256::new()
            .chain_update(start)
            .chain_update(&text)
            .finalize();
        if expected[..] != sum[..] {
            return Err(damaged(
                path,
                "was changed: its header is not as it was written",
            ));
        }
        let text = String::from_utf8(text).map_err(|_| damaged(path, "has no readable header"))?;
        let version = toml::from_str::<Version>(&text)
            .map_err(|_| damaged(path, "has no readable header"))?
            .version;
        if version > VERSION {
            return Err(Error::new(
                ErrorKind::Newer,
                format!(
                    "this packet has form {version}; this program, twoline {}, knows up to {VERSION}",
                    env!("CARGO_PKG_VERSION")
                ),
            )
            .with_hint("read it with the newer twoline that wrote it; nothing was taken"));
        }
        let header = toml::from_str(&text).map_err(|_| damaged(path, "has no readable header"))?;
        Ok((header, file))
    }

    /// Copies the database out of a packet and compares its length and check sum.
    pub(super) fn extract(&self, path: &Path, rest: &mut File, to: &Path) -> Result<()> {
        let mut out = files::new_file(to)?;
        // One byte more than was promised says that something follows.
        let mut rest = rest.take(self.bytes + 1);
        let (bytes, sum) = copy_summed(path, &mut rest, to, &mut out)?;
        self.compare(path, bytes, &sum)
    }

    fn compare(&self, path: &Path, bytes: u64, sum: &str) -> Result<()> {
        match bytes.cmp(&self.bytes) {
            std::cmp::Ordering::Less => Err(damaged(
                path,
                &format!("is cut off: {bytes} of {} bytes are there", self.bytes),
            )),
            std::cmp::Ordering::Greater => Err(damaged(path, "was changed: something follows it")),
            std::cmp::Ordering::Equal if sum != self.sha256 => {
                Err(damaged(path, "was changed: it is not as it was written"))
            }
            std::cmp::Ordering::Equal => Ok(()),
        }
    }
}

/// What every form of header has.
#[derive(Deserialize)]
struct Version {
    version: u32,
}

/// Writes a packet and syncs it; length and check sum of the database are filled in.
pub(super) fn write(to: &Path, mut header: Header, database: &Path) -> Result<()> {
    let open = || File::open(database).map_err(|e| Error::file(database, "read", e));
    let (bytes, sum) = copy_summed(database, &mut open()?, to, &mut io::sink())?;
    header.bytes = bytes;
    header.sha256 = sum;
    let text = toml::to_string(&header)
        .map_err(|e| Error::new(ErrorKind::Engine, format!("the header of a packet: {e}")))?;
    let mut start = MAGIC.to_vec();
    start.extend_from_slice(&(text.len() as u32).to_be_bytes());
    start.extend_from_slice(text.as_bytes());
    let sum = Sha256::digest(&start);
    start.extend_from_slice(&sum);
    let mut out = files::new_file(to)?;
    out.write_all(&start)
        .map_err(|e| Error::file(to, "write", e))?;
    copy_summed(database, &mut open()?, to, &mut out)?;
    out.sync_all().map_err(|e| Error::file(to, "sync", e))
}

/// Reads a written packet again, from the stick where the system allows it, and compares.
pub(super) fn read_back(path: &Path) -> Result<()> {
    let (header, mut rest) = Header::open(path)?;
    #[cfg(target_os = "linux")]
    let _ = rustix::fs::fadvise(&rest, 0, None, rustix::fs::Advice::DontNeed);
    let (bytes, sum) = copy_summed(path, &mut rest, path, &mut io::sink())?;
    header.compare(path, bytes, &sum).map_err(|_| {
        Error::new(
            ErrorKind::File,
            format!("{} does not hold what was written to it", path.display()),
        )
        .with_hint("the stick may be failing: use another one; nothing was kept on it")
    })
}

/// Copies to the end; returns how many bytes there were, and their SHA-256.
fn copy_summed(
    from: &Path,
    source: &mut impl Read,
    to: &Path,
    target: &mut impl Write,
) -> Result<(u64, String)> {
    let mut sum = Sha256::new();
    let mut total = 0;
    let mut buffer = vec![0; 256 * 1024];
    loop {
        let read = source
            .read(&mut buffer)
            .map_err(|e| Error::file(from, "read", e))?;
        if read == 0 {
            return Ok((total, hex(&sum.finalize())));
        }
        sum.update(&buffer[..read]);
        target
            .write_all(&buffer[..read])
            .map_err(|e| Error::file(to, "write", e))?;
        total += read as u64;
    }
}

/// Reads until the buffer is full or the file ends.
fn read_up_to(file: &mut File, buffer: &mut [u8]) -> io::Result<usize> {
    let mut read = 0;
    while read < buffer.len() {
        match file.read(&mut buffer[read..])? {
            0 => break,
            n => read += n,
        }
    }
    Ok(read)
}
