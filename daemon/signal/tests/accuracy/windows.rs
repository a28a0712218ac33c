//! Window constants. Source: Harris, Proc. IEEE 66 (1978), Table 1, and the coefficients' closed form.

use humward_signal::window::{
    BLACKMAN, FLAT_TOP, FLAT_TOP_ISO_18431_2, HAMMING, HANN, HFT70, HFT90D, HFT95, RECTANGULAR,
    Window,
};

use crate::signals::close;

/// name, window, coherent gain, ENBW bins, scallop dB, −6 dB width bins, highest sidelobe dB (`win.*`).
const TABLE: [(&str, Window, [f64; 5]); 9] = [
    (
        "rect",
        RECTANGULAR,
        [1.0, 1.0, 3.922394134, 1.206709557, -13.26364758],
    ),
    (
        "hann",
        HANN,
        [0.5, 1.5, 1.423622808, 2.000000013, -31.46762648],
    ),
    (
        "hamming",
        HAMMING,
        [0.54, 1.362825789, 1.751431782, 1.815224861, -42.67436637],
    ),
    (
        "blackman",
        BLACKMAN,
        [0.42, 1.72675737, 1.098878831, 2.298799851, -58.10884369],
    ),
    (
        "flattop_dantona",
        FLAT_TOP,
        [
            0.21557895,
            3.770246447,
            0.009778050465,
            4.582873053,
            -93.00905387,
        ],
    ),
    (
        "flattop_iso18431_2",
        FLAT_TOP_ISO_18431_2,
        [1.0, 3.77093292, 0.008972117782, 4.582609678, -83.92760155],
    ),
    (
        "HFT70",
        HFT70,
        [1.0, 3.412906251, 0.006504883459, 4.130054508, -70.44173368],
    ),
    (
        "HFT95",
        HFT95,
        [1.0, 3.811213009, 0.003865912118, 4.623043362, -94.97793081],
    ),
    (
        "HFT90D",
        HFT90D,
        [1.0, 3.883167166, 0.003902971635, 4.711923959, -90.2188881],
    ),
];

#[test]
fn coherent_gain_and_enbw_match_the_table_and_the_sums() {
    for (name, window, [gain, enbw, ..]) in TABLE {
        close(name, window.coherent_gain(), gain, 1e-9);
        close(name, window.enbw_bins(), enbw, 1e-6);
        let w = window.samples(1024);
        let (s1, s2) = w.iter().fold((0.0, 0.0), |(a, b), x| (a + x, b + x * x));
        close(name, s1 / 1024.0, gain, 1e-9);
        close(name, 1024.0 * s2 / (s1 * s1), enbw, 1e-6);
    }
}

#[test]
fn scalloping_matches_the_table() {
    for (name, window, row) in TABLE {
        close(
            name,
            window.scalloping_db(),
            row[2],
            if row[2] > 0.1 { 0.0005 } else { 0.002 },
        );
    }
}

#[test]
fn six_decibel_width_matches_the_table() {
    for (name, window, row) in TABLE {
        let (mut inside, mut outside) = (0.0, 4.0);
        for _ in 0..60 {
            let middle = 0.5 * (inside + outside);
            // As usual, -6 dB stands for one half.
            if window.response(middle) > 0.5 {
                inside = middle
            } else {
                outside = middle
            }
        }
        close(name, 2.0 * inside, row[3], 0.005);
    }
}

#[test]
fn highest_sidelobe_matches_the_table() {
    for (name, window, row) in TABLE {
        let lobe = window.coefficients().len() as f64;
        let highest = (0..20_000)
            .map(|i| window.response(lobe + f64::from(i) * 1e-3))
            .fold(0.0, f64::max);
        close(name, 20.0 * highest.log10(), row[4], 0.1);
    }
}

#[test]
fn harris_rows_agree_within_their_print() {
    // win.*.harris_table: ENBW, scallop dB, -6 dB width, sidelobe dB as printed (Hamming 1.78 is Harris's own).
    let printed = [
        (0, [1.0, 3.92, 1.21, -13.0]),
        (1, [1.5, 1.42, 2.0, -32.0]),
        (2, [1.36, 1.78, 1.81, -43.0]),
    ];
    for (row, [enbw, scallop, _, _]) in printed {
        let (name, window, _) = TABLE[row];
        close(name, window.enbw_bins(), enbw, 0.006);
        close(name, window.scalloping_db(), scallop, 0.03);
    }
}

#[test]
fn hann_corrections_are_2_and_1_633() {
    // win.hann.amp_correction, win.hann.energy_correction, win.hann.band_rms_divisor: definitions.
    close("amp_correction", HANN.amplitude_correction(), 2.0, 1e-9);
    close(
        "energy_correction",
        HANN.energy_correction(),
        1.632993162,
        1e-6,
    );
    close(
        "band_rms_divisor",
        HANN.enbw_bins().sqrt(),
        1.224744871,
        1e-9,
    );
}

#[test]
fn overlap_correlation_of_hann_is_one_sixth_at_half() {
    // welch.hann.corr50, corr75: Harris 1978, Table 1 (16.7 %, 65.9 %).
    let w = HANN.samples(4096);
    let energy: f64 = w.iter().map(|x| x * x).sum();
    for (shift, expected, tolerance) in [(2048, 0.1666666667, 1e-4), (1024, 0.6592, 2e-4)] {
        let shared: f64 = w[shift..].iter().zip(&w).map(|(a, b)| a * b).sum();
        close("corr", shared / energy, expected, tolerance);
    }
}
