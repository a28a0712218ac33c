//! What was heard, kept in order: every event once, every start and stop, and how the gateway stands.

use std::collections::{BTreeMap, BTreeSet};

use humward_wire::out::{
    Event, Gateway, GatewayEvent, GatewayState, Loss, Message, RunState, Status,
};

use crate::fault::DemoFault;
use crate::listener::Heard;
use crate::said::{Turns, turns};

/// One message, and whether it is new.
#[derive(Debug, Clone, PartialEq)]
pub enum News {
    /// A transition of an asset.
    Event(Box<Event>),
    /// Something about the gateway itself.
    Gateway(Box<GatewayEvent>),
    /// A machine whose running state has changed since its last status.
    Running(Box<Status>),
    /// The gateway's state has changed.
    State(GatewayState),
    /// Nothing that had not been said.
    Nothing,
}

/// Everything heard so far.
#[derive(Debug, Default)]
pub struct Story {
    prefix: String,
    seen: BTreeSet<(String, u64)>,
    events: Vec<Event>,
    turned: BTreeMap<String, Vec<Turns>>,
    running: BTreeMap<String, RunState>,
    lost: BTreeMap<String, Vec<Loss>>,
    state: Option<GatewayState>,
}

impl Story {
    /// Nothing heard yet below this prefix of topics.
    #[must_use]
    pub fn new(prefix: &str) -> Self {
        Self {
            prefix: prefix.to_owned(),
            ..Self::default()
        }
    }

    /// What to listen to: events, statuses and the gateway's state, but no block.
    #[must_use]
    pub fn filters(&self) -> Vec<String> {
        ["event/#", "status/#", "gateway/#"]
            .iter()
            .map(|kind| format!("{}{kind}", self.prefix))
            .collect()
    }

    /// Takes a message in. Delivery is at least once: an event heard before is nothing new.
    ///
    /// # Errors
    /// It does not read as the contract says.
    pub fn hear(&mut self, heard: &Heard) -> Result<News, DemoFault> {
        let below = heard.topic.strip_prefix(&self.prefix).unwrap_or("");
        match below.split_once('/') {
            Some(("event", name)) if name.starts_with("gateway.") => {
                let event: GatewayEvent = read(heard)?;
                let new = self.seen.insert((heard.topic.clone(), event.n));
                Ok(if new {
                    News::Gateway(Box::new(event))
                } else {
                    News::Nothing
                })
            }
            Some(("event", _)) => {
                let event: Event = read(heard)?;
                if !self.seen.insert((heard.topic.clone(), event.n)) {
                    return Ok(News::Nothing);
                }
                self.events.push(event.clone());
                Ok(News::Event(Box::new(event)))
            }
            Some(("status", _)) => Ok(self.status(read(heard)?)),
            Some(("gateway", _)) => {
                let gateway: Gateway = read(heard)?;
                self.lost.insert("gateway".into(), gateway.losses);
                let before = self.state.replace(gateway.state);
                Ok(if before == self.state {
                    News::Nothing
                } else {
                    News::State(gateway.state)
                })
            }
            _ => Ok(News::Nothing),
        }
    }

    fn status(&mut self, status: Status) -> News {
        let Some(asset) = status.header.asset.as_ref().map(ToString::to_string) else {
            return News::Nothing;
        };
        self.lost.insert(asset.clone(), status.losses.clone());
        if let Some(now) = turns(&status) {
            let turned = self.turned.entry(asset.clone()).or_default();
            if turned.last() != Some(&now) {
                turned.push(now);
            }
        }
        let state = status.running.state;
        let before = self.running.insert(asset, state);
        if before == Some(state) || state == RunState::Unknown {
            News::Nothing
        } else {
            News::Running(Box::new(status))
        }
    }

    /// Every event of any asset, in the order it was heard.
    #[must_use]
    pub fn events(&self) -> &[Event] {
        &self.events
    }

    /// The events of one asset, in the order they were heard.
    #[must_use]
    pub fn events_of(&self, asset: &str) -> Vec<&Event> {
        let of_it = |event: &&Event| {
            let id = event.header.asset.as_ref();
            id.is_some_and(|id| id.as_str() == asset)
        };
        self.events.iter().filter(of_it).collect()
    }

    /// How often an asset was heard to come to rest after it had run, and to run again after it had stood.
    #[must_use]
    pub fn stops_and_starts(&self, asset: &str) -> (usize, usize) {
        let turned = self.turned.get(asset).map_or(&[][..], Vec::as_slice);
        let count = |turn: [Turns; 2]| turned.windows(2).filter(|pair| *pair == turn).count();
        (
            count([Turns::Runs, Turns::Stands]),
            count([Turns::Stands, Turns::Runs]),
        )
    }

    /// How the gateway stood last.
    #[must_use]
    pub const fn state(&self) -> Option<GatewayState> {
        self.state
    }

    /// What was refused, shed or missed, by who counted it and why.
    #[must_use]
    pub fn losses(&self) -> Vec<(String, Loss)> {
        self.lost
            .iter()
            .flat_map(|(who, losses)| losses.iter().map(|loss| (who.clone(), loss.clone())))
            .collect()
    }
}

fn read<M: Message>(heard: &Heard) -> Result<M, DemoFault> {
    M::from_json(&heard.payload).map_err(|cause| DemoFault::Message {
        topic: heard.topic.clone(),
        cause: cause.to_string(),
    })
}

#[cfg(test)]
mod tests;
