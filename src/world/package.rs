//! Reading a stranger's package, folder or zip: nothing followed, nothing waited for, each file read once.

use std::fs::{self, Metadata};
use std::path::{Path, PathBuf};

use super::files::read_regular;
use super::{Cause, FileError, Mender, UNFINISHED};
use crate::package::finding::{Finding, FolderFault};
use crate::package::name::{NameFault, PATH_BYTES};
use crate::package::{Limits, Source, archive};

/// Why a package could not be read into memory at all.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum OpenFault {
    /// The package is at fault.
    Package(Vec<Finding>),
    /// The name given or the machine is at fault.
    File(FileError),
}

/// Reads a package's folder or zip into memory, within the limits.
pub fn read_package(path: &Path, limits: &Limits) -> Result<Source, OpenFault> {
    match look(path)? {
        Root::Zip(path) => read_zip(&path, limits),
        Root::Folder(path) => {
            let mut walk = Walk::new(limits);
            walk.folder(&path, "")?;
            Ok(walk.source)
        }
    }
}

/// Reads only the named files of a package, as far as they exist; of a zip everything.
pub fn read_part(path: &Path, names: &[&str], limits: &Limits) -> Result<Source, OpenFault> {
    let path = match look(path)? {
        Root::Zip(path) => return read_zip(&path, limits),
        Root::Folder(path) => path,
    };
    let mut walk = Walk::new(limits);
    for name in names {
        let mut folders = name.match_indices('/').map(|(end, _)| &name[..end]);
        let is_link = |part: &str| {
            fs::symlink_metadata(path.join(part)).is_ok_and(|metadata| metadata.is_symlink())
        };
        if let Some(part) = folders.find(|part| is_link(part)) {
            walk.refuse(part, FolderFault::Link);
        } else if fs::symlink_metadata(path.join(name)).is_ok() {
            walk.entry(&path.join(name), (*name).to_owned())?;
        }
    }
    Ok(walk.source)
}

/// What the user named as a package.
enum Root {
    Folder(PathBuf),
    Zip(PathBuf),
}

fn look(path: &Path) -> Result<Root, OpenFault> {
    // Without a trailing slash, which would make the system follow a link.
    let path = path.components().collect::<PathBuf>();
    let failed = |error| OpenFault::File(FileError::of(&path, &error));
    let metadata = fs::symlink_metadata(&path).map_err(failed)?;
    let refused = |fault| {
        let path = path
            .file_name()
            .unwrap_or(path.as_os_str())
            .to_string_lossy()
            .into_owned();
        Err(OpenFault::Package(vec![Finding::Folder { path, fault }]))
    };
    if metadata.is_symlink() {
        return refused(FolderFault::RootIsLink);
    }
    // The full path, because the name given may be `.` alone.
    if fs::canonicalize(&path)
        .map_err(failed)?
        .as_os_str()
        .as_encoded_bytes()
        .ends_with(UNFINISHED.as_bytes())
    {
        return refused(FolderFault::Unfinished);
    }
    if metadata.is_file() {
        Ok(Root::Zip(path))
    } else if metadata.is_dir() {
        Ok(Root::Folder(path))
    } else {
        refused(FolderFault::RootIsNeither)
    }
}

fn read_zip(path: &Path, limits: &Limits) -> Result<Source, OpenFault> {
    // Headers and names come on top of the content, well below this for every permitted name.
    const ENTRY_BYTES: u64 = 1024;
    let limit_bytes = limits.total_bytes + limits.n_entries as u64 * ENTRY_BYTES;
    let zip = match read_regular(path, limit_bytes) {
        Ok(zip) => zip,
        Err(FileError {
            cause: Cause::TooLarge { limit_bytes },
            ..
        }) => {
            return Err(OpenFault::Package(vec![Finding::TotalTooLarge {
                limit_bytes,
            }]));
        }
        Err(error) => return Err(OpenFault::File(error)),
    };
    archive::read(&zip, limits).map_err(OpenFault::Package)
}

struct Walk<'a> {
    limits: &'a Limits,
    n_entries: usize,
    total_bytes: u64,
    source: Source,
}

impl Walk<'_> {
    fn new(limits: &Limits) -> Walk<'_> {
        Walk {
            limits,
            n_entries: 0,
            total_bytes: 0,
            source: Source::default(),
        }
    }

    /// Reads everything below a folder; `below` is its path in the package, with a slash unless empty.
    fn folder(&mut self, folder: &Path, below: &str) -> Result<(), OpenFault> {
        let failed = |error| OpenFault::File(FileError::of(folder, &error));
        let mut names = Vec::new();
        for entry in fs::read_dir(folder).map_err(failed)? {
            self.n_entries += 1;
            if self.n_entries > self.limits.n_entries {
                return Err(OpenFault::Package(vec![Finding::TooManyEntries {
                    limit: self.limits.n_entries,
                }]));
            }
            names.push(entry.map_err(failed)?.file_name());
        }
        names.sort();
        if names.is_empty() && !below.is_empty() {
            self.refuse(below.trim_end_matches('/'), FolderFault::EmptyFolder);
        }
        for name in names {
            let path = folder.join(&name);
            let Some(text) = name.to_str() else {
                let name = format!("{below}{}", name.as_encoded_bytes().escape_ascii());
                self.source.findings.push(Finding::NameNotUtf8 { name });
                continue;
            };
            self.entry(&path, format!("{below}{text}"))?;
        }
        Ok(())
    }

    fn entry(&mut self, path: &Path, name: String) -> Result<(), OpenFault> {
        let metadata = fs::symlink_metadata(path)
            .map_err(|error| OpenFault::File(FileError::of(path, &error)))?;
        if metadata.is_symlink() {
            self.refuse(&name, FolderFault::Link);
        } else if metadata.is_dir() {
            // A path this deep is refused by its name, so the walk itself may stop here.
            if name.len() > PATH_BYTES {
                self.source.findings.push(Finding::Name {
                    name,
                    fault: NameFault::TooLong,
                });
            } else {
                self.folder(path, &format!("{name}/"))?;
            }
        } else if !metadata.is_file() {
            self.refuse(&name, FolderFault::NotAFile);
        } else if has_second_name(&metadata) {
            self.refuse(&name, FolderFault::HardLink);
        } else {
            self.file(path, name)?;
        }
        Ok(())
    }

    fn file(&mut self, path: &Path, name: String) -> Result<(), OpenFault> {
        match read_regular(path, self.limits.file_bytes) {
            Ok(bytes) => {
                self.total_bytes += bytes.len() as u64;
                if self.total_bytes > self.limits.total_bytes {
                    let limit_bytes = self.limits.total_bytes;
                    return Err(OpenFault::Package(vec![Finding::TotalTooLarge {
                        limit_bytes,
                    }]));
                }
                self.source.files.insert(name, bytes);
            }
            Err(FileError {
                cause: Cause::TooLarge { limit_bytes },
                ..
            }) => {
                self.source.findings.push(Finding::FileTooLarge {
                    path: name,
                    limit_bytes,
                });
            }
            // The machine's faults end the reading; anything else was exchanged since it was listed.
            Err(error) if error.mender() == Mender::Machine => return Err(OpenFault::File(error)),
            Err(_) => self.refuse(&name, FolderFault::ChangedWhileRead),
        }
        Ok(())
    }

    fn refuse(&mut self, path: &str, fault: FolderFault) {
        self.source.findings.push(Finding::Folder {
            path: path.to_owned(),
            fault,
        });
    }
}

/// Hard links: the content could be changed through the other name after it was checked.
#[cfg(unix)]
fn has_second_name(metadata: &Metadata) -> bool {
    use std::os::unix::fs::MetadataExt;
    metadata.nlink() > 1
}

#[cfg(not(unix))]
fn has_second_name(_metadata: &Metadata) -> bool {
    false
}
