//! Samples in, numbers out: the signal mathematics of a vibration watch.
//!
//! In: uniform samples of acceleration, m/s², as `f32`. Out: spectra, a weighted velocity waveform,
//! envelope lines and statistics, in SI units unless a name says otherwise (`_mm_s`, `_hz`, `_um`).
//! One real FFT a frame ([`frame`]) serves the spectrum ([`psd`]), the decimated low band with its
//! velocity ([`lowband`]) and the envelope ([`envelope`]); [`statistics`] reads every sample once.
//!
//! Nothing here knows the time, a sensor or an alarm: the same samples give the same numbers.
//! The crate promises numbers; `tests/accuracy` asserts them, each beside its source.
#![no_std]

extern crate alloc;

pub mod bands;
pub mod bearing;
pub mod envelope;
pub mod frame;
pub mod lowband;
mod peaks;
pub mod psd;
pub mod statistics;
pub mod units;
pub mod weighting;
pub mod window;
