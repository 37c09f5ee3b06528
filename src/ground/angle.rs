//! Axes and azimuths, and the only place where angles are converted.
//!
//! Azimuths run clockwise from true north, east = 90°. An axis has no sense, so it lives in
//! [0°, 180°); its statistics are done on the doubled angle.

use serde::{Deserialize, Serialize};

/// An undirected line on the ground: degrees clockwise from true north in [0, 180).
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Serialize, Deserialize)]
#[serde(from = "f64", into = "f64")]
pub struct Axis(f64);

/// A direction on the ground: degrees clockwise from true north in [0, 360).
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Serialize, Deserialize)]
#[serde(from = "f64", into = "f64")]
pub struct Azimuth(f64);

impl Axis {
    /// The axis at `deg` degrees; any finite value is folded into [0, 180).
    pub fn from_deg(deg: f64) -> Self {
        Self(fold(deg, 180.0))
    }

    /// The axis whose doubled angle is `phi` radians (clockwise from north, like everything here).
    pub fn from_doubled(phi: f64) -> Self {
        Self::from_deg(0.5 * phi.to_degrees())
    }

    /// The axis along the ground vector (east, north).
    pub fn from_east_north(east: f64, north: f64) -> Self {
        Self::from_deg(east.atan2(north).to_degrees())
    }

    /// Degrees in [0, 180).
    pub fn deg(self) -> f64 {
        self.0
    }

    /// Radians in [0, π).
    pub fn rad(self) -> f64 {
        self.0.to_radians()
    }

    /// The doubled angle 2θ in radians, in [0, 2π): what axial statistics run on.
    pub fn doubled(self) -> f64 {
        2.0 * self.rad()
    }

    /// The axis at right angles.
    pub fn perpendicular(self) -> Self {
        self.rotated(90.0)
    }

    /// The axis turned clockwise by `deg`.
    pub fn rotated(self, deg: f64) -> Self {
        Self::from_deg(self.0 + deg)
    }

    /// The acute angle between two axes, degrees in [0, 90].
    pub fn separation(self, other: Self) -> f64 {
        self.turn_from(other).abs()
    }

    /// The signed turn from `other` to this axis, degrees in [−90, 90), clockwise positive.
    pub fn turn_from(self, other: Self) -> f64 {
        fold(self.0 - other.0 + 90.0, 180.0) - 90.0
    }

    /// One of the two directions along the axis, the one in [0°, 180°).
    pub fn azimuth(self) -> Azimuth {
        Azimuth::from_deg(self.0)
    }
}

impl Azimuth {
    /// The azimuth at `deg` degrees; any finite value is folded into [0, 360).
    pub fn from_deg(deg: f64) -> Self {
        Self(fold(deg, 360.0))
    }

    /// The azimuth of the ground vector (east, north).
    pub fn from_east_north(east: f64, north: f64) -> Self {
        Self::from_deg(east.atan2(north).to_degrees())
    }

    /// Degrees in [0, 360).
    pub fn deg(self) -> f64 {
        self.0
    }

    /// Radians in [0, 2π).
    pub fn rad(self) -> f64 {
        self.0.to_radians()
    }

    /// Unit vector (east, north).
    pub fn east_north(self) -> (f64, f64) {
        let (sin, cos) = self.rad().sin_cos();
        (sin, cos)
    }

    /// The opposite direction: from where it blows ↔ toward where it carries.
    pub fn reversed(self) -> Self {
        self.rotated(180.0)
    }

    /// Turned clockwise by `deg`.
    pub fn rotated(self, deg: f64) -> Self {
        Self::from_deg(self.0 + deg)
    }

    /// The undirected line along this direction.
    pub fn axis(self) -> Axis {
        Axis::from_deg(self.0)
    }

    /// The signed turn from `other` to this azimuth, degrees in [−180, 180), clockwise positive.
    pub fn turn_from(self, other: Self) -> f64 {
        fold(self.0 - other.0 + 180.0, 360.0) - 180.0
    }
}

impl From<f64> for Axis {
    fn from(deg: f64) -> Self {
        Self::from_deg(deg)
    }
}

impl From<Axis> for f64 {
    fn from(axis: Axis) -> Self {
        axis.0
    }
}

impl From<f64> for Azimuth {
    fn from(deg: f64) -> Self {
        Self::from_deg(deg)
    }
}

impl From<Azimuth> for f64 {
    fn from(azimuth: Azimuth) -> Self {
        azimuth.0
    }
}

/// `deg` modulo `period`, never equal to `period` (rounding of a tiny negative value would be).
fn fold(deg: f64, period: f64) -> f64 {
    let folded = deg.rem_euclid(period);
    if folded >= period { 0.0 } else { folded }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn a_tiny_negative_angle_folds_to_zero_not_to_the_period() {
        assert_eq!(Axis::from_deg(-1e-18).deg(), 0.0);
        assert_eq!(Azimuth::from_deg(-1e-18).deg(), 0.0);
    }

    #[test]
    fn east_is_ninety() {
        assert_eq!(Azimuth::from_east_north(1.0, 0.0).deg(), 90.0);
        assert_eq!(Axis::from_east_north(-1.0, 0.0).deg(), 90.0);
    }

    proptest! {
        #[test]
        fn axes_ignore_sense_and_separate_symmetrically(a in -720.0..720.0f64, b in -720.0..720.0f64) {
            let (p, q) = (Axis::from_deg(a), Axis::from_deg(b));
            prop_assert!(p.separation(Axis::from_deg(a + 180.0)) < 1e-9);
            prop_assert!((p.separation(q) - q.separation(p)).abs() < 1e-9);
            prop_assert!(p.separation(q) <= 90.0);
            prop_assert!(q.rotated(p.turn_from(q)).separation(p) < 1e-9);
            prop_assert!(Axis::from_doubled(p.doubled()).separation(p) < 1e-9);
        }
    }
}
