//! What the README promises of its first alarm: its own configuration, the scenario it plays.

use std::fs;

use humward_sim::render::{Target, render};
use humward_sim::scenario::load;
use humward_sim::truth::tell;
use humward_sim::world::World;
use humward_tests::daemon::rehearse;
use humward_wire::out::{Event, Message};

/// The TOML that begins with `site = "harbour"` and `reading_every`, without its indent.
fn pump_toml(readme: &str) -> String {
    let begin = readme
        .find("   site = \"harbour\"\n   reading_every")
        .expect("the README has a configuration");
    let block = readme[begin..].split("   ```").next().expect("its end");
    block
        .lines()
        .map(|line| format!("{}\n", line.trim_start()))
        .collect()
}

#[test]
fn the_first_alarm_of_the_readme_comes_as_the_readme_says() {
    let readme = fs::read_to_string(concat!(env!("CARGO_MANIFEST_DIR"), "/../README.md"))
        .expect("the README is there");
    let scenario = load("first-alarm").expect("a scenario of the catalogue");
    let folder = humward_tests::folder("readme");
    let path = folder.join("first-alarm.rec");
    let start_ns = scenario.start_ns();
    let truth = tell(&scenario, start_ns);
    let target = Target {
        path: &path,
        replace: false,
        site: &scenario.site,
        root: &scenario.root,
        truth: &truth,
    };
    render(World::new(&scenario).expect("a world"), &target).expect("a recording");
    let said = rehearse(&pump_toml(&readme), &[&path]);
    let text = String::from_utf8_lossy(&said.stdout);
    let events: Vec<Event> = text
        .lines()
        .filter_map(|line| Event::from_json(line.as_bytes()).ok())
        .collect();
    let after = |event: &Event| (event.header.at.0 - start_ns) / 1_000_000_000;
    let [alert, danger] = events.as_slice() else {
        panic!(
            "an alert and a danger are promised: {text}\n{}",
            String::from_utf8_lossy(&said.stderr)
        );
    };
    let promised = readme
        .replace('\n', " ")
        .split("begins *")
        .nth(1)
        .and_then(|rest| rest.split('*').next().map(str::to_owned))
        .expect("the README quotes the alarm");
    assert!(
        alert.finding.text.starts_with(&promised),
        "{promised}\n{}",
        alert.finding.text
    );
    let value = alert.finding.value.as_ref().and_then(|value| value.value);
    assert!(
        value.is_some_and(|value| (4.0..5.0).contains(&value)),
        "just over 4.0: {value:?}"
    );
    assert!(
        (45..=75).contains(&after(alert)),
        "about a minute: {}",
        after(alert)
    );
    assert!(
        (1..=30).contains(&(after(danger) - after(alert))),
        "some seconds: {}",
        after(danger)
    );
    assert!(
        danger.finding.text.starts_with("DANGER P-103A"),
        "{}",
        danger.finding.text
    );
}
