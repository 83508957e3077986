//! Review: what a reader does with packages once they are issued.
//!
//! Owns: comparing a package with what its inputs give (`recheck`), with another (`contrast`), and listing many
//! (`register`). Does not own: solving, which `pipeline` does and hands in; the disk; the terminal.
//! Everything that is shown here may come from a stranger: no text reaches a table unguarded.

pub mod contrast;
pub mod recheck;
pub mod register;
pub mod results;
pub mod table;
pub mod work;

use crate::package::bag::Bag;

/// Field of bag-info.txt that names the problem file, by its path in the package.
pub const PROBLEM_FIELD: &str = "Calculation-Problem";
/// Field of bag-info.txt with the content fingerprint of the package that this one replaces.
pub const SUPERSEDES_FIELD: &str = "Calculation-Supersedes";
/// Field of bag-info.txt that depends on how the program was built, not on the calculation.
pub const DEPENDENCIES_FIELD: &str = "Dependencies-SHA256";
pub const NUMBER_FIELD: &str = "External-Identifier";
pub const TITLE_FIELD: &str = "External-Description";
pub const REVISION_FIELD: &str = "Calculation-Revision";
pub const STANDING_FIELD: &str = "Calculation-Standing";
pub const DATE_FIELD: &str = "Bagging-Date";

/// What a package says that it is; believed as far as its bag was found intact.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Identity {
    pub number: String,
    pub revision: String,
    pub standing: String,
    /// With `sha256:`, as is the next.
    pub fingerprint: String,
    pub package_digest: String,
}

impl Identity {
    pub fn of(bag: &Bag) -> Identity {
        let field = |label: &str| field(bag.info(), label).unwrap_or_default().to_owned();
        Identity {
            number: field(NUMBER_FIELD),
            revision: field(REVISION_FIELD),
            standing: field(STANDING_FIELD),
            fingerprint: bag.content_fingerprint().prefixed(),
            package_digest: bag.package_digest().prefixed(),
        }
    }

    /// Number, revision and standing in one line.
    pub fn words(&self) -> String {
        let line = format!(
            "{} revision {}, {}",
            self.number, self.revision, self.standing
        );
        table::plain(&line)
    }
}

/// The value of a field of bag-info.txt.
pub fn field<'a>(info: &'a [(String, String)], label: &str) -> Option<&'a str> {
    info.iter()
        .find(|(found, _)| found == label)
        .map(|(_, value)| value.as_str())
}
