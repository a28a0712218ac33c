//! The run of the demo: who comes up when, what is printed, who leaves when.
//!
//! Broker, listener, daemon, simulator come up in this order, each awaited; they leave in the order simulator, daemon
//! (its last message says `offline`), listener. One thread prints.

use std::io::Write;
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::thread;
use std::time::{Duration, Instant};

use humward::run::RunError;
use humward_sim::play::{Happened, Pace, Summary};
use humward_sim::scenario;
use humward_sim::world::World;
use humward_wire::out::{GatewayState, Transition};

use crate::banner::{self, Banner};
use crate::broker::Broker;
use crate::cli::Arguments;
use crate::exit::Exit;
use crate::fault::DemoFault;
use crate::interrupts;
use crate::listener::{Heard, Listener};
use crate::pace;
use crate::page::{Ink, Page, wrap};
use crate::player::Player;
use crate::said::{MARGIN, brief, evidence, ink, time_of_day};
use crate::story::{News, Story};
use crate::summary;
use crate::verdict::{Given, differences, given};
use crate::watch::{Watch, configuration};

/// The scenario that is played.
pub const SCENARIO: &str = "harbour-watch";
/// How long the daemon may take to say that it watches.
const ONLINE_WITHIN: Duration = Duration::from_secs(20);
/// How long the daemon's last message may take.
const OFFLINE_WITHIN: Duration = Duration::from_secs(10);
/// The plant starts on a whole multiple of this, ns, once the daemon watches.
const WHOLE_NS: i64 = 10_000_000_000;
/// How often it is looked whether it is time.
const LOOK: Duration = Duration::from_millis(50);
/// True time between the daemon's first word and the plant's first block at least: the plant is set up in it.
const SET_UP: Duration = Duration::from_millis(100);
/// True time that goes on after the last block: what the last readings say is still heard.
const AFTER: Duration = Duration::from_millis(400);
/// The plant's time within which that must be, s: sensors that have nothing more to send would soon be missed.
const AFTER_S: (f64, f64) = (5.0, 20.0);

/// What the parts of the demo tell the one that prints.
#[derive(Debug)]
pub enum Happening {
    /// A message came.
    Heard(Heard),
    /// The listener's connection is lost.
    Lost(String),
    /// The simulator has played to the end, or could not.
    Played(Result<Summary, String>),
    /// Something happened to the simulator on the way.
    Playing(Happened),
    /// The daemon has ended.
    DaemonEnded,
    /// Ctrl-C, or the word to end from the system.
    Interrupted,
}

/// Why listening ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Turn {
    /// What was waited for has come.
    Come,
    /// It did not come in time.
    TooLate,
    /// Somebody wants us to end.
    Interrupted,
    /// The daemon has ended by itself.
    DaemonEnded,
}

/// Runs the demo, and says how the story came out.
///
/// # Errors
/// A part could not come up, or ended by itself.
pub fn run(arguments: &Arguments, colour: bool, out: &mut dyn Write) -> Result<Exit, DemoFault> {
    let began = Instant::now();
    let scenario = scenario::load(SCENARIO)?;
    let measured = pace::measure(&scenario)?;
    let factor = pace::bearable(
        arguments.factor,
        measured,
        thread::available_parallelism().map_or(1, usize::from),
    );
    let broker = Broker::start(arguments.port)?;
    let config = configuration(broker.port())?;
    let story = Story::new(config.topics().prefix());
    let (to, from) = channel();
    interrupts::watch(to.clone())?;
    let listener = Listener::start(
        "humward-demo-listener",
        broker.port(),
        &story.filters(),
        to.clone(),
    )?;
    let mut stage = Stage {
        page: Page::new(out, colour),
        story,
        from,
        began,
        first_alarm: None,
        played: false,
        behind: Duration::ZERO,
    };
    banner::print(
        &mut stage.page,
        &Banner {
            scenario: &scenario,
            port: broker.port(),
            prefix: config.topics().prefix(),
            factor,
            wanted: arguments.factor,
            measured,
            keep: arguments.keep,
        },
    )?;

    let origin_ns = scenario.start_ns() - WHOLE_NS;
    let pace = Pace::now(origin_ns, factor);
    let watch = Watch::start(config, factor, origin_ns, to.clone())?;
    let mut turn = stage.listen(Some(ONLINE_WITHIN), |stage| {
        stage.story.state() == Some(GatewayState::Online)
    })?;
    let start_ns = next_whole(pace::now_ns(&pace) + plant_ns(SET_UP.as_secs_f64() * factor));
    let given = given(&scenario);
    let mut outcome = None;
    if turn == Turn::Come {
        let world = if arguments.keep {
            World::endless(&scenario, start_ns)?
        } else {
            World::starting(&scenario, start_ns)?
        };
        let player = Player::start(world, broker.port(), pace, to)?;
        let after_s = (AFTER.as_secs_f64() * factor).clamp(AFTER_S.0, AFTER_S.1);
        let over_ns = start_ns + plant_ns(scenario.duration.0 + after_s);
        let keep = arguments.keep;
        turn = stage.listen(None, |stage| {
            pace::now_ns(&pace) >= over_ns && (keep || stage.played)
        })?;
        if turn == Turn::Come {
            let exit = stage.summary(&given, start_ns)?;
            outcome = Some(exit);
            if keep {
                stage.page.text("It runs on; Ctrl-C ends it.")?;
                turn = stage.listen(None, |_| false)?;
            }
        }
        player.end();
    } else if turn == Turn::TooLate {
        return Err(DemoFault::NotOnline {
            seconds: ONLINE_WITHIN.as_secs(),
        });
    }
    watch.stop()?;
    if turn == Turn::DaemonEnded {
        return Err(DemoFault::Daemon(RunError::PartEnded {
            part: "the daemon",
        }));
    }
    stage.listen_to_the_end()?;
    listener.end();
    match outcome {
        Some(exit) => Ok(exit),
        None => {
            stage.tables(&given, start_ns)?;
            stage
                .page
                .text("Broken off before its end: whether it came out as meant is not known.")?;
            Ok(Exit::Otherwise)
        }
    }
}

/// Seconds of the plant's time in ns.
const fn plant_ns(seconds: f64) -> i64 {
    (seconds * 1e9) as i64
}

/// The next whole multiple of [`WHOLE_NS`] from `now_ns` on.
const fn next_whole(now_ns: i64) -> i64 {
    now_ns + (WHOLE_NS - now_ns.rem_euclid(WHOLE_NS)) % WHOLE_NS
}

/// What is printed and what was heard.
struct Stage<'a> {
    page: Page<'a>,
    story: Story,
    from: Receiver<Happening>,
    began: Instant,
    first_alarm: Option<Duration>,
    played: bool,
    /// The latest a block went out after it was due, where that was worth a word.
    behind: Duration,
}

impl Stage<'_> {
    /// Prints what comes until `until` holds.
    fn listen(
        &mut self,
        within: Option<Duration>,
        until: impl Fn(&Self) -> bool,
    ) -> Result<Turn, DemoFault> {
        let began = Instant::now();
        loop {
            if until(self) {
                return Ok(Turn::Come);
            }
            if within.is_some_and(|within| began.elapsed() > within) {
                return Ok(Turn::TooLate);
            }
            match self.from.recv_timeout(LOOK) {
                Ok(Happening::Heard(heard)) => self.tell(&heard)?,
                Ok(Happening::Lost(why)) => return Err(DemoFault::Listener(why)),
                Ok(Happening::Played(Ok(summary))) => {
                    self.played = true;
                    if !self.behind.is_zero() {
                        self.behind = summary.latest;
                    }
                }
                Ok(Happening::Playing(Happened::Lost { why, .. })) => {
                    return Err(DemoFault::Simulator(why.to_string()));
                }
                Ok(Happening::Playing(Happened::Behind { by })) => {
                    self.behind = self.behind.max(by);
                }
                Ok(Happening::Playing(Happened::Connected { .. })) => {}
                Ok(Happening::Played(Err(why))) => return Err(DemoFault::Simulator(why)),
                Ok(Happening::DaemonEnded) => return Ok(Turn::DaemonEnded),
                Ok(Happening::Interrupted) => return Ok(Turn::Interrupted),
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => {
                    return Err(DemoFault::Listener("every part of the demo ended".into()));
                }
            }
        }
    }

    /// Prints what comes until the daemon has said that it is gone; it has been stopped already.
    fn listen_to_the_end(&mut self) -> Result<(), DemoFault> {
        let began = Instant::now();
        while self.story.state() != Some(GatewayState::Offline) {
            let left = OFFLINE_WITHIN.saturating_sub(began.elapsed());
            if left.is_zero() {
                return Err(DemoFault::NotOffline {
                    seconds: OFFLINE_WITHIN.as_secs(),
                });
            }
            if let Ok(Happening::Heard(heard)) = self.from.recv_timeout(left) {
                self.tell(&heard)?;
            }
        }
        Ok(())
    }

    fn tell(&mut self, heard: &Heard) -> Result<(), DemoFault> {
        match self.story.hear(heard)? {
            News::Event(event) => {
                let at = time_of_day(event.header.at);
                self.page.said(&at, &event.finding.text, ink(&event))?;
                if event.transition == Transition::Raised && self.first_alarm.is_none() {
                    self.first_alarm = Some(self.began.elapsed());
                }
                if let Some(evidence) = evidence(&event) {
                    let line = format!("{}{evidence}", " ".repeat(MARGIN));
                    self.page.lines(&[line], Ink::Faint)?;
                }
            }
            News::Gateway(event) => {
                self.page
                    .said(&time_of_day(event.header.at), &event.text, Ink::Plain)?;
            }
            News::Running(status) => {
                let first = format!("{}  ", time_of_day(status.header.at));
                self.page
                    .lines(&wrap(&first, MARGIN, &brief(&status)), Ink::Faint)?;
            }
            News::State(_) | News::Nothing => {}
        }
        Ok(())
    }

    /// Prints what was injected, said and not said, and how it went.
    fn tables(&mut self, given: &[Given], start_ns: i64) -> std::io::Result<()> {
        let mut lines = vec![String::new()];
        lines.extend(summary::lines(given, &self.story, start_ns));
        lines.push(String::new());
        lines.extend(wrap("", 0, &summary::lost(&self.story)));
        if !self.behind.is_zero() {
            let late = self.behind.as_secs_f64();
            lines.extend(wrap("", 0, &format!(
                "The simulator came {late:.1} s too late: this machine has other work; take a smaller --factor."
            )));
        }
        let first = self.first_alarm.map_or_else(
            || "No alarm came".to_owned(),
            |first| {
                format!(
                    "The first alarm came {:.0} s after the start of the program",
                    first.as_secs_f64()
                )
            },
        );
        let whole = self.began.elapsed().as_secs_f64();
        lines.extend(wrap(
            "",
            0,
            &format!("{first}; this summary, {whole:.0} s after it."),
        ));
        self.page.lines(&lines, Ink::Plain)
    }

    /// Prints the summary and says how the story came out.
    fn summary(&mut self, given: &[Given], start_ns: i64) -> Result<Exit, DemoFault> {
        self.tables(given, start_ns)?;
        let differences = differences(given, &self.story, start_ns);
        if differences.is_empty() {
            self.page.text("The story came out as meant.")?;
            return Ok(Exit::AsMeant);
        }
        self.page.text("The story did not come out as meant:")?;
        for difference in differences {
            self.page.lines(&wrap("- ", 2, &difference), Ink::Plain)?;
        }
        Ok(Exit::Otherwise)
    }
}
