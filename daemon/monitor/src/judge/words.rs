//! What people are told about a measure: its name, and what to check next by severity.
//!
//! The checks are common practice, no source; none of them asks anyone to run or stop a machine.

use alloc::{format, string::String, vec::Vec};

use humward_wire::out::Severity;

use crate::{
    judge::sensor::Cause,
    plan::{Measure, PointSpec, Race},
    reading::Doubt,
};

/// The name of a measure in a sentence; a band has its own at its point.
pub(super) fn phrase(measure: Measure, point: &PointSpec) -> String {
    match measure {
        Measure::VelocityRms | Measure::VelocityPeak => "velocity".into(),
        Measure::AccelerationRms | Measure::AccelerationPeak => "acceleration".into(),
        Measure::Crest | Measure::Kurtosis => "impacts in the acceleration".into(),
        Measure::HighBandRms => "high-band acceleration".into(),
        Measure::Band(index) => point.bands.get(usize::from(index)).map_or_else(
            || "band".into(),
            |band| format!("band {}", band.spec().name),
        ),
        Measure::Bearing(race) => format!("{} line", race_phrase(race)),
    }
}

/// The name of a bearing part in a sentence.
pub(super) const fn race_phrase(race: Race) -> &'static str {
    match race {
        Race::Outer => "bearing outer race",
        Race::Inner => "bearing inner race",
        Race::Element => "bearing rolling element",
        Race::Cage => "bearing cage",
    }
}

/// The name of a measure in messages, which is also its name in the configuration.
pub(super) const fn key(measure: Measure) -> &'static str {
    match measure {
        Measure::VelocityRms => "velocity_rms",
        Measure::VelocityPeak => "velocity_peak",
        Measure::AccelerationRms => "acceleration_rms",
        Measure::AccelerationPeak => "acceleration_peak",
        Measure::Crest => "crest",
        Measure::Kurtosis => "kurtosis",
        Measure::HighBandRms => "high_band_rms",
        Measure::Band(_) => "band",
        Measure::Bearing(Race::Outer) => "bearing.outer",
        Measure::Bearing(Race::Inner) => "bearing.inner",
        Measure::Bearing(Race::Element) => "bearing.element",
        Measure::Bearing(Race::Cage) => "bearing.cage",
    }
}

/// What to check next, most telling first.
pub(super) const fn checks(measure: Measure, severity: Severity) -> &'static [&'static str] {
    match (measure, severity) {
        (Measure::Bearing(_), Severity::Danger) => &[
            "listen at the housing from outside the guard",
            "check bearing temperature and lubrication",
            "tell the shift lead and plan the bearing change",
        ],
        (Measure::Bearing(_), _) => &[
            "check lubrication and bearing temperature",
            "compare the envelope spectrum with the last round",
            "watch velocity and high band for a rise",
        ],
        (Measure::VelocityRms | Measure::VelocityPeak | Measure::Band(_), Severity::Danger) => &[
            "check suction pressure and flow",
            "listen from outside the guard",
            "tell the shift lead",
        ],
        (Measure::VelocityRms | Measure::VelocityPeak | Measure::Band(_), _) => &[
            "compare the spectrum with the last round",
            "check flow against the best point",
            "check base bolts and coupling at the next stop",
        ],
        (
            Measure::AccelerationRms
            | Measure::AccelerationPeak
            | Measure::Crest
            | Measure::Kurtosis
            | Measure::HighBandRms,
            Severity::Danger,
        ) => &[
            "check suction pressure and lubrication",
            "listen for cavitation from outside the guard",
            "tell the shift lead",
        ],
        (
            Measure::AccelerationRms
            | Measure::AccelerationPeak
            | Measure::Crest
            | Measure::Kurtosis
            | Measure::HighBandRms,
            _,
        ) => &[
            "check lubrication",
            "listen for cavitation at the suction side",
            "look for impacts in the waveform",
        ],
    }
}

/// What is wrong with a sensor, as the end of a sentence.
pub(super) fn cause(cause: Cause) -> String {
    match cause {
        Cause::Silent => "the sensor sends nothing".into(),
        Cause::Refused(refusal) => format!("what it sends is refused: {}", refusal.reason.what()),
        Cause::Late => "its blocks come too late or twice".into(),
        Cause::Uncalibrated => {
            "its blocks are in mV or counts and this point has no calibration".into()
        }
        Cause::NoChannel => "its blocks lack the channel of this point".into(),
        Cause::RateUnusable => "its sample rate cannot serve this point".into(),
        Cause::Empty => "its blocks hold no samples".into(),
        Cause::Doubtful(doubt) => match doubt {
            Doubt::Short => "more than half of its samples are missing",
            Doubt::Clipped => "the sensor clips",
            Doubt::Flat => "the signal is flat: sensor or cable is dead",
            Doubt::RateChanged => "its sample rate keeps changing",
            Doubt::RateUnusable => "its sample rate cannot serve this point",
            Doubt::SpeedMoving => "the speed keeps moving",
        }
        .into(),
    }
}

/// What is still judged at a point whose sensor is not good.
pub(super) const fn meanwhile(cause: Cause) -> &'static str {
    match cause {
        Cause::Doubtful(Doubt::Clipped) => {
            "Only what exceeds danger even so is still told, as a lower bound."
        }
        Cause::Silent
        | Cause::Refused(_)
        | Cause::Late
        | Cause::Uncalibrated
        | Cause::NoChannel
        | Cause::RateUnusable
        | Cause::Empty
        | Cause::Doubtful(_) => "Nothing is judged at this point meanwhile.",
    }
}

/// What to check at a sensor.
pub(super) fn sensor_checks(cause: Cause) -> Vec<&'static str> {
    match cause {
        Cause::Silent => alloc::vec![
            "check power and cable of the sensor",
            "check the radio or network path",
        ],
        Cause::Refused(refusal) => alloc::vec![refusal.reason.remedy()],
        Cause::Late => alloc::vec![
            "check the sensor's clock",
            "check that nothing sends its blocks again",
        ],
        Cause::Uncalibrated => alloc::vec!["give the point its sensitivity in the configuration"],
        Cause::NoChannel => alloc::vec!["compare the point's channel with what the sensor sends"],
        Cause::RateUnusable | Cause::Doubtful(Doubt::RateUnusable) => {
            alloc::vec![
                "set the sensor to 2560 samples/s or more, and to twice the envelope band's upper edge"
            ]
        }
        Cause::Empty | Cause::Doubtful(Doubt::RateChanged | Doubt::SpeedMoving) => {
            alloc::vec!["check the sensor's settings"]
        }
        Cause::Doubtful(Doubt::Short) => alloc::vec![
            "check the radio or network path for lost blocks",
            "check the sensor's supply",
        ],
        Cause::Doubtful(Doubt::Clipped) => alloc::vec![
            "check the mounting",
            "lower the gain or fit a less sensitive sensor",
        ],
        Cause::Doubtful(Doubt::Flat) => {
            alloc::vec!["check cable and connector", "check the sensor's supply",]
        }
    }
}
