//! How well a predicted trend meets the measured one, against an axis drawn at random.

use std::f64::consts::TAU;

use crate::ground::{Axis, Method, Read, Source, Symbol};
use crate::numeric::bessel::{inverse_ratio, ln_i0, ratio};

/// The weighing of theories.
pub const METHOD: Method = Method {
    id: "alignment.bayes-factor",
    name: "Bayes factors of alignment theories",
    question: "Which theory does the measured trend speak for, and how loudly?",
    formula: "f(D) = I₀(√(κ_o² + κ_p² + 2 κ_o κ_p cos D)) / (2π I₀(κ_o) I₀(κ_p));  \
              BF = 2π [(1 − ε) mean_d f(D_d) + ε/(2π)];  posterior ∝ prior × BF",
    symbols: &[
        Symbol { symbol: "D", meaning: "doubled angle between measured and predicted trend", unit: "rad" },
        Symbol {
            symbol: "κ_o",
            meaning: "concentration of the measured mean trend, doubled angle",
            unit: "1",
        },
        Symbol {
            symbol: "κ_p",
            meaning: "concentration of the theory's own error, doubled angle",
            unit: "1",
        },
        Symbol { symbol: "ε", meaning: "share of each prediction spread over all axes", unit: "1" },
        Symbol { symbol: "BF", meaning: "Bayes factor against a random axis", unit: "1" },
    ],
    assumptions: &[
        "Von Mises errors of the doubled angle",
        "Each draw of the wind record is an equally likely prediction",
        "A right theory may still miss by the model error",
    ],
    limits: &[
        "Without the uniform share ε a small misfit would count for billions; with it the factor stays above ε",
        "The verdict is among the theories listed; the truth may be none of them",
    ],
    sources: &[
        Source {
            key: "mardia2000",
            authors: "Mardia, K. V.; Jupp, P. E.",
            year: 2000,
            title: "Directional Statistics",
            published: "Wiley",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "kass1995",
            authors: "Kass, R. E.; Raftery, A. E.",
            year: 1995,
            title: "Bayes factors",
            published: "Journal of the American Statistical Association 90, 773–795",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-likelihood",
            authors: "Ventifact",
            year: 2026,
            title: "Closed marginal likelihood of two von Mises axes",
            published: "derived here; equals quadrature",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Concentration of the doubled angle for an axial standard deviation in degrees: R̄ = e^{−2s²},
/// κ = A⁻¹(R̄).
pub fn kappa_of_axial_sd(sd_deg: f64) -> f64 {
    inverse_ratio(mean_length_of_axial_sd(sd_deg))
}

/// Mean resultant length of the doubled angle for an axial standard deviation in degrees.
pub fn mean_length_of_axial_sd(sd_deg: f64) -> f64 {
    (-2.0 * sd_deg.to_radians().powi(2)).exp()
}

/// The axial standard deviation, degrees, of a concentration of the doubled angle.
pub fn axial_sd_of_kappa(kappa: f64) -> f64 {
    (-0.5 * ratio(kappa).ln()).max(0.0).sqrt().to_degrees()
}

/// Density (per radian of doubled angle) of a measured axis `separation` degrees from the
/// predicted one, with both concentrations.
pub fn density(separation: f64, kappa_observed: f64, kappa_predicted: f64) -> f64 {
    let (o, p) = (kappa_observed, kappa_predicted);
    let doubled = 2.0 * separation.to_radians();
    // √(κo² + κp² + 2κoκp cos D), written so that it does not cancel at D = π.
    let joint = ((o - p).powi(2) + 4.0 * o * p * (0.5 * doubled).cos().powi(2)).sqrt();
    (ln_i0(joint) - ln_i0(o) - ln_i0(p)).exp() / TAU
}

/// What the weighing rests on.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Weighing {
    pub trend: Axis,
    pub kappa_observed: f64,
    pub kappa_model: f64,
    /// Share of the prediction spread over all axes, in (0, 1].
    pub tail_share: f64,
}

impl Weighing {
    /// ln of the Bayes factor against a random axis. Each draw predicts one axis or several that
    /// tie; a draw that predicts none counts as random.
    pub fn ln_bayes_factor(&self, draws: &[Vec<Axis>]) -> f64 {
        let of_draw = |axes: &Vec<Axis>| {
            if axes.is_empty() {
                return 1.0 / TAU;
            }
            let sum: f64 = axes
                .iter()
                .map(|axis| density(axis.separation(self.trend), self.kappa_observed, self.kappa_model))
                .sum();
            sum / axes.len() as f64
        };
        let mean = draws.iter().map(of_draw).sum::<f64>() / draws.len().max(1) as f64;
        (TAU * ((1.0 - self.tail_share) * mean + self.tail_share / TAU)).ln()
    }

    /// The greatest ln Bayes factor this trend could give any theory: that of a prediction which
    /// meets it exactly in every draw.
    pub fn greatest(&self) -> f64 {
        self.ln_bayes_factor(&[vec![self.trend]])
    }
}

/// Posterior weights from prior weights and ln Bayes factors; all zero when no prior is.
pub fn posteriors(priors: &[f64], ln_factors: &[f64]) -> Vec<f64> {
    let greatest = ln_factors.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let raw: Vec<f64> =
        priors.iter().zip(ln_factors).map(|(p, ln)| p.max(0.0) * (ln - greatest).exp()).collect();
    let sum: f64 = raw.iter().sum();
    raw.iter().map(|r| if sum > 0.0 { r / sum } else { 0.0 }).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_density_sums_to_one() {
        for (o, p) in [(0.0, 3.0), (20.0, 30.0), (4000.0, 33.0)] {
            let n = 20_000;
            let sum: f64 = (0..n).map(|k| density(90.0 * (f64::from(k) + 0.5) / f64::from(n), o, p)).sum();
            crate::assert_close!(sum / f64::from(n) * TAU, 1.0, 1e-6, "κ {o}, {p}");
        }
    }

    #[test]
    fn a_far_prediction_costs_no_more_than_the_tail() {
        let weighing =
            Weighing { trend: Axis::from_deg(0.0), kappa_observed: 1e5, kappa_model: 33.0, tail_share: 0.05 };
        crate::assert_close!(
            weighing.ln_bayes_factor(&[vec![Axis::from_deg(90.0)]]),
            0.05f64.ln(),
            1e-9,
            "floor"
        );
        assert!(weighing.greatest() < 3.0);
        crate::assert_close!(weighing.ln_bayes_factor(&[Vec::new()]), 0.0, 1e-12, "no prediction is random");
    }

    #[test]
    fn posteriors_are_shares() {
        let got = posteriors(&[1.0, 1.0, 2.0], &[0.0, 2f64.ln(), 0.0]);
        for (g, w) in got.iter().zip([0.2, 0.4, 0.4]) {
            crate::assert_close!(*g, w, 1e-12, "posterior");
        }
    }

    #[test]
    fn spread_and_concentration_undo_each_other() {
        for sd in [0.5, 5.0, 20.0] {
            crate::assert_close!(axial_sd_of_kappa(kappa_of_axial_sd(sd)), sd, 1e-6 * sd, "sd");
        }
    }
}
