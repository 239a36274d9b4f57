//! Files that a command writes; a file that is there already is kept unless the user says otherwise.

use std::fs::OpenOptions;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Why a file was not written.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum DestinationError {
    /// There is a file of that name.
    #[error("{path} exists and is kept; choose another name, or add --replace", path = .path.display())]
    Exists {
        /// The file.
        path: PathBuf,
    },
    /// The system refuses.
    #[error("{path} cannot be written: {source}", path = .path.display())]
    Refused {
        /// The file.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
}

/// Writes a file, and only if `replace` says so in the place of another.
///
/// # Errors
/// [`DestinationError`] if there is one of that name, or the system refuses.
pub fn write_file(path: &Path, contents: &[u8], replace: bool) -> Result<(), DestinationError> {
    let mut options = OpenOptions::new();
    if replace {
        options.write(true).create(true).truncate(true);
    } else {
        options.write(true).create_new(true);
    }
    let written = options.open(path).and_then(|mut file| file.write_all(contents));
    written.map_err(|source| match source.kind() {
        io::ErrorKind::AlreadyExists => DestinationError::Exists { path: path.to_owned() },
        _ => DestinationError::Refused { path: path.to_owned(), source },
    })
}
