//! Files only their owner can read; the one place that knows what a platform calls it.

use std::fs::{self, File, OpenOptions};
use std::io::Write;
use std::path::Path;

use super::error::{Error, ErrorKind, Result};

/// Makes what this process creates from now on readable by its owner only.
pub(super) fn keep_private() {
    #[cfg(unix)]
    rustix::process::umask(rustix::fs::Mode::from_raw_mode(0o077));
}

fn options() -> OpenOptions {
    #[allow(unused_mut)]
    let mut options = OpenOptions::new();
    #[cfg(unix)]
    std::os::unix::fs::OpenOptionsExt::mode(&mut options, 0o600);
    options
}

/// Sets the mode of a file or folder.
fn set_mode(path: &Path, mode: u32) -> Result<()> {
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        fs::set_permissions(path, fs::Permissions::from_mode(mode))
            .map_err(|e| Error::file(path, "set the mode of", e))?;
    }
    #[cfg(not(unix))]
    let _ = (path, mode);
    Ok(())
}

/// Makes a folder, with those above it, that only its owner can enter.
pub(super) fn private_dir(dir: &Path) -> Result<()> {
    fs::create_dir_all(dir).map_err(|e| Error::file(dir, "make", e))?;
    set_mode(dir, 0o700)
}

/// Makes sure a file exists and only its owner can read it.
pub(super) fn private_file(path: &Path) -> Result<File> {
    let file = options()
        .read(true)
        .write(true)
        .create(true)
        .truncate(false)
        .open(path)
        .map_err(|e| Error::file(path, "open", e))?;
    set_mode(path, 0o600)?;
    Ok(file)
}

/// Makes a new file, or empties one, that only its owner can read where the disk knows of owners.
pub(super) fn new_file(path: &Path) -> Result<File> {
    options()
        .write(true)
        .create(true)
        .truncate(true)
        .open(path)
        .map_err(|e| Error::file(path, "write", e))
}

/// Writes a file aside, syncs it and renames it into place, so that it is whole or as it was.
pub(super) fn write_whole(path: &Path, bytes: &[u8]) -> Result<()> {
    let aside = path.with_extension(format!("{}.new", std::process::id()));
    let written = options()
        .write(true)
        .create(true)
        .truncate(true)
        .open(&aside)
        .and_then(|mut file| {
            file.write_all(bytes)?;
            file.sync_all()
        })
        .and_then(|()| fs::rename(&aside, path));
    if let Err(error) = written {
        let _ = fs::remove_file(&aside);
        return Err(Error::file(path, "write", error));
    }
    sync_parent(path)
}

/// Takes a folder and its key file back from others who may read them; where somebody else owns them
/// they stay as they are.
pub(super) fn keep_to_owner(dir: &Path, key_file: &Path) {
    let _ = set_mode(dir, 0o700);
    let _ = set_mode(key_file, 0o600);
}

/// Renames a damaged database, with its log, to a name that is not in use.
pub(super) fn set_aside(path: &Path) -> Result<()> {
    let named = |suffix: &str, n: u32| {
        let mut name = path.as_os_str().to_owned();
        name.push(format!("{suffix}.damaged-{n}"));
        std::path::PathBuf::from(name)
    };
    let free = (1..=u32::MAX)
        .find(|n| !named("", *n).exists())
        .unwrap_or(1);
    for suffix in ["-wal", "-shm", ""] {
        let mut from = path.as_os_str().to_owned();
        from.push(suffix);
        match fs::rename(&from, named(suffix, free)) {
            Err(e) if e.kind() != std::io::ErrorKind::NotFound => {
                return Err(Error::file(path, "set aside", e));
            }
            _ => {}
        }
    }
    Ok(())
}

/// Removes what a killed process left half written in a folder: `PREFIX` with its number and `.partial`.
pub(super) fn sweep(dir: &Path, prefix: &str) {
    let Ok(found) = fs::read_dir(dir) else {
        return;
    };
    for entry in found.flatten() {
        let name = entry.file_name();
        let of = name
            .to_str()
            .and_then(|name| name.strip_prefix(prefix)?.split_once(".partial"))
            .and_then(|(pid, _)| pid.parse::<i32>().ok());
        if of.is_some_and(|pid| !is_running(pid)) {
            let _ = fs::remove_file(entry.path());
        }
    }
}

#[cfg(unix)]
fn is_running(pid: i32) -> bool {
    rustix::process::Pid::from_raw(pid)
        .is_none_or(|pid| rustix::process::test_kill_process(pid) != Err(rustix::io::Errno::SRCH))
}

#[cfg(not(unix))]
fn is_running(_pid: i32) -> bool {
    true
}

/// Syncs one file.
pub(super) fn sync(path: &Path) -> Result<()> {
    File::open(path)
        .and_then(|f| f.sync_all())
        .map_err(|e| Error::file(path, "sync", e))
}

/// Syncs the folder a path lies in, so that its name survives a power loss.
pub(super) fn sync_parent(path: &Path) -> Result<()> {
    #[cfg(unix)]
    if let Some(dir) = path.parent() {
        let dir = if dir.as_os_str().is_empty() {
            Path::new(".")
        } else {
            dir
        };
        return sync(dir);
    }
    #[cfg(not(unix))]
    let _ = path;
    Ok(())
}

/// Refuses a folder on a network filesystem, by its name.
pub(super) fn refuse_network(dir: &Path) -> Result<()> {
    match network_name(dir) {
        None => Ok(()),
        Some(name) => Err(Error::new(
            ErrorKind::NetworkFolder,
            format!(
                "{} lies on a network filesystem ({name}), where locks and syncs cannot be trusted",
                dir.display()
            ),
        )
        .with_hint("keep the store on this computer's own disk and copy backups to the network")),
    }
}

#[cfg(target_os = "linux")]
fn network_name(dir: &Path) -> Option<String> {
    let stat = rustix::fs::statfs(dir).ok()?;
    network_magic(stat.f_type).map(str::to_owned)
}

/// Names the network filesystems by the numbers Linux gives them (statfs(2)).
#[cfg(target_os = "linux")]
fn network_magic(magic: i64) -> Option<&'static str> {
    Some(match magic & 0xFFFF_FFFF {
        0x6969 => "nfs",
        0x517B => "smb",
        0xFF53_4D42 => "cifs",
        0xFE53_4D42 => "smb2",
        0x5346_414F => "afs",
        0x6B41_4653 => "kafs",
        0x7375_7245 => "coda",
        0x564C => "ncp",
        0x0102_1997 => "9p",
        0x00C3_6400 => "ceph",
        0x0BD0_0BD0 => "lustre",
        _ => return None,
    })
}

#[cfg(target_os = "macos")]
fn network_name(dir: &Path) -> Option<String> {
    let stat = rustix::fs::statfs(dir).ok()?;
    let name: String = stat
        .f_fstypename
        .iter()
        .take_while(|c| **c != 0)
        .map(|c| char::from(*c as u8))
        .collect();
    ["nfs", "smbfs", "afpfs", "webdav", "ftp"]
        .contains(&name.as_str())
        .then_some(name)
}

#[cfg(not(any(target_os = "linux", target_os = "macos")))]
fn network_name(_dir: &Path) -> Option<String> {
    None
}

#[cfg(all(test, target_os = "linux"))]
mod tests {
    use super::network_magic;

    #[test]
    fn network_filesystems_are_named_and_others_are_not() {
        // Source: statfs(2), Linux man-pages. Basis: memory of the manual page.
        assert_eq!(network_magic(0x6969), Some("nfs"));
        assert_eq!(network_magic(0xFF53_4D42), Some("cifs"));
        assert_eq!(
            network_magic(i64::from(0xFF53_4D42_u32.cast_signed())),
            Some("cifs")
        );
        assert_eq!(network_magic(0xEF53), None, "ext4");
        assert_eq!(network_magic(0x0102_1994), None, "tmpfs");
    }
}
