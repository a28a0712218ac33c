//! Bad input gives a fault that says what, where and the remedy; never a panic.

use humward_signal::envelope::EnvelopePlan;
use humward_signal::frame::{FrameFault, FramePlan, Scratch};
use humward_signal::lowband::{LowBandPlan, Response};
use proptest::prelude::{any, prop_assert_eq, proptest};

use crate::signals::{sampled, sine};

#[test]
fn frame_lengths_the_fft_does_not_plan_are_refused() {
    for n in [
        0,
        1,
        62,
        4095,
        4097,
        8194,
        14_336,
        (1 << 20) + 2,
        1 << 21,
        usize::MAX,
    ] {
        assert_eq!(
            FramePlan::new(n, 25_600.0).err(),
            Some(FrameFault::Length { n }),
            "{n}"
        );
    }
    for n in [64, 4096, 6000, 8192, 10_000, 65_536] {
        assert!(FramePlan::new(n, 25_600.0).is_ok(), "{n}");
    }
}

#[test]
fn rates_that_are_no_rate_are_refused() {
    for rate in [0.0, -1.0, f64::INFINITY] {
        assert_eq!(
            FramePlan::new(4096, rate).err(),
            Some(FrameFault::Rate { rate_hz: rate })
        );
    }
    assert!(FramePlan::new(4096, f64::NAN).is_err());
}

#[test]
fn a_spectrum_of_another_plan_is_refused_and_adds_nothing() {
    let (a, b) = (
        FramePlan::new(4096, 25_600.0).unwrap(),
        FramePlan::new(8192, 25_600.0).unwrap(),
    );
    let mut scratch = Scratch::new();
    let (mut psd, mut other) = (a.psd(), b.psd());
    let nothing = FrameFault::Mismatch {
        expected: 4096,
        found: 0,
    };
    assert_eq!(
        a.accumulate_psd(&scratch, &mut psd),
        Err(nothing),
        "nothing transformed yet"
    );
    b.transform(&sampled(8192, 25_600.0, sine(1.0, 50.0, 0.0)), &mut scratch)
        .unwrap();
    let wrong = FrameFault::Mismatch {
        expected: 4096,
        found: 8192,
    };
    assert_eq!(a.accumulate_psd(&scratch, &mut psd), Err(wrong));
    assert!(b.accumulate_psd(&scratch, &mut psd).is_err());
    assert_eq!((psd.frames(), other.frames()), (0, 0));
    b.accumulate_psd(&scratch, &mut other).unwrap();
    assert_eq!(other.frames(), 1);
    let envelope = EnvelopePlan::new(4096, 25_600.0, 2_000.0, 8_000.0).unwrap();
    assert!(
        envelope
            .accumulate(&mut scratch, &mut envelope.spectrum())
            .is_err()
    );
    let low = LowBandPlan::new(4096, 25_600.0, Response::Plain).unwrap();
    assert!(
        low.push_frame(&mut scratch, &mut low.start(), &mut Vec::new())
            .is_err()
    );
}

#[test]
fn a_short_slice_is_refused_and_leaves_no_stale_spectrum_behind_an_error() {
    let plan = FramePlan::new(4096, 25_600.0).unwrap();
    let mut scratch = Scratch::new();
    let fault = plan.transform(&[0.0; 4095], &mut scratch).unwrap_err();
    assert_eq!(
        fault,
        FrameFault::Samples {
            expected: 4096,
            given: 4095
        }
    );
    assert!(fault.to_string().contains("4095"), "{fault}");
}

#[test]
fn one_scratch_serves_plans_of_all_sizes_without_mixing_them() {
    let mut scratch = Scratch::new();
    for n in [8192, 64, 4096, 8192] {
        let plan = FramePlan::new(n, 25_600.0).unwrap();
        let samples = sampled(n, 25_600.0, sine(2.0, 25_600.0 / 16.0, 0.2));
        let mut psd = plan.psd();
        plan.transform(&samples, &mut scratch).unwrap();
        plan.accumulate_psd(&scratch, &mut psd).unwrap();
        assert!((psd.line_amplitude(n / 16) - 2.0).abs() < 1e-5, "{n}");
    }
}

proptest! {
    #[test]
    fn no_plan_panics_on_any_numbers(n in any::<u16>(), rate in any::<f64>(), f1 in any::<f64>(), f2 in any::<f64>()) {
        let n = usize::from(n);
        let frame = FramePlan::new(n, rate);
        let low = LowBandPlan::new(n, rate, Response::Velocity { lower_edge_hz: f1 });
        let envelope = EnvelopePlan::new(n, rate, f1, f2);
        prop_assert_eq!(frame.is_err() && (low.is_ok() || envelope.is_ok()), false);
    }
}
