//! The bag: payload and fields in, every file of a BagIt 1.0 bag (RFC 8493) out, and back again.
//!
//! Owns: the layout of tag files, the two digests that name a package, and the strict reader.
//! Deviations from RFC 8493, all narrower: SHA-256 alone, byte-sorted manifests with two spaces, `\n`
//! alone as line break, no folded lines, no repeated label, no fetch.txt, no name that a manifest would
//! have to encode, no tag files but ours and those in `signatures/`.

mod info;
mod manifest;
mod read;

use std::collections::{BTreeMap, BTreeSet};
use std::fmt;

use chrono::NaiveDate;

use super::Limits;
use super::digest::Digest;
use super::name::{self, NameFault, shown};
pub use info::parse as parse_info;
pub use manifest::{Manifest, parse_payload as parse_manifest};
pub use read::{Glance, glance, read};

/// Payload files by their path below `data/`.
pub type Payload = BTreeMap<String, Vec<u8>>;

pub const DECLARATION: &str = "bagit.txt";
pub const INFO: &str = "bag-info.txt";
pub const MANIFEST: &str = "manifest-sha256.txt";
pub const TAG_MANIFEST: &str = "tagmanifest-sha256.txt";
/// Signatures are made over the tag manifest and so cannot be listed in it.
pub const SIGNATURES: &str = "signatures/";

const PAYLOAD: &str = "data/";
const DECLARATION_TEXT: &str = "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n";
/// The records carry the content fingerprint, so it cannot cover them.
const OUTSIDE_FINGERPRINT: [&str; 2] = ["data/record.md", "data/record.pdf"];

const BAGGING_DATE: &str = "Bagging-Date";
const PAYLOAD_OXUM: &str = "Payload-Oxum";
const PACKAGE_DIGEST: &str = "Package-Digest";
const OWN_LABELS: [&str; 3] = [BAGGING_DATE, PAYLOAD_OXUM, PACKAGE_DIGEST];

/// What bag-info.txt says beside the fields that follow from the payload.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BagInfo {
    /// Label and value, written in this order before the others.
    pub fields: Vec<(String, String)>,
    /// `YYYY-MM-DD`, from the problem file: no clock is read.
    pub bagging_date: String,
}

/// A complete bag: a value that exists has passed every rule of the reader.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bag {
    files: BTreeMap<String, Vec<u8>>,
    info: Vec<(String, String)>,
    manifest: Manifest,
}

/// Why a bag cannot be built.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum BuildFault {
    NoPayload,
    Name { path: String, fault: NameFault },
    Clash { first: String, second: String },
    Label { label: String },
    LabelTwice { label: String },
    Value { label: String },
    Date { text: String },
    FileTooLarge { path: String, limit_bytes: u64 },
    TotalTooLarge { limit_bytes: u64 },
    TooManyEntries { limit: usize },
}

/// Builds a bag within the limits; all faults are reported, not the first.
pub fn build(payload: Payload, info: &BagInfo, limits: &Limits) -> Result<Bag, Vec<BuildFault>> {
    let mut faults = payload_faults(&payload, limits);
    faults.extend(info_faults(info));
    if !faults.is_empty() {
        return Err(faults);
    }
    let mut files: BTreeMap<String, Vec<u8>> = payload
        .into_iter()
        .map(|(path, bytes)| (format!("{PAYLOAD}{path}"), bytes))
        .collect();
    let manifest = manifest::of(&files);
    let manifest_text = manifest::write(&manifest);
    let mut fields = info.fields.clone();
    fields.push((BAGGING_DATE.to_owned(), info.bagging_date.clone()));
    fields.push((PAYLOAD_OXUM.to_owned(), oxum(files.values())));
    fields.push((
        PACKAGE_DIGEST.to_owned(),
        Digest::of(manifest_text.as_bytes()).prefixed(),
    ));

    let tag_files = BTreeMap::from([
        (DECLARATION.to_owned(), DECLARATION_TEXT.as_bytes().to_vec()),
        (INFO.to_owned(), info::write(&fields).into_bytes()),
        (MANIFEST.to_owned(), manifest_text.into_bytes()),
    ]);
    let tag_manifest = manifest::write(&manifest::of(&tag_files));
    files.extend(tag_files);
    files.insert(TAG_MANIFEST.to_owned(), tag_manifest.into_bytes());
    Ok(Bag {
        files,
        info: fields,
        manifest,
    })
}

/// The identity of a calculation: SHA-256 of the manifest lines of every payload file but the records.
///
/// By hand: `grep -v '  data/record\.\(pdf\|md\)$' manifest-sha256.txt | sha256sum`.
pub fn content_fingerprint(payload: &Payload) -> Digest {
    let manifest = payload
        .iter()
        .map(|(path, bytes)| (format!("{PAYLOAD}{path}"), Digest::of(bytes)))
        .collect::<Manifest>();
    fingerprint_of_manifest(&manifest)
}

/// The content fingerprint from a manifest alone, for registers that hash nothing.
pub fn fingerprint_of_manifest(manifest: &Manifest) -> Digest {
    let covered = manifest
        .iter()
        .filter(|(path, _)| !OUTSIDE_FINGERPRINT.contains(&path.as_str()))
        .map(|(p, d)| (p.clone(), *d));
    Digest::of(manifest::write(&covered.collect()).as_bytes())
}

impl Bag {
    /// Every file by its path in the package's folder.
    pub fn files(&self) -> &BTreeMap<String, Vec<u8>> {
        &self.files
    }

    /// Payload files by their path below `data/`, in byte order.
    pub fn payload(&self) -> impl Iterator<Item = (&str, &[u8])> {
        self.files
            .iter()
            .filter_map(|(path, bytes)| Some((path.strip_prefix(PAYLOAD)?, bytes.as_slice())))
    }

    /// Files below `signatures/`, which the bag's own rules leave to whoever checks signatures.
    pub fn signatures(&self) -> impl Iterator<Item = (&str, &[u8])> {
        self.files
            .iter()
            .filter_map(|(path, bytes)| Some((path.strip_prefix(SIGNATURES)?, bytes.as_slice())))
    }

    /// The bytes that a signature is made over.
    pub fn tag_manifest(&self) -> &[u8] {
        self.files.get(TAG_MANIFEST).map_or(&[], Vec::as_slice)
    }

    /// Fields of bag-info.txt in their order.
    pub fn info(&self) -> &[(String, String)] {
        &self.info
    }

    /// The digest of each payload file, by its path with `data/`.
    pub fn manifest(&self) -> &Manifest {
        &self.manifest
    }

    pub fn content_fingerprint(&self) -> Digest {
        fingerprint_of_manifest(&self.manifest)
    }

    /// SHA-256 of `manifest-sha256.txt`.
    pub fn package_digest(&self) -> Digest {
        Digest::of(manifest::write(&self.manifest).as_bytes())
    }
}

impl fmt::Display for BuildFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            BuildFault::NoPayload => f.write_str("a package needs at least one payload file"),
            BuildFault::Name { path, fault } => write!(f, "{}: {fault}", shown(path)),
            BuildFault::Clash { first, second } => {
                write!(
                    f,
                    "{} and {} are one name on some systems",
                    shown(first),
                    shown(second)
                )
            }
            BuildFault::Label { label } => {
                write!(f, "{} cannot label a field of bag-info.txt", shown(label))
            }
            BuildFault::LabelTwice { label } => {
                write!(f, "the label {} occurs twice", shown(label))
            }
            BuildFault::Value { label } => write!(
                f,
                "the value of {} is empty, padded with spaces, or holds line breaks, control or invisible characters",
                shown(label)
            ),
            BuildFault::FileTooLarge { path, limit_bytes } => {
                write!(
                    f,
                    "{}: the file is larger than {limit_bytes} bytes",
                    shown(path)
                )
            }
            BuildFault::TotalTooLarge { limit_bytes } => {
                write!(f, "the payload is larger than {limit_bytes} bytes")
            }
            BuildFault::TooManyEntries { limit } => {
                write!(f, "the package has more than {limit} files and folders")
            }
            BuildFault::Date { text } => write!(f, "{} is not a date YYYY-MM-DD", shown(text)),
        }
    }
}

fn payload_faults(payload: &Payload, limits: &Limits) -> Vec<BuildFault> {
    let mut faults = Vec::new();
    if payload.is_empty() {
        faults.push(BuildFault::NoPayload);
    }
    for (path, bytes) in payload {
        if let Err(fault) = name::check(&format!("{PAYLOAD}{path}")) {
            let path = path.clone();
            faults.push(BuildFault::Name { path, fault });
        }
        if bytes.len() as u64 > limits.file_bytes {
            let (path, limit_bytes) = (path.clone(), limits.file_bytes);
            faults.push(BuildFault::FileTooLarge { path, limit_bytes });
        }
    }
    if payload
        .values()
        .map(|bytes| bytes.len() as u64)
        .sum::<u64>()
        > limits.total_bytes
    {
        let limit_bytes = limits.total_bytes;
        faults.push(BuildFault::TotalTooLarge { limit_bytes });
    }
    if n_entries(payload) > limits.n_entries {
        let limit = limits.n_entries;
        faults.push(BuildFault::TooManyEntries { limit });
    }
    let clashes = name::clashes(payload.keys().map(String::as_str));
    let clash = |(first, second)| BuildFault::Clash { first, second };
    faults.extend(clashes.into_iter().map(clash));
    faults
}

/// Files and folders of the package: the payload's, `data` itself and the four tag files.
fn n_entries(payload: &Payload) -> usize {
    let parents = |path: &'_ String| -> Vec<String> {
        path.match_indices('/')
            .map(|(end, _)| path[..end].to_owned())
            .collect()
    };
    let folders: BTreeSet<String> = payload.keys().flat_map(parents).collect();
    payload.len() + folders.len() + 5
}

fn info_faults(info: &BagInfo) -> Vec<BuildFault> {
    let mut faults = Vec::new();
    let mut labels = OWN_LABELS.to_vec();
    for (label, value) in &info.fields {
        let named = || label.clone();
        if !info::label_is_sound(label) {
            faults.push(BuildFault::Label { label: named() });
        }
        if labels
            .iter()
            .any(|earlier| earlier.eq_ignore_ascii_case(label))
        {
            faults.push(BuildFault::LabelTwice { label: named() });
        }
        if !info::value_is_sound(value) {
            faults.push(BuildFault::Value { label: named() });
        }
        labels.push(label);
    }
    if !is_date(&info.bagging_date) {
        let text = info.bagging_date.clone();
        faults.push(BuildFault::Date { text });
    }
    faults
}

/// Payload-Oxum: number of octets, a dot, number of files (RFC 8493, section 2.2.2).
fn oxum<'a>(payload: impl Iterator<Item = &'a Vec<u8>>) -> String {
    let (n_bytes, n_files) = payload.fold((0, 0), |(sum, count), bytes| {
        (sum + bytes.len() as u64, count + 1)
    });
    format!("{n_bytes}.{n_files}")
}

fn is_date(text: &str) -> bool {
    NaiveDate::parse_from_str(text, "%Y-%m-%d")
        .is_ok_and(|date| date.format("%Y-%m-%d").to_string() == text)
}

#[cfg(test)]
mod tests;
