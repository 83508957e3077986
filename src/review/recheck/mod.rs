//! Recheck: is a package what its inputs give?
//!
//! Owns: what is compared, and the report of everything found. Does not own: solving the enclosed inputs again,
//! which `pipeline` does between `enclosed` and `bytes`.

mod agreement;
mod bytes;
mod fault;
mod json;

use crate::package::bag::Bag;
use crate::package::name;
use crate::review::{Identity, PROBLEM_FIELD, field};

pub use agreement::{Agreement, agreement};
pub use bytes::{bytes, inputs};
pub use fault::{Fault, Note};

/// Folder of a package's inputs, below `data/`.
const INPUTS: &str = "inputs/";

/// Everything that a recheck has found.
#[derive(Clone, Debug, Default)]
pub struct Recheck {
    /// The package as it was named.
    pub package: String,
    pub identity: Option<Identity>,
    /// Version of the program that made the package.
    pub made_by: Option<String>,
    /// Payload files that were compared byte for byte.
    pub n_compared: usize,
    pub faults: Vec<Fault>,
    pub notes: Vec<Note>,
    /// Results beside each other, where the bytes do not say it all.
    pub agreement: Option<Agreement>,
    /// Why the package could not be opened, where that is not its fault.
    pub not_opened: Option<String>,
    /// What the package itself finds: supported, supported with holds, not supported.
    pub finding: Option<String>,
}

impl Recheck {
    pub fn of(package: &str) -> Recheck {
        Recheck {
            package: package.to_owned(),
            ..Recheck::default()
        }
    }

    /// Intact, and what its inputs give; whatever its own finding is.
    pub fn is_reproduced(&self) -> bool {
        self.faults.is_empty() && self.not_opened.is_none()
    }

    /// Takes over what the package says of itself, and what is known of its signatures.
    pub fn identify(&mut self, bag: &Bag) {
        self.identity = Some(Identity::of(bag));
        for (path, _) in bag.signatures() {
            let path = path.to_owned();
            if path.ends_with(".p7s") || path == "record-signed.pdf" {
                self.notes.push(Note::SignatureNotVerified { path });
            } else {
                self.faults.push(Fault::NoSignature { path });
            }
        }
    }
}

/// The problem file's name among a package's inputs, and those inputs: all that may be read to solve it again.
pub struct Enclosed<'a> {
    pub problem: String,
    pub files: Vec<(&'a str, &'a [u8])>,
}

/// Finds the problem file that bag-info.txt names among the enclosed inputs.
pub fn enclosed(bag: &Bag) -> Result<Enclosed<'_>, Fault> {
    let named = field(bag.info(), PROBLEM_FIELD).ok_or(Fault::NoProblem)?;
    let files: Vec<(&str, &[u8])> = bag
        .payload()
        .filter_map(|(path, bytes)| Some((path.strip_prefix(INPUTS)?, bytes)))
        .collect();
    let problem = named
        .strip_prefix("data/")
        .and_then(|path| path.strip_prefix(INPUTS))
        .filter(|problem| name::check(problem).is_ok())
        .filter(|problem| files.iter().any(|(path, _)| path == problem))
        .ok_or(Fault::NoProblem)?;
    Ok(Enclosed {
        problem: problem.to_owned(),
        files,
    })
}

/// The path that `PROBLEM_FIELD` holds for a problem file.
pub fn problem_path(file: &str) -> String {
    format!("data/{INPUTS}{file}")
}

#[cfg(test)]
mod tests;
