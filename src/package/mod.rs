//! The package: a BagIt 1.0 bag (RFC 8493) and its deterministic zip.
//!
//! Owns: digests, the rule for names, the bag, the archive, and what is found wrong with either.
//! Does not own: disk, clock or environment (bytes come in and go out), nor the meaning of any payload.

pub mod archive;
pub mod bag;
pub mod digest;
pub mod finding;
pub mod name;

use std::collections::BTreeMap;

use finding::Finding;

/// What a package may hold at most, so that a stranger's package cannot exhaust the machine.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Files and folders together.
    pub n_entries: usize,
    pub file_bytes: u64,
    pub total_bytes: u64,
}

impl Limits {
    /// What every command that opens a package accepts.
    pub const READ: Limits = Limits {
        n_entries: 10_000,
        file_bytes: 256 << 20,
        total_bytes: 512 << 20,
    };
    /// What is written: lower, so that a package with its signatures still passes its own recheck.
    pub const WRITTEN: Limits = Limits {
        n_entries: 9_900,
        file_bytes: 128 << 20,
        total_bytes: 256 << 20,
    };
}

/// The files of a package as they were read, once each, before anything about them is believed.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Source {
    /// Path below the package's folder, with `/` between its parts, and the bytes.
    pub files: BTreeMap<String, Vec<u8>>,
    /// What could not be taken as a file: links, pipes, names that are not UTF-8.
    pub findings: Vec<Finding>,
}
