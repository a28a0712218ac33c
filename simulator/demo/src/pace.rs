//! How fast the plant's time runs: measured first, so that the machine can keep up.
//!
//! One factor and one origin for everybody: the daemon's clock and the simulator both read
//! `origin + factor x (true time since)`.

use std::time::{Duration, Instant};

use humward_sim::play::Pace;
use humward_sim::scenario::Scenario;
use humward_sim::world::{World, WorldFault};

/// The factor that is taken where nothing speaks against it.
pub const USUAL: f64 = 40.0;
/// Least and largest factor that may be asked for.
pub const RANGE: (f64, f64) = (1.0, 200.0);
/// How much of the plant's time is made to measure by, s; the first second, with all that is set up, does not count.
const MEASURED_S: f64 = 4.0;
/// True time a measurement takes at most.
const MEASURED_WITHIN: Duration = Duration::from_secs(2);
/// Share of a core that making the plant may take, alone and beside others: the daemon and the broker need theirs.
const SHARE: (f64, f64) = (0.5, 0.75);

/// How many seconds of plant this machine makes in a second, with one core.
///
/// # Errors
/// The scenario makes no world.
pub fn measure(scenario: &Scenario) -> Result<f64, WorldFault> {
    let start_ns = scenario.start_ns();
    let after_s = |arrival_ns: i64| (arrival_ns - start_ns) as f64 / 1e9;
    let mut began: Option<(Instant, f64)> = None;
    let whole = Instant::now();
    for delivery in World::new(scenario)? {
        let now_s = after_s(delivery.arrival_ns);
        match began {
            None if now_s >= 1.0 => began = Some((Instant::now(), now_s)),
            Some((began, from_s)) if now_s > from_s => {
                let took = began.elapsed();
                if now_s - from_s >= MEASURED_S || whole.elapsed() > MEASURED_WITHIN {
                    return Ok((now_s - from_s) / took.as_secs_f64().max(1e-6));
                }
            }
            None | Some(_) => {}
        }
    }
    Ok(f64::INFINITY)
}

/// The factor a machine of so many cores keeps up with: `wanted`, or the whole number below what was measured that
/// leaves room for the others.
#[must_use]
pub fn bearable(wanted: f64, measured: f64, cores: usize) -> f64 {
    let share = if cores > 1 { SHARE.1 } else { SHARE.0 };
    if measured * share >= wanted {
        wanted
    } else {
        (measured * share).floor().max(RANGE.0)
    }
}

/// What the plant's time is now, ns since 1970 UTC.
#[must_use]
pub fn now_ns(pace: &Pace) -> i64 {
    let run = pace.began.elapsed().as_nanos() as f64 * pace.factor;
    pace.start_ns.saturating_add(run as i64)
}

#[cfg(test)]
mod tests {
    use super::bearable;

    #[test]
    fn a_slow_machine_gets_a_smaller_factor_and_never_less_than_true_time() {
        // Three quarters of a core of several, half of an only one.
        for (measured, cores, factor) in [
            (400.0, 2, 40.0),
            (54.0, 2, 40.0),
            (53.0, 2, 39.0),
            (9.0, 4, 6.0),
            (0.5, 2, 1.0),
            (81.0, 1, 40.0),
            (79.0, 1, 39.0),
        ] {
            assert_eq!(bearable(40.0, measured, cores), factor);
        }
    }
}
