//! The outbox kept in memory: bounded in bytes, gone with the process.
//!
//! When letters would pass the capacity the oldest that are not on their way are let go, and counted by topic.
//! States are bounded by the configuration: one per topic.

use std::collections::{BTreeMap, BTreeSet, HashMap, VecDeque};
use std::sync::Arc;

use bytes::Bytes;

use super::{Kept, LARGEST, Message, Outbox, Rank, Sending, Waiting};

#[derive(Debug)]
struct Letter {
    lane: Arc<str>,
    topic: String,
    payload: Bytes,
}

impl Letter {
    fn size(&self) -> usize {
        self.topic.len() + self.payload.len()
    }
}

#[derive(Debug)]
struct State {
    rank: Rank,
    payload: Bytes,
    version: u64,
}

/// An outbox in memory.
#[derive(Debug)]
pub struct Memory {
    capacity: usize,
    bytes: usize,
    next_id: u64,
    letters: BTreeMap<u64, Letter>,
    lanes: HashMap<Arc<str>, VecDeque<u64>>,
    /// First letters of the lanes with nothing on its way.
    ready: BTreeSet<u64>,
    on_way: BTreeSet<u64>,
    states: BTreeMap<String, State>,
    /// States to send.
    changed: BTreeSet<(Rank, String)>,
    /// States on their way: topic and version by message.
    states_on_way: HashMap<u64, (String, u64)>,
    state_in_turn: bool,
}

impl Memory {
    /// An empty outbox for letters of `capacity` bytes together.
    pub fn new(capacity: usize) -> Self {
        Self {
            capacity,
            bytes: 0,
            next_id: 1,
            letters: BTreeMap::new(),
            lanes: HashMap::new(),
            ready: BTreeSet::new(),
            on_way: BTreeSet::new(),
            states: BTreeMap::new(),
            changed: BTreeSet::new(),
            states_on_way: HashMap::new(),
            state_in_turn: true,
        }
    }

    fn id(&mut self) -> u64 {
        let id = self.next_id;
        self.next_id += 1;
        id
    }

    fn add(&mut self, letter: Letter) {
        let id = self.id();
        self.bytes += letter.size();
        let lane = self.lanes.entry(Arc::clone(&letter.lane)).or_default();
        lane.push_back(id);
        if lane.len() == 1 {
            self.ready.insert(id);
        }
        self.letters.insert(id, letter);
    }

    /// Takes letter `id` out and lets the next of its lane come forward.
    fn remove(&mut self, id: u64) -> Option<Letter> {
        let letter = self.letters.remove(&id)?;
        self.bytes -= letter.size();
        self.ready.remove(&id);
        self.on_way.remove(&id);
        if let Some(lane) = self.lanes.get_mut(&letter.lane) {
            lane.retain(|other| *other != id);
            match lane.front() {
                Some(first) if !self.on_way.contains(first) => {
                    self.ready.insert(*first);
                }
                Some(_) => {}
                None => {
                    self.lanes.remove(&letter.lane);
                }
            }
        }
        Some(letter)
    }

    fn make_room(&mut self, kept: &mut Kept) {
        while self.bytes > self.capacity {
            let Some(oldest) = self
                .letters
                .keys()
                .copied()
                .find(|id| !self.on_way.contains(id))
            else {
                return;
            };
            let Some(letter) = self.remove(oldest) else {
                return;
            };
            match kept
                .dropped
                .iter_mut()
                .find(|(topic, _)| *topic == letter.topic)
            {
                Some((_, count)) => *count += 1,
                None => kept.dropped.push((letter.topic, 1)),
            }
        }
    }

    fn next_letter(&mut self) -> Option<Sending> {
        let id = self.ready.pop_first()?;
        let letter = self.letters.get(&id)?;
        self.on_way.insert(id);
        Some(Sending {
            id,
            topic: letter.topic.clone(),
            payload: letter.payload.clone(),
            retain: false,
        })
    }

    fn next_state(&mut self) -> Option<Sending> {
        let (_, topic) = self.changed.pop_first()?;
        let id = self.id();
        let state = self.states.get(&topic)?;
        self.states_on_way
            .insert(id, (topic.clone(), state.version));
        Some(Sending {
            id,
            topic,
            payload: state.payload.clone(),
            retain: true,
        })
    }
}

impl Outbox for Memory {
    fn keep(&mut self, messages: Vec<Message>) -> Kept {
        let mut kept = Kept::default();
        for message in messages {
            match message {
                Message::Letter { topic, payload, .. } | Message::State { topic, payload, .. }
                    if payload.len() > LARGEST =>
                {
                    kept.too_large.push(topic);
                }
                Message::Letter {
                    lane,
                    topic,
                    payload,
                } => self.add(Letter {
                    lane,
                    topic,
                    payload,
                }),
                Message::State {
                    rank,
                    topic,
                    payload,
                } => {
                    let version = self.id();
                    self.changed.insert((rank, topic.clone()));
                    self.states.insert(
                        topic,
                        State {
                            rank,
                            payload,
                            version,
                        },
                    );
                }
            }
        }
        self.make_room(&mut kept);
        kept
    }

    fn connected(&mut self) {
        self.on_way.clear();
        self.ready = self
            .lanes
            .values()
            .filter_map(|lane| lane.front().copied())
            .collect();
        self.states_on_way.clear();
        self.changed = self
            .states
            .iter()
            .map(|(topic, state)| (state.rank, topic.clone()))
            .collect();
        self.state_in_turn = true;
    }

    fn next(&mut self) -> Option<Sending> {
        let first = if self.state_in_turn {
            self.next_state()
        } else {
            self.next_letter()
        };
        let sending = match first {
            Some(sending) => Some(sending),
            None if self.state_in_turn => self.next_letter(),
            None => self.next_state(),
        };
        if let Some(sending) = &sending {
            self.state_in_turn = !sending.retain;
        }
        sending
    }

    fn acknowledged(&mut self, id: u64) {
        let Some((topic, version)) = self.states_on_way.remove(&id) else {
            self.remove(id);
            return;
        };
        // An emptied topic is done with once the broker knows; anything newer goes on by itself.
        if self
            .states
            .get(&topic)
            .is_some_and(|state| state.version == version && state.payload.is_empty())
        {
            self.states.remove(&topic);
        }
    }

    fn returned(&mut self, id: u64) {
        match self.states_on_way.remove(&id) {
            Some((topic, _)) => {
                if let Some(state) = self.states.get(&topic) {
                    self.changed.insert((state.rank, topic));
                }
            }
            None => {
                if self.on_way.remove(&id) && self.letters.contains_key(&id) {
                    self.ready.insert(id);
                }
            }
        }
    }

    fn waiting(&self) -> Waiting {
        Waiting {
            letters: self.letters.len(),
            bytes: self.bytes,
            states: self.changed.len() + self.states_on_way.len(),
        }
    }
}
