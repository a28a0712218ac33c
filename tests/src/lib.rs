//! What the end-to-end tests stand on: a real broker, the real program, a player, a listener, a proxy that cuts.
//!
//! Everything runs on free ports of 127.0.0.1 and is ended by its own id. Nothing waits for a fixed time where
//! a condition can be awaited; every wait is bounded and says what it waited for.
//! Real recordings are found by `HUMWARD_RECORDINGS`; without it the tests on them are written down as not run.
#![expect(
    clippy::panic,
    clippy::expect_used,
    reason = "test support stops at the first surprise and says which"
)]

pub mod blocks;
pub mod broker;
pub mod daemon;
pub mod listener;
pub mod player;
pub mod proxy;
pub mod recordings;

use std::path::PathBuf;
use std::sync::atomic::{AtomicU32, Ordering};
use std::time::{Duration, Instant};

/// Longest wait for anything a healthy system does within seconds; generous, for a machine under load.
pub const SOON: Duration = Duration::from_secs(60);

/// A fresh folder of this test run.
pub fn folder(name: &str) -> PathBuf {
    static COUNT: AtomicU32 = AtomicU32::new(0);
    let count = COUNT.fetch_add(1, Ordering::Relaxed);
    let path = std::env::temp_dir().join(format!("humward-{}-{count}-{name}", std::process::id()));
    std::fs::create_dir_all(&path).expect("the temporary folder takes a folder");
    path
}

/// Asks again and again until there is an answer.
pub fn wait<T>(what: &str, within: Duration, mut ask: impl FnMut() -> Option<T>) -> T {
    let began = Instant::now();
    loop {
        if let Some(answer) = ask() {
            return answer;
        }
        assert!(began.elapsed() < within, "waited {within:?} for {what}");
        std::thread::sleep(Duration::from_millis(20));
    }
}
