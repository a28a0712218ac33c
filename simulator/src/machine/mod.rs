//! The machine: supply, shaft, load, the way to a sensor, and what a healthy pump set sounds like.

mod background;
mod electrical;
mod healthy;
mod motion;
mod path;
mod supply;

pub use background::{BACKGROUND_LINES, background};
pub use electrical::{Tone, bridge_ripple, electrical, electrical_tones, tone_hz};
pub use healthy::healthy;
pub use motion::{Motion, powered};
pub use path::Path;
pub use supply::Supply;
