//! At the ends of what a scenario may ask for: slowest and fastest sensor, slow shaft, other supply.

use std::f64::consts::TAU;

use humward_sim::machine::background;
use humward_sim::plant::{Plant, heard};
use humward_sim::random::Draw;
use humward_sim::wave::{State, Stretch, TICK_S, Wave};

use super::measure::{scenario, state, velocity_mm_s};

/// Every kind of fault at once, fully grown from the start.
const ALL: &str = "kind = \"imbalance\"\ngrowth = { to = 5 }\n\
    [[asset.fault]]\nkind = \"misalignment\"\ngrowth = { to = 5 }\n\
    [[asset.fault]]\nkind = \"looseness\"\ngrowth = { to = 5 }\n\
    [[asset.fault]]\nkind = \"vane-pass\"\ngrowth = { to = 5 }\n\
    [[asset.fault]]\nkind = \"electrical\"\ngrowth = { to = 5 }\n\
    [[asset.fault]]\nkind = \"cavitation\"\npoint = \"drive-end\"\ngrowth = { to = 20 }\n\
    [[asset.fault]]\nkind = \"outer-race\"\npoint = \"drive-end\"\ngrowth = { to = 3 }\n\
    [[asset.fault]]\nkind = \"inner-race\"\npoint = \"drive-end\"\ngrowth = { to = 4 }\n\
    [[asset.fault]]\nkind = \"knocks\"\npoint = \"drive-end\"\nper_hour = 36000\ngrowth = { to = 5 }";

/// A filter whose corner lies beyond half the rate grows without bound; 1e4 m/s² is far above all faults together.
#[test]
fn every_fault_is_finite_at_the_slowest_and_the_fastest_rate() {
    let mut scenario = scenario(
        "rpm = 1482\nmotor = { kind = \"rectifier\" }",
        "bearing = { balls = 9, ball_diameter_mm = 8, pitch_diameter_mm = 39 }",
        ALL,
    );
    for (rate_hz, seconds, seeds) in [(500.0, 5.0, 20), (100_000.0, 0.2, 4)] {
        for seed in 1..=seeds {
            scenario.seed = seed;
            scenario.assets[0].points[0].rate_hz = rate_hz;
            let mut waves = heard(&scenario, 0, &scenario.assets[0].points[0]);
            let mut plant = Plant::new(&scenario);
            let count = (rate_hz * TICK_S) as usize;
            let mut loudest = 0.0_f64;
            for _ in 0..(seconds / TICK_S) as u32 {
                let tick = plant.advance()[0];
                let stretch = Stretch {
                    first_s: tick.from.at_s,
                    step_s: 1.0 / rate_hz,
                    count,
                };
                let mut out = vec![0.0; count];
                for heard in &mut waves {
                    heard.wave.add(&tick, stretch, &mut out);
                }
                for value in out {
                    assert!(value.abs() < 1e4, "{rate_hz} Hz, seed {seed}: {value}");
                    loudest = loudest.max(value.abs());
                }
            }
            assert!(loudest > 1.0, "{rate_hz} Hz, seed {seed}: {loudest}");
        }
    }
}

/// Stated range: 0.004 to 0.06 mm/s rms each, whatever shaft and supply; above 0.45 of the rate nothing.
#[test]
fn background_lines_keep_their_velocity_at_60_rpm_and_60_hz() {
    for seed in 1..30 {
        let draw = Draw::new(seed);
        for rate_hz in [12_800.0, 500.0] {
            let now = State {
                line_hz: 60.0,
                ..state(1.0, 1.0, 0.0, 1.0)
            };
            let mut all = Vec::new();
            background(&draw, 1.0, 60.0, rate_hz).lines(&now, &mut all);
            for line in all {
                let velocity = velocity_mm_s(line.peak.norm(), line.hz);
                if line.hz > 0.45 * rate_hz {
                    assert_eq!(velocity, 0.0, "{} Hz", line.hz);
                } else {
                    let stated = (0.004 * (1.0 - 1e-9)..0.06 * (1.0 + 1e-9)).contains(&velocity);
                    assert!(stated, "{} Hz: {velocity}", line.hz);
                }
            }
        }
    }
    // The formula of the check itself: 1 mm/s rms at 10 Hz.
    assert!((velocity_mm_s(TAU * 10.0 * 2_f64.sqrt() * 1e-3, 10.0) - 1.0).abs() < 1e-12);
}
