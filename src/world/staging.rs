//! Writing: a package appears whole under its name, or not at all.

use std::collections::BTreeSet;
use std::fs::{self, File, OpenOptions};
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicU32, Ordering};

use super::{Cause, FileError, UNFINISHED};
use crate::package::digest::{Digest, Hasher};
use crate::package::name;

/// A folder that is being filled beside its destination; dropped before `finish`, it vanishes.
#[derive(Debug)]
pub struct Staging {
    destination: PathBuf,
    folder: PathBuf,
    /// Folders made below `folder`, relative; deeper ones sort after those that hold them.
    made: BTreeSet<PathBuf>,
}

impl Staging {
    /// Begins a package that will stand at `destination`, which must not exist; its parent must.
    pub fn beside(destination: &Path) -> Result<Staging, FileError> {
        refuse_existing(destination)?;
        loop {
            let folder = temporary_name(destination)?;
            match fs::create_dir(&folder) {
                Ok(()) => {
                    return Ok(Staging {
                        destination: destination.to_owned(),
                        folder,
                        made: BTreeSet::new(),
                    });
                }
                // Left by a killed process that had the same number.
                Err(error) if error.kind() == io::ErrorKind::AlreadyExists => {}
                Err(error) => return Err(FileError::of(&folder, &error)),
            }
        }
    }

    /// Writes one new file and returns the digest of what went to the disk.
    pub fn write(&mut self, relative_path: &str, bytes: &[u8]) -> Result<Digest, FileError> {
        name::check(relative_path)
            .map_err(|fault| FileError::new(Path::new(relative_path), Cause::Name(fault)))?;
        for (end, _) in relative_path.match_indices('/') {
            let below = Path::new(&relative_path[..end]);
            if self.made.insert(below.to_owned()) {
                let folder = self.folder.join(below);
                fs::create_dir(&folder).map_err(|error| FileError::of(&folder, &error))?;
            }
        }
        write_synced(&self.folder.join(relative_path), bytes)
    }

    /// Gives the package its name; an existing one stays as it is.
    pub fn finish(mut self) -> Result<PathBuf, FileError> {
        for below in self.made.iter().rev() {
            sync_folder(&self.folder.join(below))?;
        }
        sync_folder(&self.folder)?;
        refuse_existing(&self.destination)?;
        fs::rename(&self.folder, &self.destination)
            .map_err(|error| FileError::of(&self.destination, &error))?;
        let destination = std::mem::take(&mut self.destination);
        self.folder = PathBuf::new();
        sync_folder(&parent(&destination))?;
        Ok(destination)
    }
}

impl Drop for Staging {
    fn drop(&mut self) {
        if !self.folder.as_os_str().is_empty() {
            // A failure here leaves an unfinished folder, which no reader takes for a package.
            let _ = fs::remove_dir_all(&self.folder);
        }
    }
}

/// Writes one new file whole or not at all; an existing one is never overwritten.
pub fn write_new(destination: &Path, bytes: &[u8]) -> Result<Digest, FileError> {
    refuse_existing(destination)?;
    let temporary = temporary_name(destination)?;
    let written = write_synced(&temporary, bytes).and_then(|digest| {
        // A second name fails where one exists, which a renaming would replace.
        match fs::hard_link(&temporary, destination) {
            Err(error) if error.kind() == io::ErrorKind::AlreadyExists => {
                Err(FileError::of(destination, &error))
            }
            Ok(()) => Ok(digest),
            // Not every file system knows second names.
            Err(_) => fs::rename(&temporary, destination)
                .map_err(|error| FileError::of(destination, &error))
                .map(|()| digest),
        }
    });
    let _ = fs::remove_file(&temporary);
    let digest = written?;
    sync_folder(&parent(destination))?;
    Ok(digest)
}

fn write_synced(path: &Path, bytes: &[u8]) -> Result<Digest, FileError> {
    const PIECE_BYTES: usize = 1 << 20;
    let failed = |error: io::Error| FileError::of(path, &error);
    let mut file = OpenOptions::new()
        .write(true)
        .create_new(true)
        .open(path)
        .map_err(failed)?;
    let mut hasher = Hasher::default();
    for piece in bytes.chunks(PIECE_BYTES) {
        file.write_all(piece).map_err(failed)?;
        hasher.update(piece);
    }
    file.sync_all().map_err(failed)?;
    Ok(hasher.finish())
}

/// A name beside the destination, so that the last step is a renaming within one file system.
///
/// Unique within the machine without entropy: process number and a counter. It is never written anywhere.
fn temporary_name(destination: &Path) -> Result<PathBuf, FileError> {
    static COUNTER: AtomicU32 = AtomicU32::new(0);
    let name = destination
        .file_name()
        .ok_or_else(|| FileError::new(destination, Cause::Exists))?;
    let mut temporary = std::ffi::OsString::from(".");
    temporary.push(name);
    temporary.push(format!(
        ".{}-{}{UNFINISHED}",
        std::process::id(),
        COUNTER.fetch_add(1, Ordering::Relaxed)
    ));
    Ok(parent(destination).join(temporary))
}

fn parent(destination: &Path) -> PathBuf {
    match destination.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent.to_owned(),
        _ => PathBuf::from("."),
    }
}

/// Links count: a dangling one is still somebody's name.
fn refuse_existing(destination: &Path) -> Result<(), FileError> {
    match fs::symlink_metadata(destination) {
        Ok(_) => Err(FileError::new(destination, Cause::Exists)),
        Err(error) if error.kind() == io::ErrorKind::NotFound => Ok(()),
        Err(error) => Err(FileError::of(destination, &error)),
    }
}

/// Makes the names in a folder last through a loss of power; only Unix lets a folder be synced.
#[cfg(unix)]
fn sync_folder(folder: &Path) -> Result<(), FileError> {
    match File::open(folder).and_then(|folder| folder.sync_all()) {
        // Some network file systems do not offer it.
        Err(error)
            if matches!(
                error.kind(),
                io::ErrorKind::InvalidInput | io::ErrorKind::Unsupported
            ) =>
        {
            Ok(())
        }
        synced => synced.map_err(|error| FileError::of(folder, &error)),
    }
}

#[cfg(not(unix))]
fn sync_folder(_folder: &Path) -> Result<(), FileError> {
    Ok(())
}
