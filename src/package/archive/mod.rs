//! The package as one file: a zip whose bytes follow from its content alone.
//!
//! Owns: the store-only writer and the strict reader. Layout: PKWARE APPNOTE 6.3, sections 4.3 to 4.4.
//! Everything is fixed: stored, 1980-01-01 00:00, mode 0644, UTF-8 names in byte order, no folder entries.
//! Compression is left out on purpose: its bytes depend on the version of whoever compresses.

mod crc32;
mod read;

use std::collections::BTreeMap;
use std::fmt;

use super::name::{self, NameFault, shown};
pub use read::read;

const LOCAL_SIGNATURE: u32 = 0x0403_4b50;
const CENTRAL_SIGNATURE: u32 = 0x0201_4b50;
const END_SIGNATURE: u32 = 0x0605_4b50;
const LOCAL_BYTES: usize = 30;
const CENTRAL_BYTES: usize = 46;
const END_BYTES: usize = 22;

/// Version 2.0, made on a system with Unix modes.
const VERSION_NEEDED: u16 = 20;
const VERSION_MADE_BY: u16 = 3 << 8 | VERSION_NEEDED;
/// Bit 11: names are UTF-8.
const FLAGS: u16 = 1 << 11;
const STORED: u16 = 0;
const TIME: u16 = 0;
/// 1980-01-01, the earliest that the format can say.
const DATE: u16 = 1 << 5 | 1;
/// A regular file, `rw-r--r--`, in the upper half of the external attributes.
const ATTRIBUTES: u32 = 0o100_644 << 16;

/// Why a package cannot be put into a zip.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum WriteFault {
    Name { name: String, fault: NameFault },
    Clash { first: String, second: String },
    TooManyFiles,
    TooLarge,
}

/// Writes the zip of a package: `top_folder` and the files below it.
pub fn write(top_folder: &str, files: &BTreeMap<String, Vec<u8>>) -> Result<Vec<u8>, WriteFault> {
    check(top_folder, files)?;
    let mut zip = Vec::with_capacity(written_bytes(top_folder, files) as usize);
    emit(top_folder, files, &mut |bytes| zip.extend_from_slice(bytes));
    Ok(zip)
}

/// Whether a file's first bytes are those of a package's zip, whose first entry is `bag-info.txt` in its folder.
pub fn begins_as_package(start: &[u8]) -> bool {
    let signature = LOCAL_SIGNATURE.to_le_bytes();
    let name_length = start.get(26..28).map_or(0, |bytes| {
        usize::from(bytes[0]) | usize::from(bytes[1]) << 8
    });
    let name = start.get(LOCAL_BYTES..LOCAL_BYTES + name_length);
    start.starts_with(&signature) && name.is_some_and(|name| name.ends_with(b"/bag-info.txt"))
}

impl fmt::Display for WriteFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            WriteFault::Name { name, fault } => write!(f, "{}: {fault}", shown(name)),
            WriteFault::Clash { first, second } => {
                write!(
                    f,
                    "{} and {} are one name on some systems",
                    shown(first),
                    shown(second)
                )
            }
            WriteFault::TooManyFiles => {
                write!(f, "a zip of this kind holds at most {} files", u16::MAX - 1)
            }
            WriteFault::TooLarge => f.write_str("a zip of this kind holds less than 4 GiB"),
        }
    }
}

impl std::error::Error for WriteFault {}

fn check(top_folder: &str, files: &BTreeMap<String, Vec<u8>>) -> Result<(), WriteFault> {
    let refused = |name: &str, fault| WriteFault::Name {
        name: name.to_owned(),
        fault,
    };
    if top_folder.contains('/') {
        return Err(refused(top_folder, NameFault::EmptyOrDotPart));
    }
    name::check(top_folder).map_err(|fault| refused(top_folder, fault))?;
    files
        .keys()
        .try_for_each(|path| name::check(path).map_err(|fault| refused(path, fault)))?;
    if let Some((first, second)) = name::clashes(files.keys().map(String::as_str))
        .into_iter()
        .next()
    {
        return Err(WriteFault::Clash { first, second });
    }
    if files.len() >= usize::from(u16::MAX) {
        return Err(WriteFault::TooManyFiles);
    }
    // The format spells "see the 64-bit record" with the largest value, so stay below it.
    if written_bytes(top_folder, files) >= u64::from(u32::MAX) {
        return Err(WriteFault::TooLarge);
    }
    Ok(())
}

fn written_bytes(top_folder: &str, files: &BTreeMap<String, Vec<u8>>) -> u64 {
    let entry = |(path, bytes): (&String, &Vec<u8>)| {
        let name_bytes = top_folder.len() + 1 + path.len();
        (LOCAL_BYTES + CENTRAL_BYTES + 2 * name_bytes) as u64 + bytes.len() as u64
    };
    files.iter().map(entry).sum::<u64>() + END_BYTES as u64
}

/// Passes the zip's bytes on in pieces, so that the reader can compare without a second copy.
///
/// The content has passed `check` or was read from a zip: no size or count exceeds its field.
fn emit(top_folder: &str, files: &BTreeMap<String, Vec<u8>>, sink: &mut dyn FnMut(&[u8])) {
    let mut central = Vec::new();
    let mut offset = 0;
    for (path, bytes) in files {
        let name = format!("{top_folder}/{path}");
        let common = common_fields(&name, bytes);

        let mut local = LOCAL_SIGNATURE.to_le_bytes().to_vec();
        local.extend(&common);
        local.extend(name.as_bytes());
        sink(&local);
        sink(bytes);

        central.extend(CENTRAL_SIGNATURE.to_le_bytes());
        central.extend(VERSION_MADE_BY.to_le_bytes());
        central.extend(&common);
        // Comment length, disk number, internal attributes.
        central.extend([0; 6]);
        central.extend(ATTRIBUTES.to_le_bytes());
        central.extend((offset as u32).to_le_bytes());
        central.extend(name.as_bytes());
        offset += local.len() + bytes.len();
    }
    let n_entries = (files.len() as u16).to_le_bytes();
    let mut end = END_SIGNATURE.to_le_bytes().to_vec();
    // This disk, and the disk of the central directory.
    end.extend([0; 4]);
    end.extend(n_entries);
    end.extend(n_entries);
    end.extend((central.len() as u32).to_le_bytes());
    end.extend((offset as u32).to_le_bytes());
    // Comment length.
    end.extend([0; 2]);
    sink(&central);
    sink(&end);
}

/// The 26 bytes that a local and a central header share, from "version needed" to "extra field length".
fn common_fields(name: &str, bytes: &[u8]) -> Vec<u8> {
    let size = (bytes.len() as u32).to_le_bytes();
    let mut fields = Vec::with_capacity(LOCAL_BYTES - 4);
    for field in [VERSION_NEEDED, FLAGS, STORED, TIME, DATE] {
        fields.extend(field.to_le_bytes());
    }
    fields.extend(crc32::of(bytes).to_le_bytes());
    fields.extend(size);
    fields.extend(size);
    fields.extend((name.len() as u16).to_le_bytes());
    // Extra field length.
    fields.extend([0; 2]);
    fields
}

#[cfg(test)]
mod tests;
