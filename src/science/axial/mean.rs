//! Sums of unit vectors on the circle: the mean axis and the resultant length.
//!
//! Everything in this family runs on circle angles φ in radians. For axes φ = 2θ
//! ([`Axis::doubled`]); directions go in as they are.

use crate::ground::{Axis, Method, Symbol};
use crate::numeric::sum;

use super::sources::{FISHER, MARDIA_JUPP};

pub static METHOD: Method = Method {
    id: "axial.mean",
    name: "Mean axis and resultant length",
    question: "Which way do the axes run on the whole, and how much do they agree?",
    formula: "φ = 2θ; C = Σ w cos φ; S = Σ w sin φ; R̄ = √(C² + S²)/Σw; θ̄ = ½ atan2(S, C)",
    symbols: &[
        Symbol { symbol: "θ", meaning: "axis, clockwise from true north", unit: "deg" },
        Symbol { symbol: "w", meaning: "weight of an axis", unit: "1" },
        Symbol { symbol: "R̄", meaning: "mean resultant length of the doubled angle, 0 to 1", unit: "1" },
        Symbol { symbol: "θ̄", meaning: "mean axis", unit: "deg" },
    ],
    assumptions: &["One preferred trend; several trends need the mixture."],
    limits: &["The mean axis is a number even when no trend is preferred: read it with the test."],
    sources: &[FISHER, MARDIA_JUPP],
};

/// The weighted sum of unit vectors.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Resultant {
    /// C = Σ w cos φ.
    pub cos: f64,
    /// S = Σ w sin φ.
    pub sin: f64,
    /// W = Σ w.
    pub weight: f64,
}

impl Resultant {
    /// Sums the circle angles `phi` (radians). `weights`, when given, are as many and ≥ 0.
    pub fn of(phi: &[f64], weights: Option<&[f64]>) -> Self {
        let [cos, sin, weight] = sum::totals(phi.len(), |i| {
            let (s, c) = phi[i].sin_cos();
            let w = weights.map_or(1.0, |w| w[i]);
            [w * c, w * s, w]
        });
        Self { cos, sin, weight }
    }

    /// R = √(C² + S²).
    pub fn length(self) -> f64 {
        self.cos.hypot(self.sin)
    }

    /// R̄ = R/W, in [0, 1]; 0 for no weight.
    pub fn mean_length(self) -> f64 {
        if self.weight > 0.0 { (self.length() / self.weight).min(1.0) } else { 0.0 }
    }

    /// φ̄ = atan2(S, C) in (−π, π]; 0 when the sum vanishes.
    pub fn direction(self) -> f64 {
        self.sin.atan2(self.cos)
    }

    /// The mean axis ½φ̄ of doubled angles.
    pub fn axis(self) -> Axis {
        Axis::from_doubled(self.direction())
    }
}

/// The doubled angles 2θ of axes, radians.
pub fn doubled(axes: &[Axis]) -> Vec<f64> {
    axes.iter().map(|a| a.doubled()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn axes_either_side_of_north_average_to_north() {
        let phi = doubled(&[Axis::from_deg(170.0), Axis::from_deg(10.0)]);
        assert!(Resultant::of(&phi, None).axis().separation(Axis::from_deg(0.0)) < 1e-12);
    }

    proptest! {
        #[test]
        fn weights_are_repeated_rows(rows in prop::collection::vec((0.0..180.0f64, 0u8..4), 2..20)) {
            let phi: Vec<f64> = rows.iter().map(|(a, _)| Axis::from_deg(*a).doubled()).collect();
            let w: Vec<f64> = rows.iter().map(|(_, w)| f64::from(*w)).collect();
            let repeated: Vec<f64> = phi.iter().zip(&rows).flat_map(|(p, (_, w))| vec![*p; usize::from(*w)]).collect();
            let (a, b) = (Resultant::of(&phi, Some(&w)), Resultant::of(&repeated, None));
            prop_assert!((a.cos - b.cos).abs() < 1e-12 && (a.sin - b.sin).abs() < 1e-12 && a.weight == b.weight);
        }

        #[test]
        fn turning_the_axes_turns_the_mean(axes in prop::collection::vec(0.0..60.0f64, 3..20), by in 0.0..180.0f64) {
            let mean = |by: f64| {
                let phi: Vec<f64> = axes.iter().map(|a| Axis::from_deg(a + by).doubled()).collect();
                Resultant::of(&phi, None).axis()
            };
            prop_assert!(mean(by).separation(mean(0.0).rotated(by)) < 1e-9);
        }
    }
}
