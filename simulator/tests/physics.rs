//! The waves against closed forms: no daemon, no spectrum of ours, only sums written out here.

#![expect(clippy::panic, reason = "a test stops at its first surprise")]

mod physics {
    mod bursts;
    mod faults;
    mod lines;
    mod machines;
    mod measure;
    mod noises;
    mod power;
    mod ranges;
}
