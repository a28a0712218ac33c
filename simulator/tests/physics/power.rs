//! What happens when the power goes while the shaft still turns.

use std::sync::Arc;

use humward_sim::machine::{Path, electrical};
use humward_sim::plant::Plant;
use humward_sim::random::Draw;
use humward_sim::wave::{Growth, Law, Stretch, TICK_S};

use super::measure::{mean_square, scenario, waves};

/// The schedule takes the power away at 2 s and the shaft stands at 12 s: electrical lines end within a tick of 2 s.
#[test]
fn electrical_lines_end_with_the_power_while_the_shaft_runs_down() {
    let scenario = scenario(
        "rpm = 1482\nmotor = { kind = \"induction\" }\nschedule = [[\"0s\", 1482], [\"2s\", 1482], [\"12s\", 0]]",
        "",
        "kind = \"electrical\"\ngrowth = { to = 2 }",
    );
    let asset = &scenario.assets[0];
    let path = Arc::new(Path::plain());
    let law = Law::growing(Growth::constant(0.3), 0.0);
    let usual = electrical(asset, 50.0, law, &path, &Draw::new(1));
    let grown = waves(asset, &asset.faults[0], Path::plain());
    for mut wave in usual.into_iter().chain(grown) {
        let mut plant = Plant::new(&scenario);
        for k in 0..400_u32 {
            let tick = plant.advance()[0];
            assert!(tick.to.shaft_hz > 15.0, "the shaft turns all the time");
            let mut out = vec![0.0; 128];
            let stretch = Stretch {
                first_s: tick.from.at_s,
                step_s: TICK_S / 128.0,
                count: 128,
            };
            wave.add(&tick, stretch, &mut out);
            let mut lines = Vec::new();
            wave.lines(&tick.from, &mut lines);
            // Tick 199 ends at 2 s, tick 200 may still ring out.
            if k < 199 {
                assert!(mean_square(&out) > 0.01, "tick {k}");
                assert_eq!(lines.len(), 1, "tick {k}");
            } else if k > 200 {
                assert_eq!(mean_square(&out), 0.0, "tick {k}");
                assert!(lines.is_empty(), "tick {k}");
            }
        }
    }
}
