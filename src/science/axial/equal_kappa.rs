//! Are several von Mises sets equally concentrated?

use crate::ground::{Method, Symbol};
use crate::numeric::tail::chi2_above;

use super::mean::Resultant;
use super::sources::{MARDIA_JUPP, at};

pub static METHOD: Method = Method {
    id: "axial.equal-kappa",
    name: "Test of equal concentration",
    question: "Are sets of axes equally concentrated?",
    formula: "χ² = Σ wᵢgᵢ² − (Σ wᵢgᵢ)²/Σwᵢ with q − 1 df; R̄ < 0.45: g = asin(√1.5 R̄ᵢ), w = 4(n − 4)/3; \
              R̄ ≤ 0.7: g = asinh((R̄ᵢ − 1.089)/0.258), w = (n − 3)/0.798; above: Bartlett's form on n − R",
    symbols: &[
        Symbol { symbol: "R̄", meaning: "mean resultant length of all axes pooled", unit: "1" },
        Symbol { symbol: "R̄ᵢ", meaning: "mean resultant length of set i", unit: "1" },
    ],
    assumptions: &["Von Mises sets of independent axes."],
    limits: &["The form changes at R̄ = 0.45 and 0.7, with a small jump."],
    sources: &[at(MARDIA_JUPP, "tests of equality of concentration")],
};

/// (χ², p) of samples of circle angles; two or more, each of at least five.
pub fn equal_kappa(samples: &[&[f64]]) -> (f64, f64) {
    let each: Vec<Resultant> = samples.iter().map(|s| Resultant::of(s, None)).collect();
    equal_kappa_of(&each)
}

/// The same from the resultants of the samples; their weights are the numbers of independent angles.
pub fn equal_kappa_of(each: &[Resultant]) -> (f64, f64) {
    let pooled = each.iter().fold(Resultant::default(), |a, r| Resultant {
        cos: a.cos + r.cos,
        sin: a.sin + r.sin,
        weight: a.weight + r.weight,
    });
    let overall = pooled.mean_length();
    let chi2 = if overall < 0.45 {
        stabilised(each, |r| (1.5f64.sqrt() * r).min(1.0).asin(), |n| 4.0 * (n - 4.0) / 3.0)
    } else if overall <= 0.7 {
        stabilised(each, |r| ((r - 1.089) / 0.258).asinh(), |n| (n - 3.0) / 0.798)
    } else {
        bartlett(each)
    };
    (chi2, chi2_above(chi2, each.len() as f64 - 1.0))
}

/// Σ wg² − (Σ wg)²/Σw for a transform g of R̄ that makes the variance 1/w.
fn stabilised(each: &[Resultant], g: impl Fn(f64) -> f64, w: impl Fn(f64) -> f64) -> f64 {
    let (mut weights, mut sum, mut squares) = (0.0, 0.0, 0.0);
    for r in each {
        let (w, g) = (w(r.weight), g(r.mean_length()));
        weights += w;
        sum += w * g;
        squares += w * g * g;
    }
    squares - sum * sum / weights
}

/// [ν ln((N − ΣRᵢ)/ν) − Σ νᵢ ln((nᵢ − Rᵢ)/νᵢ)]/(1 + d), d = (Σ 1/νᵢ − 1/ν)/(3(q − 1)).
fn bartlett(each: &[Resultant]) -> f64 {
    let q = each.len() as f64;
    let n: f64 = each.iter().map(|r| r.weight).sum();
    let free = n - q;
    let lost: f64 = each.iter().map(|r| r.weight - r.length()).sum();
    let d = (each.iter().map(|r| 1.0 / (r.weight - 1.0)).sum::<f64>() - 1.0 / free) / (3.0 * (q - 1.0));
    let own: f64 =
        each.iter().map(|r| (r.weight - 1.0) * ((r.weight - r.length()) / (r.weight - 1.0)).ln()).sum();
    (free * (lost / free).ln() - own) / (1.0 + d)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_form_sees_a_difference_and_none_where_there_is_none() {
        for (narrow, wide) in [(1.2, 2.6), (1.1, 1.9), (0.2, 0.8)] {
            let sample = |a: f64| (0..60).map(|i| a * (f64::from(i) * 1.3).sin()).collect::<Vec<f64>>();
            let (a, b) = (sample(narrow), sample(wide));
            assert!(equal_kappa(&[&a, &b]).1 < 0.05, "{narrow} {wide}");
            assert!(equal_kappa(&[&a, &a]).1 > 0.99, "{narrow}");
        }
    }
}
