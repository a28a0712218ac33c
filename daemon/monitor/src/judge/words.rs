//! What people are told about a measure: its name, and what to check next by severity.
//!
//! The checks are common practice, no source; none of them asks anyone to run or stop a machine.

use humward_wire::out::Severity;

use crate::{
    judge::sensor::Cause,
    plan::{Measure, Race},
};

/// The name of a measure in a sentence.
pub(super) const fn phrase(measure: Measure) -> &'static str {
    match measure {
        Measure::VelocityRms | Measure::VelocityPeak => "velocity",
        Measure::AccelerationRms | Measure::AccelerationPeak => "acceleration",
        Measure::Crest => "crest factor",
        Measure::Kurtosis => "kurtosis",
        Measure::HighBandRms => "high-band acceleration",
        Measure::Band(_) => "band",
        Measure::Bearing(race) => race_phrase(race),
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
            "compare the envelope spectrum with the last round",
            "check lubrication and bearing temperature",
            "watch velocity and high band for a rise",
        ],
        (Measure::VelocityRms | Measure::VelocityPeak | Measure::Band(_), Severity::Danger) => &[
            "check suction pressure and flow",
            "listen from outside the guard",
            "tell the shift lead",
        ],
        (Measure::VelocityRms | Measure::VelocityPeak | Measure::Band(_), _) => &[
            "see which line carries it: 1x, 2x or vane pass",
            "check flow against the best point",
            "check base bolts and coupling at the next stop",
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

/// What is wrong with a sensor, as the middle of a sentence.
pub(super) const fn cause(cause: Cause) -> &'static str {
    match cause {
        Cause::Silent => "sends nothing",
        Cause::Refused(refusal) => refusal.reason.what(),
        Cause::Late => "sends late or doubled blocks only",
        Cause::Uncalibrated => "sends a unit that needs a calibration",
        Cause::NoChannel => "has no such channel",
        Cause::RateUnusable => "sends at a rate that cannot serve",
        Cause::Doubtful(doubt) => doubt.text(),
    }
}

/// What to check at a sensor.
pub(super) const fn sensor_checks(cause: Cause) -> &'static [&'static str] {
    match cause {
        Cause::Silent => &[
            "check power and cable of the sensor",
            "check the radio or network path",
        ],
        Cause::Refused(_)
        | Cause::Late
        | Cause::Uncalibrated
        | Cause::NoChannel
        | Cause::RateUnusable => {
            &["compare the sensor's settings with its point in the configuration"]
        }
        Cause::Doubtful(crate::reading::Doubt::Clipped) => &[
            "check the mounting",
            "lower the gain or fit a less sensitive sensor",
        ],
        Cause::Doubtful(_) => &[
            "check cable and connector",
            "check that the sensor is fixed to the housing",
        ],
    }
}
