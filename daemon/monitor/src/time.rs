//! The two time axes, as types that cannot be mixed up.
//!
//! [`Arrival`] is our own stamp: it never decreases, a step of the wall clock becomes an input.
//! [`SignalTime`] is what the sensor says. [`Span`] is a length on either axis. All in ns;
//! instants count from 1970-01-01 UTC and hold until the year 2262.

/// Nanoseconds in one second.
pub const SECOND: i64 = 1_000_000_000;

/// A length of time, ns; never negative.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Span(i64);

impl Span {
    /// No time at all.
    pub const ZERO: Self = Self(0);

    /// A span of `ns` nanoseconds; a negative one becomes zero.
    pub const fn from_ns(ns: i64) -> Self {
        Self(if ns < 0 { 0 } else { ns })
    }

    /// A span of whole seconds.
    pub const fn from_secs(seconds: i64) -> Self {
        Self::from_ns(seconds.saturating_mul(SECOND))
    }

    /// A span of `seconds`, to the nearest nanosecond; negative or not a number becomes zero.
    pub fn from_secs_f64(seconds: f64) -> Self {
        Self::from_ns((seconds * SECOND as f64).round() as i64)
    }

    /// Length in ns.
    pub const fn ns(self) -> i64 {
        self.0
    }

    /// Length in seconds.
    pub fn secs(self) -> f64 {
        self.0 as f64 / SECOND as f64
    }

    /// Both together, saturating.
    pub const fn plus(self, other: Self) -> Self {
        Self(self.0.saturating_add(other.0))
    }

    /// `times` of it, saturating.
    pub const fn times(self, times: i64) -> Self {
        Self::from_ns(self.0.saturating_mul(times))
    }
}

macro_rules! instant {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub struct $name(i64);

        impl $name {
            /// The instant `ns` nanoseconds after 1970-01-01 UTC.
            pub const fn from_ns(ns: i64) -> Self {
                Self(ns)
            }

            /// Nanoseconds since 1970-01-01 UTC.
            pub const fn ns(self) -> i64 {
                self.0
            }

            /// The instant `span` later, saturating.
            pub const fn plus(self, span: Span) -> Self {
                Self(self.0.saturating_add(span.ns()))
            }

            /// The instant `span` earlier, saturating.
            pub const fn minus(self, span: Span) -> Self {
                Self(self.0.saturating_sub(span.ns()))
            }

            /// How long after `earlier` this is; zero when it is not after it.
            pub const fn since(self, earlier: Self) -> Span {
                Span::from_ns(self.0.saturating_sub(earlier.0))
            }
        }
    };
}

instant! {
    /// When the daemon stamped an input. Late, missing, shelving, expiry and grace go by it.
    Arrival
}
instant! {
    /// When the samples were taken, by the sensor's word. Readings, persistence and clearing go by it.
    SignalTime
}

impl SignalTime {
    /// The end of the reading this instant lies in: the next whole multiple of `every` after it.
    ///
    /// An instant on a multiple belongs to the reading it begins.
    pub const fn next_multiple(self, every: Span) -> Self {
        let every = if every.ns() < 1 { 1 } else { every.ns() };
        Self(
            self.0
                .div_euclid(every)
                .saturating_add(1)
                .saturating_mul(every),
        )
    }
}

impl Arrival {
    /// The same instant on the other axis, for a sensor that has no clock of its own.
    pub const fn as_signal_time(self) -> SignalTime {
        SignalTime(self.0)
    }
}

#[cfg(test)]
mod tests {
    use super::{SECOND, SignalTime, Span};

    #[test]
    fn readings_end_on_absolute_multiples_before_and_after_the_epoch() {
        let ten = Span::from_secs(10);
        let next = |s: i64| SignalTime::from_ns(s * SECOND).next_multiple(ten).ns() / SECOND;
        assert_eq!(
            [next(0), next(9), next(10), next(-1), next(-10)],
            [10, 10, 20, 0, 0]
        );
    }
}
