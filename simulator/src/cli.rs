//! The command line of `humward-sim`.
//!
//! Reports go to standard output, faults to standard error; the exit code says which it was.

mod arguments;
mod live;
mod schedule;

use std::ffi::OsString;
use std::io::{self, Write};
use std::path::Path;

use clap::{CommandFactory as _, FromArgMatches as _};

use crate::exit::Exit;
use crate::explain::{explain, folded, words};
use crate::render::{Target, render};
use crate::scenario::{Scenario, catalogue, load, parse};
use crate::truth;
use crate::world::World;
use arguments::{Arguments, Command, Varied};

/// Runs the command of `arguments` (the first is the program's name) and says how it ended.
pub fn run(
    arguments: impl IntoIterator<Item = OsString>,
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> Exit {
    let help = format!("Exit codes:\n{}", Exit::table());
    let parsed = Arguments::command()
        .after_help(help)
        .try_get_matches_from(arguments)
        .and_then(|matches| Arguments::from_arg_matches(&matches));
    let written = match parsed {
        Ok(arguments) => dispatch(&arguments.command, out, err),
        Err(error) if error.use_stderr() => write!(err, "{error}").map(|()| Exit::Usage),
        Err(error) => write!(out, "{error}").map(|()| Exit::Fine),
    };
    written.unwrap_or(Exit::ReadWrite)
}

fn dispatch(command: &Command, out: &mut dyn Write, err: &mut dyn Write) -> io::Result<Exit> {
    match command {
        Command::List => list(out, err),
        Command::Explain { scenario, varied } => match read(scenario, varied, err)? {
            Ok(scenario) => {
                let start_ns = varied.start_ns(&scenario);
                let text = explain(&truth::tell(&scenario, start_ns));
                write!(out, "{text}").map(|()| Exit::Fine)
            }
            Err(exit) => Ok(exit),
        },
        Command::Render {
            scenario,
            out: path,
            replace,
            varied,
        } => match read(scenario, varied, err)? {
            Ok(scenario) => record(&scenario, varied, path, *replace, out, err),
            Err(exit) => Ok(exit),
        },
        Command::Play {
            scenario,
            play,
            varied,
        } => match read(scenario, varied, err)? {
            Ok(scenario) => live::play(&scenario, play, varied, out, err),
            Err(exit) => Ok(exit),
        },
    }
}

fn list(out: &mut dyn Write, err: &mut dyn Write) -> io::Result<Exit> {
    let entries = catalogue();
    let names = entries.iter().map(|entry| entry.name.len());
    let width = names.max().unwrap_or_default();
    for entry in entries {
        match parse(entry.name, entry.text) {
            Ok(scenario) => {
                let mut name = entry.name;
                for line in folded(&scenario.about, 78 - width) {
                    writeln!(out, "{name:width$}  {line}")?;
                    name = "";
                }
            }
            Err(fault) => {
                writeln!(err, "{fault}")?;
                return Ok(Exit::Scenario);
            }
        }
    }
    Ok(Exit::Fine)
}

/// The scenario with what the command line changes, or how the program ends without it.
fn read(name: &str, varied: &Varied, err: &mut dyn Write) -> io::Result<Result<Scenario, Exit>> {
    match load(name) {
        Ok(scenario) => Ok(Ok(varied.apply(scenario))),
        Err(fault) => writeln!(err, "{fault}").map(|()| Err(Exit::Scenario)),
    }
}

fn record(
    scenario: &Scenario,
    varied: &Varied,
    path: &Path,
    replace: bool,
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> io::Result<Exit> {
    let start_ns = varied.start_ns(scenario);
    let world = match World::starting(scenario, start_ns) {
        Ok(world) => world,
        Err(fault) => return writeln!(err, "{fault}").map(|()| Exit::Scenario),
    };
    let target = Target {
        path,
        replace,
        site: &scenario.site,
        root: &scenario.root,
        truth: &truth::tell(scenario, start_ns),
    };
    match render(world, &target) {
        Ok(written) => writeln!(
            out,
            "{}: simulated, {} of {}, seed {}; {} messages, {} bytes",
            path.display(),
            words(scenario.duration.0),
            scenario.name,
            scenario.seed,
            written.messages,
            written.bytes
        )
        .map(|()| Exit::Fine),
        Err(fault) => writeln!(err, "{fault}").map(|()| Exit::ReadWrite),
    }
}
