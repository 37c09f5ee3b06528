//! Closed forms for radar speckle: its moments, the number of looks, and two classic filters.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::gamma::{digamma, trigamma};
use crate::numeric::root::brent;

/// The record of the speckle statistics.
pub static METHOD: Method = Method {
    id: "orientation.speckle",
    name: "Speckle statistics",
    question: "How rough is a radar tone by nature, and how many looks were averaged?",
    formula: "ENL = ⟨I⟩²/var I, or ψ′(L) = var ln I;  CV of amplitude = √(L Γ(L)²/Γ(L + ½)² − 1);  ⟨ln I⟩ − ln⟨I⟩ = ψ(L) − ln L",
    symbols: &[
        Symbol { symbol: "I", meaning: "intensity on homogeneous ground", unit: "1" },
        Symbol { symbol: "L", meaning: "number of looks", unit: "1" },
        Symbol { symbol: "ψ, ψ′", meaning: "digamma and trigamma functions", unit: "1" },
    ],
    assumptions: &["fully developed speckle: Gamma-distributed intensity", "homogeneous ground"],
    limits: &[
        "resampled products have correlated pixels: the number of looks stays right, the count of pixels does not",
        "adaptive filters imprint the shape of their window: trends are taken from unfiltered logarithms",
    ],
    sources: &[
        Source {
            key: "oliver2004",
            authors: "Oliver, C.; Quegan, S.",
            year: 2004,
            title: "Understanding Synthetic Aperture Radar Images",
            published: "SciTech Publishing",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "lee1980",
            authors: "Lee, J.-S.",
            year: 1980,
            title: "Digital image enhancement and noise filtering by use of local statistics",
            published: "IEEE Transactions on Pattern Analysis and Machine Intelligence 2, 165",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "lopes1990",
            authors: "Lopes, A.; Nezry, E.; Touzi, R.; Laur, H.",
            year: 1990,
            title: "Maximum a posteriori speckle filtering and first order texture models in SAR images",
            published: "Proc. IGARSS 1990, 2409",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Coefficient of variation of amplitude √I for `looks` averaged intensities.
pub fn amplitude_variation(looks: f64) -> f64 {
    // E[√I] = Γ(L + ½) / (√L Γ(L)) for ⟨I⟩ = 1.
    let ln_gamma = statrs::function::gamma::ln_gamma;
    let mean = (ln_gamma(looks + 0.5) - ln_gamma(looks)).exp() / looks.sqrt();
    (1.0 / (mean * mean) - 1.0).sqrt()
}

/// (bias, variance) of ln I against ln⟨I⟩: ψ(L) − ln L and ψ′(L).
pub fn logarithm_moments(looks: f64) -> (f64, f64) {
    (digamma(looks) - looks.ln(), trigamma(looks))
}

/// Equivalent number of looks from the variance of ln I: ψ′(L) = variance. `None` outside 0.01 … 10⁶ looks.
pub fn looks_of_logarithm(variance: f64) -> Option<f64> {
    brent(|ln_l| trigamma(ln_l.exp()) - variance, 0.01f64.ln(), 1e6f64.ln(), 1e-12).map(f64::exp)
}

/// Weight of the pixel against the local mean, Î = m + w (I − m): w = 1 − Cu²/Ci², in [0, 1].
/// `local` is Ci², the squared variation coefficient in the window, `speckle` Cu² = 1/L.
pub fn lee_weight(local: f64, speckle: f64) -> f64 {
    (1.0 - speckle / local).clamp(0.0, 1.0)
}

/// The other published form: w = (Ci² − Cu²)/(Ci² (1 + Cu²)).
pub fn lee_weight_normalised(local: f64, speckle: f64) -> f64 {
    ((local - speckle) / (local * (1.0 + speckle))).clamp(0.0, 1.0)
}

/// Gamma maximum a posteriori estimate of the reflectivity behind intensity `value`, local mean `mean`, `looks`
/// looks and Ci² = `local`: the mean where Ci ≤ Cu, the value itself where Ci ≥ √2 Cu.
pub fn gamma_map(value: f64, mean: f64, looks: f64, local: f64) -> f64 {
    let speckle = 1.0 / looks;
    if local <= speckle {
        return mean;
    }
    // The published upper bound is Ci = √2·Cu for amplitude; for intensity, Ci² = 1 + 2/L.
    if local >= 1.0 + 2.0 * speckle {
        return value;
    }
    // α = (1 + Cu²)/(Ci² − Cu²), b = α − L − 1.
    let alpha = (1.0 + speckle) / (local - speckle);
    let b = alpha - looks - 1.0;
    (b * mean + (mean * mean * b * b + 4.0 * alpha * looks * value * mean).sqrt()) / (2.0 * alpha)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn looks_come_back_from_the_variance_of_the_logarithm() {
        for looks in [0.7, 1.0, 3.0, 40.0] {
            let (_, variance) = logarithm_moments(looks);
            crate::assert_close!(looks_of_logarithm(variance).unwrap(), looks, 1e-6 * looks, "looks");
        }
    }

    #[test]
    fn the_filters_end_at_the_mean_and_at_the_value() {
        assert_eq!(gamma_map(2.0, 1.0, 4.0, 0.2), 1.0);
        assert_eq!(gamma_map(2.0, 1.0, 4.0, 2.0), 2.0);
        assert_eq!(lee_weight(0.1, 0.25), 0.0);
    }
}
