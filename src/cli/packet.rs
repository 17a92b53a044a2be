//! `twoline packet`: what a store holds, to another one of the programme.

use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};
use indicatif::{ProgressBar, ProgressStyle};
use zeroize::Zeroizing;

use super::open::ask_hidden;
use super::output::{busy, clean, print_clean, print_lines};
use super::{Failure, Global, open};
use crate::actions::{ForJoin, Kdf, Merged, Secret, packet_info};

/// How many conflicts are listed after reading.
const LISTED: usize = 20;

/// Exchange what was recorded with other laptops of the programme
#[derive(Debug, Args)]
pub(super) struct Packet {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Write all that this store holds to an encrypted file, for a stick
    Write {
        /// The file to write
        file: PathBuf,
        /// Also let a new laptop join with it, by a passphrase that is asked for
        #[arg(long)]
        for_join: bool,
        /// Replace an older packet of this programme
        #[arg(long)]
        replace: bool,
        #[command(flatten)]
        passphrase: PacketPassphrase,
    },
    /// Take over what other stations recorded; a file that is not whole changes nothing
    Read {
        /// The files to read
        #[arg(required = true)]
        files: Vec<PathBuf>,
    },
    /// List what stations recorded differently and nobody has settled
    Conflicts,
    /// Show what a packet says of itself
    Show {
        /// The file
        file: PathBuf,
    },
}

/// What opens a packet for a laptop that joins.
#[derive(Debug, Clone, Args)]
pub(super) struct PacketPassphrase {
    /// File that holds the passphrase for joining
    #[arg(long, value_name = "FILE")]
    packet_passphrase_file: Option<PathBuf>,
}

impl PacketPassphrase {
    /// Returns the passphrase of a packet that is joined.
    pub(super) fn of_packet(&self) -> Result<Secret, Failure> {
        Ok(match self.text()? {
            Some(text) => Secret::from_file(&text),
            None => Secret::typed(&ask_hidden("Passphrase of the packet, for joining: ")?),
        })
    }

    /// Returns a passphrase for a packet to be written.
    fn chosen(&self) -> Result<Secret, Failure> {
        let text = if let Some(text) = self.text()? {
            text
        } else {
            let first = ask_hidden("Passphrase for joining, 15 characters or more: ")?;
            if ask_hidden("The same again: ")? != first {
                return Err(Failure::bad_input(
                    "the two are not the same; nothing was written",
                ));
            }
            first
        };
        Ok(match Secret::from_file(&text) {
            Secret::Recovery(text) => Secret::Passphrase(text),
            secret => secret,
        })
    }

    fn text(&self) -> Result<Option<Zeroizing<String>>, Failure> {
        let Some(path) = &self.packet_passphrase_file else {
            return Ok(None);
        };
        let text = std::fs::read_to_string(path).map_err(|e| {
            Failure::bad_input(format!(
                "the passphrase file {} cannot be read: {e}",
                shown(path)
            ))
        })?;
        Ok(Some(Zeroizing::new(text)))
    }
}

impl Packet {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::Write {
                file,
                for_join,
                replace,
                passphrase,
            } => {
                let desk = open::to_read(global)?;
                let join = if *for_join && !desk.is_demo() {
                    ForJoin::With(passphrase.chosen()?, Kdf::Calibrated)
                } else {
                    ForJoin::No
                };
                let head = busy("writing and reading back", || {
                    desk.write_packet(file, &join, *replace)
                })?;
                let mut lines = vec![
                    format!("wrote {} and read it back", shown(file)),
                    format!("store head {} ({} entries)", head.short(), head.entries),
                ];
                if desk.is_demo() {
                    lines.push("demo: not protected".to_owned());
                }
                print_lines(&lines)
            }
            Command::Read { files } => {
                let mut desk = open::to_write(global)?;
                for file in files {
                    let (merged, raised) = with_bar(|bar| desk.read_packet(file, bar))?;
                    let mut lines = vec![format!("read {}", shown(file))];
                    lines.extend(raised.iter().map(|u| {
                        clean(&format!(
                            "EMERGENCY, only the stations' readings together show it: {} ({}), {}: tell somebody now",
                            u.name, u.child_id, u.what
                        ))
                    }));
                    lines.extend(brought(&merged));
                    print_lines(&lines)?;
                }
                let differs = desk.in_conflict()?;
                let mut lines: Vec<String> = differs.iter().take(LISTED).cloned().collect();
                if differs.len() > LISTED {
                    lines.push(format!(
                        "… {} more: twoline packet conflicts",
                        differs.len() - LISTED
                    ));
                }
                if !lines.is_empty() {
                    print_clean(&lines)?;
                }
                let same = desk.probably_same()?.len();
                if same > 0 {
                    print_lines(&[format!(
                        "{same} probably the same child under two ids: twoline child same"
                    )])?;
                }
                Ok(())
            }
            Command::Conflicts => {
                let differs = open::to_read(global)?.in_conflict()?;
                if differs.is_empty() {
                    return print_lines(&["no value is in conflict".to_owned()]);
                }
                print_clean(&differs)
            }
            Command::Show { file } => {
                let info = packet_info(file)?;
                let join = match (info.joinable, info.protected) {
                    (false, _) => "not for joining",
                    (true, true) => "for joining, with its passphrase",
                    (true, false) => "for joining; demo: not protected",
                };
                print_lines(&[format!(
                    "packet of {}, written by {}; {join}",
                    clean(&info.programme),
                    clean(&info.station)
                )])
            }
        }
    }
}

/// Returns in words what a packet brought.
pub(super) fn brought(merged: &Merged) -> Vec<String> {
    let mut lines = Vec::new();
    if merged.transactions == 0 {
        lines.push("nothing new: all of it was here already".to_owned());
    } else {
        let mut parts: Vec<String> = merged
            .visits
            .iter()
            .map(|(station, n)| {
                let visits = if *n == 1 { "visit" } else { "visits" };
                format!("{n} new {visits} from {}", clean(station))
            })
            .collect();
        if merged.children > 0 {
            let children = if merged.children == 1 {
                "child"
            } else {
                "children"
            };
            parts.push(format!("{} new {children}", merged.children));
        }
        parts.push(format!("{} new entries", merged.entries));
        lines.push(parts.join(", "));
    }
    if merged.conflicts > 0 {
        let values = if merged.conflicts == 1 {
            "value"
        } else {
            "values"
        };
        lines.push(format!(
            "{} {values} in conflict; settle each with twoline correct:",
            merged.conflicts
        ));
    }
    if merged.said_otherwise > 0 {
        let facts = if merged.said_otherwise == 1 {
            "other fact"
        } else {
            "other facts"
        };
        lines.push(format!(
            "{} {facts} said differently by two stations; the latest stands: twoline packet conflicts",
            merged.said_otherwise
        ));
    }
    for fork in &merged.forks {
        lines.push(format!(
            "chain {} goes on in two ways from number {}: a copy of a store was written to; both are kept",
            fork.chain, fork.seq
        ));
    }
    if merged.own_fork {
        lines.push("this store goes on in a new chain".to_owned());
    }
    lines.push(format!(
        "store head {} ({} entries)",
        merged.head.short(),
        merged.head.entries
    ));
    lines
}

fn shown(path: &Path) -> String {
    clean(&path.to_string_lossy())
}

/// Shows progress on standard error, where that is a terminal.
fn with_bar<T>(work: impl FnOnce(&mut dyn FnMut(u64, u64)) -> T) -> T {
    let bar = ProgressBar::new(0);
    if let Ok(style) = ProgressStyle::with_template("{pos} of {len} entries {wide_bar} {eta}") {
        bar.set_style(style);
    }
    let done = work(&mut |done, all| {
        bar.set_length(all);
        bar.set_position(done);
    });
    bar.finish_and_clear();
    done
}
