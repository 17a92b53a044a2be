//! Finds and opens the store that a command is about.

use std::io::{IsTerminal, stdin};
use std::path::PathBuf;

use directories::ProjectDirs;
use zeroize::Zeroizing;

use super::output::{clean, confirmed, say};
use super::{Failure, Global};
use crate::actions::{self, Desk, DeskOptions, Secret};

/// Returns the platform's data folder for this program.
pub(super) fn data_folder() -> Result<PathBuf, Failure> {
    ProjectDirs::from("", "", "twoline")
        .map(|dirs| dirs.data_dir().to_owned())
        .ok_or_else(|| {
            Failure::bad_input("this account has no data folder")
                .hint("name a folder with --store DIR or TWOLINE_STORE")
        })
}

/// Returns the folder of the store.
pub(super) fn folder(global: &Global) -> Result<PathBuf, Failure> {
    global.store.clone().map_or_else(data_folder, Ok)
}

/// Opens the store for writing, waiting a little for another process to let go of it.
pub(super) fn to_write(global: &Global) -> Result<Desk, Failure> {
    let (dir, secret) = found(global)?;
    let desk = Desk::open(&dir, &secret, &options(global))?;
    if let Some(warning) = desk.clock_warning()? {
        say(&format!("note: {warning}"));
        if stdin().is_terminal() && !confirmed("Go on with this clock?")? {
            return Err(Failure::failed("nothing was written").hint(
                "set this computer's clock; --today sets the screening day for late entries",
            ));
        }
    }
    Ok(desk)
}

/// Opens the store for writing what somebody answers for with their name.
///
/// # Errors
/// Exit code 2 when it is not known who records.
pub(super) fn to_sign(global: &Global) -> Result<Desk, Failure> {
    let desk = to_write(global)?;
    if desk.screener().is_some() {
        return Ok(desk);
    }
    let known: Vec<String> = desk.screeners()?.iter().map(|name| clean(name)).collect();
    Err(
        Failure::bad_input("it is not known who records").hint(if known.is_empty() {
            "add yourself: twoline screener add --name NAME --initials XX".to_owned()
        } else {
            format!("--screener NAME; known: {}", known.join(", "))
        }),
    )
}

/// Opens the store for reading; when another process writes it, says who.
pub(super) fn to_read(global: &Global) -> Result<Desk, Failure> {
    let (dir, secret) = found(global)?;
    let writer = actions::writer(&dir)?;
    let desk = Desk::open_to_read(&dir, &secret, &options(global))?;
    if let Some(who) = writer {
        say(&format!("note: read as it was saved last; {}", clean(&who)));
    }
    Ok(desk)
}

/// Opens the store for reading what no rule is asked for; a wrong rule file of the store is said and
/// left out.
pub(super) fn to_read_without_rules(global: &Global) -> Result<Desk, Failure> {
    let (dir, secret) = found(global)?;
    let options = DeskOptions {
        judges_nothing: true,
        ..options(global)
    };
    let writer = actions::writer(&dir)?;
    let desk = Desk::open_to_read(&dir, &secret, &options)?;
    if let Some(who) = writer {
        say(&format!("note: read as it was saved last; {}", clean(&who)));
    }
    if let Some(why) = desk.rules_refused() {
        for line in why.lines() {
            say(&clean(line));
        }
        say(
            "note: nothing is judged here, so the store's rule files are left out; other commands wait until they are right",
        );
    }
    Ok(desk)
}

/// Opens the store for writing, or only for reading while another process writes it.
pub(super) fn to_write_or_read(global: &Global) -> Result<Desk, Failure> {
    let (dir, secret) = found(global)?;
    let options = options(global);
    Ok(if actions::writer(&dir)?.is_some() {
        Desk::open_to_read(&dir, &secret, &options)?
    } else {
        Desk::open(&dir, &secret, &options)?
    })
}

/// Returns what every opening takes from the arguments.
pub(super) fn options(global: &Global) -> DeskOptions {
    DeskOptions {
        today: global.today,
        screener: global.screener.clone(),
        ..DeskOptions::default()
    }
}

fn found(global: &Global) -> Result<(PathBuf, Secret), Failure> {
    let dir = folder(global)?;
    let Some(info) = actions::store_info(&dir)? else {
        return Err(Failure::bad_input(format!(
            "there is no store in {}",
            clean(&dir.to_string_lossy())
        ))
        .hint(
            "make one with twoline init, try twoline demo, or name its folder with --store DIR",
        ));
    };
    let secret = secret_of(global, &info)?;
    Ok((dir, secret))
}

/// Returns what opens a store: from the passphrase file, or asked for; nothing where nothing protects it.
pub(super) fn secret_of(global: &Global, info: &actions::Info) -> Result<Secret, Failure> {
    if !info.protected {
        return Ok(Secret::None);
    }
    secret(
        global,
        &format!("Passphrase of {}: ", clean(&info.programme)),
    )
}

/// Returns the secret from the passphrase file, or asks for it on the terminal.
fn secret(global: &Global, prompt: &str) -> Result<Secret, Failure> {
    if let Some(text) = from_file(global)? {
        return Ok(Secret::from_file(&text));
    }
    ask_hidden(prompt).map(|typed| Secret::typed(&typed))
}

/// Reads the passphrase file, where one is named.
pub(super) fn from_file(global: &Global) -> Result<Option<Zeroizing<String>>, Failure> {
    let Some(path) = &global.passphrase_file else {
        return Ok(None);
    };
    let text = std::fs::read_to_string(path).map_err(|e| {
        Failure::bad_input(format!(
            "the passphrase file {} cannot be read: {e}",
            clean(&path.to_string_lossy())
        ))
    })?;
    Ok(Some(Zeroizing::new(text)))
}

/// Asks for a text that is not shown.
///
/// # Errors
/// Exit code 2 where there is no terminal to ask on.
pub(super) fn ask_hidden(prompt: &str) -> Result<Zeroizing<String>, Failure> {
    if !stdin().is_terminal() {
        return Err(
            Failure::bad_input("there is no terminal to ask for the passphrase on").hint(
                "name a file that holds it: --passphrase-file FILE or TWOLINE_PASSPHRASE_FILE",
            ),
        );
    }
    rpassword::prompt_password(prompt)
        .map(Zeroizing::new)
        .map_err(|e| Failure::failed(format!("the passphrase was not read: {e}")))
}
