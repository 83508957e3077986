//! `countermarch register`

use std::path::PathBuf;

use crate::pipeline::{self, Failure};
use crate::review::table::plain;
use crate::world;

#[derive(clap::Args)]
pub struct Arguments {
    /// Folder at and below which packages are listed.
    folder: PathBuf,
    /// Hash every file of every package; otherwise only what is read is compared with its digest.
    #[arg(long)]
    full: bool,
    /// Also write the register as CSV to a new file.
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Also write the register as Markdown to a new file.
    #[arg(long, value_name = "FILE")]
    markdown: Option<PathBuf>,
}

/// Exit status 3 when a package is broken.
pub fn run(arguments: &Arguments) -> Result<u8, Failure> {
    let register = pipeline::register(&arguments.folder, arguments.full)?;
    let table = register.table();
    if let Some(file) = &arguments.csv {
        world::write_new(file, table.csv().as_bytes()).map_err(Failure::File)?;
    }
    if let Some(file) = &arguments.markdown {
        world::write_new(file, table.markdown().as_bytes()).map_err(Failure::File)?;
    }
    super::print(&register.overview().terminal());
    let (total, broken) = (register.entries.len(), register.n_broken());
    let depth = if arguments.full {
        "every file hashed"
    } else {
        "tag files and results read"
    };
    super::print(&format!("{total} packages, {broken} broken ({depth})\n"));
    for remark in &register.remarks {
        eprintln!("{}", plain(remark));
    }
    Ok(if broken > 0 { 3 } else { 0 })
}
