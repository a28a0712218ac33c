//! The averaged result of an interval of one point: what limits are judged on.
//!
//! Every value is in the unit its [`Quantity`](crate::plan::Quantity) states. A value that could not be had is
//! `None`, never a zero. Why a reading is not to be judged stands beside it as [`Doubts`].

use alloc::vec::Vec;

use crate::{
    plan::{Measure, Race},
    time::{Arrival, SignalTime, Span},
};

/// Why a reading, or a part of it, is not to be judged.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Doubt {
    /// Less than half of its samples came.
    Short,
    /// Samples stood at the rail: values are lower bounds at best.
    Clipped,
    /// All samples were equal: the sensor is dead or its cable open.
    Flat,
    /// The sample rate changed inside it.
    RateChanged,
    /// The blocks' rate cannot serve the point: below 2560 samples/s or below twice a band edge.
    RateUnusable,
    /// The speed moved by more than 3 % inside it.
    SpeedMoving,
}

impl Doubt {
    /// All of them, in the order of their bit.
    pub const ALL: [Self; 6] = [
        Self::Short,
        Self::Clipped,
        Self::Flat,
        Self::RateChanged,
        Self::RateUnusable,
        Self::SpeedMoving,
    ];

    /// Whether it is the sensor or link that is to blame, not the machine.
    pub const fn is_instrument(self) -> bool {
        match self {
            Self::Short | Self::Clipped | Self::Flat | Self::RateChanged | Self::RateUnusable => {
                true
            }
            Self::SpeedMoving => false,
        }
    }

    /// The word that stands for it in messages.
    pub const fn text(self) -> &'static str {
        match self {
            Self::Short => "samples missing",
            Self::Clipped => "clipped",
            Self::Flat => "flat signal",
            Self::RateChanged => "sample rate changed",
            Self::RateUnusable => "sample rate unusable",
            Self::SpeedMoving => "speed moving",
        }
    }
}

/// A set of doubts.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Doubts(u8);

impl Doubts {
    /// Adds one.
    pub const fn insert(&mut self, doubt: Doubt) {
        self.0 |= 1 << doubt as u8;
    }

    /// Whether it is in the set.
    pub const fn has(self, doubt: Doubt) -> bool {
        self.0 & (1 << doubt as u8) != 0
    }

    /// Whether there is none.
    pub const fn is_empty(self) -> bool {
        self.0 == 0
    }

    /// Those in the set, in a fixed order.
    pub fn iter(self) -> impl Iterator<Item = Doubt> {
        Doubt::ALL.into_iter().filter(move |doubt| self.has(*doubt))
    }

    /// Whether there is none but that the speed moves: no fault of what was measured.
    pub fn only_moving(self) -> bool {
        self.0 & !(1 << Doubt::SpeedMoving as u8) == 0
    }

    /// Whether it clipped and nothing else is wrong but that the speed moves: values are lower bounds.
    pub fn is_a_bound(self) -> bool {
        self.has(Doubt::Clipped) && Self(self.0 & !(1 << Doubt::SpeedMoving as u8)).only_clipped()
    }

    /// Whether clipping is the only one.
    pub fn only_clipped(self) -> bool {
        self == Self(1 << Doubt::Clipped as u8)
    }
}

/// The shaft speed a reading was read with.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum ShaftSpeed {
    /// Reported during the reading or freshly before it, r/min.
    Reported(f64),
    /// Nothing fresh was reported; the plan's nominal speed stands for it, r/min.
    Nominal(f64),
}

impl ShaftSpeed {
    /// r/min.
    pub const fn rpm(self) -> f64 {
        match self {
            Self::Reported(rpm) | Self::Nominal(rpm) => rpm,
        }
    }
}

/// The envelope line of one bearing part.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RaceLine {
    /// Where the line stands, Hz.
    pub frequency_hz: f64,
    /// The same as a multiple of shaft speed.
    pub order: f64,
    /// Over the local floor of the squared envelope's power spectrum, dB.
    pub db: f64,
    /// Strength, m/s2 rms in the envelope band (the burst train's own rms).
    pub ms2: f64,
    /// How many of its harmonics 1 to 4 stand out, the line itself counted.
    pub harmonics: u8,
}

/// What was found at a bearing part's rate.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum RaceResult {
    /// No line with a harmonic stands out: reads 0 dB.
    NoLine,
    /// A line with at least one harmonic beside it.
    Line(RaceLine),
}

/// A line of the velocity spectrum.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpectralLine {
    /// Hz.
    pub frequency_hz: f64,
    /// mm/s rms.
    pub velocity_rms: f64,
}

/// Statistics of the acceleration over every sample once, mean removed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct AccelerationSummary {
    /// m/s2 rms
    pub rms: f64,
    /// True peak, m/s2.
    pub peak: f64,
    /// Peak over rms.
    pub crest: f64,
    /// Fourth moment over the squared second; Gaussian noise reads 3.
    pub kurtosis: f64,
    /// The mean that was removed, m/s2: gravity's share and the sensor's bias.
    pub mean: f64,
}

/// One reading of one point.
#[derive(Debug, Clone, PartialEq)]
pub struct Reading {
    /// Its first instant.
    pub start: SignalTime,
    /// Its last: an absolute multiple of the reading's length.
    pub end: SignalTime,
    /// When it was closed on our side.
    pub closed: Arrival,
    /// Samples taken in, and samples a whole one has.
    pub samples: (u64, u64),
    /// Frames averaged in its spectra.
    pub frames: u32,
    /// Sample rate, samples/s.
    pub rate_hz: f64,
    /// Runs of samples that ended inside it because samples were missing.
    pub gaps: u32,
    /// Why it is not to be judged, or not wholly.
    pub doubts: Doubts,
    /// The speed it was read with.
    pub speed: ShaftSpeed,
    /// Weighted velocity: mm/s rms and true peak mm/s.
    pub velocity: Option<(f64, f64)>,
    /// Acceleration statistics.
    pub acceleration: Option<AccelerationSummary>,
    /// Acceleration from 1 kHz to 10 kHz or rate/2.56, m/s2 rms.
    pub high_band_rms: Option<f64>,
    /// One value per band of the point.
    pub bands: Vec<Option<f64>>,
    /// One result per part, in the order of [`Race::ALL`]; `None` where nothing could be read.
    pub races: [Option<RaceResult>; 4],
    /// The strongest lines of the velocity spectrum, strongest first.
    pub strongest: Vec<SpectralLine>,
    /// Resolution of spectrum and envelope spectrum, Hz.
    pub resolution_hz: f64,
}

impl Reading {
    /// The value of a measure, in its unit; `None` when this reading does not have it.
    pub fn value(&self, measure: Measure) -> Option<f64> {
        match measure {
            Measure::VelocityRms => self.velocity.map(|(rms, _)| rms),
            Measure::VelocityPeak => self.velocity.map(|(_, peak)| peak),
            Measure::AccelerationRms => self.acceleration.map(|a| a.rms),
            Measure::AccelerationPeak => self.acceleration.map(|a| a.peak),
            Measure::Crest => self.acceleration.map(|a| a.crest),
            Measure::Kurtosis => self.acceleration.map(|a| a.kurtosis),
            Measure::HighBandRms => self.high_band_rms,
            Measure::Band(index) => self.bands.get(usize::from(index)).copied().flatten(),
            Measure::Bearing(race) => self.races[race.index()].map(|result| match result {
                RaceResult::NoLine => 0.0,
                RaceResult::Line(line) => line.db,
            }),
        }
    }

    /// The envelope line of a part, if one stands out.
    pub const fn line(&self, race: Race) -> Option<RaceLine> {
        match self.races[race.index()] {
            Some(RaceResult::Line(line)) => Some(line),
            Some(RaceResult::NoLine) | None => None,
        }
    }

    /// Its length.
    pub const fn length(&self) -> Span {
        self.end.since(self.start)
    }
}
