//! Runs of equal samples and of samples at a rail, exact across chunk borders.
//!
//! A flat line or a clipped top is a run; ordinary signals have hardly any. So each span of 32
//! samples is first counted, a vector operation, and walked one by one only when it could hold a
//! run longer than the longest known.
//! Checked by `tests/accuracy/moments.rs`: `runs_match_a_walk_over_every_sample`.

use super::Rails;

const SPAN: usize = 32;

/// Run lengths so far and the runs still open.
#[derive(Debug, Clone)]
pub(super) struct Runs {
    rails: Option<Rails>,
    last: Option<f32>,
    equal_open: u64,
    equal_longest: u64,
    rail_samples: u64,
    rail_open: u64,
    rail_longest: u64,
}

impl Runs {
    pub(super) fn new(rails: Option<Rails>) -> Self {
        Runs {
            rails,
            last: None,
            equal_open: 0,
            equal_longest: 0,
            rail_samples: 0,
            rail_open: 0,
            rail_longest: 0,
        }
    }

    pub(super) fn rails(&self) -> Option<Rails> {
        self.rails
    }

    pub(super) fn longest_equal(&self) -> u64 {
        self.equal_longest
    }

    pub(super) fn rail_samples(&self) -> u64 {
        self.rail_samples
    }

    pub(super) fn longest_rail(&self) -> u64 {
        self.rail_longest
    }

    /// Reads samples that follow those read before.
    pub(super) fn push(&mut self, samples: &[f32]) {
        self.equal(samples);
        if let Some(rails) = self.rails {
            self.rail(samples, rails);
        }
    }

    fn equal(&mut self, samples: &[f32]) {
        let (Some(&first), Some(&end)) = (samples.first(), samples.last()) else {
            return;
        };
        self.step(self.last == Some(first));
        let mut from = 1;
        while let (Some(before), Some(span)) = (
            samples[from - 1..].first_chunk::<SPAN>(),
            samples[from..].first_chunk::<SPAN>(),
        ) {
            let pairs = pairs(before, span);
            // A run within the span has at most pairs + 1 samples, one carried in grows by pairs.
            if self.equal_open + u64::from(pairs) > self.equal_longest {
                for (a, b) in before.iter().zip(span) {
                    self.step(a == b);
                }
            } else if pairs == 0 {
                self.equal_open = 1;
            } else {
                let tail = before
                    .iter()
                    .zip(span)
                    .rev()
                    .take_while(|(a, b)| a == b)
                    .count();
                self.equal_open = if tail == SPAN { self.equal_open } else { 1 } + tail as u64;
            }
            from += SPAN;
        }
        for (a, b) in samples[from - 1..].iter().zip(&samples[from..]) {
            self.step(a == b);
        }
        self.last = Some(end);
    }

    /// Takes one sample that equals the one before, or does not.
    fn step(&mut self, equal: bool) {
        self.equal_open = if equal { self.equal_open + 1 } else { 1 };
        self.equal_longest = self.equal_longest.max(self.equal_open);
    }

    fn rail(&mut self, samples: &[f32], rails: Rails) {
        let (spans, rest) = samples.as_chunks::<SPAN>();
        for span in spans {
            if hits(span, rails) == 0 {
                self.rail_open = 0;
            } else {
                self.walk_rail(span, rails);
            }
        }
        self.walk_rail(rest, rails);
    }

    fn walk_rail(&mut self, span: &[f32], rails: Rails) {
        for &x in span {
            let hit = at_rail(x, rails);
            self.rail_samples += u64::from(hit);
            self.rail_open = if hit { self.rail_open + 1 } else { 0 };
            self.rail_longest = self.rail_longest.max(self.rail_open);
        }
    }
}

fn at_rail(x: f32, rails: Rails) -> bool {
    (x <= rails.low) | (x >= rails.high)
}

/// Samples equal to the one before them. Apart, and not inlined, so that it stays a vector loop.
#[inline(never)]
fn pairs(before: &[f32; SPAN], span: &[f32; SPAN]) -> u32 {
    let mut count = 0;
    for i in 0..SPAN {
        count += u32::from(before[i] == span[i]);
    }
    count
}

/// Samples at a rail. Apart, and not inlined, for the same reason.
#[inline(never)]
fn hits(span: &[f32; SPAN], rails: Rails) -> u32 {
    let mut count = 0;
    for x in span {
        count += u32::from(at_rail(*x, rails));
    }
    count
}
