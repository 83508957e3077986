//! What a recheck can find, one line each.

use std::fmt;

use crate::package::finding::Finding;
use crate::package::name::shown;
use crate::review::results::ResultsFault;
use crate::review::table::plain;

/// One reason for which a package is not what its inputs give.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Fault {
    /// The folder, zip or bag itself.
    Package(Finding),
    /// Something lies in `signatures/` that is none.
    NoSignature {
        path: String,
    },
    NoProblem,
    Results(ResultsFault),
    OtherProgram {
        name: String,
    },
    /// The enclosed problem file is refused, with line where there is one.
    Input {
        file: String,
        line: Option<usize>,
        message: String,
    },
    /// More work than was allowed, in operations.
    OverBudget {
        work: u64,
        allowed: u64,
    },
    Missing {
        path: String,
    },
    Extra {
        path: String,
    },
    Differs {
        path: String,
        /// Byte of the first difference, counted from 0.
        offset: usize,
        /// Line of the first difference in a text.
        line: Option<usize>,
    },
    Field {
        label: String,
        found: Option<String>,
        expected: Option<String>,
    },
    InputsDigest,
    /// A result, criterion, case or finding that one side lacks or that differs.
    Outcome {
        case: String,
        what: String,
        stated: String,
        recomputed: String,
    },
}

/// What a reader should know although nothing is wrong.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Note {
    OtherVersion { version: String },
    OtherDependencies,
    SignatureNotVerified { path: String },
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Fault::Package(finding) => finding.fmt(f),
            Fault::NoSignature { path } => {
                write!(
                    f,
                    "{}: no such file belongs into signatures/",
                    shown(&format!("signatures/{path}"))
                )
            }
            Fault::NoProblem => write!(
                f,
                "bag-info.txt: {} names no problem file among the package's inputs",
                crate::review::PROBLEM_FIELD
            ),
            Fault::Results(fault) => fault.fmt(f),
            Fault::OtherProgram { name } => {
                write!(f, "the results are those of another program, {}", shown(name))
            }
            Fault::Input {
                file,
                line,
                message,
            } => {
                let line = line.map(|line| format!(", line {line}")).unwrap_or_default();
                write!(
                    f,
                    "{}{line}: {}",
                    shown(&super::problem_path(file)),
                    plain(message)
                )
            }
            Fault::OverBudget { work, allowed } => write!(
                f,
                "not solved: its problem asks for up to {work} operations, {allowed} are allowed; allow them with --allow-work {work}"
            ),
            Fault::Missing { path } => write!(
                f,
                "{}: the inputs give this file, the package lacks it",
                shown(&format!("data/{path}"))
            ),
            Fault::Extra { path } => write!(
                f,
                "{}: the inputs give no such file",
                shown(&format!("data/{path}"))
            ),
            Fault::Differs { path, offset, line } => {
                let place = match line {
                    Some(line) => format!("line {line}"),
                    None => format!("byte {offset}"),
                };
                write!(
                    f,
                    "{}: differs from what the inputs give, first in {place}",
                    shown(&format!("data/{path}"))
                )
            }
            Fault::Field {
                label,
                found,
                expected,
            } => {
                let said = |value: &Option<String>| match value {
                    Some(value) => shown(value),
                    None => "absent".to_owned(),
                };
                write!(
                    f,
                    "bag-info.txt: {} is {}, the inputs give {}",
                    plain(label),
                    said(found),
                    said(expected)
                )
            }
            Fault::InputsDigest => f.write_str(
                "`data/results/results.json`: the results are those of other inputs than the enclosed ones",
            ),
            Fault::Outcome {
                case,
                what,
                stated,
                recomputed,
            } => {
                let case = if case.is_empty() {
                    String::new()
                } else {
                    format!("case {}, ", shown(case))
                };
                write!(
                    f,
                    "{case}{}: stated {}, recomputed {}",
                    plain(what),
                    plain(stated),
                    plain(recomputed)
                )
            }
        }
    }
}

impl fmt::Display for Note {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Note::OtherVersion { version } => write!(
                f,
                "made by version {}: inputs, results and findings were compared, the pages of the record and the figures were not; \
                 that version reproduces them byte for byte",
                shown(version)
            ),
            Note::OtherDependencies => f.write_str(
                "made by a build with other versions of libraries (Dependencies-SHA256 in bag-info.txt)",
            ),
            Note::SignatureNotVerified { path } => write!(
                f,
                "{}: not verified, this version verifies no signatures; by hand: openssl cms -verify -binary -inform DER -in FILE.p7s -content tagmanifest-sha256.txt",
                shown(&format!("signatures/{path}"))
            ),
        }
    }
}
