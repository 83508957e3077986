//! `countermarch issue`

use std::path::PathBuf;

use super::{report, warn};
use crate::judgement::Overall;
use crate::pipeline::{self, Failure, Form};

#[derive(clap::Args)]
pub struct Arguments {
    /// The problem file.
    problem: PathBuf,
    /// Folder below which the package is written; it must exist.
    #[arg(long, value_name = "DIR", default_value = ".")]
    into: PathBuf,
    /// Write one zip instead of a folder.
    #[arg(long)]
    zip: bool,
}

pub fn run(arguments: &Arguments) -> Result<Overall, Failure> {
    let form = if arguments.zip {
        Form::Zip
    } else {
        Form::Folder
    };
    let issued = pipeline::issue_as(form, &arguments.problem, &arguments.into)?;
    warn(&issued.trial.warnings, &issued.trial.sources);
    print!("{}", report::trial(&issued.trial));
    print!("{}", report::issued(&issued));
    Ok(issued.trial.verdict.overall)
}
