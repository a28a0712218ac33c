//! The `humward` program.

use std::io;
use std::process::ExitCode;

fn main() -> ExitCode {
    let variables = humward::cli::variables(std::env::vars_os());
    humward::cli::run(
        std::env::args_os(),
        &variables,
        &mut io::stdout(),
        &mut io::stderr(),
    )
    .into()
}
