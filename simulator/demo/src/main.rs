//! The `humward-demo` program.

use std::io::{self, IsTerminal as _};
use std::process::ExitCode;

fn main() -> ExitCode {
    if std::env::var_os("HUMWARD_LOG").is_some() {
        humward::run::log();
    }
    let terminal = io::stdout().is_terminal();
    let no_color = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
    humward_demo::cli::run(
        std::env::args_os(),
        terminal && !no_color,
        &mut io::stdout(),
        &mut io::stderr(),
    )
    .into()
}
