use humward_sim::scenario::parse;
use humward_wire::out::{Event, RunState, Severity, Transition};

use super::{Given, differences, given, span, turns_in_words};
use crate::story::Story;
use crate::testing::{START_NS, event, heard, status};

const PLANT: &str = r#"
about = "One of each."
site = "harbour"
seed = 1
duration = "20min"

[[asset]]
id = "P-101"
rpm = 1482
[[asset.point]]
id = "drive-end"

[[asset]]
id = "P-102"
rpm = 1482
[[asset.point]]
id = "drive-end"
bearing = { balls = 9, ball_diameter_mm = 7.94, pitch_diameter_mm = 39.04 }
[[asset.fault]]
kind = "outer-race"
point = "drive-end"
growth = { onset = "3min", over = "15min", law = "linear", from = 0.5, to = 4.0 }

[[asset]]
id = "P-103"
rpm = 1480
schedule = [["0s", 0], ["1min", 0], ["2min", 1480], ["9min", 1480], ["10min", 0], ["30min", 0], ["31min", 1480]]
motor = { kind = "variable-speed", poles = 4 }
[[asset.point]]
id = "drive-end"

[[asset]]
id = "P-104"
rpm = 1482
[[asset.point]]
id = "drive-end"
[[asset.point.sensor]]
kind = "flat"
at = "8min"
"#;

fn plant() -> Vec<Given> {
    given(&parse("plant", PLANT).unwrap())
}

fn alert() -> Event {
    let told = (Transition::Raised, Severity::Alert);
    event("P-102", 1, 400, told, "outer.drive-end", "bearing.outer")
}

fn danger() -> Event {
    let told = (Transition::Worsened, Severity::Danger);
    event("P-102", 2, 800, told, "outer.drive-end", "bearing.outer")
}

fn sensor() -> Event {
    let told = (Transition::Raised, Severity::Alert);
    event("P-104", 1, 560, told, "sensor.drive-end", "-")
}

fn told(events: &[Event]) -> Vec<String> {
    let mut story = Story::new("humward/v1/harbour/");
    for event in events {
        story.hear(&heard(event)).unwrap();
    }
    let turns = [RunState::Stopped, RunState::Running, RunState::Stopped];
    for (at_s, state) in (0..).zip(turns) {
        story.hear(&status("P-103", at_s, state)).unwrap();
    }
    differences(&plant(), &story, START_NS)
}

#[test]
fn the_story_as_meant_has_no_difference() {
    assert_eq!(told(&[alert(), danger(), sensor()]), Vec::<String>::new());
}

#[test]
fn an_alarm_at_another_point_than_its_pit_is_marked_as_heard_there() {
    let plant = plant();
    let near = alert();
    let mut far = alert();
    far.finding.point = Some(humward_wire::id::Id::new("far-end").expect("an id"));
    let elsewhere = |event: &Event| {
        let told = plant.iter().find_map(|asset| {
            let own = event
                .header
                .asset
                .as_ref()
                .is_some_and(|id| id.as_str() == asset.asset);
            asset.explains(event, START_NS).filter(|_| own)
        });
        told.expect("a cause").heard_elsewhere(event)
    };
    assert_eq!((elsewhere(&near), elsewhere(&far)), (false, true));
}

#[test]
fn a_word_of_an_asset_that_is_well_is_a_difference() {
    let stray = (Transition::Raised, Severity::Alert);
    let stray = event("P-101", 1, 900, stray, "velocity.drive-end", "velocity_rms");
    assert_eq!(
        told(&[alert(), danger(), sensor(), stray]),
        [
            "P-101 said raised velocity.drive-end at 03:15:00, and nothing that was injected explains it"
        ]
    );
}

#[test]
fn an_alarm_before_its_cause_is_a_difference() {
    let mut early = alert();
    early.header.at.0 = START_NS + 179_000_000_000;
    let differences = told(&[early, danger(), sensor()]);
    assert_eq!(differences.len(), 2, "{differences:?}");
    assert!(differences[0].contains("at 03:02:59, and nothing"));
    assert!(differences[1].ends_with("and no alert of a bearing watch came"));
}

#[test]
fn a_bearing_wants_an_alert_with_a_line_and_then_danger() {
    assert_eq!(
        told(&[alert(), sensor()]),
        ["P-102: outer-race at drive-end, growing for 15 min, and its alert never became danger"]
    );
    let mut bare = alert();
    bare.finding.lines.clear();
    let differences = told(&[bare, danger(), sensor()]);
    assert_eq!(differences.len(), 1, "{differences:?}");
    assert!(differences[0].ends_with("and its alert came without a line as evidence"));
    let mut by_velocity = alert();
    by_velocity.finding.value.as_mut().unwrap().measure = "velocity_rms".to_owned();
    let differences = told(&[by_velocity, danger(), sensor()]);
    assert!(differences[0].ends_with("and no alert of a bearing watch came"));
}

#[test]
fn a_sensor_that_is_told_as_a_machine_is_two_differences() {
    let mut machine = sensor();
    machine.finding.watch = Some("velocity.drive-end".to_owned());
    let differences = told(&[alert(), danger(), machine]);
    assert_eq!(
        differences,
        [
            "P-104 said raised velocity.drive-end at 03:09:20, and nothing that was injected explains it",
            "P-104: sensor drive-end: flat, and no alarm about the sensor came",
        ]
    );
}

#[test]
fn a_start_nobody_heard_of_is_a_difference() {
    let mut story = Story::new("humward/v1/harbour/");
    for event in [alert(), danger(), sensor()] {
        story.hear(&heard(&event)).unwrap();
    }
    assert_eq!(
        differences(&plant(), &story, START_NS),
        ["P-103 made 1 stop and 1 start; its status told 0 stops and 0 starts"]
    );
}

#[test]
fn spans_and_turns_are_said_as_people_do() {
    assert_eq!(
        [0, 119, 120, 250].map(span),
        ["0 s", "119 s", "2 min", "4 min 10 s"]
    );
    assert_eq!(turns_in_words((1, 2)), "1 stop and 2 starts");
}
