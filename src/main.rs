//! The command line: arguments in, exit status out.

use std::process::ExitCode;

fn main() -> ExitCode {
    countermarch::cli::run(std::env::args_os())
}
