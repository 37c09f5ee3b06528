//! Watson's two-sample U²: do two sets of axes share a distribution?

use std::f64::consts::TAU;

use crate::ground::{Method, Symbol};

use super::sources::{MARDIA_JUPP, ZAR};
use super::watson::tail;

pub static METHOD: Method = Method {
    id: "axial.watson-two",
    name: "Watson's two-sample U²",
    question: "Could two sets of axes come from one distribution?",
    formula: "U² = (n₁n₂/N²)[Σ t d² − (Σ t d)²/N]; p = 2 Σ (−1)^(m−1) exp(−2m²π²U²)",
    symbols: &[
        Symbol { symbol: "d", meaning: "difference of the two empirical distribution functions", unit: "1" },
        Symbol { symbol: "t", meaning: "number of axes that share a value", unit: "1" },
        Symbol { symbol: "N", meaning: "n₁ + n₂", unit: "1" },
    ],
    assumptions: &["Independent axes in both sets; ties are allowed."],
    limits: &["p is asymptotic: trust it for n₁, n₂ ≥ 10."],
    sources: &[ZAR, MARDIA_JUPP],
};

/// (U², p) of two samples of circle angles.
pub fn watson_two(first: &[f64], second: &[f64]) -> (f64, f64) {
    let fold = |p: &f64| p.rem_euclid(TAU);
    let mut pooled: Vec<(f64, bool)> =
        first.iter().map(|p| (fold(p), true)).chain(second.iter().map(|p| (fold(p), false))).collect();
    pooled.sort_unstable_by(|a, b| a.0.total_cmp(&b.0));
    let (n1, n2, n) = (first.len() as f64, second.len() as f64, pooled.len() as f64);
    let (mut f1, mut f2, mut sum, mut squares) = (0.0, 0.0, 0.0, 0.0);
    for ties in pooled.chunk_by(|a, b| a.0 == b.0) {
        let from_first = ties.iter().filter(|(_, is_first)| *is_first).count();
        f1 += from_first as f64 / n1;
        f2 += (ties.len() - from_first) as f64 / n2;
        let (t, d) = (ties.len() as f64, f1 - f2);
        sum += t * d;
        squares += t * d * d;
    }
    let u2 = n1 * n2 / (n * n) * (squares - sum * sum / n);
    (u2, tail(u2))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_sample_resembles_itself() {
        let a: Vec<f64> = (0..20).map(|i| (f64::from(i) * 1.7).sin()).collect();
        assert!(watson_two(&a, &a).0.abs() < 1e-12);
        let b: Vec<f64> = a.iter().map(|p| p + 2.0).collect();
        assert!(watson_two(&a, &b).1 < 1e-4);
    }
}
