//! Rms and true peak of a low-band waveform.
//!
//! In: low-rate samples, mm/s or m/s², after settling. Out: the same unit. All sums in `f64`.
//! The peak is the waveform's own, not √2 rms. Checked by `tests/accuracy/velocity.rs`.

/// Accumulator of one reading's low-band waveform.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct WaveStats {
    count: u64,
    pivot: f64,
    sum: f64,
    squares: f64,
    min: f64,
    max: f64,
}

impl Default for WaveStats {
    fn default() -> Self {
        WaveStats {
            count: 0,
            pivot: 0.0,
            sum: 0.0,
            squares: 0.0,
            min: f64::INFINITY,
            max: f64::NEG_INFINITY,
        }
    }
}

impl WaveStats {
    /// An empty accumulator.
    pub fn new() -> Self {
        WaveStats::default()
    }

    /// Reads samples.
    pub fn push(&mut self, samples: &[f32]) {
        if self.count == 0 {
            self.pivot = samples.first().copied().map_or(0.0, f64::from);
        }
        let (mut sum, mut squares) = (0.0, 0.0);
        for &sample in samples {
            let x = f64::from(sample);
            let d = x - self.pivot;
            sum += d;
            squares += d * d;
            self.min = self.min.min(x);
            self.max = self.max.max(x);
        }
        self.sum += sum;
        self.squares += squares;
        self.count += samples.len() as u64;
    }

    /// Forgets everything.
    pub fn clear(&mut self) {
        *self = WaveStats::default();
    }

    /// Samples read.
    pub fn count(&self) -> u64 {
        self.count
    }

    /// Mean; `None` before the first sample.
    pub fn mean(&self) -> Option<f64> {
        (self.count > 0).then(|| self.pivot + self.sum / self.count as f64)
    }

    /// Root mean square about the mean; `None` before the first sample.
    pub fn rms(&self) -> Option<f64> {
        (self.count > 0).then(|| {
            let n = self.count as f64;
            let mean = self.sum / n;
            (self.squares / n - mean * mean).max(0.0).sqrt()
        })
    }

    /// True peak: largest distance from the mean; `None` before the first sample.
    pub fn peak(&self) -> Option<f64> {
        self.mean()
            .map(|mean| (self.max - mean).max(mean - self.min))
    }

    /// Largest less smallest; `None` before the first sample.
    pub fn peak_to_peak(&self) -> Option<f64> {
        (self.count > 0).then_some(self.max - self.min)
    }
}
