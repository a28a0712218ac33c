//! The configuration: TOML files, the environment over them, every fault told at once.
//!
//! In: the path of a file or folder and the process's variables. Out: [`Loaded`], or [`Faults`] with
//! file, line, column, key, what was read, what is allowed and a stable code. Steps: `files` reads and
//! merges, `environment` lays variables over, `verify` compares every value with its declaration in
//! `tables`, `resolve` makes plans of it. Nothing is skipped after a fault but what depends on it.
//! Checked by `tests/check.rs`.

mod canonical;
mod code;
mod environment;
mod fault;
mod files;
mod gather;
mod keys;
mod loaded;
mod measure;
mod near;
mod node;
mod resolve;
mod source;
mod tables;
mod verify;
mod view;

use std::path::Path;

use humward_monitor::plan::ZoneLimits;

pub use code::Code;
pub use environment::{NOT_CONFIGURATION, PREFIX};
pub use fault::{Fault, Faults};
pub use loaded::{Broker, Feed, Gateway, Loaded, Route, Secret};
pub use source::Told;

use gather::Gather;
use node::{Node, Value};
use source::{Place, Sources};
use tables::SITE;

/// What a configuration turned out to be.
#[derive(Debug)]
pub enum Checked {
    /// A whole one, which can run.
    Whole(Box<Loaded>),
    /// Zone tables and nothing else: a part for another configuration to stand beside.
    ZoneTables(Vec<ZoneLimits>),
}

/// Reads and checks a configuration that is to run.
///
/// # Errors
/// Every fault found; zone tables alone lack a site and assets.
pub fn load(path: &Path, variables: &[(String, String)]) -> Result<Loaded, Faults> {
    whole(check(path, variables)?, path)
}

/// Checks a configuration that is at hand as `text`; faults name it as `path`, files beside it are looked for there.
///
/// # Errors
/// As [`load`].
pub fn load_text(
    path: &Path,
    text: &str,
    variables: &[(String, String)],
) -> Result<Loaded, Faults> {
    let mut sources = Sources::default();
    sources.add_file(path, text.into());
    whole(checked(path, sources, Vec::new(), variables)?, path)
}

fn whole(checked: Checked, path: &Path) -> Result<Loaded, Faults> {
    match checked {
        Checked::Whole(loaded) => Ok(*loaded),
        Checked::ZoneTables(_) => Err(Faults::one(Fault {
            place: Told::Path(path.into()),
            code: Code::MissingKey,
            key: "asset".into(),
            read: "zone tables alone".into(),
            allowed: "a site and its assets beside them".into(),
        })),
    }
}

/// Reads and checks a configuration, or a part of one that holds zone tables alone.
///
/// # Errors
/// Every fault found.
pub fn check(path: &Path, variables: &[(String, String)]) -> Result<Checked, Faults> {
    let mut sources = Sources::default();
    let unreadable = files::read(path, &mut sources);
    checked(path, sources, unreadable, variables)
}

fn checked(
    path: &Path,
    mut sources: Sources,
    unreadable: Vec<Fault>,
    variables: &[(String, String)],
) -> Result<Checked, Faults> {
    environment::keep(variables, &mut sources);
    let mut gather = Gather::new(&sources);
    let (tree, broken) = files::merged(&mut gather);
    let incomplete = broken || !unreadable.is_empty();
    gather.faults.extend(unreadable);
    let mut tree = tree.unwrap_or_else(|| Node::empty_table(Place::BuiltIn));
    let part = zone_tables_alone(&tree);
    environment::overlay(&mut tree, &mut gather);
    verify::table(&mut tree, &SITE, "", &mut gather);
    let checked = if part {
        gather.faults.retain(|fault| !missing_at_the_top(fault));
        Some(Checked::ZoneTables(resolve::zone_tables(
            &tree,
            &mut gather,
        )))
    } else {
        resolve::site(&tree, &mut gather).map(|loaded| Checked::Whole(Box::new(loaded)))
    };
    if incomplete {
        // What seems missing may stand in the file that could not be read.
        gather
            .faults
            .retain(|fault| fault.code != Code::NotThere && !missing_at_the_top(fault));
    }
    match (Faults::of(gather.faults), checked) {
        (Some(faults), _) => Err(faults),
        (None, Some(checked)) => Ok(checked),
        (None, None) => Err(Faults::one(Fault {
            place: Told::Path(path.into()),
            code: Code::Contradiction,
            key: String::new(),
            read: "a configuration without a fault of which no plan could be made".into(),
            allowed: "a report of this, with the configuration".into(),
        })),
    }
}

/// Every key there is, with what it is for, what it takes and what stands for it.
pub fn keys() -> String {
    let mut text = String::new();
    keys::describe(&SITE, "", &mut text);
    text
}

fn zone_tables_alone(tree: &Node) -> bool {
    tree.table().is_some_and(|table| {
        !table.entries.is_empty()
            && table
                .entries
                .iter()
                .all(|e| e.key == "zone_table" && matches!(e.node.value, Value::List(_)))
    })
}

fn missing_at_the_top(fault: &Fault) -> bool {
    fault.code == Code::MissingKey && !fault.key.contains('.')
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::load_text;

    const LEAST: &str = include_str!("../../../../config/minimal.toml");

    #[test]
    fn a_text_at_hand_is_a_configuration_over_which_variables_lie() {
        let port = ("HUMWARD_BROKER__PORT".to_owned(), "18830".to_owned());
        let loaded = load_text(Path::new("least.toml"), LEAST, &[port]).unwrap();
        assert_eq!(loaded.site().as_str(), "harbour");
        assert_eq!(loaded.broker().port(), 18_830);
    }

    #[test]
    fn a_fault_of_a_text_at_hand_stands_where_the_text_says_it_is_from() {
        let faults = load_text(Path::new("least.toml"), "site = 3\n", &[]).unwrap_err();
        let told = faults.to_string();
        assert!(told.contains("least.toml:1:8: site"), "{told}");
    }
}
