//! What is told before the daemon speaks: what runs, how fast, and how to hear it from a second terminal.

use humward_sim::scenario::Scenario;
use humward_wire::out::Instant;

use crate::page::{Ink, Page};
use crate::said::time_of_day;

/// What the banner tells.
#[derive(Debug)]
pub struct Banner<'a> {
    /// What is played.
    pub scenario: &'a Scenario,
    /// Port of the broker.
    pub port: u16,
    /// Beginning of every topic.
    pub prefix: &'a str,
    /// Factor of the plant's time.
    pub factor: f64,
    /// Factor that was asked for.
    pub wanted: f64,
    /// Factor at which this machine makes the plant.
    pub measured: f64,
    /// Whether it runs on after the story.
    pub keep: bool,
}

/// Prints it.
///
/// # Errors
/// Nobody takes it.
pub fn print(page: &mut Page<'_>, banner: &Banner<'_>) -> std::io::Result<()> {
    let Banner {
        scenario,
        port,
        prefix,
        factor,
        wanted,
        measured,
        keep,
    } = *banner;
    page.text(&format!(
        "humward demo: {} Simulated; no such plant exists.",
        scenario.about
    ))?;
    page.text(&format!(
        "One process: broker on 127.0.0.1:{port}, the daemon, {} simulated pump sets. \
         {:.0} minutes of the plant from {} UTC pass in {:.0} s, {factor} times as fast as true time.",
        scenario.assets.len(),
        scenario.duration.0 / 60.0,
        time_of_day(Instant(scenario.start_ns())),
        scenario.duration.0 / factor,
    ))?;
    if factor < wanted {
        page.text(&format!(
            "This machine makes the plant's signals at most {measured:.0} times as fast as true time; \
             with room for the daemon that is {factor}, not {wanted}."
        ))?;
    }
    if keep {
        page.text("After the summary it runs on until Ctrl-C.")?;
    }
    page.text(
        "Advisory only: not machinery protection, not a safety function. Below are the daemon's own messages.",
    )?;
    page.text("The raw topics, in a second terminal:")?;
    let filter = |kind: &str| format!("-t '{prefix}{kind}/#'");
    let lines = [
        format!(
            "  mosquitto_sub -h 127.0.0.1 -p {port} -v {} \\",
            filter("event")
        ),
        format!("    {} \\", filter("status")),
        format!("    {} {}", filter("alarm"), filter("gateway")),
        String::new(),
    ];
    page.lines(&lines, Ink::Plain)
}
