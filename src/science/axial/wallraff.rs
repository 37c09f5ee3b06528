//! Wallraff's test: do sets of axes scatter alike?

use std::f64::consts::{PI, TAU};

use crate::ground::{Method, Symbol};
use crate::numeric::tail::chi2_above;

use super::mean::Resultant;
use super::sources::ZAR;

pub static METHOD: Method = Method {
    id: "axial.wallraff",
    name: "Wallraff's test of equal spread",
    question: "Do sets of axes scatter alike about their own means?",
    formula: "H = 12/(N(N + 1)) Σ Tᵢ²/nᵢ − 3(N + 1), over 1 − Σ(t³ − t)/(N³ − N); χ² with q − 1 df",
    symbols: &[
        Symbol {
            symbol: "Tᵢ", meaning: "sum of the ranks of |φ − φ̄ᵢ| of set i among all", unit: "1"
        },
        Symbol { symbol: "t", meaning: "number of distances that share a value", unit: "1" },
    ],
    assumptions: &["Independent axes."],
    limits: &["Each set's own mean is used, which costs a little power."],
    sources: &[ZAR],
};

/// (H, p): Kruskal and Wallis's test on the distances from each sample's own mean.
pub fn wallraff(samples: &[&[f64]]) -> (f64, f64) {
    let mut pooled: Vec<(f64, usize)> = Vec::new();
    for (set, sample) in samples.iter().enumerate() {
        let mean = Resultant::of(sample, None).direction();
        pooled.extend(sample.iter().map(|p| {
            let turn = (p - mean).rem_euclid(TAU);
            (if turn > PI { TAU - turn } else { turn }, set)
        }));
    }
    pooled.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let n = pooled.len() as f64;
    let mut sums = vec![0.0; samples.len()];
    let (mut before, mut tied) = (0.0, 0.0);
    // Rounding of the mean must not break ties between whole degrees.
    for ties in pooled.chunk_by(|a, b| (a.0 - b.0).abs() < 1e-9) {
        let t = ties.len() as f64;
        let rank = before + 0.5 * (t + 1.0);
        ties.iter().for_each(|(_, set)| sums[*set] += rank);
        tied += t * t * t - t;
        before += t;
    }
    let squares: f64 = sums.iter().zip(samples).map(|(s, x)| s * s / x.len() as f64).sum();
    let h = (12.0 / (n * (n + 1.0)) * squares - 3.0 * (n + 1.0)) / (1.0 - tied / (n * n * n - n));
    (h, chi2_above(h, samples.len() as f64 - 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn narrow_and_wide_samples_differ_wherever_they_point() {
        let narrow: Vec<f64> = (0..20).map(|i| 0.1 * (f64::from(i) * 1.3).sin()).collect();
        let wide: Vec<f64> = narrow.iter().map(|x| 3.0 + 8.0 * x).collect();
        let shifted: Vec<f64> = narrow.iter().map(|x| x + 2.0).collect();
        assert!(wallraff(&[&narrow, &wide]).1 < 1e-3);
        assert!(wallraff(&[&narrow, &shifted]).1 > 0.9);
    }
}
