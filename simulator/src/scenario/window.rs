//! From when until when something is wrong.

use core::fmt;
use core::ops::Range;

use super::Seconds;
use crate::wave::Stretch;

/// A span of the scenario's time: `at` is in it, `until` no longer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Window {
    at_s: f64,
    until_s: f64,
}

impl Window {
    /// From `at`, up to `until` or for good.
    #[must_use]
    pub fn new(at: Seconds, until: Option<Seconds>) -> Window {
        Window {
            at_s: at.0,
            until_s: until.map_or(f64::INFINITY, |until| until.0),
        }
    }

    /// From `at_s` up to `until_s`, s after the start of the scenario.
    #[must_use]
    pub fn of(at_s: f64, until_s: f64) -> Window {
        Window { at_s, until_s }
    }

    /// Its beginning, s after the start of the scenario.
    #[must_use]
    pub fn at_s(&self) -> f64 {
        self.at_s
    }

    /// Its end, s after the start of the scenario; infinite when it has none.
    #[must_use]
    pub fn until_s(&self) -> f64 {
        self.until_s
    }

    /// Whether a moment is in it.
    #[must_use]
    pub fn holds(&self, at_s: f64) -> bool {
        (self.at_s..self.until_s).contains(&at_s)
    }

    /// The samples of a stretch that are in it.
    #[must_use]
    pub fn within(&self, stretch: Stretch) -> Range<usize> {
        // A sample that falls on the edge but for rounding counts as on it.
        let index = |at_s: f64| {
            let place = ((at_s - stretch.first_s) / stretch.step_s - 1e-6).ceil();
            (place.max(0.0) as usize).min(stretch.count)
        };
        index(self.at_s)..index(self.until_s)
    }

    /// How far a change that takes `over` from the beginning has come at a moment: 0 to 1, 0 outside.
    #[must_use]
    pub fn progress(&self, at_s: f64, over: Seconds) -> f64 {
        if !self.holds(at_s) {
            0.0
        } else if over.0 > 0.0 {
            ((at_s - self.at_s) / over.0).min(1.0)
        } else {
            1.0
        }
    }

    /// Adds a fault when it ends before it begins.
    pub(crate) fn check(&self, here: &str, faults: &mut Vec<String>) {
        if self.until_s <= self.at_s {
            faults.push(format!(
                "{here}: until {} s is not after at {} s; leave until out if it never ends",
                self.until_s, self.at_s
            ));
        }
    }
}

impl fmt::Display for Window {
    /// In seconds after the start.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "from {} s", self.at_s)?;
        if self.until_s.is_finite() {
            write!(f, " to {} s", self.until_s)?;
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::Window;
    use crate::scenario::Seconds;
    use crate::wave::Stretch;

    #[test]
    fn a_window_holds_the_samples_from_its_first_moment_to_the_one_before_its_last() {
        let window = Window::new(Seconds(1.0), Some(Seconds(1.5)));
        let stretch = |first_s: f64| Stretch {
            first_s,
            step_s: 0.1,
            count: 10,
        };
        assert_eq!(window.within(stretch(0.0)), 10..10);
        assert_eq!(window.within(stretch(0.55)), 5..10);
        assert_eq!(window.within(stretch(0.9)), 1..6);
        assert_eq!(window.within(stretch(2.0)), 0..0);
        assert_eq!((window.holds(1.0), window.holds(1.5)), (true, false));
    }

    #[test]
    fn a_change_runs_evenly_from_the_beginning_and_is_gone_after_the_end() {
        let window = Window::new(Seconds(10.0), Some(Seconds(30.0)));
        let at = |at_s| window.progress(at_s, Seconds(10.0));
        assert_eq!(
            [at(9.9), at(15.0), at(25.0), at(30.0)],
            [0.0, 0.5, 1.0, 0.0]
        );
        assert_eq!(window.progress(10.0, Seconds(0.0)), 1.0);
    }
}
