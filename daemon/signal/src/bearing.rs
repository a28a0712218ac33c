//! Defect frequencies of a rolling bearing as orders of the shaft, outer ring fixed.
//!
//! In: number of rolling elements, element and pitch diameter in one unit, contact angle in degrees.
//! Out: orders (multiples of the shaft's speed): outer ring, inner ring, cage, rolling element.
//! With r = d/D cos φ: outer Z/2 (1 − r), inner Z/2 (1 + r), cage (1 − r)/2, element D/d (1 − r²),
//! which is twice the spin: a defect on an element strikes both rings each turn.
//! Source: Randall and Antoni, MSSP 25 (2011) 485-520. Known error: slip moves real lines by 1-2 %,
//! and makers differ by 0.35 % in geometry for one size, so search within a tolerance.
//! Checked by `tests/accuracy/bearings.rs` against published data-set figures.

use core::fmt;

/// Why a geometry cannot be a bearing's.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum GeometryFault {
    /// Fewer than three rolling elements, or more than 200.
    Elements {
        /// Elements stated.
        elements: u32,
    },
    /// A diameter is not positive, or the element does not fit the pitch circle.
    Diameters {
        /// Element diameter stated.
        element: f64,
        /// Pitch diameter stated.
        pitch: f64,
    },
    /// The elements overlap on the pitch circle.
    Crowded {
        /// Elements stated.
        elements: u32,
        /// The most that fit.
        fit: u32,
    },
    /// The contact angle is not within 0 to below 90 degrees.
    Angle {
        /// Angle stated, degrees.
        degrees: f64,
    },
}

impl fmt::Display for GeometryFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            GeometryFault::Elements { elements } => {
                write!(
                    f,
                    "bearing with {elements} rolling elements; state 3 to 200, one row only"
                )
            }
            GeometryFault::Diameters { element, pitch } => write!(
                f,
                "element diameter {element} and pitch diameter {pitch} make no bearing; state both in one unit, the element below half the pitch"
            ),
            GeometryFault::Crowded { elements, fit } => write!(
                f,
                "{elements} elements overlap on the pitch circle, at most {fit} fit; count one row only"
            ),
            GeometryFault::Angle { degrees } => {
                write!(f, "contact angle {degrees} degrees; state 0 to below 90")
            }
        }
    }
}

impl core::error::Error for GeometryFault {}

/// Defect orders of one bearing: multiples of shaft speed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct BearingOrders {
    /// Passing of the elements over a point of the outer ring (BPFO).
    pub outer: f64,
    /// Passing of the elements over a point of the inner ring (BPFI).
    pub inner: f64,
    /// Turning of the cage (FTF).
    pub cage: f64,
    /// Strikes of a point of an element on both rings: twice its spin (2×BSF).
    pub element: f64,
}

impl BearingOrders {
    /// Orders from the geometry; both diameters in one unit, the angle in degrees.
    ///
    /// Fails on a geometry no bearing has, among them two rows counted as one.
    pub fn from_geometry(
        elements: u32,
        element: f64,
        pitch: f64,
        angle_deg: f64,
    ) -> Result<Self, GeometryFault> {
        if !(3..=200).contains(&elements) {
            return Err(GeometryFault::Elements { elements });
        }
        if !(element.is_finite() && pitch.is_finite() && element > 0.0 && element < 0.5 * pitch) {
            return Err(GeometryFault::Diameters { element, pitch });
        }
        if !(0.0..90.0).contains(&angle_deg) {
            return Err(GeometryFault::Angle { degrees: angle_deg });
        }
        // Chord between neighbouring centres: pitch · sin(π/Z), at least one element's diameter.
        let fit = (core::f64::consts::PI / (element / pitch).asin()).floor() as u32;
        if elements > fit {
            return Err(GeometryFault::Crowded { elements, fit });
        }
        let z = f64::from(elements);
        let r = element / pitch * angle_deg.to_radians().cos();
        Ok(BearingOrders {
            outer: 0.5 * z * (1.0 - r),
            inner: 0.5 * z * (1.0 + r),
            cage: 0.5 * (1.0 - r),
            element: pitch / element * (1.0 - r * r),
        })
    }

    /// Spin of an element (BSF): half its strikes.
    pub fn spin(&self) -> f64 {
        0.5 * self.element
    }

    /// Departure of stated orders from the sum rule outer + inner = number of elements.
    ///
    /// Zero for orders from a geometry. Orders copied from a catalogue with more than about 0.02 here
    /// carry a misprint.
    pub fn sum_rule_error(&self) -> f64 {
        let sum = self.outer + self.inner;
        (sum - sum.round()).abs()
    }
}
