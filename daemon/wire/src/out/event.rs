//! Events and retained alarms: one transition, and the present state of one open occurrence.
//!
//! Both carry the same account of the occurrence, [`Finding`]. An alarm topic is emptied (zero bytes) when its
//! occurrence closes. Size: at most [`MAX_EVENT`] bytes after [`Event::fit`]; checked by `tests/contract/sizes.rs`.

use alloc::string::String;
use alloc::vec::Vec;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::measured::{five_digits_or_null, rounded, rounded_pair};
use super::{Header, Instant, Measured, Message, Quality, RunState, Standing, Transition, cut};
use crate::id::Id;

/// Largest event or alarm, in bytes of JSON.
pub const MAX_EVENT: usize = 2048;
/// Longest sentence of a message, in characters.
pub const MAX_TEXT: usize = 300;
/// What every event and alarm says about its own standing.
pub const ADVISORY: &str = "Advisory only: not machinery protection or a safety function.";

/// A limit that was crossed.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Limit {
    /// The limit's value.
    #[serde(serialize_with = "rounded")]
    pub value: f64,
    /// Unit with detector, as of the value it is compared with.
    pub unit: String,
}

/// Whether and how fast the machine turns.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Running {
    /// Running, stopped and so on.
    pub state: RunState,
    /// Code of the state.
    pub state_code: u8,
    /// Since when it has been in that state, in signal time; null while nothing is known.
    pub since: Option<Instant>,
    /// Named operating state such as `high flow`; null when none is defined.
    pub operating: Option<String>,
    /// Shaft speed in r/min.
    #[serde(serialize_with = "five_digits_or_null")]
    pub rpm: Option<f64>,
    /// How far the speed can be believed.
    pub rpm_quality: Quality,
}

/// One spectral line the message rests on.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Line {
    /// What the line is called, such as `outer race 1x`.
    pub label: String,
    /// Where it stands, Hz.
    #[serde(serialize_with = "rounded")]
    pub frequency_hz: f64,
    /// Multiple of shaft speed; null when the speed is not known.
    #[serde(serialize_with = "five_digits_or_null")]
    pub order: Option<f64>,
    /// Power over the local floor, dB.
    #[serde(serialize_with = "five_digits_or_null")]
    pub strength_db: Option<f64>,
    /// Absolute strength.
    #[serde(serialize_with = "five_digits_or_null")]
    pub strength: Option<f64>,
    /// Unit of `strength`, with detector.
    pub unit: String,
    /// Band the line was looked for in, Hz: the demodulated band for envelope lines.
    #[serde(serialize_with = "rounded_pair")]
    pub band_hz: [f64; 2],
    /// Width of one bin, Hz.
    #[serde(serialize_with = "rounded")]
    pub resolution_hz: f64,
}

/// A further value, with its evaluation zone where one applies.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Zoned {
    /// The value.
    #[serde(flatten)]
    pub value: Measured,
    /// Zone `A` to `D`; null where the measure has none.
    pub zone: Option<String>,
}

/// What is known about an occurrence: the part events and alarms share.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Finding {
    /// One sentence for people, at most 300 characters; tag and severity in the first 40.
    pub text: String,
    /// The occurrence; null for events about the asset as a whole.
    pub occurrence: Option<Id>,
    /// The occurrence that speaks for the group; null when this one does.
    pub lead: Option<Id>,
    /// The measuring point; null when the watch uses several.
    pub point: Option<Id>,
    /// The watch, such as `outer-race.drive-end`; null for events about the asset as a whole.
    pub watch: Option<String>,
    /// State and severity with their codes.
    #[serde(flatten)]
    pub standing: Standing,
    /// Whether the alarm stays until it is reset.
    pub latched: bool,
    /// The value judged.
    pub value: Option<Measured>,
    /// The limit it crossed.
    pub limit: Option<Limit>,
    /// The machine's own normal, in the unit of the value; null until learned.
    #[serde(serialize_with = "five_digits_or_null")]
    pub normal: Option<f64>,
    /// When the condition began, in signal time.
    pub since: Option<Instant>,
    /// How many readings it has held.
    pub readings: u32,
    /// Whether and how fast the machine turns.
    pub running: Running,
    /// Lines the finding rests on, strongest first.
    pub lines: Vec<Line>,
    /// Further values, the most telling first.
    pub also: Vec<Zoned>,
    /// What speaks against it.
    pub against: Vec<String>,
    /// What to check next.
    pub checks: Vec<String>,
    /// Whether the message was shortened to fit.
    pub truncated: bool,
    /// Always [`ADVISORY`].
    pub advisory: String,
}

/// One transition, on `event/<asset>`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Event {
    /// Who speaks about what.
    #[serde(flatten)]
    pub header: Header,
    /// Contiguous number of the asset's events within the epoch, from 1.
    pub n: u64,
    /// Unique name of the event: `<epoch>-<n>`.
    pub id: Id,
    /// What happened.
    pub transition: Transition,
    /// Code of the transition.
    pub transition_code: u8,
    /// First event left out; only with `omitted`.
    pub from_n: Option<u64>,
    /// Last event left out; only with `omitted`.
    pub to_n: Option<u64>,
    /// The account of the occurrence.
    #[serde(flatten)]
    pub finding: Finding,
}

/// Present state of one open occurrence, retained on `alarm/<asset>/<watch>`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Alarm {
    /// Who speaks about what.
    #[serde(flatten)]
    pub header: Header,
    /// Number of the event that led to this state.
    pub n: u64,
    /// Id of that event.
    pub event: Id,
    /// The account of the occurrence.
    #[serde(flatten)]
    pub finding: Finding,
}

impl Event {
    /// Shortens the event until its JSON has at most `max` bytes; tells whether anything was left out.
    ///
    /// Order, one item at a time from the end of each list: `also` to one, `checks` to one, `against` to one,
    /// `lines` to two; then `also`, `checks`, `against` and `lines` to none; then the sentence to 100 bytes and
    /// every other free text to 64. Ids, transition, state, severity, value, limit, normal and since always stay;
    /// with all of them at their longest the event is below 2 KiB, so [`MAX_EVENT`] can always be met.
    #[must_use]
    pub fn fit(mut self, max: usize) -> (Event, bool) {
        let cut = fit(&mut self, max, |message| &mut message.finding);
        (self, cut)
    }
}

impl Alarm {
    /// Shortens the alarm as [`Event::fit`] does.
    #[must_use]
    pub fn fit(mut self, max: usize) -> (Alarm, bool) {
        let cut = fit(&mut self, max, |message| &mut message.finding);
        (self, cut)
    }
}

/// Shortens the finding of a message until its JSON has at most `max` bytes; tells whether anything was left out.
fn fit<M: Message>(message: &mut M, max: usize, finding: impl Fn(&mut M) -> &mut Finding) -> bool {
    let mut step = 0;
    while message.to_json().len() > max {
        if !finding(message).shorten(&mut step) {
            break;
        }
    }
    finding(message).truncated
}

impl Finding {
    /// Takes the next thing away; false when nothing is left to take.
    fn shorten(&mut self, step: &mut usize) -> bool {
        self.truncated = true;
        loop {
            let taken = match *step {
                0 => drop_last(&mut self.also, 1),
                1 => drop_last(&mut self.checks, 1),
                2 => drop_last(&mut self.against, 1),
                3 => drop_last(&mut self.lines, 2),
                4 => drop_last(&mut self.also, 0),
                5 => drop_last(&mut self.checks, 0),
                6 => drop_last(&mut self.against, 0),
                7 => drop_last(&mut self.lines, 0),
                8 => {
                    *step += 1;
                    self.cut_texts();
                    return true;
                }
                _ => return false,
            };
            if taken {
                return true;
            }
            *step += 1;
        }
    }

    fn cut_texts(&mut self) {
        cut(&mut self.text, 100);
        if let Some(watch) = &mut self.watch {
            cut(watch, 64);
        }
        if let Some(value) = &mut self.value {
            cut(&mut value.measure, 64);
            cut(&mut value.unit, 64);
        }
        if let Some(limit) = &mut self.limit {
            cut(&mut limit.unit, 64);
        }
        if let Some(operating) = &mut self.running.operating {
            cut(operating, 64);
        }
    }
}

pub(super) fn drop_last<T>(list: &mut Vec<T>, keep: usize) -> bool {
    list.len() > keep && list.pop().is_some()
}
