//! Every script against its expected output.

use std::{env, fs, path::PathBuf};

use crate::{drive, inputs::timed, language::Script, settings::Settings, told::told};

/// Fewest scripts there are: a lost folder must not pass.
const FEWEST: usize = 83;

fn folder() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/scripts")
}

fn output(script: &Script) -> String {
    let settings = Settings::of(&script.settings);
    let deeds = timed(&settings, &script.commands);
    let plan = settings.plan();
    let several = plan.assets().len() > 1;
    told(&script.commands, &drive::run(plan, &deeds), several)
}

#[test]
fn every_script_gives_exactly_its_actions() {
    let bless = env::var_os("HUMWARD_BLESS").is_some();
    let mut paths: Vec<PathBuf> = fs::read_dir(folder())
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .collect();
    paths.retain(|path| {
        path.extension()
            .is_some_and(|extension| extension == "script")
    });
    paths.sort();
    let mut wrong = Vec::new();
    for path in &paths {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        let script = Script::read(&name, &fs::read_to_string(path).unwrap());
        let got = output(&script);
        if got != script.expected {
            if bless {
                fs::write(path, format!("{}\n---\n{got}", script.asked)).unwrap();
            } else {
                wrong.push(format!("{name}:\n{}", difference(&script.expected, &got)));
            }
        }
    }
    assert!(
        paths.len() >= FEWEST,
        "{} scripts found, not {FEWEST}",
        paths.len()
    );
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Lines expected (`-`) and got (`+`), with the common ones before and after left out.
fn difference(expected: &str, got: &str) -> String {
    let (expected, got): (Vec<&str>, Vec<&str>) =
        (expected.lines().collect(), got.lines().collect());
    let same = expected
        .iter()
        .zip(&got)
        .take_while(|(a, b)| a == b)
        .count();
    let rest = expected.len().min(got.len()) - same;
    let same_end = expected
        .iter()
        .rev()
        .zip(got.iter().rev())
        .take(rest)
        .take_while(|(a, b)| a == b)
        .count();
    let part = |lines: &[&str], sign: &str| {
        let changed = lines[same..lines.len() - same_end].iter();
        changed
            .map(|line| format!("  {sign} {line}\n"))
            .collect::<String>()
    };
    format!(
        "  from line {} of the output on:\n{}{}",
        same + 1,
        part(&expected, "-"),
        part(&got, "+")
    )
}

#[test]
fn a_changed_line_is_shown_as_expected_and_got() {
    let shown = difference("a\nb\nc\n", "a\nx\nc\n");
    assert_eq!(shown, "  from line 2 of the output on:\n  - b\n  + x\n");
}
