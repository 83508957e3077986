//! The only door to clock, environment, files and entropy.
//!
//! Owns: reading untrusted files once each, writing a package whole or not at all, finding packages below a
//! folder, the processors, and the stopwatch for the display of progress.
//! Does not own: what the bytes mean. Everything here goes down to other rooms as an argument.

mod files;
mod package;
mod staging;
mod stopwatch;
mod tree;
mod workers;

use std::fmt;
use std::io;
use std::path::{Path, PathBuf};

use crate::package::name::NameFault;
pub use files::Files;
pub use package::{OpenFault, read_package, read_part};
pub use staging::{Staging, write_new};
pub use stopwatch::Stopwatch;
pub use tree::{TREE_ENTRIES, Tree, packages_below};
pub use workers::{Panicked, in_order, processors};

/// An unfinished package's folder ends in this, so that no reader takes it for a package.
pub(crate) const UNFINISHED: &str = ".unfinished";

/// What went wrong with a file, and where.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FileError {
    pub path: PathBuf,
    pub cause: Cause,
}

#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Cause {
    NotFound,
    Name(NameFault),
    Link,
    NotAFile,
    NotAFolder,
    TooLarge { limit_bytes: u64 },
    TooManyEntries { limit: usize },
    ChangedWhileRead,
    Exists,
    DiskFull,
    PermissionDenied,
    ReadOnly,
    Machine(io::ErrorKind),
}

/// Who can mend it: the exit status follows from this.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mender {
    User,
    Machine,
}

impl FileError {
    pub fn mender(&self) -> Mender {
        match self.cause {
            Cause::NotFound
            | Cause::Name(_)
            | Cause::Link
            | Cause::NotAFile
            | Cause::NotAFolder
            | Cause::TooLarge { .. }
            | Cause::TooManyEntries { .. }
            | Cause::ChangedWhileRead
            | Cause::Exists => Mender::User,
            Cause::DiskFull | Cause::PermissionDenied | Cause::ReadOnly | Cause::Machine(_) => {
                Mender::Machine
            }
        }
    }

    fn new(path: &Path, cause: Cause) -> FileError {
        FileError {
            path: path.to_owned(),
            cause,
        }
    }

    fn of(path: &Path, error: &io::Error) -> FileError {
        FileError::new(path, Cause::of(error.kind()))
    }
}

impl Cause {
    fn of(kind: io::ErrorKind) -> Cause {
        match kind {
            io::ErrorKind::NotFound => Cause::NotFound,
            io::ErrorKind::NotADirectory => Cause::NotAFolder,
            io::ErrorKind::IsADirectory => Cause::NotAFile,
            io::ErrorKind::AlreadyExists | io::ErrorKind::DirectoryNotEmpty => Cause::Exists,
            io::ErrorKind::StorageFull
            | io::ErrorKind::QuotaExceeded
            | io::ErrorKind::FileTooLarge => Cause::DiskFull,
            io::ErrorKind::PermissionDenied => Cause::PermissionDenied,
            io::ErrorKind::ReadOnlyFilesystem => Cause::ReadOnly,
            other => Cause::Machine(other),
        }
    }
}

impl fmt::Display for FileError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.path.display(), self.cause)
    }
}

impl std::error::Error for FileError {}

impl fmt::Display for Cause {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Cause::NotFound => "no such file or folder",
            Cause::Name(fault) => return fault.fmt(f),
            Cause::Link => "a link; links are not followed",
            Cause::NotAFile => "not a regular file",
            Cause::NotAFolder => "not a folder",
            Cause::TooLarge { limit_bytes } => return write!(f, "larger than {limit_bytes} bytes"),
            Cause::TooManyEntries { limit } => {
                return write!(
                    f,
                    "more than {limit} files and folders lie below; name a smaller folder"
                );
            }
            Cause::ChangedWhileRead => "exchanged while it was read",
            Cause::Exists => "exists already and is not overwritten",
            Cause::DiskFull => "the disk or quota is full",
            Cause::PermissionDenied => "permission denied",
            Cause::ReadOnly => "the file system is read-only",
            Cause::Machine(kind) => return kind.fmt(f),
        })
    }
}

#[cfg(test)]
mod tests;
