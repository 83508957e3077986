//! `countermarch trial`

use std::path::PathBuf;

use super::{report, warn};
use crate::judgement::Overall;
use crate::pipeline::{self, Failure};

#[derive(clap::Args)]
pub struct Arguments {
    /// The problem file.
    problem: PathBuf,
    /// Print results.json as the package would hold it, and nothing else.
    #[arg(long)]
    json: bool,
}

pub fn run(arguments: &Arguments) -> Result<Overall, Failure> {
    let trial = pipeline::trial(&arguments.problem)?;
    warn(&trial.warnings, &trial.sources);
    if arguments.json {
        print!("{}", pipeline::results_json(&trial));
    } else {
        print!("{}", report::trial(&trial));
    }
    Ok(trial.verdict.overall)
}
