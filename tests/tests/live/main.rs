//! The daemon from the outside: real program, real broker, real recordings.
#![expect(clippy::expect_used, reason = "a test stops at its first surprise")]

mod access;
mod broker_lost;
mod faster;
mod lifecycle;
mod readme;
mod real_recordings;
mod refusals;
mod simulated;

/// A site of one point, read every second, watched for velocity; the broker is on `port`.
fn site(port: u16) -> String {
    format!(
        r#"site = "harbour"
reading_every = "1s"
status_every = "1s"
default_watches = false
commands = ["status"]

[broker]
port = {port}

[[watch]]
name = "velocity"
measure = "velocity_rms"
alert = 2
alert_after = "2 readings"
clear_after = "2 readings"

[[asset]]
id = "P-1"
name = "cooling water pump"
speed = 3840

[[asset.point]]
id = "de"
frame = 4096
"#
    )
}

/// The topic of that point's blocks.
const BLOCKS: &str = "humward/v1/harbour/block/P-1/de";
/// The retained state of the gateway.
const GATEWAY: &str = "gateway/gw-1";
/// The gateway's own events.
const GATEWAY_EVENTS: &str = "event/gateway.gw-1";
