//! Cavitation: a mound of noise at high frequency that breathes with the vanes, and bubbles collapsing by chance.
//!
//! Severity: acceleration of the mound, m/s² rms. Band-passed Gaussian noise x (1 + m cos vane pass), m 0.3-0.6; bursts
//! by chance, 40-150 a second, log-normal with a heavy tail (sigma 0.8), their height 2.5 x the mound; a little of it
//! is felt as velocity at 10-500 Hz. No line, no even spacing. Evidence: Gao et al. 2017, Mousmoulis et al. 2021; the
//! mixture is common practice, no source.

use serde::Deserialize;

use super::{Expected, Kind, Seat, Seen};
use crate::random::Draw;
use crate::scenario::Asset;
use crate::wave::{
    Biquad, BurstTrain, Cascade, Growth, Law, Noise, Strength, Strikes, Timing, Voice, Wave,
};

/// Vapour at the eye of the impeller.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Cavitation {
    /// m/s² rms of the mound at nominal speed.
    pub growth: Growth,
    /// The point nearest to the impeller; others hear 0.12-0.3 of it.
    pub point: String,
}

/// Height of a burst over the rms of the mound.
const BURST: f64 = 2.5;
/// Velocity at 10-500 Hz, m/s per m/s² of the mound.
const FELT: f64 = 3e-5;

impl Kind for Cavitation {
    fn growth(&self) -> &Growth {
        &self.growth
    }

    fn point(&self) -> Option<&str> {
        Some(&self.point)
    }

    fn waves(&self, seat: &Seat<'_>) -> Vec<Box<dyn Wave>> {
        if seat.impact_gain == 0.0 {
            return Vec::new();
        }
        let mut draw = seat.draw.part("mixture");
        let rate_hz = seat.point.true_rate_hz();
        let vanes = f64::from(seat.asset.vanes);
        let (depth, hz) = (draw.between(0.3, 0.6), draw.log_between(40.0, 150.0));
        let gain = seat.impact_gain * seat.path.gain();
        let law = Law::growing(self.growth, 1.0);
        let mound = Cascade::new(
            vec![
                Biquad::high_pass(
                    (0.2 * rate_hz).min(draw.log_between(2000.0, 3500.0)),
                    rate_hz,
                ),
                Biquad::low_pass(
                    (0.4 * rate_hz).min(draw.log_between(6000.0, 12_000.0)),
                    rate_hz,
                ),
            ],
            rate_hz,
        );
        let low = Cascade::new(
            vec![
                Biquad::high_pass(20.0, rate_hz),
                Biquad::low_pass((0.3 * rate_hz).min(500.0), rate_hz),
            ],
            rate_hz,
        );
        let noise = Noise::new(vec![
            Voice::with_rms(mound, rate_hz, gain, law, seat.local.part("mound"))
                .modulated(vanes, depth),
            Voice::with_velocity(low, FELT * gain, law, seat.local.part("felt")),
        ]);
        let strikes = Strikes::new(
            Timing::Chance {
                hz,
                order: vanes,
                depth,
            },
            Strength::Scattered { sigma: 0.8 },
            law,
            seat.draw.part("bubbles"),
        );
        let modes = seat
            .path
            .ringing()
            .into_iter()
            .map(|mode| crate::wave::Mode {
                gain: mode.gain * seat.impact_gain * BURST,
                ..mode
            });
        vec![
            Box::new(noise),
            Box::new(BurstTrain::new(strikes, modes.collect())),
        ]
    }

    fn expected(&self, asset: &Asset, _: f64, _: &Draw) -> Vec<Expected> {
        let hz = f64::from(asset.vanes) * asset.nominal_rpm() / 60.0;
        vec![
            Expected {
                line: "mound without spacing, from".to_owned(),
                hz: 2000.0,
                order: 2000.0 * 60.0 / asset.nominal_rpm(),
                seen: Seen::Acceleration,
                level: Some(self.growth.to),
            },
            Expected {
                line: "mound breathes at vane pass".to_owned(),
                hz,
                order: f64::from(asset.vanes),
                seen: Seen::Envelope,
                level: None,
            },
        ]
    }

    fn severity(&self) -> &'static str {
        "m/s2 rms of the mound"
    }

    fn check(&self, asset: &Asset, faults: &mut Vec<String>) {
        super::check_growth("cavitation", asset, &self.growth, 0.0, 500.0, faults);
        super::check_point("cavitation", asset, &self.point, faults);
    }
}
