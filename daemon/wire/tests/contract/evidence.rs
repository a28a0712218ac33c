//! Evidence survives CBOR and keeps to its size.

use humward_wire::out::{Evidence, MAX_EVIDENCE, TURNS_KEPT};
use humward_wire::refusal::Reason;

use crate::samples::{evidence, trace};

#[test]
fn evidence_survives_cbor() {
    let mut thin = evidence();
    thin.spectrum = None;
    thin.watch = None;
    thin.rpm = None;
    for evidence in [evidence(), thin] {
        assert_eq!(Evidence::decode(&evidence.encode()), Ok(evidence));
    }
}

#[test]
fn evidence_that_is_too_long_gives_up_its_waveform_beyond_ten_turns_first() {
    let mut long = evidence();
    let rate = 25_600.0;
    long.waveform = Some(trace(40_000, 1.0 / rate, "s"));
    assert!(long.encode().len() > MAX_EVIDENCE);
    let (cut, told) = long.clone().fit(MAX_EVIDENCE);
    assert!(told && cut.truncated && cut.encode().len() <= MAX_EVIDENCE);
    let kept = cut.waveform.unwrap().values.len();
    let turns = kept as f64 / rate * 1482.3 / 60.0;
    assert!(
        (TURNS_KEPT..TURNS_KEPT + 0.01).contains(&turns),
        "{turns} turns"
    );
    assert_eq!((cut.spectrum, cut.envelope), (long.spectrum, long.envelope));
}

#[test]
fn a_thinned_spectrum_keeps_the_height_of_every_line() {
    let mut long = evidence();
    let mut spectrum = trace(16_384, 0.78125, "Hz");
    spectrum.values.iter_mut().for_each(|value| *value = 0.1);
    spectrum.values[4097] = 9.0;
    long.spectrum = Some(spectrum);
    let (cut, told) = long.fit(MAX_EVIDENCE);
    assert!(told);
    let spectrum = cut.spectrum.unwrap();
    assert_eq!(
        (spectrum.values.len(), spectrum.step, spectrum.thinned),
        (8192, 1.5625, 2)
    );
    assert_eq!(spectrum.values[2048], 9.0);
    assert_eq!(spectrum.resolution_hz, Some(1.171_875));
}

#[test]
fn evidence_fits_any_size_that_holds_its_header() {
    for max in [MAX_EVIDENCE, 10_000, 3_000, 1_000, 400] {
        let (cut, _) = evidence().fit(max);
        let size = cut.encode().len();
        assert!(size <= max, "{size} bytes for {max}");
    }
}

#[test]
fn evidence_with_a_trace_cut_or_mistyped_is_refused() {
    let bytes = evidence().encode();
    assert_eq!(
        Evidence::decode(&bytes[..bytes.len() - 1])
            .unwrap_err()
            .reason,
        Reason::Truncated
    );
    // The last byte is the boolean under `truncated`; 1 is no boolean.
    let last = bytes.len() - 1;
    let wrong = [&bytes[..last], &[0x01][..]].concat();
    let refusal = Evidence::decode(&wrong).unwrap_err();
    assert_eq!(
        (refusal.reason, refusal.offset, refusal.key),
        (Reason::WrongType, last, Some("truncated"))
    );
    let partial: Vec<u8> = bytes
        .windows(6)
        .position(|w| w == b"values")
        .map(|at| {
            // The typed array of the spectrum, one byte shorter than it says in whole floats.
            let mut cut = bytes.clone();
            cut[at + 10] -= 1;
            cut
        })
        .unwrap();
    assert!(Evidence::decode(&partial).is_err());
}
