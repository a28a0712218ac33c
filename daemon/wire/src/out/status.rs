//! The compact whole of an asset, retained on `status/<asset>`.
//!
//! Size: at most [`MAX_STATUS`] bytes for four points with two values each; checked by `tests/contract/sizes.rs`.

use alloc::string::String;
use alloc::vec::Vec;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::event::drop_last;
use super::measured::five_digits_or_null;
use super::{Header, Instant, Loss, Measured, Message, Quality, Running, Standing};
use crate::id::Id;

/// Largest status of an asset with up to four points, in bytes of JSON.
pub const MAX_STATUS: usize = 1536;

/// One open occurrence, in brief.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Open {
    /// The occurrence.
    pub occurrence: Id,
    /// Its watch.
    pub watch: String,
    /// State and severity with their codes.
    #[serde(flatten)]
    pub standing: Standing,
    /// When the condition began, in signal time.
    pub since: Instant,
}

/// What one measuring point says.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct PointStatus {
    /// The point.
    pub point: Id,
    /// Whether its signal is believable.
    pub quality: Quality,
    /// Age of its last reading in whole seconds, at the `at` of the message; null before the first.
    pub age_s: Option<u32>,
    /// Its values, the most telling first.
    pub values: Vec<Measured>,
    /// What is assumed and was not verified, such as `rate`.
    pub not_verified: Vec<String>,
}

/// The machine as it last ran, kept readable through a stop.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct LastRunning {
    /// Signal time of the last running reading.
    pub at: Instant,
    /// Shaft speed then, r/min.
    #[serde(serialize_with = "five_digits_or_null")]
    pub rpm: Option<f64>,
    /// The most telling values then, each named `<measure>.<point>`.
    pub values: Vec<Measured>,
}

/// The compact whole of an asset.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Status {
    /// Who speaks about what.
    #[serde(flatten)]
    pub header: Header,
    /// What people call the asset.
    pub asset_name: String,
    /// From then on this status says nothing any more.
    pub valid_until: Instant,
    /// Number of the asset's last event.
    pub last_n: u64,
    /// Open occurrences, worst first.
    pub open: Vec<Open>,
    /// How many are open, also when the list was shortened.
    pub open_count: u32,
    /// Whether and how fast the machine turns.
    pub running: Running,
    /// The last running condition; null while it runs, and before it ever ran.
    pub last_running: Option<LastRunning>,
    /// Share of the last 24 h in which the machine was judged, 0 to 1; null in the first hour.
    #[serde(serialize_with = "five_digits_or_null")]
    pub judged_share_24h: Option<f64>,
    /// What each measuring point says.
    pub points: Vec<PointStatus>,
    /// Answers that are too old, as watch names.
    pub stale: Vec<String>,
    /// What was refused, shed or missed since the start, by reason.
    pub losses: Vec<Loss>,
    /// Whether the message was shortened to fit.
    pub truncated: bool,
}

impl Status {
    /// Shortens the status until its JSON has at most `max` bytes; tells whether anything was left out.
    ///
    /// Order: values of the last running condition to one; values of each point to two, then to one; losses to
    /// two; stale watches to four; open occurrences to four, the worst staying; the last running condition's
    /// values to none; losses, stale and unverified lists to none; point values to none.
    /// Never taken: the points themselves, the run state, the validity, and one open occurrence.
    #[must_use]
    pub fn fit(mut self, max: usize) -> (Status, bool) {
        let mut step = 0;
        while self.to_json().len() > max {
            if !self.shorten(&mut step) {
                break;
            }
        }
        let cut = self.truncated;
        (self, cut)
    }

    fn shorten(&mut self, step: &mut usize) -> bool {
        self.truncated = true;
        loop {
            let taken = match *step {
                0 => self
                    .last_running
                    .as_mut()
                    .is_some_and(|last| drop_last(&mut last.values, 1)),
                1 => self.thin_points(2),
                2 => self.thin_points(1),
                3 => drop_last(&mut self.losses, 2),
                4 => drop_last(&mut self.stale, 4),
                5 => drop_last(&mut self.open, 4),
                6 => self
                    .last_running
                    .as_mut()
                    .is_some_and(|last| drop_last(&mut last.values, 0)),
                7 => drop_last(&mut self.losses, 0),
                8 => drop_last(&mut self.stale, 0),
                9 => self
                    .points
                    .iter_mut()
                    .rev()
                    .any(|p| drop_last(&mut p.not_verified, 0)),
                10 => self.thin_points(0),
                11 => drop_last(&mut self.open, 1),
                _ => return false,
            };
            if taken {
                return true;
            }
            *step += 1;
        }
    }

    /// Takes the last value of the point that has most, down to `keep` each.
    fn thin_points(&mut self, keep: usize) -> bool {
        self.points
            .iter_mut()
            .rev()
            .max_by_key(|point| point.values.len())
            .is_some_and(|point| drop_last(&mut point.values, keep))
    }
}
