//! Reading: files below one folder, untrusted, each read once.

use std::collections::BTreeMap;
use std::fs::{self, File, Metadata};
use std::io::{self, Read};
use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::{Cause, FileError};
use crate::package::name;

/// The files that a calculation may read: those below one folder, on disk or out of a package.
///
/// A file is read once; asking again gives the same bytes, so what was judged is what is enclosed.
#[derive(Debug)]
pub struct Files {
    origin: Origin,
    read: BTreeMap<String, Arc<[u8]>>,
}

#[derive(Debug)]
enum Origin {
    Folder(PathBuf),
    Package(BTreeMap<String, Arc<[u8]>>),
}

impl Files {
    /// Files below a folder that the user named.
    pub fn below(folder: &Path) -> Result<Files, FileError> {
        let metadata = fs::metadata(folder).map_err(|error| FileError::of(folder, &error))?;
        if !metadata.is_dir() {
            return Err(FileError::new(folder, Cause::NotAFolder));
        }
        Ok(Files {
            origin: Origin::Folder(folder.to_owned()),
            read: BTreeMap::new(),
        })
    }

    /// Files that a package encloses: nothing else can be read, and no disk is touched.
    pub fn enclosed<'a>(files: impl IntoIterator<Item = (&'a str, &'a [u8])>) -> Files {
        let files = files
            .into_iter()
            .map(|(name, bytes)| (name.to_owned(), Arc::from(bytes)))
            .collect();
        Files {
            origin: Origin::Package(files),
            read: BTreeMap::new(),
        }
    }

    /// Reads a regular file by its relative name; no link on the way is followed.
    pub fn read(&mut self, name: &str, limit_bytes: u64) -> Result<Arc<[u8]>, FileError> {
        name::check(name).map_err(|fault| FileError::new(Path::new(name), Cause::Name(fault)))?;
        if let Some(bytes) = self.read.get(name) {
            return within(limit_bytes, name, bytes.clone());
        }
        let bytes = match &self.origin {
            Origin::Folder(folder) => {
                refuse_links(folder, name)?;
                Arc::from(read_regular(&folder.join(name), limit_bytes)?)
            }
            Origin::Package(files) => {
                let bytes = files
                    .get(name)
                    .ok_or_else(|| FileError::new(Path::new(name), Cause::NotFound))?;
                within(limit_bytes, name, bytes.clone())?
            }
        };
        self.read.insert(name.to_owned(), Arc::clone(&bytes));
        Ok(bytes)
    }

    /// Every file read so far, by its relative name: what the package has to enclose.
    pub fn all_read(&self) -> &BTreeMap<String, Arc<[u8]>> {
        &self.read
    }
}

/// Reads a file that must be regular, not a link, and the same one that was looked at before opening.
///
/// Opening a pipe would wait for its writer, therefore the look comes first.
pub(super) fn read_regular(path: &Path, limit_bytes: u64) -> Result<Vec<u8>, FileError> {
    let failed = |error: io::Error| FileError::of(path, &error);
    let expected = fs::symlink_metadata(path).map_err(failed)?;
    if expected.is_symlink() {
        return Err(FileError::new(path, Cause::Link));
    }
    if !expected.is_file() {
        return Err(FileError::new(path, Cause::NotAFile));
    }
    if expected.len() > limit_bytes {
        return Err(FileError::new(path, Cause::TooLarge { limit_bytes }));
    }
    let file = File::open(path).map_err(failed)?;
    if !is_same_file(&expected, &file.metadata().map_err(failed)?) {
        return Err(FileError::new(path, Cause::ChangedWhileRead));
    }
    let mut bytes = Vec::with_capacity(expected.len() as usize);
    // The length may have grown since, or be a lie, as in virtual file systems.
    file.take(limit_bytes.saturating_add(1))
        .read_to_end(&mut bytes)
        .map_err(failed)?;
    if bytes.len() as u64 > limit_bytes {
        return Err(FileError::new(path, Cause::TooLarge { limit_bytes }));
    }
    Ok(bytes)
}

#[cfg(unix)]
fn is_same_file(expected: &Metadata, opened: &Metadata) -> bool {
    use std::os::unix::fs::MetadataExt;
    opened.is_file() && (expected.dev(), expected.ino()) == (opened.dev(), opened.ino())
}

#[cfg(not(unix))]
fn is_same_file(expected: &Metadata, opened: &Metadata) -> bool {
    opened.is_file() && expected.len() == opened.len()
}

fn within(limit_bytes: u64, name: &str, bytes: Arc<[u8]>) -> Result<Arc<[u8]>, FileError> {
    if bytes.len() as u64 > limit_bytes {
        return Err(FileError::new(
            Path::new(name),
            Cause::TooLarge { limit_bytes },
        ));
    }
    Ok(bytes)
}

/// Refuses a link anywhere between the folder and the file.
fn refuse_links(folder: &Path, name: &str) -> Result<(), FileError> {
    let mut path = folder.to_owned();
    for part in name.split('/') {
        path.push(part);
        let metadata = fs::symlink_metadata(&path).map_err(|error| FileError::of(&path, &error))?;
        if metadata.is_symlink() {
            return Err(FileError::new(&path, Cause::Link));
        }
    }
    Ok(())
}
