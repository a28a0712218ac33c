//! Statistics of a reading's waveform, every sample once.
//!
//! In: samples, m/s², all finite, in order and without overlap. Out: rms about the mean, true peak,
//! crest, kurtosis (Pearson: Gaussian 3, sine 1.5), runs of equal values and of values at a rail.
//! Each chunk of 256 samples is summed in `f32` about a pivot of its own, near its mean, and joined
//! in `f64`: gravity, drift or a wild first sample cost no digits. The mean of the whole
//! reading is what is removed, not a running one. Formula of the join: Pébay (2008), Sandia report
//! SAND2008-6212, from memory; checked against two-pass `f64` moments by `tests/accuracy/moments.rs`.
//! Known error: 2e-6 of kurtosis and rms.

mod runs;

use runs::Runs;

/// Samples summed in `f32` before they join the totals.
const CHUNK: usize = 256;
const LANES: usize = 8;

/// The values at which a converter clips, in the unit of the samples.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Rails {
    /// Samples at or below this are at the lower rail.
    pub low: f32,
    /// Samples at or above this are at the upper rail.
    pub high: f32,
}

/// What a reading's samples came to.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Summary {
    /// Samples read.
    pub count: u64,
    /// Mean, m/s².
    pub mean: f64,
    /// Smallest sample, m/s².
    pub min: f64,
    /// Largest sample, m/s².
    pub max: f64,
    /// Root mean square about the mean, m/s².
    pub rms: f64,
    /// True peak: the largest distance from the mean, m/s².
    pub peak: f64,
    /// Largest less smallest, m/s².
    pub peak_to_peak: f64,
    /// Peak over rms; `None` for a constant signal.
    pub crest: Option<f64>,
    /// Fourth moment over the squared second, 3 for Gaussian noise; `None` for a constant signal.
    pub kurtosis: Option<f64>,
    /// Longest run of equal successive samples, 1 when no two are equal.
    pub longest_equal_run: u64,
    /// Samples at a rail.
    pub rail_samples: u64,
    /// Longest run of samples at a rail.
    pub longest_rail_run: u64,
}

/// Accumulator of a reading.
#[derive(Debug, Clone)]
pub struct Statistics {
    moments: Moments,
    min: f32,
    max: f32,
    runs: Runs,
}

impl Statistics {
    /// An empty accumulator; without `rails` no sample counts as clipped.
    pub fn new(rails: Option<Rails>) -> Self {
        Statistics {
            moments: Moments::default(),
            min: f32::INFINITY,
            max: f32::NEG_INFINITY,
            runs: Runs::new(rails),
        }
    }

    /// Reads samples; blocks of any length, also empty.
    pub fn push(&mut self, samples: &[f32]) {
        for chunk in samples.chunks(CHUNK) {
            let (min, max, pivot) = extremes(chunk);
            self.min = self.min.min(min);
            self.max = self.max.max(max);
            self.moments.join(&Moments::of(chunk, pivot));
        }
        self.runs.push(samples);
    }

    /// Forgets everything but the rails.
    pub fn clear(&mut self) {
        *self = Statistics::new(self.runs.rails());
    }

    /// Samples read so far.
    pub fn count(&self) -> u64 {
        self.moments.count
    }

    /// The reading so far; `None` before the first sample.
    pub fn summary(&self) -> Option<Summary> {
        let m = &self.moments;
        if m.count == 0 {
            return None;
        }
        let n = m.count as f64;
        let (min, max) = (f64::from(self.min), f64::from(self.max));
        let constant = max <= min;
        let variance = if constant { 0.0 } else { m.second / n };
        let rms = variance.sqrt();
        let peak = (max - m.mean).max(m.mean - min).max(0.0);
        Some(Summary {
            count: m.count,
            mean: m.mean,
            min,
            max,
            rms,
            peak,
            peak_to_peak: max - min,
            crest: (variance > 0.0).then(|| peak / rms),
            kurtosis: (variance > 0.0).then(|| m.fourth / n / (variance * variance)),
            longest_equal_run: self.runs.longest_equal(),
            rail_samples: self.runs.rail_samples(),
            longest_rail_run: self.runs.longest_rail(),
        })
    }
}

/// Smallest, largest and a value near the mean of a chunk of one sample or more.
fn extremes(chunk: &[f32]) -> (f32, f32, f32) {
    let (lanes, rest) = chunk.as_chunks::<LANES>();
    let mut all = lane_extremes(lanes);
    let mut rows = lanes.len();
    if let Some(&first) = rest.first() {
        // Filled up with one of its own values, the last row changes no extreme.
        let [low, high, sum] = lane_extremes(&[filled(rest, first)]);
        for i in 0..LANES {
            all[0][i] = all[0][i].min(low[i]);
            all[1][i] = all[1][i].max(high[i]);
            all[2][i] += sum[i];
        }
        rows += 1;
    }
    let [low, high, sum] = all;
    (
        low.into_iter().fold(f32::INFINITY, f32::min),
        high.into_iter().fold(f32::NEG_INFINITY, f32::max),
        sum.into_iter().sum::<f32>() / (rows * LANES) as f32,
    )
}

fn filled(rest: &[f32], with: f32) -> [f32; LANES] {
    let mut row = [with; LANES];
    row[..rest.len()].copy_from_slice(rest);
    row
}

/// Smallest, largest and sum of each lane. Apart, and not inlined, so that it stays a vector loop.
#[inline(never)]
fn lane_extremes(rows: &[[f32; LANES]]) -> [[f32; LANES]; 3] {
    let mut low = [f32::INFINITY; LANES];
    let mut high = [f32::NEG_INFINITY; LANES];
    let mut sum = [0f32; LANES];
    for x in rows {
        for i in 0..LANES {
            low[i] = if x[i] < low[i] { x[i] } else { low[i] };
            high[i] = if x[i] > high[i] { x[i] } else { high[i] };
            sum[i] += x[i];
        }
    }
    [low, high, sum]
}

/// Σd, Σd², Σd³, Σd⁴ of each lane, d = x − pivot. Apart, and not inlined, for the same reason.
#[inline(never)]
fn lane_moments(rows: &[[f32; LANES]], pivot: f32) -> [[f32; LANES]; 4] {
    let mut sums = [[0f32; LANES]; 4];
    for x in rows {
        for i in 0..LANES {
            let d = x[i] - pivot;
            let square = d * d;
            sums[0][i] += d;
            sums[1][i] += square;
            sums[2][i] += square * d;
            sums[3][i] += square * square;
        }
    }
    sums
}

/// Count, mean and central moment sums Σ(x − mean)^p.
#[derive(Debug, Clone, Copy, Default)]
struct Moments {
    count: u64,
    mean: f64,
    second: f64,
    third: f64,
    fourth: f64,
}

impl Moments {
    /// Moments of at most [`CHUNK`] samples, summed about `pivot`, which is near their mean.
    fn of(chunk: &[f32], pivot: f32) -> Self {
        let (rows, rest) = chunk.as_chunks::<LANES>();
        let total = |lanes: [f32; LANES]| lanes.into_iter().map(f64::from).sum::<f64>();
        let [mut s1, mut s2, mut s3, mut s4] = lane_moments(rows, pivot).map(total);
        if !rest.is_empty() {
            // Filled up with the pivot, the last row adds nothing of its own.
            let last = lane_moments(&[filled(rest, pivot)], pivot).map(total);
            s1 += last[0];
            s2 += last[1];
            s3 += last[2];
            s4 += last[3];
        }
        let n = chunk.len() as f64;
        let m = s1 / n;
        Moments {
            count: chunk.len() as u64,
            mean: f64::from(pivot) + m,
            second: s2 - n * m * m,
            third: s3 - 3.0 * m * s2 + 2.0 * n * m * m * m,
            fourth: s4 - 4.0 * m * s3 + 6.0 * m * m * s2 - 3.0 * n * m * m * m * m,
        }
    }

    /// Joins another set of samples to this one.
    fn join(&mut self, other: &Moments) {
        if self.count == 0 {
            *self = *other;
            return;
        }
        let (a, b) = (self.count as f64, other.count as f64);
        let n = a + b;
        let delta = other.mean - self.mean;
        let step = delta / n;
        let square = delta * step * a * b;
        self.fourth += other.fourth
            + square * step * step * (a * a - a * b + b * b)
            + 6.0 * step * step * (a * a * other.second + b * b * self.second)
            + 4.0 * step * (a * other.third - b * self.third);
        self.third += other.third
            + square * step * (a - b)
            + 3.0 * step * (a * other.second - b * self.second);
        self.second += other.second + square;
        self.mean += step * b;
        self.count += other.count;
    }
}
