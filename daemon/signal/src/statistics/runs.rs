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

    pub(super) fn push(&mut self, samples: &[f32]) {
        for span in samples.chunks(SPAN) {
            self.equal(span);
            if let Some(rails) = self.rails {
                self.rail(span, rails);
            }
        }
    }

    fn equal(&mut self, span: &[f32]) {
        let (Some(&first), Some(&end)) = (span.first(), span.last()) else {
            return;
        };
        let joins = self.last == Some(first);
        let mut pairs = 0u32;
        for (a, b) in span.iter().zip(&span[1..]) {
            pairs += u32::from(a == b);
        }
        let carried = if joins { self.equal_open } else { 0 };
        // `pairs` equal neighbours make no run longer than pairs + 1, plus what is carried in.
        if carried + u64::from(pairs) + 1 > self.equal_longest {
            let mut last = self.last;
            for &x in span {
                self.equal_open = if last == Some(x) {
                    self.equal_open + 1
                } else {
                    1
                };
                self.equal_longest = self.equal_longest.max(self.equal_open);
                last = Some(x);
            }
        } else {
            let tail = span.iter().rev().take_while(|x| **x == end).count() as u64;
            self.equal_open = if tail == span.len() as u64 {
                carried + tail
            } else {
                tail
            };
        }
        self.last = Some(end);
    }

    fn rail(&mut self, span: &[f32], rails: Rails) {
        let at_rail = |x: f32| (x <= rails.low) | (x >= rails.high);
        let mut hits = 0u32;
        for &x in span {
            hits += u32::from(at_rail(x));
        }
        if hits == 0 {
            self.rail_open = 0;
            return;
        }
        self.rail_samples += u64::from(hits);
        for &x in span {
            self.rail_open = if at_rail(x) { self.rail_open + 1 } else { 0 };
            self.rail_longest = self.rail_longest.max(self.rail_open);
        }
    }
}
