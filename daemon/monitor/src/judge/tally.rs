//! How many readings of a point were judged, since the start.

/// The readings of one point by what became of them.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Tally {
    /// Held against the limits, clipped ones included.
    pub judged: u64,
    /// Not judged: the signal is not to be believed.
    pub doubtful: u64,
    /// Not judged: the machine was not known to run all through it.
    pub not_running: u64,
}

impl Tally {
    /// One more reading.
    pub(super) const fn count(&mut self, runs: bool, judged: bool) {
        let place = match (runs, judged) {
            (_, true) => &mut self.judged,
            (true, false) => &mut self.doubtful,
            (false, false) => &mut self.not_running,
        };
        *place = place.saturating_add(1);
    }
}

#[cfg(test)]
mod tests {
    use super::Tally;

    #[test]
    fn each_reading_counts_once_under_what_became_of_it() {
        let mut tally = Tally::default();
        for (runs, judged) in [(true, true), (true, true), (true, false), (false, false)] {
            tally.count(runs, judged);
        }
        assert_eq!(
            tally,
            Tally {
                judged: 2,
                doubtful: 1,
                not_running: 1
            }
        );
    }
}
