//! What can be asked for.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};

use crate::scenario::{LONGEST_S, Scenario, Seconds};

/// Makes what accelerometers on pumps would send, with the truth beside it.
/// Everything made here is simulated and says so.
#[derive(Debug, Parser)]
#[command(name = "humward-sim", version)]
pub(super) struct Arguments {
    /// What is asked for.
    #[command(subcommand)]
    pub(super) command: Command,
}

#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Lists the catalogue: a name and a sentence each.
    List,
    /// Tells what a scenario injects, when, and which lines to expect.
    Explain {
        /// A name of the catalogue, or a TOML file.
        #[arg(value_name = "SCENARIO")]
        scenario: String,
        #[command(flatten)]
        varied: Varied,
    },
    /// Writes a scenario as a recording, with the truth in its header.
    Render {
        /// A name of the catalogue, or a TOML file.
        #[arg(value_name = "SCENARIO")]
        scenario: String,
        /// The file to write.
        #[arg(long, value_name = "FILE")]
        out: PathBuf,
        /// Writes over a file of that name.
        #[arg(long)]
        replace: bool,
        #[command(flatten)]
        varied: Varied,
    },
    /// Plays a scenario to an MQTT broker, in real time from now unless --factor says otherwise.
    Play {
        /// A name of the catalogue, or a TOML file.
        #[arg(value_name = "SCENARIO")]
        scenario: String,
        #[command(flatten)]
        play: Playing,
        #[command(flatten)]
        varied: Varied,
    },
}

/// What of a scenario can be changed at the command line.
#[derive(Debug, Args)]
pub(super) struct Varied {
    /// Draws everything from another seed.
    #[arg(long, value_name = "NUMBER")]
    seed: Option<u64>,
    /// Simulated time it starts at, such as 2026-03-02T03:00:00Z.
    #[arg(long, value_name = "TIME", value_parser = time)]
    start: Option<i64>,
    /// How long it goes on, such as 90s, 10min or 2h.
    #[arg(long, value_name = "LENGTH", value_parser = length)]
    duration: Option<Seconds>,
}

impl Varied {
    /// The scenario as changed.
    pub(super) fn apply(&self, mut scenario: Scenario) -> Scenario {
        scenario.seed = self.seed.unwrap_or(scenario.seed);
        scenario.duration = self.duration.unwrap_or(scenario.duration);
        scenario
    }

    /// When it starts, ns since 1970 UTC.
    pub(super) fn start_ns(&self, scenario: &Scenario) -> i64 {
        self.start.unwrap_or_else(|| scenario.start_ns())
    }

    /// Whether a start was asked for.
    pub(super) fn starts(&self) -> bool {
        self.start.is_some()
    }

    /// Whether a duration was asked for.
    pub(super) fn lasts(&self) -> bool {
        self.duration.is_some()
    }
}

/// How a scenario is played.
#[derive(Debug, Args)]
pub(super) struct Playing {
    /// Where the broker is.
    #[arg(long, value_name = "NAME", default_value = "127.0.0.1")]
    pub(super) host: String,
    /// Its MQTT port, without encryption.
    #[arg(long, value_name = "NUMBER", default_value_t = 1883, value_parser = clap::value_parser!(u16).range(1..))]
    pub(super) port: u16,
    /// User name at the broker.
    #[arg(long, value_name = "NAME", requires = "password_file")]
    pub(super) username: Option<String>,
    /// File with the password; a line break at its end does not count.
    #[arg(long, value_name = "FILE", requires = "username")]
    pub(super) password_file: Option<PathBuf>,
    /// Client id at the broker; of two clients with one id it ends the older. [default: humward-sim-<process>]
    #[arg(long, value_name = "ID", value_parser = client_id)]
    pub(super) client_id: Option<String>,
    /// Runs so many times faster than true time, from --start on. A daemon needs a clock of the same factor and start.
    #[arg(long, value_name = "NUMBER", value_parser = factor)]
    pub(super) factor: Option<f64>,
    /// Goes on after the scenario's duration until Ctrl-C.
    #[arg(long)]
    pub(super) endless: bool,
}

fn time(text: &str) -> Result<i64, String> {
    humward_wire::time::parse(text)
        .filter(|ns| humward_wire::time::plausible(*ns))
        .ok_or_else(|| {
            "no time of the years 2000 to 2199; write it like 2026-03-02T03:00:00Z".to_owned()
        })
}

fn length(text: &str) -> Result<Seconds, String> {
    let length = Seconds::parse(text)?;
    if (1.0..=LONGEST_S).contains(&length.0) {
        Ok(length)
    } else {
        Err(format!("{} s; allowed: 1 to {LONGEST_S} s", length.0))
    }
}

fn factor(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(factor) if (0.01..=1000.0).contains(&factor) => Ok(factor),
        Ok(_) | Err(_) => Err("allowed: a number from 0.01 to 1000".to_owned()),
    }
}

fn client_id(text: &str) -> Result<String, String> {
    humward_wire::id::Id::new(text)
        .map(|id| id.to_string())
        .map_err(|fault| fault.to_string())
}
