//! The whole demo as a newcomer runs it, with an ear of our own at its broker.
#![expect(
    clippy::expect_used,
    reason = "the helpers of a test stop at its first surprise"
)]

use std::io::{BufReader, Read as _};
use std::net::TcpListener;
use std::process::{Child, Command, Stdio};
use std::sync::mpsc::channel;

use humward_demo::listener::{Heard, Listener};
use humward_demo::stage::Happening;
use humward_wire::out::{Event, Message as _};

const PREFIX: &str = "humward/v1/harbour/";

fn demo(arguments: &[&str]) -> Child {
    let mut command = Command::new(env!("CARGO_BIN_EXE_humward-demo"));
    for (variable, _) in std::env::vars_os() {
        if variable.to_string_lossy().starts_with("HUMWARD_") {
            command.env_remove(variable);
        }
    }
    command
        .args(arguments)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the demo starts")
}

/// The command of the banner that shows the raw topics, its lines joined.
fn read_banner(out: &mut impl std::io::BufRead) -> (String, String) {
    let mut all = String::new();
    let mut command = String::new();
    loop {
        let mut line = String::new();
        let read = out.read_line(&mut line).expect("text in UTF-8");
        assert!(read > 0, "it ended in the banner:\n{all}");
        all.push_str(&line);
        if line.contains("mosquitto_sub") || command.ends_with('\\') {
            command = format!("{}{}", command.trim_end_matches('\\'), line.trim());
            if !command.ends_with('\\') {
                return (all, command);
            }
        }
    }
}

fn port(command: &str) -> u16 {
    let after = command.split(" -p ").nth(1).expect("a port in the banner");
    after
        .split(' ')
        .next()
        .and_then(|port| port.parse().ok())
        .expect("the port is a number")
}

/// What was printed as said: time of day and sentence, with the wrapping undone.
fn sentences(out: &str) -> Vec<(String, String)> {
    let mut said: Vec<(String, String)> = Vec::new();
    let mut open = false;
    for line in out.lines() {
        let time = line.get(..8).filter(|time| {
            time.bytes().enumerate().all(|(at, byte)| match at {
                2 | 5 => byte == b':',
                _ => byte.is_ascii_digit(),
            })
        });
        if let (Some(time), Some(text)) = (time, line.get(10..)) {
            open = !text.starts_with("status: ");
            if open {
                said.push((time.to_owned(), text.to_owned()));
            }
        } else if open
            && line.starts_with("          ")
            && !line.trim_start().starts_with('[')
            && let Some((_, text)) = said.last_mut()
        {
            text.push(' ');
            text.push_str(line.trim());
        } else {
            open = false;
        }
    }
    said
}

fn one_space(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

#[test]
fn the_first_minute_comes_out_as_meant_and_prints_what_the_broker_carried() {
    let mut child = demo(&[]);
    let mut out = BufReader::new(child.stdout.take().expect("its output is ours"));
    let (mut all, command) = read_banner(&mut out);
    let (to, from) = channel();
    let filters = [format!("{PREFIX}event/#")];
    let ear = Listener::start("ear", port(&command), &filters, to).expect("the broker takes us");
    out.read_to_string(&mut all).expect("text in UTF-8");
    let status = child.wait().expect("our own child can be waited for");
    let mut errors = String::new();
    child
        .stderr
        .take()
        .expect("its errors are ours")
        .read_to_string(&mut errors)
        .expect("text in UTF-8");
    ear.end();

    assert_eq!((status.code(), errors.as_str()), (Some(0), ""), "{all}");
    assert!(!all.contains('\x1b'), "piped output is plain:\n{all}");
    for line in all.lines() {
        assert!(line.chars().count() <= 80, "too wide: {line}");
    }
    assert!(all.contains("Advisory only"), "{all}");
    assert!(all.ends_with("The story came out as meant.\n"), "{all}");

    let carried: Vec<(String, String)> = from
        .try_iter()
        .filter_map(|happening| match happening {
            Happening::Heard(Heard { topic, payload }) if !topic.contains("/gateway.") => {
                let event = Event::from_json(&payload).expect("an event");
                let time = event.header.at.to_string()[11..19].to_owned();
                Some((time, one_space(&event.finding.text)))
            }
            Happening::Heard(_)
            | Happening::Lost(_)
            | Happening::Played(_)
            | Happening::Playing(_)
            | Happening::DaemonEnded
            | Happening::Interrupted => None,
        })
        .collect();
    assert!(
        carried.len() >= 3,
        "an alert, a danger, a sensor: {carried:?}"
    );
    let mut printed = sentences(&all);
    // The gateway's own words stand among them; the first of them came before our ear was there.
    printed.retain(|(_, text)| text.ends_with("Advisory only."));
    assert_eq!(printed, carried, "{all}");
}

#[test]
fn the_command_of_the_banner_names_each_kind_of_message_and_no_block() {
    let mut child = demo(&[]);
    let mut out = BufReader::new(child.stdout.take().expect("its output is ours"));
    let (_, command) = read_banner(&mut out);
    let interrupted = Command::new("kill")
        .args(["-INT", &child.id().to_string()])
        .status()
        .expect("kill starts");
    assert!(interrupted.success());
    let mut rest = String::new();
    out.read_to_string(&mut rest).expect("text in UTF-8");
    let status = child.wait().expect("our own child can be waited for");
    for kind in ["event", "status", "alarm", "gateway"] {
        assert!(
            command.contains(&format!("-t '{PREFIX}{kind}/#'")),
            "{command}"
        );
    }
    assert!(!command.contains("block"), "{command}");
    // Broken off is told, with an exit of its own.
    assert!(
        rest.ends_with("Broken off before its end: whether it came out as meant is not known.\n"),
        "{rest}"
    );
    assert!(!rest.contains("The story"), "nothing is concluded: {rest}");
    assert_eq!(status.code(), Some(1));
}

#[test]
fn a_port_in_use_ends_it_with_one_line_that_names_the_port() {
    let taken = TcpListener::bind("127.0.0.1:0").expect("a free port");
    let port = taken.local_addr().expect("it has an address").port();
    let output = demo(&["--port", &port.to_string()])
        .wait_with_output()
        .expect("our own child can be waited for");
    let errors = String::from_utf8(output.stderr).expect("text in UTF-8");
    assert_eq!(output.status.code(), Some(3), "{errors}");
    assert!(
        errors.starts_with(&format!("humward-demo: port {port} of 127.0.0.1 ")),
        "{errors}"
    );
    assert_eq!(errors.lines().count(), 1, "{errors}");
}
