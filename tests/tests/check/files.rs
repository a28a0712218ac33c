//! One file, a folder, and files that cannot be read.

use humward::exit::Exit;

use crate::bench::{Bench, command};

const TOP: &str = "site = \"harbour\"\n";

fn pump(id: &str) -> String {
    format!("[[asset]]\nid = \"{id}\"\nspeed = 1482\npoint = [{{ id = \"de\" }}]\n")
}

#[test]
fn a_folder_is_every_toml_in_name_order_and_arrays_append() {
    let (b, a) = (pump("P-B"), pump("P-A"));
    let bench = Bench::new(&[
        ("20-b.toml", &b),
        ("00-site.toml", TOP),
        ("10-a.toml", &a),
        ("notes.txt", "= not toml"),
    ]);
    let loaded = bench.load("").unwrap();
    let ids: Vec<&str> = loaded
        .groups()
        .iter()
        .map(|group| group.id().as_str())
        .collect();
    assert_eq!(ids, ["P-A", "P-B"]);
}

#[test]
fn one_value_in_two_files_is_a_fault_naming_both() {
    let bench = Bench::new(&[
        ("a.toml", TOP),
        ("b.toml", &format!("site = \"quay\"\n{}", pump("P-1"))),
    ]);
    let said = bench.check("", &[]);
    assert!(
        said.err
            .starts_with("b.toml:1:8: site\n    read:    \"quay\"\n"),
        "{}",
        said.err
    );
    assert!(
        said.err.contains("it stands already at a.toml:1:8") && said.err.contains("cfg-twice"),
        "{}",
        said.err
    );
}

#[test]
fn the_same_asset_in_two_files_is_a_fault_naming_both() {
    let bench = Bench::new(&[
        ("a.toml", &format!("{TOP}{}", pump("P-1"))),
        ("b.toml", &pump("P-1")),
    ]);
    let said = bench.check("", &[]);
    assert!(
        said.err.contains("b.toml:2:6: asset.P-1.id") && said.err.contains("a.toml:3:6"),
        "{}",
        said.err
    );
}

#[test]
fn a_syntax_fault_in_one_file_leaves_the_others_checked() {
    let bench = Bench::new(&[
        ("a.toml", "site = \"harbour\n"),
        ("b.toml", &format!("{}frame = 1\n", pump("P-1"))),
    ]);
    let said = bench.check("", &[]);
    assert!(
        said.err.contains("a.toml:1:") && said.err.contains("cfg-syntax"),
        "{}",
        said.err
    );
    assert!(
        said.err.contains("b.toml:5:1: asset.P-1.frame") && said.err.contains("cfg-unknown-key"),
        "{}",
        said.err
    );
    assert!(
        !said.err.contains("cfg-missing-key"),
        "the site may stand in the broken file:\n{}",
        said.err
    );
}

#[test]
fn a_missing_file_an_empty_folder_and_bytes_that_are_no_text_are_faults() {
    let bench = Bench::new(&[("only.txt", "")]);
    let said = bench.check("", &[]);
    assert!(
        said.err
            .contains("a folder without any file ending in .toml"),
        "{}",
        said.err
    );
    let said = bench.check("nowhere.toml", &[]);
    assert_eq!(said.exit, Exit::Configuration);
    assert!(
        said.err.starts_with("nowhere.toml:\n") && said.err.contains("cfg-unreadable"),
        "{}",
        said.err
    );
    std::fs::write(bench.path("latin.toml"), b"site = \"k\xfche\"\n").unwrap();
    let said = bench.check("latin.toml", &[]);
    assert!(said.err.contains("not UTF-8 at offset 9"), "{}", said.err);
}

#[test]
fn a_configuration_of_zone_tables_alone_checks_but_does_not_run() {
    let zones = crate::bench::root().join("config/zones.toml");
    assert_eq!(
        command(&["check", &zones.to_string_lossy()], &[]).exit,
        Exit::Fine
    );
    let faults = humward::config::load(&zones, &[]).unwrap_err();
    assert_eq!(faults.list()[0].key, "asset");
}

#[test]
fn the_hash_follows_the_meaning_and_not_the_writing() {
    let hash = |files: &[(&str, &str)]| Bench::new(files).load("").unwrap().hash().to_owned();
    let one = format!("{TOP}{}", pump("P-1"));
    let same = [
        hash(&[("a.toml", &one)]),
        hash(&[("a.toml", TOP), ("b.toml", &pump("P-1"))]),
        hash(&[(
            "a.toml",
            "# a comment\nreading_every = \"10s\"\nsite = \"harbour\"\n[[asset]]\nspeed = 1482.0\nid = \"P-1\"\npoint = [{ id = \"de\" }]\n",
        )]),
    ];
    assert!(
        same.iter().all(|hash| *hash == same[0] && hash.len() == 16),
        "{same:?}"
    );
    assert_ne!(hash(&[("a.toml", &one.replace("1482", "1483"))]), same[0]);
    assert_ne!(
        hash(&[("a.toml", &format!("reading_every = \"20s\"\n{one}"))]),
        same[0]
    );
}

#[test]
fn a_password_is_the_first_line_of_its_file_and_is_never_shown() {
    let site = format!(
        "{TOP}broker = {{ username = \"gw\", password_file = \"secret\" }}\n{}",
        pump("P-1")
    );
    let bench = Bench::new(&[
        ("site.toml", &site),
        ("secret", "tidal-lock\nsecond line\n"),
    ]);
    let loaded = bench.load("site.toml").unwrap();
    assert_eq!(loaded.broker().password().unwrap().reveal(), "tidal-lock");
    assert!(
        !format!("{loaded:?}").contains("tidal")
            && !bench.check("site.toml", &[]).out.contains("tidal")
    );
}
