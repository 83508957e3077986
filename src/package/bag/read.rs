//! The strict reader: everything that is wrong with a bag, all at once.

use std::collections::{BTreeMap, BTreeSet};

use super::manifest::{self, Manifest, Scope};
use super::{
    BAGGING_DATE, Bag, DECLARATION, DECLARATION_TEXT, INFO, MANIFEST, PACKAGE_DIGEST, PAYLOAD,
    PAYLOAD_OXUM, SIGNATURES, TAG_MANIFEST, info, is_date, oxum,
};
use crate::package::digest::Digest;
use crate::package::finding::{BagFault, EncodingFault, Finding};
use crate::package::{Limits, Source, name};

/// What the tag manifest lists, neither more nor less.
const LISTED_TAG_FILES: [&str; 3] = [INFO, DECLARATION, MANIFEST];

/// Accepts a source that is exactly a bag as `build` makes it, with or without signatures.
pub fn read(source: Source, limits: &Limits) -> Result<Bag, Vec<Finding>> {
    let Source {
        files,
        mut findings,
    } = source;
    let refused = refused_paths(&findings);
    findings.extend(name_findings(&files));

    let mut faults = Vec::new();
    check_declaration(&files, &mut faults);
    let manifest = read_manifest(&files, MANIFEST, Scope::Payload, limits, &mut faults);
    let tag_manifest = read_manifest(&files, TAG_MANIFEST, Scope::Tags, limits, &mut faults);
    let info = read_info(&files, &mut faults);
    check_payload(&files, &manifest, &refused, &mut faults);
    check_tag_files(&files, &tag_manifest, &refused, &mut faults);
    check_info(&files, &info, &mut faults);

    findings.extend(faults.into_iter().map(Finding::Bag));
    if findings.is_empty() {
        Ok(Bag {
            files,
            info,
            manifest,
        })
    } else {
        Err(findings)
    }
}

/// What the tag files say, and those payload files that were read with them.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Glance {
    pub info: Vec<(String, String)>,
    pub manifest: Manifest,
    files: BTreeMap<String, Vec<u8>>,
}

impl Glance {
    /// A payload file that was read, by its path below `data/`.
    pub fn payload(&self, path: &str) -> Option<&[u8]> {
        self.files
            .get(&format!("{PAYLOAD}{path}"))
            .map(Vec::as_slice)
    }
}

/// Accepts tag files and a part of the payload; what was read agrees with its digest, the rest was not looked at.
pub fn glance(source: Source, limits: &Limits) -> Result<Glance, Vec<Finding>> {
    let Source {
        files,
        mut findings,
    } = source;
    let mut faults = Vec::new();
    check_declaration(&files, &mut faults);
    let manifest = read_manifest(&files, MANIFEST, Scope::Payload, limits, &mut faults);
    let tag_manifest = read_manifest(&files, TAG_MANIFEST, Scope::Tags, limits, &mut faults);
    let info = read_info(&files, &mut faults);
    let refused = refused_paths(&findings);
    check_tag_files(&files, &tag_manifest, &refused, &mut faults);
    let was_read = |(path, digest): (&String, &Digest)| {
        files.contains_key(path).then_some((path.clone(), *digest))
    };
    let part: Manifest = manifest.iter().filter_map(was_read).collect();
    check_payload(&files, &part, &refused, &mut faults);
    check_package_digest(&files, &info, &mut faults);
    findings.extend(faults.into_iter().map(Finding::Bag));
    if findings.is_empty() {
        Ok(Glance {
            info,
            manifest,
            files,
        })
    } else {
        Err(findings)
    }
}

/// Paths that the source refused: reported there, so not once more as missing.
fn refused_paths(findings: &[Finding]) -> BTreeSet<String> {
    let path = |finding: &Finding| match finding {
        Finding::Folder { path, .. } | Finding::FileTooLarge { path, .. } => Some(path.clone()),
        _ => None,
    };
    findings.iter().filter_map(path).collect()
}

fn name_findings(files: &BTreeMap<String, Vec<u8>>) -> Vec<Finding> {
    let faulty = files.keys().filter_map(|path| {
        let fault = name::check(path).err()?;
        Some(Finding::Name {
            name: path.clone(),
            fault,
        })
    });
    let clashes = name::clashes(files.keys().map(String::as_str));
    faulty
        .chain(
            clashes
                .into_iter()
                .map(|(first, second)| Finding::Clash { first, second }),
        )
        .collect()
}

fn check_declaration(files: &BTreeMap<String, Vec<u8>>, faults: &mut Vec<BagFault>) {
    let Some(text) = tag_text(files, DECLARATION, faults) else {
        return;
    };
    if text == DECLARATION_TEXT {
        return;
    }
    let version = text
        .lines()
        .next()
        .and_then(|line| line.strip_prefix("BagIt-Version: "));
    faults.push(match version {
        Some(version) if version != "1.0" => BagFault::OtherVersion {
            version: version.to_owned(),
        },
        _ => BagFault::Declaration,
    });
}

fn read_manifest(
    files: &BTreeMap<String, Vec<u8>>,
    file: &'static str,
    scope: Scope,
    limits: &Limits,
    faults: &mut Vec<BagFault>,
) -> Manifest {
    let Some(text) = tag_text(files, file, faults) else {
        return Manifest::new();
    };
    let (manifest, found) = manifest::parse(file, text, scope, limits.n_entries);
    faults.extend(found);
    manifest
}

fn read_info(
    files: &BTreeMap<String, Vec<u8>>,
    faults: &mut Vec<BagFault>,
) -> Vec<(String, String)> {
    let Some(text) = tag_text(files, INFO, faults) else {
        return Vec::new();
    };
    info::parse(text).unwrap_or_else(|found| {
        faults.extend(found);
        Vec::new()
    })
}

/// The text of a tag file, or `None` with the reason among the faults.
fn tag_text<'a>(
    files: &'a BTreeMap<String, Vec<u8>>,
    file: &str,
    faults: &mut Vec<BagFault>,
) -> Option<&'a str> {
    let Some(bytes) = files.get(file) else {
        faults.push(BagFault::MissingTagFile {
            path: file.to_owned(),
        });
        return None;
    };
    let decoded = match bytes.as_slice() {
        [0xef, 0xbb, 0xbf, ..] => Err(EncodingFault::ByteOrderMark),
        [0xff, 0xfe, ..] | [0xfe, 0xff, ..] => Err(EncodingFault::Utf16),
        // ASCII letters in UTF-16 without a mark: every second byte is zero.
        [0, _, ..] | [_, 0, ..] => Err(EncodingFault::Utf16),
        _ => std::str::from_utf8(bytes).map_err(|_| EncodingFault::NotUtf8),
    };
    decoded
        .map_err(|fault| {
            faults.push(BagFault::Encoding {
                path: file.to_owned(),
                fault,
            })
        })
        .ok()
}

fn check_payload(
    files: &BTreeMap<String, Vec<u8>>,
    manifest: &Manifest,
    refused: &BTreeSet<String>,
    faults: &mut Vec<BagFault>,
) {
    compare_digests(files, manifest, MANIFEST, refused, faults);
    let payload = files.keys().filter(|path| path.starts_with(PAYLOAD));
    let unlisted = payload.clone().filter(|path| !manifest.contains_key(*path));
    faults.extend(unlisted.map(|path| BagFault::UnlistedPayload { path: path.clone() }));
    if payload.count() == 0 {
        faults.push(BagFault::NoPayload);
    }
}

fn check_tag_files(
    files: &BTreeMap<String, Vec<u8>>,
    tag_manifest: &Manifest,
    refused: &BTreeSet<String>,
    faults: &mut Vec<BagFault>,
) {
    compare_digests(files, tag_manifest, TAG_MANIFEST, refused, faults);
    let tags = files
        .keys()
        .filter(|path| !path.starts_with(PAYLOAD) && !path.starts_with(SIGNATURES));
    for path in tags.filter(|path| *path != TAG_MANIFEST) {
        let is_ours = LISTED_TAG_FILES.contains(&path.as_str());
        if path == "fetch.txt" {
            faults.push(BagFault::Fetch);
        } else if !tag_manifest.contains_key(path) {
            faults.push(BagFault::UnlistedTagFile { path: path.clone() });
        } else if !is_ours {
            faults.push(BagFault::ForeignTagFile { path: path.clone() });
        }
    }
}

fn compare_digests(
    files: &BTreeMap<String, Vec<u8>>,
    manifest: &Manifest,
    by: &'static str,
    refused: &BTreeSet<String>,
    faults: &mut Vec<BagFault>,
) {
    for (path, &listed) in manifest {
        match files.get(path) {
            Some(bytes) => {
                let found = Digest::of(bytes);
                if found != listed {
                    faults.push(BagFault::DigestDiffers {
                        path: path.clone(),
                        listed,
                        found,
                    });
                }
            }
            None if is_refused(path, refused) => {}
            None => faults.push(BagFault::ListedButMissing {
                path: path.clone(),
                by,
            }),
        }
    }
}

/// Whether the path or a folder above it was refused.
fn is_refused(path: &str, refused: &BTreeSet<String>) -> bool {
    let folders = path.match_indices('/').map(|(end, _)| &path[..end]);
    folders.chain([path]).any(|part| refused.contains(part))
}

fn check_info(
    files: &BTreeMap<String, Vec<u8>>,
    info: &[(String, String)],
    faults: &mut Vec<BagFault>,
) {
    if info.is_empty() {
        // Absent or malformed: reported where it was read.
        return;
    }
    let value = |label| {
        info.iter()
            .find(|(found, _)| found == label)
            .map(|(_, value)| value.as_str())
    };
    match value(BAGGING_DATE) {
        None => faults.push(BagFault::InfoMissing {
            label: BAGGING_DATE,
        }),
        Some(date) if !is_date(date) => faults.push(BagFault::BaggingDate),
        Some(_) => {}
    }
    let payload = files
        .iter()
        .filter(|(path, _)| path.starts_with(PAYLOAD))
        .map(|(_, bytes)| bytes);
    let found = oxum(payload);
    match value(PAYLOAD_OXUM) {
        None => faults.push(BagFault::InfoMissing {
            label: PAYLOAD_OXUM,
        }),
        Some(listed) if listed != found => faults.push(BagFault::Oxum {
            listed: listed.to_owned(),
            found,
        }),
        Some(_) => {}
    }
    check_package_digest(files, info, faults);
}

fn check_package_digest(
    files: &BTreeMap<String, Vec<u8>>,
    info: &[(String, String)],
    faults: &mut Vec<BagFault>,
) {
    if info.is_empty() {
        return;
    }
    let listed = info.iter().find(|(label, _)| label == PACKAGE_DIGEST);
    let found = files.get(MANIFEST).map(|bytes| Digest::of(bytes));
    match (listed.map(|(_, value)| value.as_str()), found) {
        (None, _) => faults.push(BagFault::InfoMissing {
            label: PACKAGE_DIGEST,
        }),
        (Some(listed), Some(found)) if listed != found.prefixed() => {
            faults.push(BagFault::PackageDigest { found })
        }
        _ => {}
    }
}
