//! What is told of faulty configurations.

use std::collections::BTreeSet;
use std::fs;

use humward::config::{self, Code};
use humward::exit::Exit;

use crate::bench::{Bench, check, command, golden, root};

/// `== key`, a configuration, `--`, what is said: to the end of the file.
fn cases(text: &str) -> Vec<(String, String)> {
    text.split("\n== ")
        .skip(1)
        .map(|case| {
            let (key, rest) = case.split_once('\n').unwrap();
            let (toml, _) = rest.split_once("\n--\n").unwrap();
            (key.to_owned(), toml.to_owned())
        })
        .collect()
}

#[test]
fn every_key_has_a_bad_value_that_is_told_to_the_letter() {
    let name = "bad-values.golden";
    let kept = fs::read_to_string(root().join("tests/fixtures/config").join(name)).unwrap();
    let (mut text, _) = kept
        .split_once("\n\n== ")
        .map(|(head, rest)| (head.to_owned(), rest))
        .unwrap();
    text.push('\n');
    let (mut covered, mut untold) = (BTreeSet::new(), Vec::new());
    for (key, toml) in cases(&kept) {
        let said = Bench::new(&[("site.toml", &toml)]).check("site.toml", &[]);
        let last = key.rsplit('.').next().unwrap();
        if said.exit != Exit::Configuration
            || !said.err.contains(last)
            || !said.err.contains("site.toml:")
        {
            untold.push(format!("{key}:\n{}{}", said.out, said.err));
        }
        text.push_str(&format!("\n== {key}\n{toml}\n--\n{}", said.err));
        covered.insert(key);
    }
    assert!(
        untold.is_empty(),
        "not told with key and place:\n{}",
        untold.join("\n")
    );
    golden(name, &text);
    let keys: BTreeSet<String> = config::keys()
        .lines()
        .filter(|line| !line.starts_with(' '))
        .map(str::to_owned)
        .collect();
    // A watch has the same keys wherever it stands.
    let same = |key: &str| {
        key.replace("asset.point.watch.", "watch.")
            .replace("asset.watch.", "watch.")
    };
    let missing: Vec<&String> = keys
        .iter()
        .filter(|key| !covered.contains(&same(key)))
        .collect();
    assert!(missing.is_empty(), "keys without a bad value: {missing:?}");
    assert!(
        covered.iter().all(|key| keys.contains(key)),
        "cases of keys that are gone"
    );
}

#[test]
fn six_different_faults_in_one_file_are_told_in_one_run() {
    let toml = fs::read_to_string(root().join("tests/fixtures/config/six-faults.toml")).unwrap();
    let said = Bench::new(&[("six-faults.toml", &toml)]).check("six-faults.toml", &[]);
    golden("six-faults.golden", &said.err);
    let codes: BTreeSet<Code> = Code::ALL
        .into_iter()
        .filter(|code| said.err.contains(code.text()))
        .collect();
    assert_eq!(codes.len(), 6, "{}", said.err);
    assert!(said.err.contains("\n6 faults; "), "{}", said.err);
    assert!(said.out.is_empty(), "{}", said.out);
}

#[test]
fn a_bad_id_hides_no_other_fault_of_its_asset_or_point() {
    for (asset, point) in [("P 1", "de"), ("P-1", "d e"), ("P 1", "d e")] {
        let toml = format!(
            "site = \"a\"\n[[asset]]\nid = \"{asset}\"\nspeed = 1500\nzones = \"nope\"\n[[asset.point]]\n\
             id = \"{point}\"\nframe = 8191\nbearing = {{ outer = 3.5 }}\n"
        );
        let said = Bench::new(&[("site.toml", &toml)]).check("site.toml", &[]);
        for told in ["site.toml:5:", "site.toml:8:", "site.toml:9:"] {
            assert!(said.err.contains(told), "{told}\n{}", said.err);
        }
    }
}

#[test]
fn an_unknown_key_is_a_fault_with_the_nearest_known_one() {
    let said = check(
        "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\nreading_evry = \"1s\"\npoint = [{ id = \"de\" }]\n",
    );
    assert!(
        said.err
            .starts_with("site.toml:5:1: asset.P-1.reading_evry\n"),
        "{}",
        said.err
    );
    assert!(
        said.err.contains("allowed: did you mean reading_every?\n"),
        "{}",
        said.err
    );
    assert!(said.err.contains("cfg-unknown-key"), "{}", said.err);
}

#[test]
fn a_fault_of_one_watch_is_told_once_however_many_points_it_stands_at() {
    let points: String = (0..5)
        .map(|i| format!("[[asset.point]]\nid = \"p{i}\"\n"))
        .collect();
    let said = check(&format!(
        "site = \"harbour\"\n[[watch]]\nname = \"v\"\nmeasure = \"velocity_rms\"\nalert = 4.0\ndanger = 3.0\n[[asset]]\nid = \"P-1\"\nspeed = 1482\n{points}"
    ));
    assert!(said.err.contains("\n1 fault; "), "{}", said.err);
}

#[test]
fn a_watch_that_would_watch_nothing_is_a_fault() {
    for measure in ["band.vanes", "bearing.outer", "bearing.any"] {
        let said = check(&format!(
            "site = \"harbour\"\n[[watch]]\nname = \"v\"\nmeasure = \"{measure}\"\nalert = 4.0\n[[asset]]\nid = \"P-1\"\nspeed = 1482\npoint = [{{ id = \"de\" }}]\n"
        ));
        assert!(
            said.err.contains("cfg-not-there")
                && said.err.contains("site.toml:4:11: watch.v.measure"),
            "{}",
            said.err
        );
    }
}

#[test]
fn two_watches_of_one_name_and_width_at_one_point_are_a_fault_naming_both_lines() {
    let said = check(
        "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\npoint = [{ id = \"de\" }]\n\
         [[asset.watch]]\nname = \"v\"\nmeasure = \"velocity_rms\"\nalert = 4.0\n\
         [[asset.watch]]\nname = \"v\"\nmeasure = \"crest\"\nalert = 4.0\n",
    );
    assert!(
        said.err
            .starts_with("site.toml:11:8: asset.P-1.watch.v.name\n"),
        "{}",
        said.err
    );
    assert!(said.err.contains("from site.toml:7:8"), "{}", said.err);
}

#[test]
fn a_race_line_the_frame_cannot_resolve_is_refused_with_the_frame_that_would_do() {
    let said = check(
        "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\n[[asset.point]]\nid = \"de\"\nrate_hz = 12000\n\
         bearing = { outer = 3.585, inner = 5.415, element = 4.714, cage = 0.398 }\n\
         [[asset.point.watch]]\nname = \"cage\"\nmeasure = \"bearing.cage\"\nalert = 15\n",
    );
    assert!(
        said.err.contains("cfg-cannot-resolve") && said.err.contains("frame = 16384 would do"),
        "{}",
        said.err
    );
}

#[test]
fn what_cannot_work_is_refused_with_what_would_do() {
    let bearing = "bearing = { outer = 3.585, inner = 5.415, element = 4.714, cage = 0.398 }";
    let watch = |measure: &str| {
        format!("watch = [{{ name = \"w\", measure = \"{measure}\", alert = 15 }}]")
    };
    let cases = [
        ("1482", "reading_every = \"1s\"", "rate_hz = 12000\nframe = 16384".to_owned(), "at least 1.365 s, one frame of 16384 samples"),
        ("120", "reading_every = \"4s\"", String::new(), "at least 5 s, 4 periods of velocity_from_hz = 0.8"),
        ("1482", "", "rate_hz = 12000\nenvelope_hz = [2000, 2040]".to_owned(), "at least 46.9 Hz wide, 32 spectral lines"),
        ("1482", "", "rate_hz = 12000\nband = [{ name = \"b\", hz = [100, 103], quantity = \"velocity\" }]".to_owned(), "at least 5.86 Hz, 4 spectral lines"),
        ("1482", "", "rate_hz = 12000\nband = [{ name = \"b\", orders = [200, 300], quantity = \"velocity\" }]".to_owned(), "up to half the rate, 6000 Hz"),
        ("1482", "", format!("rate_hz = 4000\n{}", watch("high_band_rms")), "a rate of at least 5120 samples/s"),
        ("1482", "", format!("{bearing}\nenvelope_hz = [2000, 2500]\n{}", watch("bearing.inner")), "a band at least 535 Hz wide would do"),
        ("100", "", format!("{bearing}\nrate_hz = 102400\n{}", watch("bearing.cage")), "no frame does at this rate"),
    ];
    for (speed, asset, point, remedy) in cases {
        let said = check(&format!(
            "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = {speed}\n{asset}\n[[asset.point]]\nid = \"de\"\n{point}\n"
        ));
        assert!(
            said.err.contains(remedy) && said.err.contains("cfg-cannot-resolve"),
            "{remedy}:\n{}{}",
            said.out,
            said.err
        );
    }
}

#[test]
fn persistence_is_a_time_a_count_or_m_of_n_and_nothing_else() {
    let with = |text: &str| {
        check(&format!(
            "site = \"harbour\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\npoint = [{{ id = \"de\" }}]\n\
             [[asset.watch]]\nname = \"v\"\nmeasure = \"velocity_rms\"\nalert = 4.0\nalert_after = \"{text}\"\n"
        ))
    };
    for (text, told) in [
        ("3 readings", "3 readings"),
        ("1 reading", "1 reading"),
        ("3 of 5", "3 of 5 readings"),
        ("2min", "120 s"),
        ("500 ms", ""),
    ] {
        let said = with(text);
        assert_eq!(
            said.exit == Exit::Fine,
            !told.is_empty(),
            "{text}: {}",
            said.err
        );
        assert!(said.out.contains(told), "{text}: {}", said.out);
    }
    for text in [
        "",
        "3",
        "0 readings",
        "3 of 65",
        "4 of 3",
        "0s",
        "31d",
        "-5s",
        "1.5s",
        "3 reading s",
        "five of six",
    ] {
        assert!(with(text).err.contains("cfg-wrong-form"), "{text:?}");
    }
}

#[test]
fn each_code_is_explained_on_request_and_an_unknown_one_is_a_usage_error() {
    for code in Code::ALL {
        let said = command(&["check", "--explain", code.text()], &[]);
        assert_eq!(said.exit, Exit::Fine);
        assert!(said.out.contains(code.explanation()), "{}", said.out);
    }
    let said = command(&["check", "--explain", "cfg-nonsense"], &[]);
    assert_eq!((said.exit, said.out.as_str()), (Exit::Usage, ""));
    assert!(said.err.contains("cfg-unknown-key"), "{}", said.err);
}

#[test]
fn the_help_lists_every_exit_code_and_a_wrong_command_line_ends_with_the_usage_code() {
    let said = command(&["--help"], &[]);
    assert_eq!(said.exit, Exit::Fine);
    for exit in Exit::ALL {
        assert!(
            said.out
                .contains(&format!("{}  {}", exit.number(), exit.meaning())),
            "{}",
            said.out
        );
    }
    for wrong in [
        &["chek"][..],
        &["check"],
        &["check", "a", "--explain", "b"],
        &[],
    ] {
        assert_eq!(command(wrong, &[]).exit, Exit::Usage, "{wrong:?}");
    }
}
