//! `humward rehearse`: recordings through the same decoding and the same step as the live daemon.
//!
//! In: a checked configuration and recordings. Out: each event as one JSON line, the very bytes that would be
//! published; a summary to a second writer. Each recording meets fresh groups: nothing is remembered from
//! the one before. After the last record the readings under way are ended; nothing else falls due.
//! Alarms are no failure: only a recording that cannot be read, or has nothing of this configuration, is.

mod summary;

use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::Arc;

use humward_monitor::input::{DeadlineReason, GapCause, Input};
use humward_monitor::time::{Arrival, Span};
use humward_monitor::{Action, Group};
use humward_signal::frame::Scratch;
use humward_wire::id::Id;
use humward_wire::out::Message as _;
use humward_wire::recording::{Header, Record, RecordingFault, open};

use crate::clock::{Stamp, ahead_after};
use crate::config::Loaded;
use crate::decode::{Decoder, refused};
use crate::exit::Exit;
use crate::message::{event_json, status_json};
use crate::route::{About, GroupIndex, Routes};
use crate::setup;
use summary::Summary;

/// What to print beside events.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Options {
    /// Statuses, too.
    pub status: bool,
}

/// Why a recording cannot be rehearsed.
#[derive(Debug, thiserror::Error)]
pub enum RehearseError {
    /// The file cannot be read.
    #[error("{}: {cause}; give a readable recording", path.display())]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: io::Error,
    },
    /// The file is no recording, or no longer one from some byte on. What came before was rehearsed.
    #[error("{}: {fault}", path.display())]
    Recording {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        fault: RecordingFault,
    },
    /// Nothing in the recording is of this configuration.
    #[error(
        "{}: recorded at site {recorded}, the configuration is of site {configured}, and no topic is known here \
         (first seen: {seen}); give the configuration it was recorded with", path.display()
    )]
    NothingKnown {
        /// The file.
        path: PathBuf,
        /// Its site.
        recorded: Id,
        /// Ours.
        configured: Id,
        /// Its first topic.
        seen: String,
    },
    /// Events cannot be written.
    #[error("cannot write events: {0}; check where standard output goes")]
    Write(#[from] io::Error),
}

impl RehearseError {
    /// How the command ends over it.
    pub const fn exit(&self) -> Exit {
        match self {
            Self::Read { .. } | Self::Write(_) => Exit::ReadWrite,
            Self::Recording { .. } | Self::NothingKnown { .. } => Exit::Recording,
        }
    }
}

/// Rehearses each recording and prints its events to `out`, one JSON line each; the summary goes to stderr.
///
/// # Errors
/// [`RehearseError`] of the first recording that cannot be rehearsed to its end.
pub fn run(
    config: Loaded,
    recordings: &[PathBuf],
    out: &mut dyn Write,
) -> Result<(), RehearseError> {
    run_with(
        &config,
        recordings,
        Options::default(),
        out,
        &mut io::stderr(),
    )
}

/// As [`run`], with a choice of what to print and of where the summary goes.
///
/// # Errors
/// As [`run`].
pub fn run_with(
    config: &Loaded,
    recordings: &[PathBuf],
    options: Options,
    out: &mut dyn Write,
    told: &mut dyn Write,
) -> Result<(), RehearseError> {
    let routes = setup::routes(config);
    for path in recordings {
        let bytes = std::fs::read(path).map_err(|cause| RehearseError::Read {
            path: path.clone(),
            cause,
        })?;
        let mut rehearsal = Rehearsal::new(config, &routes, options, out);
        let done = rehearsal.recording(path, &bytes);
        let summary = rehearsal.summary;
        writeln!(told, "{}", path.display())?;
        summary.write(told)?;
        done?;
    }
    Ok(())
}

struct Rehearsal<'a> {
    config: &'a Loaded,
    routes: &'a Routes,
    options: Options,
    out: &'a mut dyn Write,
    groups: Vec<Group>,
    decoder: Decoder,
    scratch: Scratch,
    actions: Vec<Action>,
    ahead: Span,
    summary: Summary,
}

impl<'a> Rehearsal<'a> {
    fn new(
        config: &'a Loaded,
        routes: &'a Routes,
        options: Options,
        out: &'a mut dyn Write,
    ) -> Self {
        Self {
            config,
            routes,
            options,
            out,
            groups: Vec::new(),
            decoder: Decoder::new(config.gateway().at_tolerance()),
            scratch: Scratch::new(),
            actions: Vec::new(),
            ahead: Span::ZERO,
            summary: Summary::default(),
        }
    }

    fn recording(&mut self, path: &Path, bytes: &[u8]) -> Result<(), RehearseError> {
        let fault = |fault| RehearseError::Recording {
            path: path.to_owned(),
            fault,
        };
        let (header, reader) = open(bytes).map_err(fault)?;
        let mut last = None;
        let mut broken = None;
        for record in reader {
            match record {
                Ok((_, record)) => {
                    let arrival = Arrival::from_ns(record.arrival());
                    if last.is_none() {
                        self.start(arrival)?;
                    }
                    last = Some(arrival);
                    self.summary.at(arrival);
                    self.record(arrival, &record, &header)?;
                }
                Err(why) => {
                    broken = Some(why);
                    break;
                }
            }
        }
        if let Some(last) = last {
            for group in 0..self.groups.len() {
                self.step(group, last, &Input::Deadline(DeadlineReason::RecordingEnd))?;
            }
        }
        self.summary.readings(self.config, &self.groups);
        match (broken, &self.summary.first_unknown) {
            (Some(why), _) => Err(fault(why)),
            (None, Some(seen)) if self.summary.known == 0 => Err(RehearseError::NothingKnown {
                path: path.to_owned(),
                recorded: header.site,
                configured: self.config.site().clone(),
                seen: seen.clone(),
            }),
            (None, Some(_) | None) => Ok(()),
        }
    }

    fn start(&mut self, arrival: Arrival) -> Result<(), RehearseError> {
        self.groups = self.config.groups().iter().map(|_| Group::new()).collect();
        for (index, plan) in self.config.groups().iter().enumerate() {
            self.step(
                index,
                arrival,
                &Input::Started(setup::identity(self.config)),
            )?;
            self.step(index, arrival, &Input::Plan(Arc::clone(plan)))?;
        }
        Ok(())
    }

    fn record(
        &mut self,
        arrival: Arrival,
        record: &Record<'_>,
        header: &Header,
    ) -> Result<(), RehearseError> {
        match record {
            Record::Message { topic, payload, .. } => self.message(arrival, topic, payload),
            // A restart loses what was in memory, as the live daemon did.
            Record::Started { .. } => self.start(arrival),
            Record::Plan { config_hash, .. } => {
                if *config_hash != self.config.hash() {
                    self.summary
                        .other_plan(header.config_hash.as_deref().unwrap_or(config_hash));
                }
                Ok(())
            }
            Record::Gap {
                topic,
                reason,
                blocks,
                ..
            } => {
                let blocks = blocks.unwrap_or(1);
                match self.routes.find(topic) {
                    Some(route) => {
                        let About::Block(source, _) = &route.about else {
                            return Ok(());
                        };
                        let gap = Input::Gap(Some(source.clone()), cause(reason), blocks);
                        self.step(route.group, arrival, &gap)
                    }
                    None => Ok(()),
                }
            }
            Record::Link { up, .. } => self.step_all(arrival, &Input::Link(*up)),
            Record::ClockStep { by, .. } => {
                self.ahead = ahead_after(self.ahead, *by);
                self.step_all(arrival, &Input::ClockStep(*by))
            }
        }
    }

    fn message(
        &mut self,
        arrival: Arrival,
        topic: &str,
        payload: &[u8],
    ) -> Result<(), RehearseError> {
        let Some(route) = self.routes.find(topic) else {
            self.summary.unknown(topic);
            return Ok(());
        };
        self.summary.known += 1;
        let stamp = Stamp {
            arrival,
            ahead: self.ahead,
        };
        match self.decoder.decode(&route.about, stamp, payload) {
            Ok(input) => {
                let done = self.step(route.group, arrival, &input);
                self.decoder.take_back(input);
                done
            }
            Err(refusal) => {
                self.summary.refused(topic, &refusal);
                match refused(&route.about, refusal) {
                    Some(input) => self.step(route.group, arrival, &input),
                    None => Ok(()),
                }
            }
        }
    }

    fn step_all(&mut self, arrival: Arrival, input: &Input) -> Result<(), RehearseError> {
        (0..self.groups.len()).try_for_each(|group| self.step(group, arrival, input))
    }

    fn step(
        &mut self,
        group: GroupIndex,
        arrival: Arrival,
        input: &Input,
    ) -> Result<(), RehearseError> {
        if let Some(group) = self.groups.get_mut(group) {
            group.step(arrival, input, &mut self.scratch, &mut self.actions);
        }
        for action in std::mem::take(&mut self.actions) {
            match &action {
                Action::Event(event) => {
                    self.summary.event(event);
                    self.line(&event_json(event))?;
                }
                Action::Status(status) if self.options.status => self.line(&status_json(status))?,
                Action::Reply { reply, .. } => self.line(&reply.to_json())?,
                Action::Status(_) | Action::Alarm { .. } | Action::Evidence(_) => {}
            }
        }
        Ok(())
    }

    fn line(&mut self, json: &[u8]) -> Result<(), RehearseError> {
        self.out.write_all(json)?;
        self.out.write_all(b"\n")?;
        Ok(())
    }
}

/// The cause a capture names; a word of a later version counts as shedding, the only other one there is.
fn cause(reason: &str) -> GapCause {
    match reason {
        "link_lost" => GapCause::LinkLost,
        "restart" => GapCause::Restart,
        _ => GapCause::Shed,
    }
}

#[cfg(test)]
mod tests;
