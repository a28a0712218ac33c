//! `humward check`: every fault of a configuration, or the plan it resolves to.

mod report;

use std::io::{self, Write};
use std::path::Path;

use crate::config::{self, Checked};
use crate::exit::Exit;

/// Checks the configuration at `path`; the plan goes to `out`, faults to `err`.
///
/// # Errors
/// An output cannot be written.
pub fn run(
    path: &Path,
    variables: &[(String, String)],
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> io::Result<Exit> {
    match config::check(path, variables) {
        Ok(Checked::Whole(loaded)) => {
            report::write(&loaded, out)?;
            Ok(Exit::Fine)
        }
        Ok(Checked::ZoneTables(classes)) => {
            writeln!(
                out,
                "zone tables alone, {} classes; another file of the folder gives site and assets",
                classes.len()
            )?;
            for class in &classes {
                report::write_zone(class, out)?;
            }
            Ok(Exit::Fine)
        }
        Err(faults) => {
            writeln!(err, "{faults}")?;
            Ok(Exit::Configuration)
        }
    }
}
