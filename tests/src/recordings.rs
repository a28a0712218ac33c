//! Where the real recordings are, and the honest word when they are not there.

use std::env;
use std::fs;
use std::io::Write;
use std::path::PathBuf;

/// The folder of real recordings; without one, `test` is written down as not run and `None` comes back.
///
/// The word goes to stderr and, when `HUMWARD_NOT_RUN` names a folder, into a file there named after the test:
/// the summary of a run counts those files.
pub fn folder(test: &str) -> Option<PathBuf> {
    if let Some(folder) = env::var_os("HUMWARD_RECORDINGS") {
        let folder = PathBuf::from(folder);
        assert!(
            folder.is_dir(),
            "HUMWARD_RECORDINGS names {}, which is no folder",
            folder.display()
        );
        return Some(folder);
    }
    let why = "HUMWARD_RECORDINGS names no folder of recordings";
    writeln!(std::io::stderr(), "NOT RUN {test}: {why}").expect("stderr can be written");
    if let Some(folder) = env::var_os("HUMWARD_NOT_RUN") {
        fs::write(PathBuf::from(folder).join(test), format!("{why}\n"))
            .expect("the folder of HUMWARD_NOT_RUN");
    }
    None
}
