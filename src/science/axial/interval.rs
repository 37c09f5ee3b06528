//! Confidence intervals of the mean direction for independent angles.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::sum;

use super::mean::Resultant;
use super::sources::{FISHER, ZAR, at};

pub static METHOD: Method = Method {
    id: "axial.interval",
    name: "Interval of the mean axis",
    question: "Within what angle is the mean axis known?",
    formula: "δ = ⟨sin²(φ − φ̄)⟩/R̄²; half = ½ asin(q √(δ/n))",
    symbols: &[
        Symbol {
            symbol: "δ", meaning: "circular dispersion (1 − ⟨cos 2(φ − φ̄)⟩)/(2R̄²)", unit: "1"
        },
        Symbol {
            symbol: "n",
            meaning: "number of independent axes, the effective number for nodes",
            unit: "1",
        },
        Symbol {
            symbol: "q",
            meaning: "normal quantile; Student's where n was estimated from the data",
            unit: "1",
        },
    ],
    assumptions: &["One preferred trend; no shape is assumed."],
    limits: &[
        "For n ≥ 25 independent axes; fewer need the bootstrap.",
        "Where q √(δ/n) passes 1 the interval is every axis.",
        "The χ² form is a quarter too wide as R̄ nears 0.9.",
    ],
    sources: &[
        at(FISHER, "§4.4.4"),
        ZAR,
        Source {
            key: "upton1986",
            authors: "Upton, G. J. G.",
            year: 1986,
            title: "Approximate confidence intervals for the mean direction of a von Mises distribution",
            published: "Biometrika 73, 525–527",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// The circular dispersion δ = (1 − ⟨cos 2(φ − φ̄)⟩)/(2R̄²); infinite for R̄ = 0.
pub fn dispersion(phi: &[f64], weights: Option<&[f64]>) -> f64 {
    let resultant = Resultant::of(phi, weights);
    let mean = resultant.direction();
    // 1 − cos 2x = 2 sin² x, which keeps its digits when the angles agree.
    let [square] = sum::totals(phi.len(), |i| {
        let s = (phi[i] - mean).sin();
        [weights.map_or(1.0, |w| w[i]) * s * s]
    });
    let length = resultant.mean_length();
    if resultant.weight > 0.0 { square / resultant.weight / (length * length) } else { f64::INFINITY }
}

/// Half width (radians of the circle angle) of the interval from the dispersion `delta` and
/// `reach` = q/√n, the quantile over the root of the number of independent angles
/// ([`Number::standard_reach`](super::effective::Number::standard_reach)); `None` when it is the
/// whole circle.
pub fn half_width(delta: f64, reach: f64) -> Option<f64> {
    let sine = reach * delta.sqrt();
    (sine <= 1.0).then(|| sine.asin())
}

/// Half width (radians) by the χ² form for `n` independent von Mises angles; `chi2` is the quantile
/// with one degree of freedom (3.841 for 95 %). `None` when it is the whole circle.
pub fn half_width_chi2(mean_length: f64, n: f64, chi2: f64) -> Option<f64> {
    let r = n * mean_length;
    // R̄ ≤ 0.9: acos(√(2n(2R² − nχ²)/(4n − χ²))/R); above: acos(√(n² − (n² − R²)e^(χ²/n))/R)
    let square = if mean_length <= 0.9 {
        2.0 * n * (2.0 * r * r - n * chi2) / (4.0 * n - chi2)
    } else {
        n * n - (n * n - r * r) * (chi2 / n).exp()
    };
    if square.is_nan() || square < 0.0 || 4.0 * n <= chi2 {
        return None;
    }
    Some((square.sqrt() / r).min(1.0).acos())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn opposite_angles_leave_the_whole_circle() {
        let phi = [0.0, std::f64::consts::PI];
        assert_eq!(half_width(dispersion(&phi, None), 1.96 / 2f64.sqrt()), None);
        assert_eq!(half_width_chi2(0.1, 10.0, 3.841), None);
    }

    #[test]
    fn both_forms_agree_for_moderate_concentration() {
        let phi: Vec<f64> =
            (0..400).map(|i| crate::numeric::tail::normal_quantile((f64::from(i) + 0.5) / 400.0)).collect();
        let r = Resultant::of(&phi, None).mean_length();
        let a = half_width(dispersion(&phi, None), 1.959_964 / 20.0).expect("narrow");
        let b = half_width_chi2(r, 400.0, 3.841_459).expect("narrow");
        assert_close!(a / b, 1.0, 0.04, "dispersion over χ²");
    }

    #[test]
    fn weights_are_repeated_rows() {
        let (phi, w) = ([0.1, 0.7, -0.4], [1.0, 3.0, 2.0]);
        let rows = [0.1, 0.7, 0.7, 0.7, -0.4, -0.4];
        assert_close!(dispersion(&phi, Some(&w)), dispersion(&rows, None), 1e-14, "dispersion");
    }
}
