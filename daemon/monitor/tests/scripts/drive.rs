//! Drives a group as the service does: every deadline with its own stamp, then what arrives.

use std::sync::Arc;

use humward_monitor::{Action, Group, Input, input::Identity, plan::GroupPlan, time::Arrival};
use humward_signal::frame::Scratch;

use crate::{
    inputs::{Deed, Timed, ZERO_NS},
    settings::id,
};

/// A group with its worker's memory.
#[derive(Debug)]
pub(crate) struct Driver {
    group: Group,
    scratch: Scratch,
}

/// An action and when it was asked for.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Done {
    /// The arrival of the deadline or input it came with.
    pub(crate) arrival: Arrival,
    /// Which command it belongs to; `None`: the start.
    pub(crate) command: Option<usize>,
    /// The action.
    pub(crate) action: Action,
}

/// Who speaks in every script.
pub(crate) fn identity() -> Identity {
    Identity {
        gateway: id("gw-2"),
        site: id("north-works"),
        epoch: 0,
    }
}

impl Driver {
    /// A started group that runs on `plan`, and what it did then.
    pub(crate) fn start(plan: Arc<GroupPlan>, at: Arrival) -> (Self, Vec<Action>) {
        let mut driver = Self {
            group: Group::new(),
            scratch: Scratch::new(),
        };
        let mut actions = driver.step(at, &Input::Started(identity()));
        actions.extend(driver.step(at, &Input::Plan(plan)));
        (driver, actions)
    }

    /// One step.
    pub(crate) fn step(&mut self, arrival: Arrival, input: &Input) -> Vec<Action> {
        let mut actions = Vec::new();
        self.group
            .step(arrival, input, &mut self.scratch, &mut actions);
        actions
    }

    /// One step, with every deadline before it as a step of its own.
    pub(crate) fn step_on_time(
        &mut self,
        arrival: Arrival,
        input: &Input,
    ) -> Vec<(Arrival, Action)> {
        let mut done = Vec::new();
        while let Some((due, reason)) = self
            .group
            .next_deadline()
            .filter(|(due, _)| *due <= arrival)
        {
            let actions = self.step(due, &Input::Deadline(reason));
            done.extend(actions.into_iter().map(|action| (due, action)));
        }
        done.extend(
            self.step(arrival, input)
                .into_iter()
                .map(|action| (arrival, action)),
        );
        done
    }
}

/// Runs everything; actions in the order they were asked for.
pub(crate) fn run(plan: Arc<GroupPlan>, deeds: &[Timed]) -> Vec<Done> {
    let zero = Arrival::from_ns(ZERO_NS);
    let (mut driver, started) = Driver::start(plan, zero);
    let mut done: Vec<Done> = Vec::new();
    done.extend(started.into_iter().map(|action| Done {
        arrival: zero,
        command: None,
        action,
    }));
    for timed in deeds {
        let actions = match &timed.deed {
            Deed::Step(input) => driver.step_on_time(timed.arrival, input),
            Deed::Wake(input) => {
                let actions = driver.step(timed.arrival, input);
                let stamped = |action| (timed.arrival, action);
                actions.into_iter().map(stamped).collect()
            }
            Deed::Restart(plan) => {
                let (fresh, actions) = Driver::start(Arc::clone(plan), timed.arrival);
                driver = fresh;
                actions
                    .into_iter()
                    .map(|action| (timed.arrival, action))
                    .collect()
            }
        };
        done.extend(actions.into_iter().map(|(arrival, action)| Done {
            arrival,
            command: Some(timed.command),
            action,
        }));
    }
    done
}
