//! A pit in a bearing's ring, from its first day to the stage where its lines sink in the floor it raises.
//!
//! Severity: stage 1 to 4. Strikes once per ball pass with accumulating slip (sigma 0.8-1.6 %, the mean 1 % below to
//! 0.3 % above geometry), ring the modes of the structure. The outer ring's pit lies in the load zone; the inner
//! ring's turns through it (Stribeck), so its strikes come and go with the shaft. Height of the strikes: [`PIT`];
//! distributed wear: noise that breathes with the shaft, [`FLOOR`], whose velocity is [`FELT`]. From
//! stage 3 strikes weaken as edges round off while the floor rises. Structure: Antoni & Randall 2003, D'Elia et al.;
//! levels: common practice, no source. Velocity hardly moves before stage 3.

use serde::Deserialize;

use super::{Expected, Kind, Seat, Seen};
use crate::random::Draw;
use crate::scenario::{Asset, Bearing};
use crate::wave::{
    Biquad, BurstTrain, Cascade, Growth, Law, Mode, Noise, Strength, Strikes, Timing, Voice, Wave,
};

/// Height of a strike, m/s², at stages 0 to 4.
pub const PIT: [f64; 5] = [0.1, 1.0, 6.0, 30.0, 20.0];
/// Noise of distributed wear, m/s² rms above 1 kHz, at stages 0 to 4.
pub const FLOOR: [f64; 5] = [1e-3, 0.03, 0.4, 5.0, 40.0];
/// Velocity of distributed wear at 10 Hz to 1 kHz, mm/s rms, at stages 0 to 4.
pub const FELT: [f64; 5] = [1e-5, 1e-3, 0.04, 0.8, 5.0];

/// A pit and the ring it is in.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RacePit {
    /// Stage, 0 to 4.
    pub growth: Growth,
    /// The bearing's point.
    pub point: String,
}

/// A pit in the outer ring.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(transparent)]
pub struct OuterRace(pub RacePit);

/// A pit in the inner ring.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(transparent)]
pub struct InnerRace(pub RacePit);

#[derive(Clone, Copy, PartialEq)]
enum Ring {
    Outer,
    Inner,
}

/// Log-linear between the stages of a table; nothing at stage 0 or below: no pit yet.
fn stage(table: &[f64; 5], severity: f64) -> f64 {
    if severity <= 0.0 {
        return 0.0;
    }
    let below = (severity.floor() as usize).min(3);
    let share = (severity - below as f64).min(1.0);
    table[below] * (table[below + 1] / table[below]).powf(share)
}

fn pit(severity: f64) -> f64 {
    stage(&PIT, severity)
}

fn floor(severity: f64) -> f64 {
    stage(&FLOOR, severity)
}

fn felt(severity: f64) -> f64 {
    stage(&FELT, severity) * 1e-3
}

/// How the balls really roll: passes per turn, jitter.
fn rolling(ring: Ring, bearing: &Bearing, draw: &Draw) -> (f64, f64) {
    let mut draw = draw.part("rolling");
    let geometry = match ring {
        Ring::Outer => bearing.outer(),
        Ring::Inner => bearing.inner(),
    };
    (
        geometry * (1.0 + draw.between(-0.010, 0.003)),
        draw.between(0.008, 0.016),
    )
}

fn waves(fault: &RacePit, ring: Ring, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
    let bearing = seat
        .asset
        .points
        .iter()
        .find(|point| point.id == fault.point)
        .and_then(|p| p.bearing);
    let Some(bearing) = bearing.filter(|_| seat.impact_gain > 0.0) else {
        return Vec::new();
    };
    let (order, slip) = rolling(ring, &bearing, &seat.draw);
    let mut draw = seat.draw.part("ring");
    let strength = match ring {
        Ring::Outer => Strength::Scattered { sigma: 0.15 },
        Ring::Inner => Strength::LoadZone {
            epsilon: draw.between(0.4, 0.6),
            exponent: 1.5,
            angle: draw.angle(),
        },
    };
    let law = |shape: fn(f64) -> f64| Law {
        shape,
        ..Law::growing(fault.growth, 1.0)
    };
    let strikes = Strikes::new(
        Timing::Turns { order, slip },
        strength,
        law(pit),
        seat.draw.part("strikes"),
    );
    let modes = seat
        .path
        .ringing()
        .into_iter()
        .map(|mode| Mode {
            gain: mode.gain * seat.impact_gain,
            ..mode
        })
        .collect();
    let rate_hz = seat.point.true_rate_hz();
    let gain = seat.impact_gain * seat.path.gain();
    let high = Cascade::new(
        vec![
            Biquad::high_pass((0.1 * rate_hz).min(1000.0), rate_hz),
            Biquad::low_pass(0.4 * rate_hz, rate_hz),
        ],
        rate_hz,
    );
    let low = Cascade::new(
        vec![
            Biquad::high_pass(30.0, rate_hz),
            Biquad::low_pass((0.3 * rate_hz).min(900.0), rate_hz),
        ],
        rate_hz,
    );
    let wear = Noise::new(vec![
        Voice::with_rms(high, rate_hz, gain, law(floor), seat.local.part("wear"))
            .modulated(1.0, 0.3),
        Voice::with_velocity(low, gain, law(felt), seat.local.part("felt")),
    ]);
    vec![Box::new(BurstTrain::new(strikes, modes)), Box::new(wear)]
}

fn expected(fault: &RacePit, ring: Ring, asset: &Asset, draw: &Draw) -> Vec<Expected> {
    let bearing = asset
        .points
        .iter()
        .find(|point| point.id == fault.point)
        .and_then(|p| p.bearing);
    let Some(bearing) = bearing else {
        return Vec::new();
    };
    let (order, _) = rolling(ring, &bearing, draw);
    let name = match ring {
        Ring::Outer => "outer race",
        Ring::Inner => "inner race",
    };
    let line = |text: String, order: f64, level: Option<f64>| Expected {
        line: text,
        hz: order * asset.nominal_rpm() / 60.0,
        order,
        seen: Seen::Envelope,
        level,
    };
    let mut lines = vec![line(
        format!("{name}, strike height"),
        order,
        Some(pit(fault.growth.to)),
    )];
    lines.extend((2..=4).map(|k| line(format!("{k} x {name}"), f64::from(k) * order, None)));
    if ring == Ring::Inner {
        lines.push(line(format!("{name} - 1x, load zone"), order - 1.0, None));
        lines.push(line(format!("{name} + 1x, load zone"), order + 1.0, None));
    }
    lines
}

fn check(kind: &str, fault: &RacePit, asset: &Asset, faults: &mut Vec<String>) {
    super::check_growth(kind, asset, &fault.growth, 0.0, 4.0, faults);
    super::check_point(kind, asset, &fault.point, faults);
    let bare = asset
        .points
        .iter()
        .any(|point| point.id == fault.point && point.bearing.is_none());
    if bare {
        faults.push(format!(
            "asset {}: {kind}: point {} has no bearing; give it balls, ball_diameter_mm and pitch_diameter_mm",
            asset.id, fault.point
        ));
    }
}

macro_rules! race {
    ($type:ident, $ring:expr, $name:literal) => {
        impl Kind for $type {
            fn growth(&self) -> &Growth {
                &self.0.growth
            }

            fn point(&self) -> Option<&str> {
                Some(&self.0.point)
            }

            fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
                waves(&self.0, $ring, seat)
            }

            fn expected(&self, asset: &Asset, _: f64, draw: &Draw) -> Vec<Expected> {
                expected(&self.0, $ring, asset, draw)
            }

            fn severity(&self) -> &'static str {
                "stage, 1 to 4"
            }

            fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
                check($name, &self.0, asset, faults);
            }
        }
    };
}

race!(OuterRace, Ring::Outer, "outer-race");
race!(InnerRace, Ring::Inner, "inner-race");
