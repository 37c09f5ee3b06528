//! The concentration κ of a von Mises distribution from the resultant: the estimators that published
//! sources disagree about, each under its name.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::bessel::{inverse_ratio, ratio, ratio_slope};
use crate::numeric::root::brent;

use super::sources::{FISHER, at};

pub static METHOD: Method = Method {
    id: "axial.kappa",
    name: "Von Mises concentration",
    question: "How concentrated are the axes, as one number a model can use?",
    formula: "I₁(κ)/I₀(κ) = R̄; for n ≤ 15, κ* = max(κ − 2/(nκ), 0) below 2, else (n − 1)³κ/(n³ + n)",
    symbols: &[
        Symbol { symbol: "R̄", meaning: "mean resultant length of the doubled angle", unit: "1" },
        Symbol { symbol: "n", meaning: "number of independent axes", unit: "1" },
        Symbol { symbol: "κ", meaning: "concentration of the doubled angle, never halved", unit: "1" },
    ],
    assumptions: &["Doubled angles are von Mises with one mode."],
    limits: &[
        "The bias corrections differ by 10 % at n = 30: quote the estimator with the number.",
        "The piecewise approximation is up to 0.7 % low.",
        "Values above 10⁶ are reported as 10⁶.",
    ],
    sources: &[
        at(FISHER, "eq. 4.40 and 4.41"),
        Source {
            key: "best1981",
            authors: "Best, D. J.; Fisher, N. I.",
            year: 1981,
            title: "The bias of the maximum likelihood estimators of the von Mises–Fisher concentration parameters",
            published: "Communications in Statistics – Simulation and Computation 10, 493–502",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "schou1978",
            authors: "Schou, G.",
            year: 1978,
            title: "Estimation of the concentration parameter in von Mises–Fisher distributions",
            published: "Biometrika 65, 369–377",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Which estimator of κ.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kappa {
    /// Exact maximum likelihood.
    MaximumLikelihood,
    /// Fisher's piecewise approximation to it.
    Piecewise,
    /// Bias-corrected after Best and Fisher, from the maximum likelihood value.
    BestFisher,
    /// Marginal maximum likelihood after Schou.
    Schou,
}

impl Kappa {
    /// The name printed beside the number.
    pub fn name(self) -> &'static str {
        match self {
            Self::MaximumLikelihood => "maximum likelihood",
            Self::Piecewise => "piecewise approximation",
            Self::BestFisher => "Best–Fisher bias-corrected",
            Self::Schou => "Schou marginal likelihood",
        }
    }

    /// The estimator recommended for `n` independent axes: Best–Fisher up to 15, else maximum
    /// likelihood.
    pub fn recommended(n: f64) -> Self {
        if n <= 15.0 { Self::BestFisher } else { Self::MaximumLikelihood }
    }

    /// κ of the circle angle for the mean resultant length `mean_length` of `n` angles.
    pub fn of(self, mean_length: f64, n: f64) -> f64 {
        match self {
            Self::MaximumLikelihood => inverse_ratio(mean_length),
            Self::Piecewise => piecewise(mean_length),
            Self::BestFisher => best_fisher(inverse_ratio(mean_length), n),
            Self::Schou => schou(mean_length, n),
        }
    }
}

/// Fisher (1993) eq. 4.40.
pub fn piecewise(r: f64) -> f64 {
    if r < 0.53 {
        2.0 * r + r.powi(3) + 5.0 * r.powi(5) / 6.0
    } else if r < 0.85 {
        -0.4 + 1.39 * r + 0.43 / (1.0 - r)
    } else {
        1.0 / (r.powi(3) - 4.0 * r * r + 3.0 * r)
    }
}

/// Fisher (1993) eq. 4.41: the bias of `kappa` for `n` angles taken off.
pub fn best_fisher(kappa: f64, n: f64) -> f64 {
    // κ < 2: max(κ − 2/(nκ), 0); κ ≥ 2: (n − 1)³κ/(n³ + n)
    if kappa <= 0.0 {
        0.0
    } else if kappa < 2.0 {
        (kappa - 2.0 / (n * kappa)).max(0.0)
    } else {
        (n - 1.0).max(0.0).powi(3) * kappa / (n.powi(3) + n)
    }
}

/// A(κ) = R̄ A(κR), and κ = 0 where R² < n.
fn schou(mean_length: f64, n: f64) -> f64 {
    let length = n * mean_length;
    if length * length <= n {
        return 0.0;
    }
    let upper = inverse_ratio(mean_length);
    brent(|kappa| ratio(kappa) - mean_length * ratio(kappa * length), 1e-6, upper, 1e-12 * upper)
        .unwrap_or(0.0)
}

/// Large-sample standard errors (of the mean circle angle in radians, of κ) for `n` independent
/// angles: 1/√(nκA) and 1/√(n(1 − A² − A/κ)). The first is infinite at κ = 0.
pub fn standard_errors(kappa: f64, n: f64) -> (f64, f64) {
    ((n * kappa * ratio(kappa)).sqrt().recip(), (n * ratio_slope(kappa)).sqrt().recip())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn every_estimator_tends_to_maximum_likelihood_for_many_angles() {
        for r in [0.2, 0.6, 0.95] {
            let ml = Kappa::MaximumLikelihood.of(r, 1e7);
            for other in [Kappa::BestFisher, Kappa::Schou] {
                assert_close!(other.of(r, 1e7) / ml, 1.0, 1e-5, "{} at {r}", other.name());
            }
            assert_close!(Kappa::Piecewise.of(r, 1e7) / ml, 1.0, 0.01, "piecewise at {r}");
        }
    }

    #[test]
    fn no_agreement_is_no_concentration() {
        assert_eq!(Kappa::Schou.of(0.1, 20.0), 0.0);
        assert_eq!(Kappa::BestFisher.of(0.0, 20.0), 0.0);
        assert_eq!(Kappa::MaximumLikelihood.of(1.0, 5.0), 1e6);
    }
}
