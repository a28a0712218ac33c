//! The command line: three commands, each with a configuration.
//!
//! Reports go to standard output, faults to standard error; the exit code says which it was.

use std::ffi::OsString;
use std::io::Write;
use std::path::PathBuf;

use clap::{CommandFactory as _, FromArgMatches as _, Parser, Subcommand};

use crate::check;
use crate::config::{self, Code};
use crate::exit::Exit;
use crate::rehearse::{self, Options};
use crate::run;

/// Watches pumps between rounds: accelerometer blocks in over MQTT, alarms with their evidence out.
/// Advisory only: not machinery protection and not a safety function.
#[derive(Debug, Parser)]
#[command(name = "humward", version)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Watches: connects to the broker and runs until SIGINT or SIGTERM.
    Run {
        /// A TOML file, or a folder of which every *.toml is read in name order.
        #[arg(value_name = "CONFIG")]
        config: PathBuf,
    },
    /// Replays recordings through the same steps and prints each event as a JSON line; alarms are no failure.
    Rehearse {
        /// A TOML file, or a folder of which every *.toml is read in name order.
        #[arg(value_name = "CONFIG")]
        config: PathBuf,
        /// Recordings, each met with nothing remembered from the one before.
        #[arg(value_name = "RECORDING", required = true)]
        recordings: Vec<PathBuf>,
        /// Prints statuses, too.
        #[arg(long)]
        status: bool,
    },
    /// Tells every fault of a configuration, or what it means when it has none.
    Check {
        /// A TOML file, or a folder of which every *.toml is read in name order.
        #[arg(value_name = "CONFIG", required_unless_present_any = ["explain", "keys"])]
        config: Option<PathBuf>,
        /// Explains a fault code such as cfg-unknown-key instead.
        #[arg(long, value_name = "CODE", conflicts_with = "config")]
        explain: Option<String>,
        /// Lists every key a configuration may have instead.
        #[arg(long, conflicts_with_all = ["config", "explain"])]
        keys: bool,
    },
}

/// The process's variables as text; a name that is not Unicode is no key of ours and is left out, a value that is
/// not keeps replacement characters, which no key takes.
pub fn variables(all: impl Iterator<Item = (OsString, OsString)>) -> Vec<(String, String)> {
    all.filter_map(|(name, value)| {
        Some((
            name.into_string().ok()?,
            value.to_string_lossy().into_owned(),
        ))
    })
    .collect()
}

/// Runs the command of `arguments` (the first is the program's name) and says how it ended.
pub fn run(
    arguments: impl IntoIterator<Item = OsString>,
    variables: &[(String, String)],
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> Exit {
    let help = format!("Exit codes:\n{}", Exit::table());
    let parsed = Arguments::command()
        .after_help(help)
        .try_get_matches_from(arguments)
        .and_then(|matches| Arguments::from_arg_matches(&matches));
    let written = match parsed {
        Ok(arguments) => dispatch(arguments.command, variables, out, err),
        Err(error) if error.use_stderr() => write!(err, "{error}").map(|()| Exit::Usage),
        Err(error) => write!(out, "{error}").map(|()| Exit::Fine),
    };
    written.unwrap_or(Exit::ReadWrite)
}

fn dispatch(
    command: Command,
    variables: &[(String, String)],
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> std::io::Result<Exit> {
    match command {
        Command::Run { config } => {
            run::log();
            let config = match config::load(&config, variables) {
                Ok(config) => config,
                Err(faults) => return writeln!(err, "{faults}").map(|()| Exit::Configuration),
            };
            match run::run(config) {
                Ok(()) => Ok(Exit::Fine),
                Err(error) => writeln!(err, "{error}").map(|()| error.exit()),
            }
        }
        Command::Rehearse {
            config,
            recordings,
            status,
        } => {
            let config = match config::load(&config, variables) {
                Ok(config) => config,
                Err(faults) => return writeln!(err, "{faults}").map(|()| Exit::Configuration),
            };
            match rehearse::run_with(&config, &recordings, Options { status }, out, err) {
                Ok(()) => Ok(Exit::Fine),
                Err(error) => writeln!(err, "{error}").map(|()| error.exit()),
            }
        }
        Command::Check {
            explain: Some(text),
            ..
        } => match Code::find(&text) {
            Some(code) => {
                writeln!(out, "{}\n{}", code.text(), code.explanation()).map(|()| Exit::Fine)
            }
            None => {
                let known: Vec<&str> = Code::ALL.into_iter().map(Code::text).collect();
                writeln!(
                    err,
                    "no fault code {text:?}; the codes are {}",
                    known.join(", ")
                )
                .map(|()| Exit::Usage)
            }
        },
        Command::Check { keys: true, .. } => write!(out, "{}", config::keys()).map(|()| Exit::Fine),
        Command::Check {
            config,
            explain: None,
            keys: false,
        } => check::run(&config.unwrap_or_default(), variables, out, err),
    }
}
