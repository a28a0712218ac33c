//! Accuracy of the signal mathematics against sources outside the project.
//!
//! Each test names its source beside the figure: a published table, a closed form, or scipy through
//! `tests/reference/make.py`. An id such as `win.hann.enbw_bins` names the
//! quantity checked, so a failure can be looked up. Inputs are closed forms or a seeded generator, never a clock.

#[cfg(test)]
mod bearings;
#[cfg(test)]
mod conversions;
#[cfg(test)]
mod envelope;
#[cfg(test)]
mod faults;
#[cfg(test)]
mod low_band;
#[cfg(test)]
mod moments;
#[cfg(test)]
mod reference;
#[cfg(test)]
mod signals;
#[cfg(test)]
mod spectrum;
#[cfg(test)]
mod tones;
#[cfg(test)]
mod velocity;
#[cfg(test)]
mod weighting;
#[cfg(test)]
mod windows;
