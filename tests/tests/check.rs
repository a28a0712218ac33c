//! `humward check` from the outside: every fault at once, told so that it can be mended, and the plan in words.

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
