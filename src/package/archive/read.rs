//! The strict reader: a zip is believed only if it is, byte for byte, the one written from its content.
//!
//! The specific rules before that one give a reviewer the reason. Nothing is copied until all have passed,
//! and nothing is ever expanded, so the content is held at most twice: in the zip and as files.

use std::collections::{BTreeMap, BTreeSet};

use super::{
    CENTRAL_BYTES, CENTRAL_SIGNATURE, END_BYTES, END_SIGNATURE, FLAGS, LOCAL_BYTES,
    LOCAL_SIGNATURE, STORED, crc32, emit,
};
use crate::package::finding::{ArchiveFault, Finding};
use crate::package::{Limits, Source, name};

/// Takes the files out of a zip's bytes, or says everything that is wrong with it.
pub fn read(zip: &[u8], limits: &Limits) -> Result<Source, Vec<Finding>> {
    let end = find_end(zip, limits).map_err(|finding| vec![finding])?;
    let mut findings = Vec::new();
    let entries = read_central(zip, &end, &mut findings);
    check_extents(&entries, &end, &mut findings);
    check_sizes(&entries, limits, &mut findings);
    // Content is summed only while that cannot cost more than reading the file: no overlap, no excess.
    let is_bounded = findings.is_empty();
    for entry in &entries {
        check_entry(zip, entry, &end, is_bounded, &mut findings);
    }
    let top_folder = check_names(&entries, &mut findings);
    if let (Some(top_folder), true) = (top_folder, findings.is_empty()) {
        let files = take_files(zip, &entries, top_folder);
        match first_difference(zip, top_folder, &files) {
            None => return Ok(Source { files, findings }),
            Some(offset) => findings.push(Finding::Archive(ArchiveFault::NotCanonical { offset })),
        }
    }
    Err(findings)
}

/// The end record: where the central directory lies and how many entries it has.
struct End {
    at: usize,
    n_entries: usize,
    central_at: usize,
}

/// One record of the central directory.
struct Entry<'a> {
    made_by: u16,
    flags: u16,
    method: u16,
    crc: u32,
    stored_bytes: u32,
    size_bytes: u32,
    name: &'a [u8],
    has_extra: bool,
    attributes: u32,
    local_at: usize,
}

impl Entry<'_> {
    /// The name as text, for findings too: bytes that are not UTF-8 are escaped.
    fn name(&self) -> String {
        match str::from_utf8(self.name) {
            Ok(name) => name.to_owned(),
            Err(_) => self.name.escape_ascii().to_string(),
        }
    }

    /// First byte after the entry's content, if its local header is as long as the central one says.
    fn end(&self) -> u64 {
        self.local_at as u64 + (LOCAL_BYTES + self.name.len()) as u64 + u64::from(self.stored_bytes)
    }
}

fn find_end(zip: &[u8], limits: &Limits) -> Result<End, Finding> {
    let fault = |fault| Err(Finding::Archive(fault));
    let last = zip.len().checked_sub(END_BYTES);
    let Some(at) = last.filter(|&at| u32_at(zip, at) == Some(END_SIGNATURE)) else {
        // A record further ahead means a comment or bytes after it; without one the end is lost.
        let tail = &zip[zip.len().saturating_sub(END_BYTES + usize::from(u16::MAX))..];
        let mut records = tail.windows(END_BYTES);
        let somewhere = records.any(|record| record.starts_with(&END_SIGNATURE.to_le_bytes()));
        let begins = u32_at(zip, 0) == Some(LOCAL_SIGNATURE);
        return fault(match (begins, somewhere) {
            (_, true) => ArchiveFault::BytesAfter,
            (true, _) => ArchiveFault::Truncated,
            _ => ArchiveFault::NotAZip,
        });
    };
    let field = |offset| u16_at(zip, at + offset).unwrap_or_default();
    let long_field = |offset| u32_at(zip, at + offset).unwrap_or_default();
    let (n_here, n_entries) = (field(8), field(10));
    let (central_bytes, central_at) = (long_field(12), long_field(16));
    if field(4) == u16::MAX
        || n_entries == u16::MAX
        || central_bytes == u32::MAX
        || central_at == u32::MAX
    {
        return fault(ArchiveFault::Oversize);
    }
    if field(4) != 0 || field(6) != 0 || n_here != n_entries {
        return fault(ArchiveFault::SeveralDisks);
    }
    if field(20) != 0 {
        return fault(ArchiveFault::Truncated);
    }
    if n_entries == 0 {
        return fault(ArchiveFault::Empty);
    }
    if usize::from(n_entries) > limits.n_entries {
        return Err(Finding::TooManyEntries {
            limit: limits.n_entries,
        });
    }
    let central_end = u64::from(central_at) + u64::from(central_bytes);
    if central_end > at as u64 {
        return fault(ArchiveFault::Truncated);
    }
    if central_end < at as u64 {
        return fault(match u32_at(zip, 0) {
            Some(LOCAL_SIGNATURE) => ArchiveFault::BytesBetween {
                before: "end record".to_owned(),
            },
            _ => ArchiveFault::BytesBefore,
        });
    }
    Ok(End {
        at,
        n_entries: n_entries.into(),
        central_at: central_at as usize,
    })
}

/// Reads as many records as are declared and fit; says so when that is not the whole directory.
fn read_central<'a>(zip: &'a [u8], end: &End, findings: &mut Vec<Finding>) -> Vec<Entry<'a>> {
    let mut entries = Vec::new();
    let mut at = end.central_at;
    while let Some((entry, next)) = central_entry(&zip[..end.at], at) {
        entries.push(entry);
        at = next;
        if entries.len() > end.n_entries {
            break;
        }
    }
    if entries.len() != end.n_entries || at != end.at {
        findings.push(Finding::Archive(ArchiveFault::CountDiffers));
    }
    entries
}

fn central_entry(zip: &[u8], at: usize) -> Option<(Entry<'_>, usize)> {
    if u32_at(zip, at)? != CENTRAL_SIGNATURE {
        return None;
    }
    let name_at = at + CENTRAL_BYTES;
    let name_bytes = usize::from(u16_at(zip, at + 28)?);
    let extra_bytes = usize::from(u16_at(zip, at + 30)?) + usize::from(u16_at(zip, at + 32)?);
    let next = name_at + name_bytes + extra_bytes;
    let entry = Entry {
        made_by: u16_at(zip, at + 4)?,
        flags: u16_at(zip, at + 8)?,
        method: u16_at(zip, at + 10)?,
        crc: u32_at(zip, at + 16)?,
        stored_bytes: u32_at(zip, at + 20)?,
        size_bytes: u32_at(zip, at + 24)?,
        name: zip.get(name_at..name_at + name_bytes)?,
        has_extra: extra_bytes != 0,
        attributes: u32_at(zip, at + 38)?,
        local_at: u32_at(zip, at + 42)? as usize,
    };
    (next <= zip.len()).then_some((entry, next))
}

/// Every byte before the central directory belongs to exactly one entry.
fn check_extents(entries: &[Entry], end: &End, findings: &mut Vec<Finding>) {
    let mut by_place: Vec<&Entry> = entries.iter().collect();
    by_place.sort_by_key(|entry| (entry.local_at, entry.end()));
    let central_at = end.central_at as u64;
    let mut free_from = 0;
    let mut previous: Option<&Entry> = None;
    for entry in by_place {
        let place = entry.local_at as u64;
        let fault = match previous {
            Some(previous) if place < free_from => Some(ArchiveFault::Overlap {
                first: previous.name(),
                second: entry.name(),
            }),
            None if place > 0 => Some(ArchiveFault::BytesBefore),
            Some(_) if place > free_from => Some(ArchiveFault::BytesBetween {
                before: entry.name(),
            }),
            _ => None,
        };
        findings.extend(fault.map(Finding::Archive));
        if entry.end() >= free_from {
            free_from = entry.end();
            previous = Some(entry);
        }
    }
    match previous {
        Some(previous) if free_from > central_at => {
            findings.push(Finding::Archive(ArchiveFault::Overlap {
                first: previous.name(),
                second: "central directory".to_owned(),
            }))
        }
        _ if free_from < central_at => {
            findings.push(Finding::Archive(ArchiveFault::BytesBetween {
                before: "central directory".to_owned(),
            }))
        }
        _ => {}
    }
}

fn check_sizes(entries: &[Entry], limits: &Limits, findings: &mut Vec<Finding>) {
    for entry in entries
        .iter()
        .filter(|entry| u64::from(entry.size_bytes) > limits.file_bytes)
    {
        findings.push(Finding::FileTooLarge {
            path: entry.name(),
            limit_bytes: limits.file_bytes,
        });
    }
    let total_bytes: u64 = entries
        .iter()
        .map(|entry| u64::from(entry.size_bytes))
        .sum();
    if total_bytes > limits.total_bytes {
        findings.push(Finding::TotalTooLarge {
            limit_bytes: limits.total_bytes,
        });
    }
}

fn check_entry(
    zip: &[u8],
    entry: &Entry,
    end: &End,
    is_bounded: bool,
    findings: &mut Vec<Finding>,
) {
    let name = || entry.name();
    let mut faults = Vec::new();
    if entry.flags & 1 != 0 {
        faults.push(ArchiveFault::Encrypted { name: name() });
    } else if entry.flags != FLAGS {
        faults.push(ArchiveFault::Flags {
            name: name(),
            flags: entry.flags,
        });
    }
    if entry.method != STORED {
        faults.push(ArchiveFault::Compressed {
            name: name(),
            method: entry.method,
        });
    } else if entry.stored_bytes != entry.size_bytes {
        faults.push(ArchiveFault::DeclaredSize { name: name() });
    }
    if let Some(kind) = special_kind(entry) {
        faults.push(ArchiveFault::Special { name: name(), kind });
    }
    if entry.has_extra {
        faults.push(ArchiveFault::ExtraFields { name: name() });
    }
    match differing_field(zip, entry, end) {
        Some(field) => faults.push(ArchiveFault::HeadersDiffer {
            name: name(),
            field,
        }),
        None if !is_bounded || !faults.is_empty() => {}
        None if content(zip, entry).map(crc32::of) == Some(entry.crc) => {}
        None => faults.push(ArchiveFault::Checksum { name: name() }),
    }
    findings.extend(faults.into_iter().map(Finding::Archive));
}

/// What an entry is if not a regular file, by the mode that Unix systems store.
fn special_kind(entry: &Entry) -> Option<&'static str> {
    if entry.name.ends_with(b"/") {
        return Some("folder");
    }
    let is_unix = entry.made_by >> 8 == 3;
    match entry.attributes >> 16 & 0o170_000 {
        _ if !is_unix => None,
        0o120_000 => Some("link"),
        0o010_000 => Some("pipe"),
        0o040_000 => Some("folder"),
        0o020_000 | 0o060_000 => Some("device"),
        0o140_000 => Some("socket"),
        _ => None,
    }
}

/// The first field in which the local header contradicts the central one.
fn differing_field(zip: &[u8], entry: &Entry, end: &End) -> Option<&'static str> {
    let zip = &zip[..end.central_at];
    let at = entry.local_at;
    let short = |offset| at.checked_add(offset).and_then(|place| u16_at(zip, place));
    let long = |offset| at.checked_add(offset).and_then(|place| u32_at(zip, place));
    let local_name = zip
        .get(at..)
        .and_then(|rest| rest.get(LOCAL_BYTES..LOCAL_BYTES + entry.name.len()));
    let fields = [
        ("their signature", long(0) == Some(LOCAL_SIGNATURE)),
        ("flags", short(6) == Some(entry.flags)),
        ("method", short(8) == Some(entry.method)),
        ("CRC-32", long(14) == Some(entry.crc)),
        (
            "size",
            long(18) == Some(entry.stored_bytes) && long(22) == Some(entry.size_bytes),
        ),
        (
            "name",
            short(26).map(usize::from) == Some(entry.name.len()) && local_name == Some(entry.name),
        ),
        ("extra fields", short(28) == Some(0) || entry.has_extra),
    ];
    fields
        .iter()
        .find(|(_, agree)| !agree)
        .map(|(field, _)| *field)
}

/// The top folder that all entries share, if all names are sound.
fn check_names<'a>(entries: &[Entry<'a>], findings: &mut Vec<Finding>) -> Option<&'a str> {
    let mut names = BTreeSet::new();
    let mut top_folder: Option<&str> = None;
    for entry in entries {
        let Ok(name) = str::from_utf8(entry.name) else {
            findings.push(Finding::NameNotUtf8 { name: entry.name() });
            continue;
        };
        if !names.insert(name) {
            findings.push(Finding::Archive(ArchiveFault::Duplicate {
                name: name.to_owned(),
            }));
            continue;
        }
        // A folder's entry was reported for what it is.
        let name = name.strip_suffix('/').unwrap_or(name);
        // The limit of length is for the path below the top folder, whose own name is checked apart.
        let (top, rest) = name.split_once('/').unwrap_or((name, ""));
        let refused = if name.starts_with('/') {
            name::check(name).err()
        } else {
            name::check(top).err().or_else(|| {
                if rest.is_empty() {
                    None
                } else {
                    name::check(rest).err()
                }
            })
        };
        if let Some(fault) = refused {
            findings.push(Finding::Name {
                name: name.to_owned(),
                fault,
            });
        } else if rest.is_empty() {
            findings.push(Finding::Archive(ArchiveFault::OutsideTopFolder {
                name: name.to_owned(),
            }));
        }
        match top_folder {
            Some(first) if first != top => {
                findings.push(Finding::Archive(ArchiveFault::TwoTopFolders {
                    first: first.to_owned(),
                    second: top.to_owned(),
                }))
            }
            _ => top_folder = Some(top),
        }
    }
    let clashes = name::clashes(names);
    findings.extend(
        clashes
            .into_iter()
            .map(|(first, second)| Finding::Clash { first, second }),
    );
    top_folder
}

fn take_files(zip: &[u8], entries: &[Entry], top_folder: &str) -> BTreeMap<String, Vec<u8>> {
    let file = |entry: &Entry| {
        let name = entry.name();
        let path = name.strip_prefix(top_folder)?.strip_prefix('/')?;
        Some((path.to_owned(), content(zip, entry)?.to_vec()))
    };
    entries.iter().filter_map(file).collect()
}

fn content<'a>(zip: &'a [u8], entry: &Entry) -> Option<&'a [u8]> {
    let start = entry.local_at.checked_add(LOCAL_BYTES + entry.name.len())?;
    zip.get(start..)?.get(..entry.stored_bytes as usize)
}

/// Where a zip first differs from the one that is written from its content.
fn first_difference(
    zip: &[u8],
    top_folder: &str,
    files: &BTreeMap<String, Vec<u8>>,
) -> Option<u64> {
    let mut rest = zip;
    let mut difference = None;
    emit(top_folder, files, &mut |bytes| {
        if difference.is_some() {
            return;
        }
        match rest.strip_prefix(bytes) {
            Some(after) => rest = after,
            None => {
                let pairs = rest.iter().zip(bytes);
                let n_equal = pairs
                    .take_while(|(found, written)| found == written)
                    .count();
                difference = Some((zip.len() - rest.len() + n_equal) as u64);
            }
        }
    });
    difference.or_else(|| (!rest.is_empty()).then(|| (zip.len() - rest.len()) as u64))
}

fn u16_at(bytes: &[u8], at: usize) -> Option<u16> {
    bytes
        .get(at..)?
        .first_chunk()
        .copied()
        .map(u16::from_le_bytes)
}

fn u32_at(bytes: &[u8], at: usize) -> Option<u32> {
    bytes
        .get(at..)?
        .first_chunk()
        .copied()
        .map(u32::from_le_bytes)
}
