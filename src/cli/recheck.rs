//! `countermarch recheck`

use std::io::{self, IsTerminal, Write};
use std::path::{Path, PathBuf};

use crate::pipeline::{self, Failure};
use crate::review::recheck::Recheck;
use crate::review::table::plain;
use crate::review::work;
use crate::world::Stopwatch;

#[derive(clap::Args)]
pub struct Arguments {
    /// Packages: folders or zips.
    #[arg(required = true)]
    packages: Vec<PathBuf>,
    /// Solve a problem that takes up to this many operations.
    #[arg(long, value_name = "N", default_value_t = work::DEFAULT_LIMIT)]
    allow_work: u64,
    /// Print one JSON document, and nothing else.
    #[arg(long)]
    json: bool,
}

/// Rechecks every package; the exit status is that of the gravest outcome.
pub fn run(arguments: &Arguments) -> u8 {
    let mut tally = Tally::default();
    let mut progress = Progress::of(arguments.packages.len());
    let mut is_first = true;
    let mut out = io::stdout().lock();
    if arguments.json {
        // A reader that has gone away is no fault, here and below.
        let _ = write!(out, "{{ \"format\": 1, \"packages\": [");
    }
    pipeline::recheck_all(
        &arguments.packages,
        arguments.allow_work,
        |package, outcome| {
            progress.clear();
            tally.count(&outcome);
            if arguments.json {
                let separator = if is_first { "\n" } else { ",\n" };
                let _ = write!(out, "{separator}{}", json(package, &outcome));
            } else {
                let _ = write!(out, "{}", report(package, &outcome));
            }
            is_first = false;
            progress.advance();
        },
    );
    progress.clear();
    if arguments.json {
        let _ = writeln!(
            out,
            "\n], \"total\": {}, \"failed\": {}, \"not_opened\": {} }}",
            tally.total(),
            tally.failed,
            tally.not_opened
        );
    } else if tally.total() > 1 {
        let _ = writeln!(out, "{}", tally.words());
    }
    tally.status
}

/// A package in as many lines as it has faults, the outcome first.
fn report(package: &Path, outcome: &Result<Recheck, Failure>) -> String {
    let recheck = match outcome {
        Ok(recheck) => recheck,
        Err(failure) => {
            return format!(
                "{}: not rechecked: {}\n",
                plain(&package.display().to_string()),
                reason(failure)
            );
        }
    };
    let mut text = format!("{}: {}\n", plain(&recheck.package), headline(recheck));
    if let Some(identity) = &recheck.identity {
        text.push_str(&format!(
            "  {}, {}\n",
            identity.words(),
            identity.fingerprint
        ));
    }
    for fault in &recheck.faults {
        text.push_str(&format!("  fault: {fault}\n"));
    }
    if let Some(agreement) = &recheck.agreement {
        text.push_str(&format!("  {}\n", agreement.words()));
    }
    for note in &recheck.notes {
        text.push_str(&format!("  note: {note}\n"));
    }
    text
}

fn headline(recheck: &Recheck) -> String {
    let files = format!("{} payload files", recheck.n_compared);
    let own = recheck
        .finding
        .as_deref()
        .map(|finding| format!("; its finding: {}", plain(finding)))
        .unwrap_or_default();
    match (recheck.faults.len(), &recheck.agreement) {
        (0, None) => format!("reproduced, {files} byte for byte{own}"),
        (0, Some(agreement)) => format!(
            "intact, {} results agree within their stated uncertainty{own}",
            agreement.n_results
        ),
        (1, _) => "FAILED, 1 fault".to_owned(),
        (count, _) => format!("FAILED, {count} faults"),
    }
}

fn json(package: &Path, outcome: &Result<Recheck, Failure>) -> String {
    match outcome {
        Ok(recheck) => recheck.json(),
        Err(failure) => {
            let mut recheck = Recheck::of(&package.display().to_string());
            recheck.not_opened = Some(reason(failure));
            recheck.json()
        }
    }
}

fn reason(failure: &Failure) -> String {
    match failure {
        Failure::File(error) => plain(&error.to_string()),
        Failure::Bug(message) => {
            format!("a bug of the program, please report it: {}", plain(message))
        }
        // The pipeline makes these a part of the report.
        Failure::Input { .. } | Failure::Package { .. } => "its content is at fault".to_owned(),
    }
}

/// Outcomes counted, and the gravest exit status: a bug, a failed recheck, the machine, the arguments.
#[derive(Default)]
struct Tally {
    reproduced: usize,
    failed: usize,
    not_opened: usize,
    status: u8,
}

impl Tally {
    fn count(&mut self, outcome: &Result<Recheck, Failure>) {
        let status = match outcome {
            Ok(recheck) if recheck.is_reproduced() => {
                self.reproduced += 1;
                0
            }
            Ok(_) => {
                self.failed += 1;
                3
            }
            Err(failure) => {
                self.not_opened += 1;
                failure.exit_status()
            }
        };
        let gravity = |status: u8| [0, 2, 4, 3, 70].iter().position(|other| *other == status);
        if gravity(status) > gravity(self.status) {
            self.status = status;
        }
    }

    fn total(&self) -> usize {
        self.reproduced + self.failed + self.not_opened
    }

    fn words(&self) -> String {
        format!(
            "{} packages: {} reproduced, {} failed, {} not rechecked",
            self.total(),
            self.reproduced,
            self.failed,
            self.not_opened
        )
    }
}

/// A line on standard error while it takes long, for a person at a terminal.
struct Progress {
    stopwatch: Stopwatch,
    total: usize,
    done: usize,
    is_shown: bool,
    is_wanted: bool,
}

impl Progress {
    fn of(total: usize) -> Progress {
        Progress {
            stopwatch: Stopwatch::start(),
            total,
            done: 0,
            is_shown: false,
            is_wanted: total > 1 && io::stderr().is_terminal(),
        }
    }

    fn advance(&mut self) {
        const PATIENCE_S: f64 = 1.0;
        self.done += 1;
        if self.is_wanted && self.done < self.total && self.stopwatch.elapsed_s() > PATIENCE_S {
            eprint!("rechecked {} of {}", self.done, self.total);
            self.is_shown = true;
        }
    }

    fn clear(&mut self) {
        if self.is_shown {
            eprint!("\r\u{1b}[K");
            self.is_shown = false;
        }
    }
}
