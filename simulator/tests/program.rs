//! The program as it is run: what it says, what it writes, how it ends.
#![expect(
    clippy::unwrap_used,
    clippy::panic,
    reason = "the helpers of a test stop at its first surprise"
)]

use std::fs;
use std::path::PathBuf;
use std::process::{Command, Output};
use std::sync::atomic::{AtomicU32, Ordering};

use humward_wire::recording::{Header, Record, open};

/// A folder of this test run, gone with its guard.
struct Folder(PathBuf);

impl Drop for Folder {
    fn drop(&mut self) {
        let removed = fs::remove_dir_all(&self.0);
        // A test that fails already says so itself.
        assert!(removed.is_ok() || std::thread::panicking(), "{removed:?}");
    }
}

/// A fresh folder.
fn folder() -> Folder {
    static COUNT: AtomicU32 = AtomicU32::new(0);
    let count = COUNT.fetch_add(1, Ordering::Relaxed);
    let path = std::env::temp_dir().join(format!("humward-sim-{}-{count}", std::process::id()));
    fs::create_dir_all(&path).unwrap();
    Folder(path)
}

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_humward-sim"))
        .args(arguments)
        .output()
        .unwrap()
}

/// Exit code, standard output, standard error.
fn told(output: &Output) -> (i32, String, String) {
    let text = |bytes: &[u8]| String::from_utf8_lossy(bytes).into_owned();
    (
        output.status.code().unwrap_or(-1),
        text(&output.stdout),
        text(&output.stderr),
    )
}

/// What the program says of a scenario with this text.
fn explain(text: &str) -> (i32, String, String) {
    let folder = folder();
    let path = folder.0.join("mine.toml");
    fs::write(&path, text).unwrap();
    told(&run(&["explain", path.to_str().unwrap()]))
}

const SMALL: &str = r#"about = "A pump for tests."
site = "harbour"
seed = 9
duration = "5s"

[[asset]]
id = "P-1"
rpm = 1482
speed_every = "1s"

[[asset.point]]
id = "de"
rate_hz = 1000

[[asset.point.sensor]]
kind = "flat"
at = "2s"
"#;

/// Renders [`SMALL`] and gives the bytes.
fn rendered(more: &[&str]) -> Vec<u8> {
    let folder = folder();
    let (scenario, out) = (folder.0.join("small.toml"), folder.0.join("small.rec"));
    fs::write(&scenario, SMALL).unwrap();
    let mut arguments = vec![
        "render",
        scenario.to_str().unwrap(),
        "--out",
        out.to_str().unwrap(),
    ];
    arguments.extend(more);
    let (code, said, fault) = told(&run(&arguments));
    assert_eq!((code, fault.as_str()), (0, ""));
    let bytes = fs::read(&out).unwrap();
    assert!(said.contains(&format!("{} bytes", bytes.len())), "{said}");
    assert_eq!(
        fs::read_dir(&folder.0).unwrap().count(),
        2,
        "nothing is left beside"
    );
    bytes
}

fn messages(bytes: &[u8]) -> (Header, Vec<(i64, String)>) {
    let (header, reader) = open(bytes).unwrap();
    let messages = reader
        .map(|item| {
            let Record::Message { arrival, topic, .. } = item.unwrap().1 else {
                panic!("a record that is no message");
            };
            (arrival, topic.to_owned())
        })
        .collect();
    (header, messages)
}

#[test]
fn the_catalogue_is_listed_and_every_scenario_of_it_explained() {
    let (code, listed, fault) = told(&run(&["list"]));
    assert_eq!((code, fault.as_str()), (0, ""));
    let names: Vec<&str> = listed
        .lines()
        .filter(|line| !line.starts_with(' '))
        .filter_map(|line| line.split_whitespace().next())
        .collect();
    let narrow = |text: &str| text.lines().all(|line| line.chars().count() <= 80);
    assert!(narrow(&listed), "{listed}");
    assert!(names.contains(&"imbalance-growing"), "{listed}");
    for name in names {
        let (code, text, fault) = told(&run(&["explain", name]));
        assert_eq!((code, fault.as_str()), (0, ""), "{name}");
        assert!(
            text.starts_with(name) && text.contains("Simulated.") && narrow(&text),
            "{text}"
        );
    }
}

#[test]
fn a_recording_reopens_whole_in_order_and_with_the_truth_in_its_header() {
    let (header, messages) = messages(&rendered(&[]));
    assert_eq!(
        (header.site.as_str(), header.root.as_deref()),
        ("harbour", Some("humward/v1"))
    );
    let truth: serde_json::Value = serde_json::from_str(&header.truth.unwrap()).unwrap();
    assert_eq!(truth["simulated"], true);
    assert_eq!(
        (&truth["scenario"], truth["seed"].as_u64()),
        (&"small".into(), Some(9))
    );
    assert_eq!(truth["start"], "2026-03-02T03:00:00.000Z");
    assert!(messages.windows(2).all(|two| two[0].0 <= two[1].0));
    let of = |ending: &str| messages.iter().filter(|m| m.1.ends_with(ending)).count();
    assert_eq!(
        (of("block/P-1/de"), of("speed/P-1"), messages.len()),
        (5, 5, 10)
    );
}

#[test]
fn the_same_seed_renders_the_same_bytes_and_another_does_not() {
    let first = rendered(&[]);
    assert!(first == rendered(&["--seed", "9"]));
    assert!(first != rendered(&["--seed", "10"]));
    let (_, later) = messages(&rendered(&[
        "--start",
        "2026-05-01T00:00:00Z",
        "--duration",
        "3s",
    ]));
    // `date -u -d 2026-05-01 +%s`
    assert_eq!(
        (later.len(), later[0].0 / 60_000_000_000),
        (6, 1_777_593_600 / 60)
    );
}

#[test]
fn a_file_that_is_there_stays_unless_it_is_to_be_replaced() {
    let folder = folder();
    let out = folder.0.join("kept.rec");
    fs::write(&out, "dear").unwrap();
    let render = |more: &[&str]| {
        let mut arguments = vec![
            "render",
            "healthy-pump",
            "--duration",
            "1s",
            "--out",
            out.to_str().unwrap(),
        ];
        arguments.extend(more);
        told(&run(&arguments))
    };
    let (code, _, fault) = render(&[]);
    assert_eq!(
        (code, fs::read_to_string(&out).unwrap().as_str()),
        (3, "dear")
    );
    assert!(fault.contains("--replace"), "{fault}");
    assert_eq!(render(&["--replace"]).0, 0);
    assert!(open(&fs::read(&out).unwrap()).is_ok());
    let (code, _, fault) = told(&run(&[
        "render",
        "healthy-pump",
        "--out",
        "/no/such/folder/x.rec",
    ]));
    assert_eq!(code, 3);
    assert!(
        fault.contains("/no/such/folder/x.rec cannot be written"),
        "{fault}"
    );
}

#[test]
fn an_unknown_key_is_told_with_its_line_and_the_keys_there_are() {
    let (code, _, fault) = explain(&SMALL.replace("rate_hz = 1000", "rate = 1000"));
    assert_eq!(code, 1);
    assert!(
        fault.contains("line 13") && fault.contains("`rate`"),
        "{fault}"
    );
    assert!(fault.contains("`rate_hz`"), "{fault}");
    let (code, _, fault) = explain(&SMALL.replace("at = \"2s\"", "since = \"2s\""));
    assert_eq!(code, 1);
    assert!(
        fault.contains("line 15") && fault.contains("`since`"),
        "{fault}"
    );
    let (_, _, fault) = explain(&SMALL.replace("\"2s\"", "\"soon\""));
    assert!(
        fault.contains("\"soon\" is not a length of time") && fault.contains("90s"),
        "{fault}"
    );
    let (_, _, fault) = explain(&SMALL.replace("\"flat\"", "\"sleepy\""));
    assert!(
        fault.contains("sleepy") && fault.contains("`fallen-off`"),
        "{fault}"
    );
}

#[test]
fn every_value_that_does_not_fit_is_told_in_one_run_with_what_is_allowed() {
    let text = SMALL
        .replace("\"harbour\"", "\"har/bour\"")
        .replace(
            "id = \"de\"",
            "id = \"\"\nblock = \"1ms\"\noffset_g = 3\nresonance_hz = 600",
        )
        .replace("at = \"2s\"", "at = \"2s\"\nuntil = \"1s\"")
        + "[[asset.point.transport]]\nkind = \"lost\"\nshare = 1.5\n"
        + "[[asset.point.transport]]\nkind = \"late\"\nby = \"2000h\"\n"
        + "[[asset.point.sensor]]\nkind = \"cable\"\nat = \"1s\"\nper_minute = 0\n";
    let (code, _, fault) = explain(&text);
    assert_eq!(code, 1);
    for told in [
        "site \"har/bour\"",
        "the id is empty",
        "block x rate_hz is 1; allowed: 16 to 262144 samples",
        "offset_g is 3; allowed: -2 to 2 g",
        "resonance_hz is 600; allowed: 10 to 450 Hz",
        "sensor flat: until 1 s is not after at 2 s",
        "transport lost: share is 1.5; allowed: 0 to 1",
        "transport late: by is 7200000; allowed: 0 to 86400 s",
        "sensor cable: per_minute is 0; allowed: 0.01 to 600 per minute",
    ] {
        assert!(fault.contains(told), "{told:?} is not in {fault}");
    }
    assert_eq!(fault.trim().lines().count(), 10, "{fault}");
}

#[test]
fn numbers_that_are_none_are_refused_wherever_toml_lets_them_stand() {
    for (from, to, told) in [
        (
            "rpm = ",
            "rpm = nan #",
            "rpm is NaN; allowed: 30 to 60000 r/min",
        ),
        (
            "rpm = ",
            "motor = { kind = \"rectifier\", firing_deg = inf }\nrpm = ",
            "motor.firing_deg is inf; allowed: 0 to 150 degrees",
        ),
        (
            "rpm = ",
            "motor = { kind = \"induction\", poles = 0 }\nrpm = ",
            "motor.poles is 0; allowed: 2 to 48\n",
        ),
        (
            "rpm = ",
            "load = { walk = nan }\nrpm = ",
            "load.walk is NaN; allowed: 0 to 0.5\n",
        ),
    ] {
        let (code, _, fault) = explain(&SMALL.replace(from, to));
        assert_eq!(code, 1, "{to}");
        assert!(fault.contains(told), "{told:?} is not in {fault}");
    }
}

#[test]
fn a_number_without_a_unit_is_told_how_a_length_of_time_is_written() {
    for number in ["4", "-4", "1.5"] {
        let (code, _, fault) = explain(&SMALL.replace("\"5s\"", number));
        assert_eq!(code, 1, "{number}");
        let told = format!("{number} is not a length of time: a number needs a unit and quotes");
        assert!(
            fault.contains(&told) && fault.contains("\"90s\""),
            "{fault}"
        );
        assert!(fault.contains("line 4"), "{fault}");
    }
}

#[test]
fn a_bearing_of_two_negative_diameters_is_refused() {
    let bearing =
        "rate_hz = 1000\nbearing = { balls = 9, ball_diameter_mm = -8, pitch_diameter_mm = -39 }";
    let (code, _, fault) = explain(&SMALL.replace("rate_hz = 1000", bearing));
    assert_eq!(code, 1);
    for told in [
        "bearing.ball_diameter_mm is -8; allowed: 0.1 to 1000 mm",
        "bearing.pitch_diameter_mm is -39; allowed: 0.2 to 10000 mm",
    ] {
        assert!(fault.contains(told), "{told:?} is not in {fault}");
    }
}

#[test]
fn a_scenario_longer_than_a_week_is_refused() {
    let (code, _, fault) = explain(&SMALL.replace("\"5s\"", "\"169h\""));
    assert_eq!(code, 1);
    assert!(
        fault.contains("duration is 608400; allowed: 1 to 604800 s"),
        "{fault}"
    );
}

#[test]
fn rms_is_said_of_velocity_lines_and_not_of_the_height_of_strikes() {
    for (scenario, rms, without) in [
        ("imbalance-growing", "mm/s rms", "m/s2 rms"),
        ("outer-race-growing", "strike height", "rms"),
    ] {
        let (_, text, _) = told(&run(&["explain", scenario]));
        let lines: Vec<&str> = text
            .lines()
            .skip_while(|line| !line.contains("lines to expect"))
            .take_while(|line| !line.contains("  point "))
            .collect();
        assert!(lines.iter().any(|line| line.contains(rms)), "{text}");
        assert!(!lines.iter().any(|line| line.contains(without)), "{text}");
    }
}

#[test]
fn a_folder_of_these_tests_is_gone_with_its_guard() {
    let folder = folder();
    let path = folder.0.join("mine.toml");
    fs::write(&path, SMALL).unwrap();
    drop(folder);
    assert!(!path.exists() && !path.parent().unwrap().exists());
}

#[test]
fn a_block_too_large_for_a_message_is_refused() {
    let long = "rate_hz = 50000\nblock = \"5s\"\nencoding = \"json\"";
    let (code, _, fault) = explain(&SMALL.replace("rate_hz = 1000", long));
    assert_eq!(code, 1);
    assert!(
        fault.contains("block in bytes is 4000000; allowed: 0 to 1000000"),
        "{fault}"
    );
}

#[test]
fn a_name_that_is_no_scenario_is_told_with_the_nearest() {
    let (code, _, fault) = told(&run(&["explain", "imbalance-growin"]));
    assert_eq!(code, 1);
    assert!(fault.contains("did you mean imbalance-growing?"), "{fault}");
}

#[test]
fn a_command_line_that_is_not_understood_ends_with_two_and_says_why() {
    for (arguments, why) in [
        (
            vec!["play", "healthy-pump", "--factor", "0"],
            "0.01 to 1000",
        ),
        (
            vec!["play", "healthy-pump", "--start", "2026-03-02T03:00:00Z"],
            "without --factor",
        ),
        (
            vec!["play", "healthy-pump", "--endless", "--duration", "1h"],
            "--endless",
        ),
        (
            vec!["play", "healthy-pump", "--username", "pump"],
            "--password-file",
        ),
        (vec!["play", "healthy-pump", "--client-id", "a b"], "A-Z"),
        (vec!["render", "healthy-pump"], "--out"),
        (
            vec!["render", "healthy-pump", "--out", "x", "--duration", "0s"],
            "allowed: 1 to",
        ),
        (
            vec!["explain", "healthy-pump", "--start", "soon"],
            "2026-03-02T03:00:00Z",
        ),
    ] {
        let (code, _, fault) = told(&run(&arguments));
        assert_eq!(code, 2, "{arguments:?}: {fault}");
        assert!(fault.contains(why), "{arguments:?}: {fault}");
    }
}

#[test]
fn a_play_tells_at_its_start_what_it_injects_and_when_and_nothing_beyond_its_end() {
    let play = |duration: &str| {
        let start = "2026-03-02T03:00:00Z";
        let (code, said, _) = told(&run(&[
            "play",
            "imbalance-growing",
            "--port",
            "1",
            "--factor",
            "10",
            "--start",
            start,
            "--seed",
            "4",
            "--duration",
            duration,
        ]));
        assert_eq!(code, 3);
        said
    };
    let said = play("15min");
    assert!(
        said.starts_with("simulated: imbalance-growing, seed 4, site harbour, "),
        "{said}"
    );
    assert!(
        said.contains("10 times as fast as true time; a daemon needs a clock"),
        "{said}"
    );
    let onset = "  2026-03-02T03:02:00.000Z  P-103A: imbalance begins";
    assert!(said.lines().any(|line| line == onset), "{said}");
    assert!(
        said.contains("clean velocity rises above 4 mm/s rms"),
        "{said}"
    );
    let short = play("1min");
    assert!(short.contains("nothing is injected"), "{short}");
}

#[test]
fn a_broker_that_is_not_there_ends_a_play_with_its_address_and_the_remedy() {
    // Port 1 of this machine is nobody's.
    let (code, said, fault) = told(&run(&[
        "play",
        "healthy-pump",
        "--port",
        "1",
        "--duration",
        "5s",
    ]));
    assert_eq!(code, 3);
    assert!(said.starts_with("simulated: healthy-pump, seed "), "{said}");
    assert!(
        said.contains("under humward/v1/") && said.contains("in real time"),
        "{said}"
    );
    assert!(
        fault.contains("broker 127.0.0.1:1: no connection"),
        "{fault}"
    );
    assert!(
        fault.contains("start the broker, or give its --host and --port"),
        "{fault}"
    );
    let (code, _, fault) = told(&run(&[
        "play",
        "healthy-pump",
        "--username",
        "a",
        "--password-file",
        "/no/file",
    ]));
    assert_eq!(code, 3);
    assert!(fault.contains("/no/file cannot be read"), "{fault}");
}
