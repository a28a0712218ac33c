//! The files of a configuration: one TOML file, or every `*.toml` of a folder in name order, merged.
//!
//! Arrays append in the order of the files, tables merge, and a value given in two files is a fault
//! naming both: no file overrides another in silence.

use std::fs;
use std::path::{Path, PathBuf};

use toml::de::DeTable;

use super::gather::Gather;
use super::node::{Node, Table, Value};
use super::source::{Place, Sources, Told};
use super::verify::join;
use super::{Code, Fault};

/// Reads the file or folder at `path` into `sources`; faults name what could not be read.
pub(crate) fn read(path: &Path, sources: &mut Sources) -> Vec<Fault> {
    let paths = match list(path) {
        Ok(paths) => paths,
        Err(fault) => return vec![fault],
    };
    let mut faults = Vec::new();
    for path in paths {
        match fs::read(&path) {
            Err(error) => faults.push(unreadable(
                &path,
                error.to_string(),
                "a TOML file this user may read",
            )),
            Ok(bytes) => match String::from_utf8(bytes) {
                Err(error) => {
                    let read = format!(
                        "a byte that is not UTF-8 at offset {}",
                        error.utf8_error().valid_up_to()
                    );
                    faults.push(unreadable(&path, read, "a text file in UTF-8"));
                }
                Ok(text) => {
                    sources.add_file(&path, text);
                }
            },
        }
    }
    faults
}

fn list(path: &Path) -> Result<Vec<PathBuf>, Fault> {
    let remedy = "the path of a TOML file or of a folder that holds some";
    let metadata =
        fs::metadata(path).map_err(|error| unreadable(path, error.to_string(), remedy))?;
    if !metadata.is_dir() {
        return Ok(vec![path.into()]);
    }
    let entries =
        fs::read_dir(path).map_err(|error| unreadable(path, error.to_string(), remedy))?;
    let mut paths = Vec::new();
    for entry in entries {
        let entry = entry
            .map_err(|error| unreadable(path, error.to_string(), remedy))?
            .path();
        if entry
            .extension()
            .is_some_and(|extension| extension == "toml")
        {
            paths.push(entry);
        }
    }
    paths.sort();
    if paths.is_empty() {
        return Err(unreadable(
            path,
            "a folder without any file ending in .toml".into(),
            remedy,
        ));
    }
    Ok(paths)
}

fn unreadable(path: &Path, read: String, allowed: &str) -> Fault {
    Fault {
        code: Code::Unreadable,
        place: Told::Path(path.into()),
        key: String::new(),
        read,
        allowed: allowed.into(),
    }
}

/// Parses every file of `gather`'s sources and merges them; `None` for a tree means that nothing could be read.
///
/// A file with a syntax fault contributes nothing; the second value tells whether there was one.
pub(crate) fn merged(gather: &mut Gather<'_>) -> (Option<Node>, bool) {
    let sources = gather.sources;
    let mut whole: Option<Node> = None;
    let mut broken = false;
    for file in 0..sources.files() {
        let Some(text) = sources.text(file) else {
            continue;
        };
        let (document, errors) = DeTable::parse_recoverable(text);
        for error in &errors {
            let span = error.span().unwrap_or(0..0);
            let place = Place::File {
                file,
                start: span.start,
                end: span.end,
            };
            let line = text[..span.start.min(text.len())]
                .rsplit('\n')
                .next()
                .unwrap_or_default()
                .len();
            let line_start = span.start.min(text.len()) - line;
            let read = text[line_start..].lines().next().unwrap_or_default().trim();
            gather.add(
                Code::Syntax,
                place,
                "",
                read.into(),
                format!("TOML: {}", error.message()),
            );
        }
        if errors.is_empty() {
            let node = Node::of_document(&document, file);
            match &mut whole {
                None => whole = Some(node),
                Some(whole) => merge(whole, node, "", gather),
            }
        }
        broken |= !errors.is_empty();
    }
    (whole, broken)
}

fn merge(into: &mut Node, from: Node, path: &str, gather: &mut Gather<'_>) {
    match (&mut into.value, from.value) {
        (Value::Table(into), Value::Table(from)) => merge_tables(into, from, path, gather),
        (Value::List(into), Value::List(mut from)) => into.append(&mut from),
        _ => {
            let read = gather.written(from.place);
            let allowed = format!(
                "given once; it stands already at {}",
                gather.tell(into.place)
            );
            gather.add(Code::Twice, from.place, path, read, allowed);
        }
    }
}

fn merge_tables(into: &mut Table, from: Table, path: &str, gather: &mut Gather<'_>) {
    for entry in from.entries {
        match into.entries.iter_mut().find(|there| there.key == entry.key) {
            Some(there) => merge(&mut there.node, entry.node, &join(path, &entry.key), gather),
            None => into.entries.push(entry),
        }
    }
}
