//! One thread per core, each with its groups, one mailbox and one FFT scratch.
//!
//! A worker takes letters in order, decodes payloads, steps the group they are for and sends the actions on to be
//! kept. It waits when the keeper is slow; its mailbox then fills and the intake lets blocks go, counted.

use std::collections::BTreeMap;
use std::sync::Arc;
use std::sync::mpsc::SyncSender;

use bytes::Bytes;
use humward_monitor::input::{GapCause, Identity, Input, Source};
use humward_monitor::plan::GroupPlan;
use humward_monitor::time::{Arrival, Span};
use humward_monitor::{Action, Group};
use humward_signal::frame::Scratch;
use humward_wire::command::{Command, Verb};
use humward_wire::id::Id;
use humward_wire::out::{GatewayEventKind, Header, Instant, Outcome as Answer, Reply};
use humward_wire::refusal::Refusal;

use crate::clock::{Moment, Stamp};
use crate::commit::Outcome;
use crate::decode::{Decoder, refused};
use crate::gateway::{Book, Told};
use crate::mailbox::Mailbox;
use crate::route::{About, GroupIndex, Route};

/// What a worker is told.
#[derive(Debug, Clone, PartialEq)]
pub enum Letter {
    /// A message for one group.
    Payload {
        /// Where it goes.
        route: Arc<Route>,
        /// When it came.
        stamp: Stamp,
        /// Its bytes.
        payload: Bytes,
        /// Whether the broker had kept it from before.
        retained: bool,
    },
    /// Blocks of a source were let go.
    Shed {
        /// Where they would have gone.
        route: Arc<Route>,
        /// When this is told.
        arrival: Arrival,
        /// How many.
        blocks: u64,
    },
    /// The ingest connection came up or fell, for every group.
    Link(Arrival, bool),
    /// The wall clock was set by so many ns, for every group.
    ClockStep(Arrival, i64),
    /// It is so late now; deadlines may be due.
    Tick(Arrival),
    /// Nothing follows.
    Stop,
}

/// A worker before it runs.
#[derive(Debug)]
pub struct Worker {
    /// Its place among the workers.
    pub index: usize,
    /// Its groups.
    pub groups: BTreeMap<GroupIndex, Arc<GroupPlan>>,
    /// Where its letters come from.
    pub mailbox: Arc<Mailbox<Letter>>,
    /// Where its actions go.
    pub to: SyncSender<Outcome>,
    /// The gateway's account.
    pub book: Arc<Book>,
    /// How far a block's time may be from its arrival.
    pub tolerance: Span,
    /// Commands that may be given.
    pub allowed: Arc<[Verb]>,
}

impl Worker {
    /// Runs until told to stop.
    pub fn run(self) {
        let started = self.book.constants().started;
        let mut bench = Bench {
            decoder: Decoder::new(self.tolerance),
            scratch: Scratch::new(),
            groups: BTreeMap::new(),
            actions: Vec::new(),
        };
        for (index, plan) in &self.groups {
            bench.groups.insert(*index, Group::new());
            let identity: Identity = self.book.constants().identity.clone();
            self.step(&mut bench, *index, started, &Input::Started(identity));
            self.step(&mut bench, *index, started, &Input::Plan(Arc::clone(plan)));
        }
        loop {
            let letter = self.mailbox.take();
            let began = Moment::now();
            match letter {
                Letter::Stop => return,
                Letter::Payload {
                    route,
                    stamp,
                    payload,
                    retained,
                } => {
                    self.payload(&mut bench, &route, stamp, &payload, retained);
                }
                Letter::Shed {
                    route,
                    arrival,
                    blocks,
                } => {
                    if let About::Block(source, _) = &route.about {
                        let gap = Input::Gap(Some(Source::clone(source)), GapCause::Shed, blocks);
                        self.step(&mut bench, route.group, arrival, &gap);
                    }
                }
                Letter::Link(arrival, up) => self.step_all(&mut bench, arrival, &Input::Link(up)),
                Letter::ClockStep(arrival, by) => {
                    self.step_all(&mut bench, arrival, &Input::ClockStep(by))
                }
                Letter::Tick(arrival) => {
                    let due: Vec<_> = bench
                        .groups
                        .iter()
                        .filter_map(|(index, group)| Some((*index, group.next_deadline()?)))
                        .filter(|(_, (at, _))| *at <= arrival)
                        .collect();
                    for (index, (_, reason)) in due {
                        self.step(&mut bench, index, arrival, &Input::Deadline(reason));
                    }
                }
            }
            if let Some(meter) = self.book.meter(self.index) {
                meter.worked(began.elapsed());
            }
        }
    }

    fn payload(
        &self,
        bench: &mut Bench,
        route: &Route,
        stamp: Stamp,
        payload: &[u8],
        retained: bool,
    ) {
        let input = match bench.decoder.decode(&route.about, stamp, payload) {
            Ok(input) => input,
            Err(refusal) => {
                self.refuse(bench, route, stamp.arrival, refusal);
                return;
            }
        };
        let timeless = match &input {
            Input::Speed(_, speed) => retained && speed.at.is_none(),
            Input::Process(_, process) => retained && process.at.is_none(),
            Input::Command(asset, sender, command) if !self.allowed.contains(&command.verb) => {
                self.forbid(stamp.arrival, asset, sender, command);
                return;
            }
            Input::Block(..) => {
                if let Some(meter) = self.book.meter(self.index) {
                    meter.accepted();
                }
                false
            }
            Input::Command(..)
            | Input::Started(_)
            | Input::Plan(_)
            | Input::Gap(..)
            | Input::Refused(..)
            | Input::Link(_)
            | Input::ClockStep(_)
            | Input::Deadline(_) => false,
        };
        if timeless {
            if self.book.lost("retained_without_time", 1) {
                tracing::warn!(
                    "{}: a retained value without its own time was refused; add `at` to it",
                    route.topic
                );
            }
            return;
        }
        self.step(bench, route.group, stamp.arrival, &input);
        bench.decoder.take_back(input);
    }

    fn refuse(&self, bench: &mut Bench, route: &Route, arrival: Arrival, refusal: Refusal) {
        let code = refusal.reason.code();
        if self.book.lost(code, 1) {
            tracing::warn!("{}: payload refused: {refusal}", route.topic);
            let told = Told {
                reason: Some(code.to_owned()),
                topic: Some(route.topic.clone()),
                offset: Some(refusal.offset),
                ..Told::new(GatewayEventKind::PayloadRefused, refusal.to_string())
            };
            self.send(Outcome::Told(arrival, told));
        }
        if let About::Command { asset, sender } = &route.about {
            let mut reply = self.reply(arrival, asset, refusal.to_string());
            reply.offset = Some(refusal.offset as u64);
            self.answer(arrival, asset, sender, reply);
        }
        if let Some(input) = refused(&route.about, refusal) {
            self.step(bench, route.group, arrival, &input);
        }
    }

    fn forbid(&self, arrival: Arrival, asset: &Id, sender: &Id, command: &Command) {
        let verb = command.verb.text();
        self.book.lost("command_not_allowed", 1);
        tracing::warn!(
            "{sender} asked {verb:?} of {asset}, which the configuration does not allow"
        );
        let why = format!(
            "{verb:?} is not among the commands the configuration allows; add it to `commands`"
        );
        let mut reply = self.reply(arrival, asset, why);
        reply.id = Some(command.id.clone());
        reply.occurrence = command.occurrence.clone();
        self.answer(arrival, asset, sender, reply);
    }

    fn reply(&self, arrival: Arrival, asset: &Id, why: String) -> Reply {
        let Identity {
            gateway,
            site,
            epoch,
        } = self.book.constants().identity.clone();
        Reply {
            header: Header::new::<Reply>(
                gateway,
                epoch,
                site,
                Some(asset.clone()),
                Instant(arrival.ns()),
            ),
            id: None,
            outcome: Answer::Refused,
            outcome_code: Answer::Refused.code(),
            reason: Some(why),
            offset: None,
            occurrence: None,
            event: None,
        }
    }

    fn answer(&self, arrival: Arrival, asset: &Id, sender: &Id, reply: Reply) {
        let action = Action::Reply {
            asset: asset.clone(),
            sender: sender.clone(),
            reply,
        };
        self.send(Outcome::Actions(arrival, vec![action]));
    }

    fn step_all(&self, bench: &mut Bench, arrival: Arrival, input: &Input) {
        let groups: Vec<GroupIndex> = bench.groups.keys().copied().collect();
        for index in groups {
            self.step(bench, index, arrival, input);
        }
    }

    fn step(&self, bench: &mut Bench, group: GroupIndex, arrival: Arrival, input: &Input) {
        let Some(group) = bench.groups.get_mut(&group) else {
            return;
        };
        group.step(arrival, input, &mut bench.scratch, &mut bench.actions);
        if !bench.actions.is_empty() {
            self.send(Outcome::Actions(
                arrival,
                std::mem::take(&mut bench.actions),
            ));
        }
    }

    fn send(&self, outcome: Outcome) {
        if self.to.send(outcome).is_err() {
            tracing::error!("the keeper of messages has ended; an outcome is lost");
        }
    }
}

/// What a worker works with.
#[derive(Debug)]
struct Bench {
    decoder: Decoder,
    scratch: Scratch,
    groups: BTreeMap<GroupIndex, Group>,
    actions: Vec<Action>,
}
