//! The checked, resolved configuration the core runs on.
//!
//! A `…Spec` is what somebody asked for; its plan has private fields and one constructor, so a limit
//! that was never checked cannot reach the judge. Constructors gather *all* faults, each naming the
//! key it is about, what was read and what is allowed.

mod asset;
mod fault;
mod feasible;
mod limits;
mod persistence;
mod point;
mod watch;
mod zones;

pub use asset::{AssetPlan, AssetSpec, GroupPlan, RunningRule, SpeedRange, StartingRule};
pub use fault::{Code, Part, PlanFault};
pub use feasible::{
    LEAST_LINE_BINS, NOISE_MARGIN, acceleration_noise_ms2, band_hz, frame_for_line, race_order,
    velocity_noise_mm_s,
};
pub use limits::{Limit, Limits};
pub use persistence::{Persistence, PersistenceFault, parse_span};
pub use point::{BandPlan, BandSpec, Calibration, Edges, PointPlan, PointSpec};
pub use watch::{Measure, Quantity, Race, WatchPlan, WatchSpec};
pub use zones::{Zone, ZoneLimits};
