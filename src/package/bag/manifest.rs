//! Manifests: one line a file, `digest`, two spaces, path; byte-sorted, so that equal content is equal text.

use std::collections::BTreeMap;

use super::{PAYLOAD, SIGNATURES};
use crate::package::digest::Digest;
use crate::package::finding::{BagFault, LineFault};
use crate::package::name;

/// Path in the package's folder and digest.
pub type Manifest = BTreeMap<String, Digest>;

/// Which files a manifest may list.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scope {
    Payload,
    Tags,
}

pub fn of(files: &BTreeMap<String, Vec<u8>>) -> Manifest {
    files
        .iter()
        .map(|(path, bytes)| (path.clone(), Digest::of(bytes)))
        .collect()
}

pub fn write(manifest: &Manifest) -> String {
    manifest
        .iter()
        .map(|(path, digest)| format!("{digest}  {path}\n"))
        .collect()
}

/// Reads the text of `manifest-sha256.txt`, for registers that look at nothing else.
pub fn parse_payload(text: &str, n_lines_limit: usize) -> Result<Manifest, Vec<BagFault>> {
    let (manifest, faults) = parse(super::MANIFEST, text, Scope::Payload, n_lines_limit);
    if faults.is_empty() {
        Ok(manifest)
    } else {
        Err(faults)
    }
}

/// Reads what it can and reports each line that is not exactly as `write` would spell it.
pub fn parse(
    file: &'static str,
    text: &str,
    scope: Scope,
    n_lines_limit: usize,
) -> (Manifest, Vec<BagFault>) {
    let mut manifest = Manifest::new();
    let mut faults = Vec::new();
    if text.lines().count() > n_lines_limit {
        return (
            manifest,
            vec![BagFault::TooManyLines {
                file,
                limit: n_lines_limit,
            }],
        );
    }
    let mut previous = String::new();
    for (line, number) in text.split_terminator('\n').zip(1..) {
        match parse_line(line, scope) {
            Ok((path, _)) if manifest.contains_key(&path) => {
                faults.push(BagFault::Line {
                    file,
                    number,
                    fault: LineFault::Duplicate,
                });
            }
            Ok((path, digest)) => {
                if path < previous {
                    faults.push(BagFault::Line {
                        file,
                        number,
                        fault: LineFault::OutOfOrder,
                    });
                }
                previous.clone_from(&path);
                manifest.insert(path, digest);
            }
            Err(fault) => faults.push(BagFault::Line {
                file,
                number,
                fault,
            }),
        }
    }
    if !text.is_empty() && !text.ends_with('\n') {
        faults.push(BagFault::NoFinalLineBreak { file });
    }
    (manifest, faults)
}

fn parse_line(line: &str, scope: Scope) -> Result<(String, Digest), LineFault> {
    if line.contains('\r') {
        return Err(LineFault::CarriageReturn);
    }
    let (digest, path) = line.split_once("  ").ok_or(LineFault::NoSeparator)?;
    let digest = Digest::parse(digest).map_err(LineFault::Digest)?;
    if path.contains('%') {
        return Err(LineFault::EncodedPath);
    }
    name::check(path).map_err(LineFault::Name)?;
    match scope {
        Scope::Payload if !path.starts_with(PAYLOAD) => Err(LineFault::NotPayload),
        Scope::Tags if path.starts_with(PAYLOAD) => Err(LineFault::Payload),
        Scope::Tags if path.starts_with(SIGNATURES) => Err(LineFault::Signature),
        _ => Ok((path.to_owned(), digest)),
    }
}
