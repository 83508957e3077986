//! `countermarch contrast`

use std::path::PathBuf;

use crate::pipeline::{self, Failure};
use crate::world;

#[derive(clap::Args)]
pub struct Arguments {
    /// The earlier package: folder or zip.
    old: PathBuf,
    /// The later package.
    new: PathBuf,
    /// Also write it as Markdown to a new file.
    #[arg(long, value_name = "FILE")]
    markdown: Option<PathBuf>,
}

pub fn run(arguments: &Arguments) -> Result<u8, Failure> {
    let contrast = pipeline::contrast(&arguments.old, &arguments.new)?;
    if let Some(file) = &arguments.markdown {
        world::write_new(file, contrast.markdown().as_bytes()).map_err(Failure::File)?;
    }
    super::print(&contrast.terminal());
    Ok(0)
}
