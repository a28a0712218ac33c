//! Accounts, access rules and encryption: what the broker does not grant is said in plain words.

use std::io::{Read, Write};
use std::net::{TcpListener, TcpStream};
use std::process::Command;
use std::thread;

use humward_tests::blocks::{BLOCK_NS, quarter_ns, sine};
use humward_tests::broker::Broker;
use humward_tests::daemon::Daemon;
use humward_tests::listener::Listener;
use humward_tests::{SOON, wait};
use humward_wire::out::Status;

use crate::{BLOCKS, GATEWAY, site};

/// Runs a program of the machine to its end.
fn done(program: &str, arguments: &[&str], folder: &std::path::Path) {
    let output = Command::new(program)
        .args(arguments)
        .current_dir(folder)
        .output()
        .expect("the program is installed");
    assert!(
        output.status.success(),
        "{program} {arguments:?}: {}",
        String::from_utf8_lossy(&output.stderr)
    );
}

/// The site with further keys of the broker.
fn with_broker(port: u16, lines: &str) -> String {
    site(port).replace("[broker]\n", &format!("[broker]\n{lines}\n"))
}

#[test]
fn refused_credentials_are_named_with_their_remedy_and_tried_again_only_after_long() {
    let folder = humward_tests::folder("passwords");
    done(
        "mosquitto_passwd",
        &["-b", "-c", "passwords", "pump-watch", "right"],
        &folder,
    );
    std::fs::write(folder.join("wrong"), "wrong\n").expect("the folder takes a file");
    let broker = Broker::with(&format!(
        "password_file {}\n",
        folder.join("passwords").display()
    ));
    let wrong = format!(
        "username = \"pump-watch\"\npassword_file = \"{}\"",
        folder.join("wrong").display()
    );
    let mut daemon = Daemon::start(&with_broker(broker.port(), &wrong));
    for connection in ["ingest", "publish"] {
        daemon.wait_for_log(&format!("{connection} connection: the broker refused us"));
    }
    let log = daemon.log();
    assert!(log.contains("check user name, password"), "{log}");
    let waits: Vec<f64> = log
        .lines()
        .filter_map(|line| {
            line.split("next try in ")
                .nth(1)?
                .split(' ')
                .next()?
                .parse()
                .ok()
        })
        .collect();
    assert!(
        waits.len() == 2 && waits.iter().all(|wait| (30.0..=60.0).contains(wait)),
        "{log}"
    );
    assert!(daemon.runs(), "a refusal is waited out");
}

/// A broker that lets everybody in and denies every subscription to a speed, one connection after another.
///
/// Mosquitto 2.0.11 grants a subscription its access file denies, and lets no message through; brokers that say
/// so answer 0x80 (MQTT 3.1.1, section 3.9.3).
fn denier() -> u16 {
    let listener = TcpListener::bind("127.0.0.1:0").expect("127.0.0.1 has a free port");
    let port = listener
        .local_addr()
        .expect("a bound listener has an address")
        .port();
    thread::spawn(move || {
        for stream in listener.incoming().flatten() {
            thread::spawn(move || deny(stream));
        }
    });
    port
}

/// Answers CONNECT and SUBSCRIBE until the client goes; packets are short enough for one length byte or two.
fn deny(mut stream: TcpStream) -> std::io::Result<()> {
    loop {
        let mut head = [0; 2];
        stream.read_exact(&mut head)?;
        let mut length = usize::from(head[1] & 0x7f);
        if head[1] & 0x80 != 0 {
            let mut more = [0];
            stream.read_exact(&mut more)?;
            length |= usize::from(more[0]) << 7;
        }
        let mut packet = vec![0; length];
        stream.read_exact(&mut packet)?;
        match head[0] >> 4 {
            1 => stream.write_all(&[0x20, 2, 0, 0])?,
            8 => {
                let mut codes = Vec::new();
                let mut rest = &packet[2..];
                while let [high, low, after @ ..] = rest {
                    let topic = usize::from(u16::from_be_bytes([*high, *low]));
                    let denied = after[..topic].windows(5).any(|five| five == b"speed");
                    codes.push(if denied { 0x80 } else { 1 });
                    rest = &after[topic + 1..];
                }
                let length = u8::try_from(2 + codes.len()).unwrap_or(0x7f);
                stream.write_all(&[&[0x90, length, packet[0], packet[1]], &codes[..]].concat())?;
            }
            _ => {}
        }
    }
}

#[test]
fn a_subscription_the_broker_denies_is_named_and_the_others_go_on() {
    let mut daemon = Daemon::start(&site(denier()));
    daemon.wait_for_log("subscribed to 3 of 4 filters");
    let log = daemon.log();
    assert!(
        log.contains(
            "refused the subscription to humward/v1/harbour/speed/P-1; check its access rules"
        ),
        "{log}"
    );
    assert!(!log.contains("next try in"), "the connection stays: {log}");
    assert!(daemon.runs());
}

#[test]
fn blocks_come_in_and_statuses_go_out_under_tls_and_a_broker_that_is_not_trusted_is_refused() {
    let folder = humward_tests::folder("tls");
    let ca = [
        "req",
        "-x509",
        "-newkey",
        "rsa:2048",
        "-nodes",
        "-days",
        "2",
        "-subj",
        "/CN=test ca",
    ];
    done(
        "openssl",
        &[&ca[..], &["-keyout", "ca.key", "-out", "ca.pem"]].concat(),
        &folder,
    );
    done(
        "openssl",
        &[&ca[..], &["-keyout", "other.key", "-out", "other.pem"]].concat(),
        &folder,
    );
    let request = [
        "req",
        "-newkey",
        "rsa:2048",
        "-nodes",
        "-subj",
        "/CN=localhost",
        "-keyout",
        "broker.key",
    ];
    done(
        "openssl",
        &[&request[..], &["-out", "broker.csr"]].concat(),
        &folder,
    );
    std::fs::write(
        folder.join("names"),
        "subjectAltName=DNS:localhost,IP:127.0.0.1\n",
    )
    .expect("the folder takes a file");
    let sign = [
        "x509",
        "-req",
        "-in",
        "broker.csr",
        "-CA",
        "ca.pem",
        "-CAkey",
        "ca.key",
        "-CAcreateserial",
    ];
    done(
        "openssl",
        &[
            &sign[..],
            &["-days", "2", "-extfile", "names", "-out", "broker.pem"],
        ]
        .concat(),
        &folder,
    );

    // Mosquitto reads its key as its own user.
    done("chmod", &["644", "broker.key"], &folder);
    let path = |name: &str| folder.join(name).display().to_string();
    let (plain, tls) = (Broker::free_port(), Broker::free_port());
    let lines = format!(
        "certfile {}\nkeyfile {}\nlistener {plain} 127.0.0.1\n",
        path("broker.pem"),
        path("broker.key")
    );
    let _broker = Broker::on(tls, &lines);
    let listener = Listener::connect(plain, "listener", "humward/#");
    let trusting = |ca: &str| {
        with_broker(
            tls,
            &format!(
                "host = \"localhost\"\ntls = true\nca_file = \"{}\"",
                path(ca)
            ),
        )
    };

    let stranger = Daemon::start(&trusting("other.pem"));
    stranger.wait_for_log("check ca_file and the host name");
    assert!(
        listener.heard(GATEWAY).is_empty(),
        "nothing is said to a broker that is not trusted"
    );
    stranger.kill();

    let daemon = Daemon::start(&trusting("ca.pem"));
    daemon.wait_for_log("subscribed to");
    let start = quarter_ns() - 8 * BLOCK_NS;
    for i in 0..12 {
        listener.publish(BLOCKS, false, sine(start + i * BLOCK_NS, 1.0));
    }
    wait("a value in the status", SOON, || {
        let statuses = listener.heard("status/P-1");
        statuses
            .iter()
            .any(|heard| {
                heard
                    .read::<Status>()
                    .points
                    .iter()
                    .any(|point| !point.values.is_empty())
            })
            .then_some(())
    });
    assert_eq!(daemon.stop().code(), Some(0));
}
