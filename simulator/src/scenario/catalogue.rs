//! The scenarios that come with the program: every file of `simulator/scenarios`.

use include_dir::{Dir, include_dir};

static SCENARIOS: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/scenarios");

/// One scenario of the catalogue.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Entry {
    /// Its name: the file's without `.toml`.
    pub name: &'static str,
    /// Its text.
    pub text: &'static str,
}

/// All of them, by name.
#[must_use]
pub fn catalogue() -> Vec<Entry> {
    let mut entries: Vec<Entry> = SCENARIOS
        .files()
        .filter_map(|file| {
            let name = file.path().file_name()?.to_str()?.strip_suffix(".toml")?;
            Some(Entry {
                name,
                text: file.contents_utf8()?,
            })
        })
        .collect();
    entries.sort_by_key(|entry| entry.name);
    entries
}

/// The one of this name.
#[must_use]
pub fn find(name: &str) -> Option<Entry> {
    catalogue().into_iter().find(|entry| entry.name == name)
}
