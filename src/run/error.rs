//! What can go wrong with the files of a run.

use std::io;
use std::path::{Path, PathBuf};

use thiserror::Error;

/// A file or folder that could not be written.
#[derive(Debug, Error)]
pub enum FileError {
    /// The folder cannot be made or written to.
    #[error("{}: the folder cannot be written to\n  choose another with --out, or ask for the right to write there", .path.display())]
    NoPermission {
        /// The folder or file.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
    /// A file stands where a folder is needed.
    #[error("{}: is a file, and a folder is needed there\n  move it away, or choose another folder with --out", .path.display())]
    IsFile {
        /// The path.
        path: PathBuf,
    },
    /// A folder stands where a file is to be written.
    #[error("{}: is a folder, and a file is to be written there\n  move it away, or choose another folder with --out", .path.display())]
    IsFolder {
        /// The path.
        path: PathBuf,
    },
    /// No room left, or over quota.
    #[error("{}: the disk is full; nothing was put into place\n  free some space and start again", .path.display())]
    DiskFull {
        /// The file.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
    /// Anything else the system said.
    #[error("{}: cannot be written: {source}", .path.display())]
    Other {
        /// The path.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
}

impl FileError {
    /// Sorts what the system said about a path.
    pub fn new(path: &Path, source: io::Error) -> Self {
        let path = path.to_owned();
        match source.kind() {
            io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
                Self::NoPermission { path, source }
            }
            io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
                Self::DiskFull { path, source }
            }
            io::ErrorKind::NotADirectory => Self::IsFile { path },
            io::ErrorKind::IsADirectory => Self::IsFolder { path },
            _ => Self::Other { path, source },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_the_system_says_is_sorted() {
        let sorted = |kind: io::ErrorKind| FileError::new(Path::new("d"), kind.into());
        assert!(matches!(
            sorted(io::ErrorKind::StorageFull),
            FileError::DiskFull { .. }
        ));
        assert!(matches!(
            sorted(io::ErrorKind::PermissionDenied),
            FileError::NoPermission { .. }
        ));
        assert!(matches!(
            sorted(io::ErrorKind::NotADirectory),
            FileError::IsFile { .. }
        ));
        assert!(matches!(
            sorted(io::ErrorKind::Interrupted),
            FileError::Other { .. }
        ));
    }
}
