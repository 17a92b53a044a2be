//! The bytes of a file, whole.

use std::fs::File;
use std::io::{self, Read};
use std::path::Path;

use super::problem::Problem;

/// The largest file that is read.
const LARGEST: u64 = 2 << 30;

/// A file's name and bytes.
#[derive(Debug, Clone)]
pub struct InputFile {
    /// The name for messages.
    pub name: String,
    /// The bytes.
    pub bytes: Vec<u8>,
}

impl InputFile {
    /// Reads a file, or standard input for `-`.
    pub fn read(path: &Path) -> Result<InputFile, Problem> {
        let name = if path == Path::new("-") {
            "standard input".to_owned()
        } else {
            path.file_name()
                .unwrap_or(path.as_os_str())
                .to_string_lossy()
                .into_owned()
        };
        match read_whole(path) {
            Ok(bytes) if bytes.len() as u64 > LARGEST => {
                Err(Problem::of_file(&name, "more than 2 GB", "a smaller file")
                    .cure("split it into several files"))
            }
            Ok(bytes) => Ok(InputFile { name, bytes }),
            Err(error) => Err(unreadable(path, &error)),
        }
    }
}

fn read_whole(path: &Path) -> io::Result<Vec<u8>> {
    let mut bytes = Vec::new();
    if path == Path::new("-") {
        io::stdin()
            .lock()
            .take(LARGEST + 1)
            .read_to_end(&mut bytes)?;
    } else {
        let file = File::open(path)?;
        if let Ok(size) = usize::try_from(file.metadata()?.len().min(LARGEST)) {
            bytes.reserve_exact(size + 1);
        }
        file.take(LARGEST + 1).read_to_end(&mut bytes)?;
    }
    Ok(bytes)
}

fn unreadable(path: &Path, error: &io::Error) -> Problem {
    let what = match error.kind() {
        io::ErrorKind::NotFound => "no such file".to_owned(),
        io::ErrorKind::IsADirectory => "a folder".to_owned(),
        io::ErrorKind::PermissionDenied => "a file that may not be read".to_owned(),
        _ => error.to_string(),
    };
    Problem::of_file(&path.to_string_lossy(), what, "a CSV file")
}
