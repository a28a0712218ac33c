//! The `humward-sim` program: synthetic pump signals with known truth.

use std::io;
use std::process::ExitCode;

fn main() -> ExitCode {
    humward_sim::cli::run(std::env::args_os(), &mut io::stdout(), &mut io::stderr()).into()
}
