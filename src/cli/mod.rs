//! The command line: arguments, one file a command, the terminal report.
//!
//! Exit status is an interface: 0 supported and met · 1 issued, but a criterion is not met or not resolved, or the
//! evidence is insufficient · 2 problem file or arguments at fault · 3 a package fails its recheck · 4 the machine
//! failed us · 70 a bug of ours.

use std::ffi::OsString;
use std::process::ExitCode;

use clap::{Parser, Subcommand};

use crate::diagnostic::{Diagnostic, Listing};
use crate::judgement::Overall;
use crate::pipeline::Failure;
use crate::review::table::plain;

mod contrast;
mod issue;
mod recheck;
mod reference;
mod register;
mod report;
mod trial;

/// Turns one problem file into one audited, reproducible calculation package.
#[derive(Parser)]
#[command(name = "countermarch", version, about, propagate_version = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// Solve a problem file and write its calculation package.
    Issue(issue::Arguments),
    /// Solve a problem file and print what would be issued; nothing is written.
    Trial(trial::Arguments),
    /// Check packages: intact, and what their own inputs give.
    Recheck(recheck::Arguments),
    /// Show what changed between two packages, and what it did.
    Contrast(contrast::Arguments),
    /// List the packages below a folder.
    Register(register::Arguments),
    /// List the units.
    Units,
    /// List the methods.
    Methods,
    /// List the functions of formulas and results.
    Functions,
    /// List every stated limit.
    Limits,
    /// List the keys of the problem file.
    Keys {
        /// As a JSON Schema, for editors.
        #[arg(long)]
        schema: bool,
    },
    /// List the codes of diagnostics.
    Codes,
}

/// Runs the program with the given arguments, the first being its name.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version are no fault and go to standard output.
            let status = if error.use_stderr() { 2 } else { 0 };
            let _ = error.print();
            return ExitCode::from(status);
        }
    };
    let outcome = match arguments.command {
        Command::Issue(arguments) => issue::run(&arguments).map(status_of),
        Command::Trial(arguments) => trial::run(&arguments).map(status_of),
        Command::Recheck(arguments) => Ok(recheck::run(&arguments)),
        Command::Contrast(arguments) => contrast::run(&arguments),
        Command::Register(arguments) => register::run(&arguments),
        Command::Units => return print(&reference::units()),
        Command::Methods => return print(&reference::methods()),
        Command::Functions => return print(&reference::functions()),
        Command::Limits => return print(&reference::limits()),
        Command::Keys { schema } => return print(&reference::keys(schema)),
        Command::Codes => return print(&reference::codes()),
    };
    match outcome {
        Ok(status) => ExitCode::from(status),
        Err(failure) => {
            explain(&failure);
            ExitCode::from(failure.exit_status())
        }
    }
}

fn status_of(overall: Overall) -> u8 {
    if overall == Overall::NotSupported {
        1
    } else {
        0
    }
}

/// Prints a listing; a reader that has gone away is no fault.
fn print(text: &str) -> ExitCode {
    use std::io::Write;
    let _ = std::io::stdout().write_all(text.as_bytes());
    ExitCode::SUCCESS
}

fn explain(failure: &Failure) {
    match failure {
        Failure::Input {
            diagnostics,
            sources,
        } => {
            eprint!(
                "{}",
                Listing {
                    diagnostics,
                    sources
                }
            );
            let faults = diagnostics
                .iter()
                .filter(|diagnostic| !diagnostic.code.is_warning())
                .count();
            let word = if faults == 1 { "fault" } else { "faults" };
            eprintln!("{faults} {word}; nothing was written.");
        }
        Failure::Package { package, faults } => {
            eprintln!("{}: the package is at fault.", plain(package));
            for fault in faults {
                eprintln!("  fault: {fault}");
            }
            eprintln!("Nothing was written. `recheck` says more.");
        }
        Failure::File(error) => eprintln!("{}; nothing was written.", plain(&error.to_string())),
        Failure::Bug(message) => eprintln!(
            "This is a bug of the program, please report it: {message}. Nothing was written."
        ),
    }
}

fn warn(warnings: &[Diagnostic], sources: &std::collections::BTreeMap<String, String>) {
    if !warnings.is_empty() {
        eprint!(
            "{}",
            Listing {
                diagnostics: warnings,
                sources
            }
        );
    }
}
