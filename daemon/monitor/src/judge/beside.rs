//! A bearing alarm that stands at the point another watch rings at.
//!
//! Acceleration and impacts rise when a bearing goes, and the line may sink in the floor that rises with it: then the
//! line that rang first is the evidence, and its checks are the ones to make. Velocity and its bands are left out:
//! what moves them is not the bearing as long as it is small.

use alloc::format;
use alloc::string::String;

use super::{AssetJudge, Context, account::two_or_more_digits, words};
use crate::{
    plan::{Measure, Race},
    reading::{RaceLine, Reading},
};

/// A bearing alarm at the same point.
#[derive(Debug, Clone, Copy)]
pub(super) struct Beside {
    /// The part of the bearing.
    pub(super) race: Race,
    /// Its line in this reading; `None` when it has sunk in the floor.
    pub(super) line: Option<RaceLine>,
}

/// The bearing alarm that has stood longest beside watch `index`, when what that watch measures rises with a bearing.
pub(super) fn beside(
    judge: &AssetJudge,
    context: Context<'_>,
    index: usize,
    reading: &Reading,
) -> Option<Beside> {
    let watches = &context.plan.spec().watches;
    let own = watches[index].spec();
    match own.measure {
        Measure::AccelerationRms
        | Measure::AccelerationPeak
        | Measure::Crest
        | Measure::Kurtosis
        | Measure::HighBandRms => {}
        Measure::VelocityRms | Measure::VelocityPeak | Measure::Band(_) | Measure::Bearing(_) => {
            return None;
        }
    }
    let standing = watches
        .iter()
        .zip(&judge.watches)
        .filter_map(|(plan, state)| {
            let Measure::Bearing(race) = plan.spec().measure else {
                return None;
            };
            let open = state
                .occurrence()
                .filter(|_| plan.spec().point == own.point)?;
            Some((race, open.since))
        });
    standing
        .min_by_key(|(_, since)| *since)
        .map(|(race, _)| Beside {
            race,
            line: reading.line(race),
        })
}

impl Beside {
    /// A sentence of its own: which part of the bearing, and its line.
    pub(super) fn said(&self) -> String {
        let race = words::race_phrase(self.race).replacen('b', "B", 1);
        match self.line {
            Some(line) => format!(
                "{race} in alarm at {} Hz.",
                two_or_more_digits(line.frequency_hz)
            ),
            None => format!("{race} in alarm, line sunk."),
        }
    }
}
