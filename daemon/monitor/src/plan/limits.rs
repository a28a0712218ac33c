//! Absolute limits of a watch, in the unit of its measure.

use alloc::{format, vec::Vec};

use super::fault::{Code, Part, PlanFault};

/// One limit, in the unit of the measure it is set on; finite and above zero.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Limit(f64);

impl Limit {
    /// The limit's value.
    pub const fn value(self) -> f64 {
        self.0
    }
}

/// The limits of one watch: at least one of alert and danger, alert below danger, and a deadband.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limits {
    alert: Option<Limit>,
    danger: Option<Limit>,
    deadband: f64,
}

impl Limits {
    /// Checks and keeps the limits; `deadband` is how far below a limit a value must fall to be back, in the same unit.
    ///
    /// # Errors
    /// No limit at all, a limit that is not finite and above zero, danger not above alert, or a
    /// deadband that is negative or reaches the lowest limit.
    pub fn new(
        alert: Option<f64>,
        danger: Option<f64>,
        deadband: f64,
    ) -> Result<Self, Vec<PlanFault>> {
        let mut faults = Vec::new();
        for (key, limit) in [("alert", alert), ("danger", danger)] {
            if let Some(value) = limit
                && !(value.is_finite() && value > 0.0)
            {
                faults.push(PlanFault {
                    code: Code::OutOfRange,
                    part: Part::Own,
                    key,
                    read: format!("{value}"),
                    allowed: "a number above 0".into(),
                });
            }
        }
        let lowest = match (alert, danger) {
            (None, None) => {
                faults.push(PlanFault {
                    code: Code::NotThere,
                    part: Part::Own,
                    key: "alert",
                    read: "neither alert nor danger".into(),
                    allowed: "at least one of the two".into(),
                });
                f64::INFINITY
            }
            (Some(alert), Some(danger)) => {
                if danger <= alert {
                    faults.push(PlanFault {
                        code: Code::Contradiction,
                        part: Part::Own,
                        key: "danger",
                        read: format!("{danger}"),
                        allowed: format!("above alert = {alert}"),
                    });
                }
                alert.min(danger)
            }
            (Some(only), None) | (None, Some(only)) => only,
        };
        if !(deadband.is_finite() && (0.0..lowest).contains(&deadband)) {
            faults.push(PlanFault {
                code: Code::OutOfRange,
                part: Part::Own,
                key: "deadband",
                read: format!("{deadband}"),
                allowed: format!("0 or more, below the lowest limit {lowest}"),
            });
        }
        if faults.is_empty() {
            Ok(Self {
                alert: alert.map(Limit),
                danger: danger.map(Limit),
                deadband,
            })
        } else {
            Err(faults)
        }
    }

    /// The alert limit.
    pub const fn alert(&self) -> Option<Limit> {
        self.alert
    }

    /// The danger limit.
    pub const fn danger(&self) -> Option<Limit> {
        self.danger
    }

    /// How far below a limit a value must fall to be back.
    pub const fn deadband(&self) -> f64 {
        self.deadband
    }
}
