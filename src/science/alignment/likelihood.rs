//! How well a predicted trend meets the measured one, against an axis drawn at random.

use std::f64::consts::TAU;

use crate::ground::{Axis, Method, Read, Source, Symbol};
use crate::numeric::bessel::{inverse_ratio, ln_i0, ratio};

use super::theory::Prediction;

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
    /// Bayes factor against a random axis of one draw's prediction, the tail included; a draw that
    /// predicts nothing is as good as random.
    pub fn factor(&self, prediction: Option<&Prediction>) -> f64 {
        let Some(prediction) = prediction else { return 1.0 };
        let near = |axis: Axis| density(axis.separation(self.trend), self.kappa_observed, self.kappa_model);
        let mean: f64 = prediction.ways.iter().map(|way| way.share * near(way.axis)).sum();
        (1.0 - self.tail_share) * TAU * mean + self.tail_share
    }
}

/// ln of the Bayes factor of a cloud against random axes. Several trends are judged together by the
/// mean over draws of the product of their factors: the winds of one draw made them all.
pub fn ln_bayes_factor(weighings: &[Weighing], cloud: &[Option<Prediction>]) -> f64 {
    let joint = |prediction: &Option<Prediction>| -> f64 {
        weighings.iter().map(|w| w.factor(prediction.as_ref())).product()
    };
    (cloud.iter().map(joint).sum::<f64>() / cloud.len().max(1) as f64).ln()
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
        let at = |deg: f64| Some(Prediction::of_axis(Axis::from_deg(deg), 1.0));
        let ln = |cloud: &[Option<Prediction>]| ln_bayes_factor(&[weighing], cloud);
        crate::assert_close!(ln(&[at(90.0)]), 0.05f64.ln(), 1e-9, "floor");
        assert!(ln(&[at(0.0)]) < 3.0);
        crate::assert_close!(ln(&[None]), 0.0, 1e-12, "no prediction is random");
        let twice = ln_bayes_factor(&[weighing, weighing], &[at(3.0)]);
        crate::assert_close!(twice, 2.0 * ln(&[at(3.0)]), 1e-9, "two trends by one sure prediction");
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
