//! What may depend on what, which lints stand, and how long a file may grow: held by a test from the first commit.

#![expect(
    clippy::unwrap_used,
    reason = "the helpers of a test stop at its first surprise"
)]

use std::{
    collections::BTreeSet,
    fs,
    path::{Path, PathBuf},
};

/// The pure crates, each with every dependency it may have, and the crates that may not know each other.
const PURE: [(&str, &[&str]); 3] = [
    ("daemon/signal", &["realfft"]),
    (
        "daemon/wire",
        &[
            "base64",
            "jiff",
            "minicbor",
            "schemars",
            "serde",
            "serde_json",
        ],
    ),
    ("daemon/monitor", &["humward-signal", "humward-wire"]),
];
/// Longest file of code, in lines.
const LONGEST: usize = 500;
/// Median length of a file of code, in lines: "near 150" with room.
const MEDIAN: usize = 200;

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .parent()
        .map(Path::to_path_buf)
        .unwrap()
}

fn manifest(folder: &str) -> toml::Table {
    fs::read_to_string(root().join(folder).join("Cargo.toml"))
        .unwrap()
        .parse()
        .unwrap()
}

fn keys(table: Option<&toml::Value>) -> BTreeSet<String> {
    table
        .and_then(toml::Value::as_table)
        .map(|table| table.keys().cloned().collect())
        .unwrap_or_default()
}

fn code_files(under: &Path, into: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(under).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        if path.is_dir() && name != "target" && !name.starts_with('.') {
            code_files(&path, into);
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            into.push(path);
        }
    }
}

#[test]
fn a_pure_crate_depends_on_its_list_and_on_nothing_else() {
    for (folder, allowed) in PURE {
        let manifest = manifest(folder);
        let found = keys(manifest.get("dependencies"));
        let allowed = allowed.iter().map(ToString::to_string).collect();
        assert_eq!(
            found, allowed,
            "{folder}: a pure crate's dependencies are listed in tests/layering.rs"
        );
        for section in ["build-dependencies", "target"] {
            assert!(
                manifest.get(section).is_none(),
                "{folder} has {section}: a pure crate builds everywhere alike"
            );
        }
    }
}

#[test]
fn a_pure_crate_is_no_std_and_names_neither_clock_nor_file_nor_socket() {
    for (folder, _) in PURE {
        let lib = fs::read_to_string(root().join(folder).join("src/lib.rs")).unwrap();
        assert!(
            lib.lines().any(|line| line == "#![no_std]"),
            "{folder}/src/lib.rs lacks #![no_std]"
        );
        let mut files = Vec::new();
        code_files(&root().join(folder).join("src"), &mut files);
        for file in files {
            let text = fs::read_to_string(&file).unwrap();
            let is_test = file
                .components()
                .any(|part| part.as_os_str() == "tests.rs" || part.as_os_str() == "tests");
            let code = text.split("#[cfg(test)]").next().unwrap_or_default();
            assert!(
                is_test || !code.contains("std::"),
                "{} names std",
                file.display()
            );
        }
    }
}

#[test]
fn the_simulator_never_sees_how_the_daemon_measures() {
    let folder = root().join("simulator");
    if folder.join("Cargo.toml").exists() {
        let found = keys(manifest("simulator").get("dependencies"));
        for forbidden in ["humward-signal", "humward-monitor", "humward"] {
            assert!(
                !found.contains(forbidden),
                "simulator depends on {forbidden}"
            );
        }
    }
    let wire = keys(manifest("daemon/wire").get("dependencies"));
    assert!(
        wire.iter().all(|name| !name.starts_with("humward")),
        "wire depends on {wire:?}"
    );
}

/// What only `humward-demo` may depend on, beside the daemon and the simulator at once.
const BROKER: &str = "rumqttd";

#[test]
fn the_demo_alone_knows_daemon_and_simulator_together_and_alone_holds_a_broker() {
    let workspace: toml::Table = fs::read_to_string(root().join("Cargo.toml"))
        .unwrap()
        .parse()
        .unwrap();
    let members = workspace["workspace"]["members"].as_array().unwrap();
    let mut together = Vec::new();
    let mut brokers = Vec::new();
    for member in members.iter().filter_map(toml::Value::as_str) {
        let manifest = manifest(member);
        let mut found = BTreeSet::new();
        for section in ["dependencies", "dev-dependencies", "build-dependencies"] {
            found.extend(keys(manifest.get(section)));
        }
        // The package of tests sees everything; nothing is made of it.
        if found.contains("humward") && found.contains("humward-sim") && member != "tests" {
            together.push(member);
        }
        if found.contains(BROKER) {
            brokers.push(member);
        }
    }
    assert_eq!(together, ["simulator/demo"]);
    assert_eq!(brokers, ["simulator/demo"]);
}

#[test]
fn nothing_the_daemon_is_built_of_is_a_broker() {
    let lock: toml::Table = fs::read_to_string(root().join("Cargo.lock"))
        .unwrap()
        .parse()
        .unwrap();
    let packages = lock["package"].as_array().unwrap();
    let mut waiting = vec!["humward".to_owned()];
    let mut reached = BTreeSet::new();
    while let Some(name) = waiting.pop() {
        if !reached.insert(name.clone()) {
            continue;
        }
        // Of several versions of a package every one counts: that is more than the daemon takes, never less.
        for package in packages
            .iter()
            .filter(|package| package["name"].as_str() == Some(&name))
        {
            let needed = package.get("dependencies").and_then(toml::Value::as_array);
            waiting.extend(
                needed
                    .into_iter()
                    .flatten()
                    .filter_map(toml::Value::as_str)
                    .filter_map(|entry| entry.split(' ').next())
                    .map(str::to_owned),
            );
        }
    }
    assert!(reached.contains("rumqttc"), "the walk reaches the client");
    assert!(!reached.contains(BROKER), "humward is built with {BROKER}");
}

#[test]
fn every_crate_takes_the_lints_of_the_workspace_and_each_dependency_says_why() {
    let workspace_text = fs::read_to_string(root().join("Cargo.toml")).unwrap();
    let workspace: toml::Table = workspace_text.parse().unwrap();
    let members = workspace["workspace"]["members"].as_array().unwrap();
    for member in members.iter().filter_map(toml::Value::as_str) {
        let manifest = manifest(member);
        let inherits = manifest
            .get("lints")
            .and_then(|lints| lints.get("workspace"));
        assert_eq!(
            inherits.and_then(toml::Value::as_bool),
            Some(true),
            "{member} has lints of its own"
        );
        for section in ["dependencies", "dev-dependencies"] {
            for (name, value) in manifest
                .get(section)
                .and_then(toml::Value::as_table)
                .into_iter()
                .flatten()
            {
                assert!(
                    value.get("workspace").is_some(),
                    "{member}: {name} does not take the workspace's version"
                );
            }
        }
    }
    let lints = &workspace["workspace"]["lints"];
    for (tool, lint) in [
        ("rust", "unsafe_code"),
        ("rust", "missing_docs"),
        ("rust", "unreachable_pub"),
        ("clippy", "unwrap_used"),
        ("clippy", "print_stdout"),
        ("clippy", "wildcard_enum_match_arm"),
        ("clippy", "allow_attributes"),
    ] {
        assert_eq!(
            lints[tool][lint].as_str(),
            Some("deny"),
            "{lint} is not denied"
        );
    }
    let dependencies = workspace_text
        .split("[workspace.dependencies]")
        .nth(1)
        .unwrap();
    let dependencies = dependencies.split("\n[").next().unwrap_or_default();
    for line in dependencies
        .lines()
        .filter(|line| line.contains('=') && !line.starts_with("humward"))
    {
        let after = line.rfind(['}', '"']).map_or(line, |end| &line[end..]);
        assert!(after.contains("# "), "no reason beside: {line}");
    }
}

#[test]
fn no_file_of_code_passes_five_hundred_lines() {
    let mut files = Vec::new();
    for folder in ["daemon", "tests", "simulator"] {
        if root().join(folder).is_dir() {
            code_files(&root().join(folder), &mut files);
        }
    }
    let length = |file: &PathBuf| fs::read_to_string(file).unwrap().lines().count();
    let mut lengths: Vec<usize> = files.iter().map(length).collect();
    let longest = files.iter().max_by_key(|file| length(file)).unwrap();
    assert!(
        length(longest) <= LONGEST,
        "{} has {} lines",
        longest.display(),
        length(longest)
    );
    lengths.sort_unstable();
    let median = lengths[lengths.len() / 2];
    assert!(
        median <= MEDIAN,
        "the median file has {median} lines; split the growing ones"
    );
}

#[test]
fn the_top_level_holds_what_it_is_meant_to_hold() {
    let allowed = [
        "Cargo.toml",
        "Cargo.lock",
        "README.md",
        "DEVELOPERS.md",
        "daemon",
        "config",
        "deploy",
        "tests",
        "simulator",
        "target",
    ];
    for entry in fs::read_dir(root()).unwrap() {
        let name = entry.unwrap().file_name().to_string_lossy().into_owned();
        assert!(
            name.starts_with('.') || allowed.contains(&name.as_str()),
            "{name} does not belong at the top level"
        );
    }
}
