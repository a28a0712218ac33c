//! The files an operator copies, and the figures of the zone table.

use std::fs;
use std::path::PathBuf;

use humward::config::{self, Checked};
use humward::exit::Exit;

use crate::bench::{command, golden, root};

fn shipped() -> Vec<PathBuf> {
    let mut paths: Vec<PathBuf> = fs::read_dir(root().join("config"))
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .collect();
    paths.sort();
    paths
}

#[test]
fn every_file_in_config_checks_clean() {
    let paths = shipped();
    let names: Vec<String> = paths
        .iter()
        .map(|path| path.file_name().unwrap().to_string_lossy().into_owned())
        .collect();
    for name in ["example.toml", "harbour.toml", "minimal.toml", "zones.toml"] {
        assert!(
            names.iter().any(|there| there == name),
            "{name} among {names:?}"
        );
    }
    for path in paths {
        let said = command(&["check", &path.to_string_lossy()], &[]);
        assert_eq!(said.exit, Exit::Fine, "{}\n{}", path.display(), said.err);
        assert!(said.err.is_empty() && !said.out.is_empty());
    }
}

#[test]
fn the_minimal_asset_has_six_lines() {
    let text = fs::read_to_string(root().join("config/minimal.toml")).unwrap();
    assert_eq!(
        text.lines().filter(|line| !line.starts_with('#')).count(),
        6
    );
}

#[test]
fn an_asset_of_which_only_the_sensors_are_watched_is_told() {
    let path = root().join("config/minimal.toml");
    let said = command(&["check", &path.to_string_lossy()], &[]);
    assert!(
        said.out.ends_with(
            "not watched:\n  P-103A: only its sensors are watched, nothing about the machine; \
             give it zones, a bearing or a [[watch]]\n"
        ),
        "{}",
        said.out
    );
}

#[test]
fn the_example_names_every_key() {
    let text = fs::read_to_string(root().join("config/example.toml")).unwrap();
    let words: Vec<&str> = text
        .split(|c: char| !(c.is_ascii_alphanumeric() || c == '_'))
        .collect();
    let keys = config::keys();
    for path in keys.lines().filter(|line| !line.starts_with(' ')) {
        let key = path.rsplit('.').next().unwrap();
        assert!(words.contains(&key), "{path}");
    }
}

#[test]
fn the_plan_of_the_example_is_told_to_the_letter() {
    let said = command(
        &[
            "check",
            &root().join("config/example.toml").to_string_lossy(),
        ],
        &[],
    );
    golden("example.golden", &said.out);
}

/// ISO 10816-7:2009 Table A.1 (from memory), and its rounded largest alarm and trip, 1.25 x the upper
/// limits of zones B and C: `iso10816_7.max_alarm_trip.*`, tolerance 0.06 mm/s for the printed rounding.
#[test]
fn the_shipped_zones_are_those_of_the_table_and_its_largest_alarms() {
    let Checked::ZoneTables(classes) =
        config::check(&root().join("config/zones.toml"), &[]).unwrap()
    else {
        panic!("zones.toml holds more than zone tables");
    };
    let table = [
        ("pump-1-small", [2.5, 4.0, 6.6], [5.0, 8.3]),
        ("pump-1-large", [3.5, 5.0, 7.6], [6.3, 9.5]),
        ("pump-2-small", [3.2, 5.1, 8.5], [6.4, 10.6]),
        ("pump-2-large", [4.2, 6.1, 9.5], [7.6, 11.9]),
    ];
    assert_eq!(classes.len(), table.len());
    for (zone, (class, borders, largest)) in classes.iter().zip(table) {
        assert_eq!((zone.class(), zone.borders()), (class, borders));
        assert!(
            zone.source()
                .starts_with("ISO 10816-7:2009 Table A.1, from memory"),
            "{}",
            zone.source()
        );
        for (border, largest) in zone.borders()[1..].iter().zip(largest) {
            assert!(
                (1.25 * border - largest).abs() <= 0.06,
                "{class}: {border} and {largest}"
            );
        }
    }
}
