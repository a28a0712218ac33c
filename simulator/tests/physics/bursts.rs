//! Bursts and strikes: rolling, slip, load zone, ringing.

use std::f64::consts::{PI, TAU};

use humward_sim::random::Draw;
use humward_sim::scenario::Bearing;
use humward_sim::wave::{
    BurstTrain, Growth, HalfSines, Law, Mode, Strength, Strike, Strikes, TICK_S, Tick, Timing, Wave,
};

use super::measure::{mean_square, samples, state};

const ALIKE: Strength = Strength::Scattered { sigma: 0.0 };

fn strikes_of(mut strikes: Strikes, seconds: f64, shaft_hz: f64) -> Vec<Strike> {
    let mut all = Vec::new();
    for k in 0..(seconds / TICK_S) as u64 {
        let at = |k: u64| state(k as f64 * TICK_S, shaft_hz, 0.0, shaft_hz);
        strikes.within(
            &Tick {
                from: at(k),
                to: at(k + 1),
            },
            |strike| all.push(strike),
        );
    }
    all
}

/// Closed form: the sum of exp(-zeta omega t) sin(omega_d t), each begun at its own instant between samples.
#[test]
fn a_burst_train_is_the_sum_of_its_damped_sines_within_1e_9() {
    let times = vec![0.0101, 0.02345, 0.023_461, 0.31];
    let law = Law::steady(0.0);
    let strikes = Strikes::new(Timing::Listed(times.clone()), ALIKE, law, Draw::new(1));
    let modes = vec![
        Mode {
            hz: 3000.0,
            damping: 0.03,
            gain: 0.7,
        },
        Mode {
            hz: 4400.0,
            damping: 0.02,
            gain: 0.3,
        },
    ];
    let got = samples(
        &mut BurstTrain::new(strikes, modes.clone()),
        12_800.0,
        0.5,
        25.0,
        0.0,
    );
    for (k, x) in got.iter().enumerate() {
        let t = k as f64 / 12_800.0;
        let want: f64 = times
            .iter()
            .filter(|struck| **struck <= t)
            .flat_map(|struck| modes.iter().map(move |mode| (t - struck, mode)))
            .map(|(since, mode)| {
                let omega = TAU * mode.hz;
                let damped = omega * (1.0 - mode.damping * mode.damping).sqrt();
                mode.gain * (-mode.damping * omega * since).exp() * (damped * since).sin()
            })
            .sum();
        assert!((x - want).abs() < 1e-9, "{k}: {x} {want}");
    }
}

/// Source: checks stat.impulse_train.*, f_r 107.5 Hz, f0 3 kHz, zeta 3 %: kurtosis about 1.5 / (f_r tau), crest
/// about 2 / sqrt(f_r tau) x the first peak's factor exp(-zeta pi / 2).
#[test]
fn a_burst_train_has_the_kurtosis_and_crest_of_the_formula_within_4_per_cent() {
    let order = 107.5 / 25.0;
    let strikes = Strikes::new(
        Timing::Turns { order, slip: 0.0 },
        ALIKE,
        Law::steady(0.0),
        Draw::new(2),
    );
    let mode = Mode {
        hz: 3000.0,
        damping: 0.03,
        gain: 1.0,
    };
    let got = samples(
        &mut BurstTrain::new(strikes, vec![mode]),
        102_400.0,
        4.0,
        25.0,
        0.0,
    );
    let got = &got[102_400..];
    let square = mean_square(got);
    let kurtosis =
        got.iter().map(|x| x.powi(4)).sum::<f64>() / got.len() as f64 / (square * square);
    let crest = got.iter().fold(0_f64, |peak, x| peak.max(x.abs())) / square.sqrt();
    let f_tau = 107.5 / (TAU * 0.03 * 3000.0);
    let (want_kurtosis, want_crest) = (1.5 / f_tau, 2.0 / f_tau.sqrt() * (-0.03 * PI / 2.0).exp());
    assert!(
        (kurtosis / want_kurtosis - 1.0).abs() < 0.04,
        "{kurtosis} {want_kurtosis}"
    );
    assert!(
        (crest / want_crest - 1.0).abs() < 0.04,
        "{crest} {want_crest}"
    );
    assert!((want_kurtosis - 7.89).abs() < 0.01);
}

/// Closed form: with independent intervals the n-th strike scatters by sigma T sqrt(n), not by sigma T.
/// Source: Antoni & Randall 2003 (from memory). 400 trains; tolerance four standard errors, 4 / sqrt(2 x 400) = 14 %.
#[test]
fn slip_accumulates_as_the_root_of_the_strikes() {
    let (order, slip) = (4.0, 0.012);
    let spread = |n: usize| {
        let after: Vec<f64> = (0..400)
            .map(|seed| {
                let strikes = Strikes::new(
                    Timing::Turns { order, slip },
                    ALIKE,
                    Law::steady(0.0),
                    Draw::new(seed),
                );
                let all = strikes_of(strikes, (n + 8) as f64 / 100.0, 25.0);
                all[n].at_s - all[0].at_s
            })
            .collect();
        let mean = after.iter().sum::<f64>() / 400.0;
        assert!(
            (mean * 100.0 / n as f64 - 1.0).abs() < 0.002,
            "mean interval {mean}"
        );
        (after.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / 400.0).sqrt()
    };
    for n in [16, 256] {
        let want = slip * 0.01 * (n as f64).sqrt();
        assert!(
            (spread(n) / want - 1.0).abs() < 0.15,
            "n {n}: {} {want}",
            spread(n)
        );
    }
}

/// Closed form at three angles: full load in the middle, none from the edge on, [1 - (1 - cos) / (2 eps)]^1.5 between.
#[test]
fn the_load_zone_is_stribecks() {
    let q = |theta: f64| Strength::load_zone(0.5, 1.5, theta);
    assert_eq!(q(0.0), 1.0);
    assert!((q(PI / 3.0) - 0.5_f64.powf(1.5)).abs() < 1e-12);
    assert!(q(PI / 2.0) < 1e-12 && q(PI) == 0.0);
}

/// An inner pit at the load zone's middle strikes at full strength there only: mean square of strikes equals that of
/// the zone over a turn when strikes and turns share no factor.
#[test]
fn strikes_of_an_inner_pit_come_and_go_with_the_shaft() {
    let strength = Strength::LoadZone {
        epsilon: 0.5,
        exponent: 1.5,
        angle: 1.0,
    };
    let strikes = Strikes::new(
        Timing::Turns {
            order: 5.415,
            slip: 0.01,
        },
        strength,
        Law::steady(0.0),
        Draw::new(4),
    );
    let all = strikes_of(strikes, 120.0, 25.0);
    let total = 5.415 * 25.0 * 120.0;
    let square = all
        .iter()
        .map(|strike| strike.strength * strike.strength)
        .sum::<f64>()
        / total;
    let (_, want) = strength.moments();
    assert!((square / want - 1.0).abs() < 0.03, "{square} {want}");
    assert!(
        all.len() < (0.52 * total) as usize,
        "outside the zone nothing strikes"
    );
}

/// Source: table of bearing orders, checks brg.*: drive-end bearing of an open data set (9 balls, .3126 on 1.537 in)
/// outer 3.5848, inner 5.4152; their sum is the number of balls.
#[test]
fn ball_passes_per_turn_are_those_of_the_geometry() {
    let bearing = Bearing {
        balls: 9,
        ball_diameter_mm: 0.3126 * 25.4,
        pitch_diameter_mm: 1.537 * 25.4,
        angle_deg: 0.0,
    };
    assert!(
        (bearing.outer() - 3.5848).abs() < 1e-4,
        "{}",
        bearing.outer()
    );
    assert!(
        (bearing.inner() - 5.4152).abs() < 1e-4,
        "{}",
        bearing.inner()
    );
    let angled = Bearing {
        balls: 8,
        ball_diameter_mm: 20.0,
        pitch_diameter_mm: 120.0,
        angle_deg: 15.0,
    };
    assert!(
        (angled.outer() * 25.0 - 83.901).abs() < 1e-3
            && (angled.inner() * 25.0 - 116.099).abs() < 1e-3
    );
}

/// Closed form: a Poisson process of rate r strikes r T times with standard deviation sqrt(r T), and its modulated
/// twin as often.
#[test]
fn chance_strikes_as_often_as_its_rate() {
    for depth in [0.0, 0.6] {
        let timing = Timing::Chance {
            hz: 80.0,
            order: 5.0,
            depth,
        };
        let got = strikes_of(
            Strikes::new(timing, ALIKE, Law::steady(0.0), Draw::new(9)),
            100.0,
            25.0,
        )
        .len() as f64;
        assert!(
            (got - 8000.0).abs() < 4.0 * 8000_f64.sqrt(),
            "depth {depth}: {got}"
        );
    }
}

/// Closed form: a half sine of height A and width w has the area 2 A w / pi and one sign.
#[test]
fn a_knock_is_one_half_sine_of_its_height() {
    let law = Law::growing(Growth::constant(245.0), 0.0);
    let strikes = Strikes::new(Timing::Listed(vec![0.1003]), ALIKE, law, Draw::new(1));
    let got = samples(
        &mut HalfSines::new(strikes, 1e-3),
        102_400.0,
        0.2,
        25.0,
        0.0,
    );
    let area = got.iter().sum::<f64>() / 102_400.0;
    assert!(
        (area / (2.0 * 245.0 * 1e-3 / PI) - 1.0).abs() < 1e-3,
        "{area}"
    );
    assert!(got.iter().all(|x| *x >= 0.0));
    let peak = got.iter().fold(0_f64, |peak, x| peak.max(*x));
    assert!((peak / 245.0 - 1.0).abs() < 1e-3, "{peak}");
}

/// Two trains of one draw strike at the same instants: all points of a machine hear the same pit.
#[test]
fn the_same_pit_is_heard_at_the_same_instants_everywhere() {
    let train = || {
        Strikes::new(
            Timing::Turns {
                order: 3.585,
                slip: 0.01,
            },
            ALIKE,
            Law::steady(0.0),
            Draw::new(12),
        )
    };
    assert_eq!(
        strikes_of(train(), 3.0, 24.7),
        strikes_of(train(), 3.0, 24.7)
    );
}

/// Closed form of the truth's own velocity of a burst train, against the train's samples integrated line by line.
#[test]
fn clean_velocity_of_a_burst_train_is_that_of_its_lines_within_2_per_cent() {
    let rate = 100.0;
    let law = Law::growing(Growth::constant(50.0), 0.0);
    let timing = Timing::Turns {
        order: rate / 25.0,
        slip: 0.0,
    };
    let mut train = BurstTrain::new(
        Strikes::new(timing, ALIKE, law, Draw::new(3)),
        vec![Mode {
            hz: 3000.0,
            damping: 0.03,
            gain: 1.0,
        }],
    );
    let claimed = train
        .random_velocity_power(&state(5.0, 25.0, 0.0, 25.0))
        .sqrt()
        * 1e3;
    let got = samples(&mut train, 51_200.0, 4.0, 25.0, 0.0);
    let power: f64 = (1..=10)
        .map(|k| {
            let hz = rate * f64::from(k);
            let peak = super::measure::line(&got[51_200..], 51_200.0, hz).norm();
            super::measure::velocity_mm_s(peak, hz).powi(2)
        })
        .sum();
    assert!(
        (claimed / power.sqrt() - 1.0).abs() < 0.02,
        "{claimed} {}",
        power.sqrt()
    );
}

/// Independent route: all harmonics one by one, up to 1 kHz. More than 2000 of them are summed as a density.
#[test]
fn velocity_of_slow_strikes_is_the_sum_of_all_their_harmonics_within_1_percent() {
    let mode = Mode {
        hz: 700.0,
        damping: 0.03,
        gain: 1.0,
    };
    let power = |hz: f64| {
        let timing = Timing::Turns {
            order: 1.0,
            slip: 0.0,
        };
        let strikes = Strikes::new(timing, ALIKE, Law::steady(0.0), Draw::new(1));
        BurstTrain::new(strikes, vec![mode]).random_velocity_power(&state(0.0, hz, 0.0, hz))
    };
    for hz in [0.15_f64, 0.49, 0.51, 5.0] {
        let omega = TAU * mode.hz;
        let damped = omega * (1.0 - mode.damping * mode.damping).sqrt();
        let sum: f64 = ((10.0 / hz).ceil() as u32..=(1000.0 / hz).floor() as u32)
            .map(|k| TAU * hz * f64::from(k))
            .map(|w| {
                let (re, im) = (omega * omega - w * w, 2.0 * mode.damping * omega * w);
                2.0 * hz * hz * damped * damped / (re * re + im * im) / (w * w)
            })
            .sum();
        let got = power(hz);
        assert!((got / sum - 1.0).abs() < 0.01, "{hz} Hz: {got} {sum}");
    }
    assert_eq!((power(0.05), power(1e-9)), (0.0, 0.0));
}
