//! Files for other people: whole or not there, readable by their owner only.

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};

use tempfile::NamedTempFile;

use super::Failure;
use super::output::clean;

/// Writes files aside, syncs them and gives them their names, so that none is ever there in part.
pub(super) fn whole(files: &[(&Path, &[u8])]) -> Result<(), Failure> {
    whole_once(files, || Ok(()))
}

/// The same, where the files get their names only once something is done.
pub(super) fn whole_once(
    files: &[(&Path, &[u8])],
    done: impl FnOnce() -> Result<(), Failure>,
) -> Result<(), Failure> {
    let mut written = Vec::new();
    for (path, bytes) in files {
        let path = plain(path)?;
        let folder = match path.parent() {
            Some(folder) if !folder.as_os_str().is_empty() => folder,
            _ => Path::new("."),
        };
        let temp = NamedTempFile::with_prefix_in(".twoline-", folder)
            .and_then(|mut temp| {
                temp.write_all(bytes)?;
                temp.as_file().sync_all()?;
                Ok(temp)
            })
            .map_err(|e| failed(&path, &e))?;
        written.push((temp, path));
    }
    done()?;
    for (temp, path) in written {
        temp.persist(&path).map_err(|e| failed(&path, &e.error))?;
        #[cfg(unix)]
        if let Some(folder) = path.parent().filter(|f| !f.as_os_str().is_empty()) {
            fs::File::open(folder)
                .and_then(|f| f.sync_all())
                .map_err(|e| failed(&path, &e))?;
        }
    }
    Ok(())
}

/// Returns the file a path means: a link stays a link, and only a plain file is replaced.
fn plain(path: &Path) -> Result<PathBuf, Failure> {
    let path = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
    let folder = path.parent().filter(|f| !f.as_os_str().is_empty());
    let folder = fs::canonicalize(folder.unwrap_or(Path::new("."))).unwrap_or_default();
    if folder.ancestors().any(|f| f.join("store.key").exists()) {
        return Err(Failure::bad_input(format!(
            "{} is inside the folder of a store; nothing was written",
            clean(&path.to_string_lossy())
        ))
        .hint("name a file outside of it"));
    }
    match fs::metadata(&path) {
        Ok(found) if !found.is_file() => Err(Failure::bad_input(format!(
            "{} is not a plain file; nothing was written",
            clean(&path.to_string_lossy())
        ))
        .hint("without -o the report goes to standard output")),
        _ => Ok(path),
    }
}

fn failed(path: &Path, error: &std::io::Error) -> Failure {
    Failure::failed(format!(
        "cannot write {}: {error}",
        clean(&path.to_string_lossy())
    ))
}
