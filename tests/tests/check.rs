//! `humward check` from the outside: every fault at once, told so that it can be mended, and the plan in words.

#![expect(
    clippy::unwrap_used,
    clippy::panic,
    reason = "the helpers of a test stop at its first surprise"
)]

#[path = "check/bench.rs"]
mod bench;
#[path = "check/environment.rs"]
mod environment;
#[path = "check/faults.rs"]
mod faults;
#[path = "check/files.rs"]
mod files;
#[path = "check/plan.rs"]
mod plan;
#[path = "check/shipped.rs"]
mod shipped;
