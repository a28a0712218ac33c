//! What is planned once for a point and a sample rate: the FFTs, the low band, the envelope.

use core::fmt;

use humward_signal::{
    envelope::{EnvelopeFault, EnvelopePlan},
    frame::{FrameFault, FramePlan},
    lowband::{LowBandFault, LowBandPlan, Response},
};

use crate::plan::PointSpec;

/// The plans for one rate.
#[derive(Debug)]
pub(super) struct Plans {
    pub(super) rate_hz: f64,
    pub(super) frame: FramePlan,
    pub(super) low: LowBandPlan,
    pub(super) envelope: Option<EnvelopePlan>,
}

/// Why a rate cannot serve a point.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum RateFault {
    Frame(FrameFault),
    LowBand(LowBandFault),
    Envelope(EnvelopeFault),
}

impl fmt::Display for RateFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Frame(fault) => write!(f, "{fault}"),
            Self::LowBand(fault) => write!(f, "{fault}"),
            Self::Envelope(fault) => write!(f, "{fault}"),
        }
    }
}

impl Plans {
    /// Plans everything a point needs at `rate_hz`.
    ///
    /// # Errors
    /// The rate is too low for velocity to 1000 Hz, or the envelope band does not fit below half of it.
    pub(super) fn new(point: &PointSpec, rate_hz: f64) -> Result<Self, RateFault> {
        let frame = FramePlan::new(point.frame, rate_hz).map_err(RateFault::Frame)?;
        let response = Response::Velocity {
            lower_edge_hz: point.velocity_from_hz,
        };
        let low = LowBandPlan::new(point.frame, rate_hz, response).map_err(RateFault::LowBand)?;
        let envelope = match point.envelope_hz {
            Some((from, to)) => Some(
                EnvelopePlan::new(point.frame, rate_hz, from, to).map_err(RateFault::Envelope)?,
            ),
            None => None,
        };
        Ok(Self {
            rate_hz,
            frame,
            low,
            envelope,
        })
    }
}
