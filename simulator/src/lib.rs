//! `humward-sim`: what accelerometers on pumps would send, with the truth beside it.
//!
//! In: a scenario (TOML: assets, points, faults, sensors, transport, one seed). Out: the messages a plant would put on
//! its broker, in order of arrival, and the truth: what was injected, when, and which lines to expect. Samples are
//! computed in f64, m/s², from closed forms; nothing here is shared with the daemon but the wire. The same scenario
//! and seed give the same bytes on the same kind of machine.
//!
//! Recordings and plays say that they are simulated. Checked by `tests/physics.rs` against closed form and by
//! `tests/physics.py` against scipy, never against the daemon's own analysis.

pub mod cli;
pub mod exit;
pub mod explain;
pub mod fault;
pub mod machine;
pub mod plant;
pub mod play;
pub mod random;
pub mod render;
pub mod scenario;
pub mod sensor;
pub mod transport;
pub mod truth;
pub mod wave;
pub mod world;
