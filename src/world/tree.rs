//! Which packages lie below a folder: found by name, opened by others.

use std::fs::{self, File};
use std::io::Read;
use std::path::{Path, PathBuf};

use super::{Cause, FileError, UNFINISHED};
use crate::package::{archive, bag};

/// Most files and folders that are looked at.
pub const TREE_ENTRIES: usize = 5_000_000;

/// What lies below a folder.
#[derive(Debug, Default)]
pub struct Tree {
    /// Folders and zips that mean to be packages, in byte order.
    pub packages: Vec<PathBuf>,
    /// Zips that do not begin as a package's zip does.
    pub n_other_zips: usize,
    /// Folders that could not be looked into.
    pub unreadable: Vec<FileError>,
}

/// Looks for packages at and below `folder`; no link is followed, and no package is looked into.
pub fn packages_below(folder: &Path) -> Result<Tree, FileError> {
    let failed = |error| FileError::of(folder, &error);
    if !fs::metadata(folder).map_err(failed)?.is_dir() {
        return Err(FileError::new(folder, Cause::NotAFolder));
    }
    let mut tree = Tree::default();
    let mut n_entries = 0;
    let mut folders = vec![folder.to_owned()];
    while let Some(folder) = folders.pop() {
        if is_package(&folder) {
            tree.packages.push(folder);
            continue;
        }
        let entries = match fs::read_dir(&folder).and_then(Iterator::collect::<Result<Vec<_>, _>>) {
            Ok(entries) => entries,
            Err(error) => {
                tree.unreadable.push(FileError::of(&folder, &error));
                continue;
            }
        };
        n_entries += entries.len();
        if n_entries > TREE_ENTRIES {
            let limit = TREE_ENTRIES;
            return Err(FileError::new(&folder, Cause::TooManyEntries { limit }));
        }
        for entry in entries {
            let Ok(kind) = entry.file_type() else {
                continue;
            };
            let path = entry.path();
            if kind.is_dir() {
                folders.push(path);
            } else if kind.is_file() && path.extension().is_some_and(|end| end == "zip") {
                if begins_as_package(&path) {
                    tree.packages.push(path);
                } else {
                    tree.n_other_zips += 1;
                }
            }
        }
    }
    tree.packages.sort();
    tree.unreadable.sort_by(|a, b| a.path.cmp(&b.path));
    Ok(tree)
}

fn is_package(folder: &Path) -> bool {
    let is_unfinished = folder
        .as_os_str()
        .as_encoded_bytes()
        .ends_with(UNFINISHED.as_bytes());
    let holds = |name| fs::symlink_metadata(folder.join(name)).is_ok();
    is_unfinished || holds(bag::DECLARATION) || holds(bag::MANIFEST)
}

fn begins_as_package(path: &Path) -> bool {
    const ENOUGH_BYTES: u64 = 512;
    let mut start = Vec::new();
    let read = File::open(path).and_then(|file| file.take(ENOUGH_BYTES).read_to_end(&mut start));
    read.is_ok() && archive::begins_as_package(&start)
}
