//! How far axes scatter about their mean, by named definitions.

use crate::ground::{Method, Symbol};

use super::sources::{FISHER, MARDIA_JUPP};

pub static METHOD: Method = Method {
    id: "axial.spread",
    name: "Axial standard deviation",
    question: "How far do the axes scatter about their mean?",
    formula: "s = ½ √(−2 ln R̄)",
    symbols: &[
        Symbol { symbol: "R̄", meaning: "mean resultant length of the doubled angle", unit: "1" },
        Symbol {
            symbol: "s",
            meaning: "axial standard deviation, half that of the doubled angle",
            unit: "deg",
        },
    ],
    assumptions: &["Equals the usual standard deviation when doubled angles are wrapped normal."],
    limits: &["Another book definition, the angular deviation √(2(1 − R̄)), is smaller: say which is quoted."],
    sources: &[FISHER, MARDIA_JUPP],
};

/// Which definition of spread.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Spread {
    /// √(−2 ln R̄).
    Standard,
    /// √(2(1 − R̄)).
    AngularDeviation,
}

impl Spread {
    /// The spread of the circle angle, radians; infinite for R̄ = 0 by the standard definition.
    pub fn of(self, mean_length: f64) -> f64 {
        match self {
            Self::Standard => (-2.0 * mean_length.ln()).max(0.0).sqrt(),
            Self::AngularDeviation => (2.0 * (1.0 - mean_length)).max(0.0).sqrt(),
        }
    }

    /// The spread of axes, degrees: half that of the doubled angle. `None` where it has no bound.
    pub fn axial_deg(self, mean_length: f64) -> Option<f64> {
        let deg = 0.5 * self.of(mean_length).to_degrees();
        deg.is_finite().then_some(deg)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn wrapped_normal_axes_give_their_own_deviation() {
        // R̄ = exp(−2s²) for axial standard deviation s.
        let s = 12f64.to_radians();
        let length = (-2.0 * s * s).exp();
        assert_close!(Spread::Standard.axial_deg(length).expect("bounded"), 12.0, 1e-10, "spread");
        assert!(Spread::AngularDeviation.of(length) < Spread::Standard.of(length));
        assert_eq!(Spread::Standard.axial_deg(0.0), None);
        assert_eq!(Spread::Standard.axial_deg(1.0), Some(0.0));
    }
}
