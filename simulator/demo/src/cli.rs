//! The command line: nothing has to be said, and little may be.

use std::ffi::OsString;
use std::io::Write;

use clap::{CommandFactory as _, FromArgMatches as _, Parser};

use crate::exit::Exit;
use crate::pace::{RANGE, USUAL};
use crate::stage;

/// The first minute: a broker, the daemon and a simulated plant in one process,
/// many times faster than true time.
///
/// Prints what the daemon says, in its own words, and holds it against what was
/// injected. Everything is simulated; no such plant exists.
/// Advisory only: not machinery protection and not a safety function.
#[derive(Debug, Clone, Parser)]
#[command(name = "humward-demo", version, verbatim_doc_comment)]
pub struct Arguments {
    /// Times true time; less where this machine cannot keep up.
    #[arg(long, default_value_t = USUAL, value_parser = factor)]
    pub factor: f64,
    /// Runs on after the summary until Ctrl-C.
    #[arg(long)]
    pub keep: bool,
    /// Port of the broker on 127.0.0.1; a free one if not given.
    #[arg(long, value_parser = clap::value_parser!(u16).range(1..))]
    pub port: Option<u16>,
}

fn factor(text: &str) -> Result<f64, String> {
    let (least, most) = RANGE;
    text.parse()
        .ok()
        .filter(|factor| (least..=most).contains(factor))
        .ok_or_else(|| format!("allowed: a number from {least} to {most}"))
}

/// Runs the demo as `arguments` say (the first is the program's name) and says how it ended.
pub fn run(
    arguments: impl IntoIterator<Item = OsString>,
    colour: bool,
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> Exit {
    let help = format!("Exit codes:\n{}", Exit::table());
    let parsed = Arguments::command()
        .after_help(help)
        .try_get_matches_from(arguments)
        .and_then(|matches| Arguments::from_arg_matches(&matches));
    let written = match parsed {
        Ok(arguments) => match stage::run(&arguments, colour, out) {
            Ok(exit) => Ok(exit),
            Err(fault) => writeln!(err, "humward-demo: {fault}").map(|()| Exit::CouldNotRun),
        },
        Err(error) if error.use_stderr() => write!(err, "{error}").map(|()| Exit::Usage),
        Err(error) => write!(out, "{error}").map(|()| Exit::AsMeant),
    };
    written.unwrap_or(Exit::CouldNotRun)
}

#[cfg(test)]
mod tests {
    use super::run;
    use crate::exit::Exit;

    fn ran(arguments: &[&str]) -> (Exit, String, String) {
        let (mut out, mut err) = (Vec::new(), Vec::new());
        let arguments = ["humward-demo"].iter().chain(arguments).map(Into::into);
        let exit = run(arguments, false, &mut out, &mut err);
        (
            exit,
            String::from_utf8(out).unwrap(),
            String::from_utf8(err).unwrap(),
        )
    }

    #[test]
    fn help_names_every_option_and_every_exit_code_within_eighty_columns() {
        let (exit, out, err) = ran(&["--help"]);
        assert_eq!((exit, err.as_str()), (Exit::AsMeant, ""));
        for part in [
            "--factor",
            "--keep",
            "--port",
            "  3  it could not run",
            "Advisory only",
        ] {
            assert!(out.contains(part), "{part} is not in:\n{out}");
        }
        for line in out.lines() {
            assert!(line.chars().count() <= 80, "too wide: {line}");
        }
    }

    #[test]
    fn a_factor_out_of_range_is_told_with_the_range_and_exit_2() {
        for wrong in ["0.5", "201", "fast", "NaN"] {
            let (exit, _, err) = ran(&["--factor", wrong]);
            assert_eq!(exit, Exit::Usage);
            assert!(err.contains("allowed: a number from 1 to 200"), "{err}");
        }
    }
}
