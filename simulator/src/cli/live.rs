//! `play`: what it says at the start, on the way and at the end.

use std::fs;
use std::io::{self, Write};
use std::time::{SystemTime, UNIX_EPOCH};

use super::arguments::{Playing, Varied};
use super::schedule::schedule;
use crate::exit::Exit;
use crate::explain::words;
use crate::play::{Broker, Happened, Pace, Summary};
use crate::scenario::Scenario;
use crate::truth::{self, moment};
use crate::world::World;

/// Plays the scenario until it is over, SIGINT or SIGTERM.
pub(super) fn play(
    scenario: &Scenario,
    playing: &Playing,
    varied: &Varied,
    out: &mut dyn Write,
    err: &mut dyn Write,
) -> io::Result<Exit> {
    if let Some(conflict) = conflict(playing, varied) {
        return writeln!(err, "{conflict}").map(|()| Exit::Usage);
    }
    let broker = match broker(playing) {
        Ok(broker) => broker,
        Err(fault) => return writeln!(err, "{fault}").map(|()| Exit::ReadWrite),
    };
    // Telling the truth takes its time: the play starts after it.
    let truth = truth::tell(scenario, scenario.start_ns());
    let factor = playing.factor.unwrap_or(1.0);
    let start_ns = match playing.factor {
        Some(_) => varied.start_ns(scenario),
        None => now_ns(),
    };
    let pace = Pace::now(start_ns, factor);
    let world = if playing.endless {
        World::endless(scenario, start_ns)
    } else {
        World::starting(scenario, start_ns)
    };
    let world = match world {
        Ok(world) => world,
        Err(fault) => return writeln!(err, "{fault}").map(|()| Exit::Scenario),
    };
    writeln!(
        out,
        "simulated: {}, seed {}, site {}, to {}:{} under {}/{}/#",
        scenario.name,
        scenario.seed,
        scenario.site,
        playing.host,
        playing.port,
        scenario.root,
        scenario.site
    )?;
    let length = if playing.endless {
        "until Ctrl-C".to_owned()
    } else {
        words(scenario.duration.0)
    };
    let speed = if playing.factor.is_some() {
        format!(
            "{factor} times as fast as true time; a daemon needs a clock of the same factor and start"
        )
    } else {
        "in real time".to_owned()
    };
    writeln!(out, "{length} from {}, {speed}", moment(start_ns, 0.0))?;
    let until_s = if playing.endless {
        f64::INFINITY
    } else {
        scenario.duration.0
    };
    for line in schedule(scenario, &truth, start_ns, until_s) {
        writeln!(out, "  {line}")?;
    }
    out.flush()?;
    let mut told = Ok(());
    let runtime = tokio::runtime::Builder::new_current_thread()
        .enable_all()
        .build()?;
    let played = runtime.block_on(async {
        let stop = stopped()?;
        let tell = |happened: &Happened| {
            if told.is_ok() {
                told = writeln!(out, "{}", sentence(happened)).and_then(|()| out.flush());
            }
        };
        Ok::<_, io::Error>(crate::play::play(world, &broker, pace, stop, tell).await)
    })?;
    told?;
    match played {
        Ok(summary) => writeln!(out, "{}", total(&summary)).map(|()| Exit::Fine),
        Err(fault) => writeln!(err, "{fault}").map(|()| Exit::ReadWrite),
    }
}

/// What was asked for and does not go together.
fn conflict(playing: &Playing, varied: &Varied) -> Option<&'static str> {
    if playing.factor.is_none() && varied.starts() {
        Some("without --factor it starts now; leave --start out, or give --factor 1 with it")
    } else if playing.endless && varied.lasts() {
        Some("--endless has no --duration; give one of them")
    } else {
        None
    }
}

fn broker(playing: &Playing) -> Result<Broker, String> {
    let login = match (&playing.username, &playing.password_file) {
        (Some(username), Some(path)) => {
            let text = fs::read_to_string(path).map_err(|cause| {
                format!(
                    "{} cannot be read: {cause}; check the path and its permissions",
                    path.display()
                )
            })?;
            let password = text.strip_suffix('\n').unwrap_or(&text);
            let password = password.strip_suffix('\r').unwrap_or(password);
            Some((username.clone(), password.to_owned()))
        }
        (Some(_), None) | (None, Some(_) | None) => None,
    };
    Ok(Broker {
        host: playing.host.clone(),
        port: playing.port,
        login,
        client_id: playing
            .client_id
            .clone()
            .unwrap_or_else(|| format!("humward-sim-{}", std::process::id())),
    })
}

/// Done on SIGINT or SIGTERM.
fn stopped() -> io::Result<impl Future<Output = ()>> {
    use tokio::signal::unix::{SignalKind, signal};
    let (mut interrupt, mut terminate) = (
        signal(SignalKind::interrupt())?,
        signal(SignalKind::terminate())?,
    );
    Ok(async move {
        tokio::select! {
            _ = interrupt.recv() => {}
            _ = terminate.recv() => {}
        }
    })
}

fn now_ns() -> i64 {
    // A clock before 1970 is as good as none: the daemon will say so of the stamps.
    let since = SystemTime::now()
        .duration_since(UNIX_EPOCH)
        .unwrap_or_default();
    i64::try_from(since.as_nanos()).unwrap_or(i64::MAX)
}

fn sentence(happened: &Happened) -> String {
    match happened {
        Happened::Connected { dropped: 0 } => "connected".to_owned(),
        Happened::Connected { dropped } => {
            format!("connected again; {dropped} messages were dropped meanwhile")
        }
        Happened::Lost { why, wait } => {
            format!(
                "lost the broker: {why}; next try in {:.1} s",
                wait.as_secs_f64()
            )
        }
        Happened::Behind { by } => format!(
            "messages go out {:.1} s late: this machine or the broker is too slow for the pace; give a lower --factor",
            by.as_secs_f64()
        ),
    }
}

fn total(summary: &Summary) -> String {
    let mut text = format!(
        "{} messages published, {} dropped for want of a broker",
        summary.published, summary.dropped
    );
    if summary.unanswered > 0 {
        text += &format!(", {} sent and not acknowledged", summary.unanswered);
    }
    text
}
