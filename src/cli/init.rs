//! `twoline init`: makes a store.

use std::io::{IsTerminal, Write, stderr, stdin};
use std::path::{Path, PathBuf};

use clap::Args;
use zeroize::Zeroizing;

use super::open::{ask_hidden, folder, from_file, options};
use super::output::{busy, clean, print_lines, say};
use super::packet::PacketPassphrase;
use super::{Failure, Global};
use crate::actions::{Desk, Kdf, NewStore, RecoveryKey, Secret, init, join, packet_info};
use crate::domain::acuity::Notation;

/// Make a store
///
/// The passphrase is asked for twice, or read from the passphrase file. The recovery key is shown
/// once and kept nowhere: it opens the store when the passphrase is lost.
#[derive(Debug, Args)]
pub(super) struct Init {
    /// Name of the programme
    #[arg(long, value_name = "NAME", required_unless_present = "join")]
    programme: Option<String>,
    /// Name of this table or laptop
    #[arg(long, value_name = "NAME")]
    station: String,
    /// What a bare acuity number stands under: 40 is 20/40, or 12 is 6/12
    #[arg(long, value_parser = ["feet", "metres"], default_value = "feet")]
    notation: String,
    /// Join the programme of a packet that was written with --for-join
    #[arg(long, value_name = "PACKET", conflicts_with_all = ["programme", "notation"])]
    join: Option<PathBuf>,
    #[command(flatten)]
    packet_passphrase: PacketPassphrase,
}

impl Init {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let dir = folder(global)?;
        if let Some(packet) = &self.join {
            return self.join(global, &dir, packet);
        }
        let new = NewStore {
            programme: self.programme.clone().unwrap_or_default(),
            station: self.station.clone(),
            notation: if self.notation == "metres" {
                Notation::Metres
            } else {
                Notation::Feet
            },
            secret: chosen(global)?,
            kdf: Kdf::Calibrated,
        };
        let (desk, recovery) = init(&dir, new, &options(global))?;
        made(&desk, &dir, recovery.as_ref(), Vec::new())
    }

    fn join(&self, global: &Global, dir: &Path, packet: &Path) -> Result<(), Failure> {
        let info = packet_info(packet)?;
        let (packet_secret, secret) = if info.protected {
            let packet_secret = if info.joinable {
                self.packet_passphrase.of_packet()?
            } else {
                Secret::None
            };
            (packet_secret, chosen(global)?)
        } else {
            (Secret::None, Secret::None)
        };
        let (desk, recovery, merged) = busy("reading the packet", || {
            join(
                dir,
                packet,
                &packet_secret,
                (&self.station, secret, Kdf::Calibrated),
                &options(global),
            )
        })?;
        let mut lines = vec![format!("{} entries came with the packet", merged.entries)];
        if !info.protected {
            lines.push("demo: not protected".to_owned());
        }
        made(&desk, dir, recovery.as_ref(), lines)
    }
}

/// Says what was made, and shows the recovery key once.
fn made(
    desk: &Desk,
    dir: &Path,
    recovery: Option<&RecoveryKey>,
    more: Vec<String>,
) -> Result<(), Failure> {
    let mut lines = vec![format!(
        "made the store of {}, station {}, in {}",
        clean(&desk.programme()),
        clean(&desk.station()),
        clean(&dir.to_string_lossy())
    )];
    lines.extend(more);
    if let Some(key) = recovery {
        lines.extend([
            "recovery key, shown this once; write it down and keep it away from this computer:"
                .to_owned(),
            format!("  {}", &*key.grouped()),
        ]);
    }
    print_lines(&lines)?;
    recovery.map_or(Ok(()), typed_back)
}

/// Returns the chosen passphrase: from the file, or typed twice.
fn chosen(global: &Global) -> Result<Secret, Failure> {
    let text = if let Some(text) = from_file(global)? {
        text
    } else {
        let first = ask_hidden("Passphrase, 15 characters or more: ")?;
        if ask_hidden("The same again: ")? != first {
            return Err(Failure::bad_input(
                "the two are not the same; nothing was made",
            ));
        }
        first
    };
    match Secret::from_file(&text) {
        Secret::Recovery(text) => Ok(Secret::Passphrase(text)),
        secret => Ok(secret),
    }
}

/// Wants the last four characters of the recovery key, where there is a terminal to type them on.
fn typed_back(key: &RecoveryKey) -> Result<(), Failure> {
    if !stdin().is_terminal() {
        return Ok(());
    }
    loop {
        let mut err = stderr().lock();
        let _ = write!(
            err,
            "Type its last four characters, to show that you have it: "
        );
        let _ = err.flush();
        drop(err);
        let mut typed = Zeroizing::new(String::new());
        if stdin().read_line(&mut typed)? == 0 {
            return Err(Failure::failed(
                "the store is made, but its recovery key was not typed back",
            )
            .hint("without the recovery key a lost passphrase is the loss of the store"));
        }
        if key.ends_with(&typed) {
            return Ok(());
        }
        say("those are not its last four characters");
    }
}
