//! The database key, wrapped once for each secret that may open it.
//!
//! `store.key` is a small text file: a readable part (format, programme, store) and slots. A slot
//! holds the 32 random bytes of the key under XChaCha20-Poly1305, by a key derived with Argon2id from
//! a passphrase or a recovery key; the ids of programme and store and the kind of slot are
//! authenticated with it. A slot of kind `none` holds the key bare, for the demo.

mod passphrase;
mod recovery;

use std::path::Path;

use chacha20poly1305::aead::{Aead, KeyInit, Payload};
use chacha20poly1305::{XChaCha20Poly1305, XNonce};
use serde::{Deserialize, Serialize};
use unicode_normalization::UnicodeNormalization;
use uuid::Uuid;
use zeroize::{Zeroize, Zeroizing};

use super::error::{Error, ErrorKind, Result};
use super::ledger::{hex, unhex};
use super::{ForJoin, Store, files};

pub use passphrase::check as check_passphrase;
pub use recovery::RecoveryKey;

/// Name of the key file.
pub(super) const FILE: &str = "store.key";
const FORMAT: &str = "twoline-key";
const VERSION: u32 = 1;

/// The key of the database itself.
pub type RawKey = Zeroizing<[u8; 32]>;

/// What opens a store.
#[derive(Clone)]
pub enum Secret {
    /// A passphrase.
    Passphrase(Zeroizing<String>),
    /// The recovery key printed when the store was made.
    Recovery(Zeroizing<String>),
    /// Nothing: a demo that is not protected.
    None,
}

impl std::fmt::Debug for Secret {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Secret::Passphrase(_) => "Passphrase",
            Secret::Recovery(_) => "Recovery",
            Secret::None => "None",
        })
    }
}

impl Secret {
    /// Makes a secret of what was typed: a recovery key when it is one, else a passphrase.
    pub fn typed(text: &str) -> Secret {
        let typed = Zeroizing::new(text.to_owned());
        match recovery::normal(text) {
            Some(_) => Secret::Recovery(typed),
            None => Secret::Passphrase(typed),
        }
    }

    /// Makes a secret of the text of a passphrase file, without its one trailing newline.
    pub fn from_file(text: &str) -> Secret {
        let text = text.strip_suffix('\n').unwrap_or(text);
        Secret::typed(text.strip_suffix('\r').unwrap_or(text))
    }
}

/// How dear one guess of a passphrase is made.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kdf {
    /// Argon2id with 64 MiB and as many passes as this computer does in under a second.
    Calibrated,
    /// Exactly so much.
    Fixed {
        /// Memory in KiB.
        memory_kib: u32,
        /// Passes.
        passes: u32,
    },
}

impl Kdf {
    /// Returns parameters for tests, which protect nothing.
    pub fn test() -> Kdf {
        Kdf::Fixed {
            memory_kib: 8,
            passes: 1,
        }
    }

    fn costs(self) -> Result<(u32, u32)> {
        const MEMORY_KIB: u32 = 64 * 1024;
        const BUDGET_MS: i64 = 800;
        match self {
            Kdf::Fixed { memory_kib, passes } => Ok((memory_kib, passes)),
            Kdf::Calibrated => {
                let before = crate::clock::now().utc_ms;
                derive(b"calibration", &[0; 16], MEMORY_KIB, 1)?;
                let one = (crate::clock::now().utc_ms - before).max(1);
                Ok((MEMORY_KIB, (BUDGET_MS / one).clamp(1, 16) as u32))
            }
        }
    }
}

/// The readable part of a key file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Info {
    /// Name of the programme when the store was made.
    pub programme: String,
    /// Id of the programme.
    pub programme_id: Uuid,
    /// Id of the store.
    pub store_id: Uuid,
    /// Whether a secret is needed at all.
    pub protected: bool,
}

#[derive(Debug, Serialize, Deserialize)]
pub(super) struct KeyFile {
    format: String,
    version: u32,
    programme: String,
    programme_id: String,
    store_id: String,
    #[serde(default)]
    slot: Vec<Slot>,
}

#[derive(Debug, Clone, Serialize, Deserialize)]
struct Slot {
    kind: String,
    #[serde(default)]
    memory_kib: u32,
    #[serde(default)]
    passes: u32,
    #[serde(default)]
    salt: String,
    #[serde(default)]
    nonce: String,
    key: String,
}

impl Drop for Slot {
    fn drop(&mut self) {
        self.key.zeroize();
    }
}

fn broken(what: &str) -> Error {
    Error::new(ErrorKind::Damaged, format!("{FILE} is damaged: {what}")).with_hint(
        "copy store.key back from a backup of this store: it does not change with the entries",
    )
}

pub(super) fn random<const N: usize>() -> Result<Zeroizing<[u8; N]>> {
    let mut bytes = Zeroizing::new([0; N]);
    getrandom::fill(&mut bytes[..])
        .map_err(|e| Error::new(ErrorKind::Engine, format!("no random bytes: {e}")))?;
    Ok(bytes)
}

fn derive(secret: &[u8], salt: &[u8], memory_kib: u32, passes: u32) -> Result<RawKey> {
    use argon2::{Algorithm, Argon2, Params, Version};
    let mut out = Zeroizing::new([0; 32]);
    Params::new(memory_kib, passes, 1, Some(32))
        .and_then(|params| {
            Argon2::new(Algorithm::Argon2id, Version::V0x13, params).hash_password_into(
                secret,
                salt,
                &mut out[..],
            )
        })
        .map_err(|e| broken(&e.to_string()))?;
    Ok(out)
}

impl KeyFile {
    /// Makes a key file with its slots; also the recovery key, where the secret is a passphrase.
    pub(super) fn make(
        programme: &str,
        programme_id: Uuid,
        secret: &Secret,
        kdf: Kdf,
        key: &RawKey,
    ) -> Result<(KeyFile, Option<RecoveryKey>)> {
        let mut file = KeyFile {
            format: FORMAT.to_owned(),
            version: VERSION,
            programme: programme.to_owned(),
            programme_id: programme_id.to_string(),
            store_id: super::new_id().to_string(),
            slot: Vec::new(),
        };
        let recovery = match secret {
            Secret::None => {
                file.slot.push(Slot {
                    kind: "none".to_owned(),
                    memory_kib: 0,
                    passes: 0,
                    salt: String::new(),
                    nonce: String::new(),
                    key: hex(&key[..]),
                });
                None
            }
            Secret::Recovery(_) => {
                return Err(Error::new(
                    ErrorKind::WeakPassphrase,
                    "a recovery key is made by the program, not chosen",
                ));
            }
            Secret::Passphrase(text) => {
                check_passphrase(text, programme)?;
                let (memory_kib, passes) = kdf.costs()?;
                let recovery = RecoveryKey::make()?;
                for (kind, secret) in [
                    ("passphrase", normal_passphrase(text)),
                    ("recovery", recovery.secret()),
                ] {
                    let slot = file.wrap(kind, &secret, memory_kib, passes, key)?;
                    file.slot.push(slot);
                }
                Some(recovery)
            }
        };
        Ok((file, recovery))
    }

    /// Makes what opens a packet: nothing for its own programme, which has the key, and for others
    /// what `join` says.
    pub(super) fn for_packet(of: &Info, join: &ForJoin, key: &RawKey) -> Result<KeyFile> {
        let nothing = KeyFile {
            format: FORMAT.to_owned(),
            version: VERSION,
            programme: of.programme.clone(),
            programme_id: of.programme_id.to_string(),
            store_id: super::new_id().to_string(),
            slot: Vec::new(),
        };
        let ForJoin::With(secret, kdf) = join else {
            return Ok(nothing);
        };
        let (mut file, _) = KeyFile::make(&of.programme, of.programme_id, secret, *kdf, key)?;
        // Nobody keeps a recovery key of a packet.
        file.slot.retain(|slot| slot.kind != "recovery");
        Ok(file)
    }

    /// Says whether any secret opens it.
    pub(super) fn opens(&self) -> bool {
        !self.slot.is_empty()
    }

    pub(super) fn read(dir: &Path) -> Result<KeyFile> {
        let path = dir.join(FILE);
        let text = std::fs::read_to_string(&path).map_err(|e| match e.kind() {
            std::io::ErrorKind::NotFound => Error::new(
                ErrorKind::NotAStore,
                format!("there is no store in {}", dir.display()),
            )
            .with_hint("make one with `twoline init`, or name its folder with --store"),
            std::io::ErrorKind::InvalidData => broken("it is not text"),
            _ => Error::file(&path, "read", e),
        })?;
        let file: KeyFile = toml::from_str(&text).map_err(|_| broken("it cannot be read"))?;
        if file.format != FORMAT {
            return Err(broken("it is not a key file"));
        }
        if file.version > VERSION {
            return Err(Error::newer(i64::from(file.version), VERSION as usize));
        }
        Ok(file)
    }

    pub(super) fn write(&self, dir: &Path) -> Result<()> {
        let text = Zeroizing::new(toml::to_string(self).map_err(|e| broken(&e.to_string()))?);
        files::write_whole(&dir.join(FILE), text.as_bytes())
    }

    pub(super) fn info(&self) -> Result<Info> {
        let id = |text: &str| text.parse().map_err(|_| broken("an id is not one"));
        Ok(Info {
            programme: self.programme.clone(),
            programme_id: id(&self.programme_id)?,
            store_id: id(&self.store_id)?,
            protected: self.slot.iter().all(|slot| slot.kind != "none"),
        })
    }

    fn bound(&self, kind: &str) -> String {
        format!(
            "{FORMAT} {} {} {} {kind}",
            self.version, self.programme_id, self.store_id
        )
    }

    fn wrap(
        &self,
        kind: &str,
        secret: &str,
        memory_kib: u32,
        passes: u32,
        key: &RawKey,
    ) -> Result<Slot> {
        let (salt, nonce) = (random::<16>()?, random::<24>()?);
        let wrapping = derive(secret.as_bytes(), &salt[..], memory_kib, passes)?;
        let wrapped = XChaCha20Poly1305::new((&*wrapping).into())
            .encrypt(
                &XNonce::from(*nonce),
                Payload {
                    msg: &key[..],
                    aad: self.bound(kind).as_bytes(),
                },
            )
            .map_err(|_| Error::new(ErrorKind::Engine, "the key could not be wrapped"))?;
        Ok(Slot {
            kind: kind.to_owned(),
            memory_kib,
            passes,
            salt: hex(&salt[..]),
            nonce: hex(&nonce[..]),
            key: hex(&wrapped),
        })
    }

    fn unwrap_slot(&self, slot: &Slot, secret: &str) -> Result<Option<RawKey>> {
        // A slot is read before anything is authenticated: no file may ask for all memory.
        if !(8..=4 << 20).contains(&slot.memory_kib) || !(1..=1000).contains(&slot.passes) {
            return Err(broken("a slot asks for impossible work"));
        }
        let bytes = |text: &str| unhex(text).ok_or_else(|| broken("a slot is not hex"));
        let (salt, nonce, wrapped) = (bytes(&slot.salt)?, bytes(&slot.nonce)?, bytes(&slot.key)?);
        let nonce: [u8; 24] = nonce
            .try_into()
            .map_err(|_| broken("a nonce has a wrong length"))?;
        let wrapping = derive(secret.as_bytes(), &salt, slot.memory_kib, slot.passes)?;
        let opened = XChaCha20Poly1305::new((&*wrapping).into()).decrypt(
            &XNonce::from(nonce),
            Payload {
                msg: &wrapped,
                aad: self.bound(&slot.kind).as_bytes(),
            },
        );
        opened.ok().map(|key| raw(&Zeroizing::new(key))).transpose()
    }

    pub(super) fn unlock(&self, secret: &Secret) -> Result<RawKey> {
        // An unprotected store opens whatever is typed, so that a demo never asks.
        if let Some(open) = self.slot.iter().find(|slot| slot.kind == "none") {
            let key = Zeroizing::new(unhex(&open.key).ok_or_else(|| broken("a slot is not hex"))?);
            return raw(&key);
        }
        let (words, tries) = match secret {
            Secret::None => {
                return Err(
                    Error::new(ErrorKind::WrongSecret, "this store needs its passphrase")
                        .with_hint(
                            "give it with --passphrase-file, or run the command in a terminal",
                        ),
                );
            }
            Secret::Passphrase(text) => {
                ("passphrase", vec![("passphrase", normal_passphrase(text))])
            }
            // A passphrase may look like a recovery key by chance.
            Secret::Recovery(text) => (
                "recovery key",
                recovery::normal(text)
                    .map(|key| ("recovery", key))
                    .into_iter()
                    .chain([("passphrase", normal_passphrase(text))])
                    .collect(),
            ),
        };
        for (kind, text) in &tries {
            for slot in self.slot.iter().filter(|slot| slot.kind == *kind) {
                if let Some(key) = self.unwrap_slot(slot, text)? {
                    return Ok(key);
                }
            }
        }
        Err(Error::wrong_secret(words))
    }
}

pub(super) fn raw(bytes: &[u8]) -> Result<RawKey> {
    let mut key = Zeroizing::new([0; 32]);
    if bytes.len() != key.len() {
        return Err(broken("a key has a wrong length"));
    }
    key.copy_from_slice(bytes);
    Ok(key)
}

fn normal_passphrase(text: &str) -> Zeroizing<String> {
    Zeroizing::new(text.nfc().collect())
}

/// Returns the database key, for tools that look at the file from outside.
pub fn unlock(dir: &Path, secret: &Secret) -> Result<RawKey> {
    KeyFile::read(dir)?.unlock(secret)
}

impl Store {
    /// Returns the readable part of a store's key file, without opening the store.
    pub fn info(dir: &Path) -> Result<Info> {
        KeyFile::read(dir)?.info()
    }

    /// Changes the passphrase: only the key file is rewritten, whole or not at all.
    ///
    /// `old` may be the passphrase or the recovery key; the recovery key stays as it is.
    pub fn change_passphrase(dir: &Path, old: &Secret, new: &str, kdf: Kdf) -> Result<()> {
        let mut file = KeyFile::read(dir)?;
        let key = file.unlock(old)?;
        check_passphrase(new, &file.programme)?;
        let (memory_kib, passes) = kdf.costs()?;
        let slot = file.wrap(
            "passphrase",
            &normal_passphrase(new),
            memory_kib,
            passes,
            &key,
        )?;
        file.slot.retain(|slot| slot.kind == "recovery");
        file.slot.insert(0, slot);
        file.write(dir)
    }
}
