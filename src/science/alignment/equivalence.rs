//! Showing that two axes agree, which is more than failing to show that they differ.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::tail::{normal_above, normal_below, normal_quantile};

/// Two one-sided tests.
pub const METHOD: Method = Method {
    id: "alignment.equivalence",
    name: "Two one-sided tests of equivalence",
    question: "Does the trend agree with the prediction within a margin that matters?",
    formula: "p₁ = Φ((D − Δ)/se), p₂ = 1 − Φ((D + Δ)/se);  equivalent at 5 % when both are below 0.05",
    symbols: &[
        Symbol { symbol: "D", meaning: "signed difference of the axes", unit: "deg" },
        Symbol { symbol: "se", meaning: "its standard error", unit: "deg" },
        Symbol { symbol: "Δ", meaning: "margin within which axes count as the same", unit: "deg" },
    ],
    assumptions: &["Near normal errors, small against 90°"],
    limits: &["The margin is chosen before looking"],
    sources: &[Source {
        key: "schuirmann1987",
        authors: "Schuirmann, D. J.",
        year: 1987,
        title: "A comparison of the two one-sided tests procedure and the power approach",
        published: "Journal of Pharmacokinetics and Biopharmaceutics 15, 657–680",
        locator: "",
        read: Read::Memory,
    }],
};

/// Benjamini and Hochberg's control of false discoveries.
pub const FALSE_DISCOVERY: Method = Method {
    id: "alignment.false-discovery",
    name: "Benjamini–Hochberg adjustment",
    question: "Of many patches tested, how many claims may be false?",
    formula: "p₍ᵢ₎ adjusted = min over j ≥ i of m p₍ⱼ₎ / j",
    symbols: &[
        Symbol { symbol: "p₍ᵢ₎", meaning: "i-th smallest p-value", unit: "1" },
        Symbol { symbol: "m", meaning: "number of tests", unit: "1" },
    ],
    assumptions: &["Independent or positively dependent tests"],
    limits: &[],
    sources: &[Source {
        key: "benjamini1995",
        authors: "Benjamini, Y.; Hochberg, Y.",
        year: 1995,
        title: "Controlling the false discovery rate",
        published: "Journal of the Royal Statistical Society B 57, 289–300",
        locator: "",
        read: Read::Memory,
    }],
};

/// Outcome of the two tests.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Equivalence {
    /// p of the upper and of the lower test.
    pub p: [f64; 2],
    /// 90 % interval of the difference, degrees.
    pub ci90: [f64; 2],
    /// Whether both tests reject at 5 %.
    pub equivalent: bool,
}

/// Tests whether a `difference` known to `se` lies within ± `margin`; all in degrees, `se` > 0.
pub fn equivalence(difference: f64, se: f64, margin: f64) -> Equivalence {
    let p = [normal_below((difference - margin) / se), normal_above((difference + margin) / se)];
    let half = normal_quantile(0.95) * se;
    Equivalence { p, ci90: [difference - half, difference + half], equivalent: p[0] < 0.05 && p[1] < 0.05 }
}

/// p-values adjusted so that claiming those below q keeps the expected share of false claims below q.
pub fn false_discovery(p: &[f64]) -> Vec<f64> {
    let mut order: Vec<usize> = (0..p.len()).collect();
    order.sort_by(|a, b| p[*a].total_cmp(&p[*b]));
    let mut adjusted = vec![1.0; p.len()];
    let mut least = 1.0f64;
    for (rank, &at) in order.iter().enumerate().rev() {
        least = least.min(p[at] * p.len() as f64 / (rank + 1) as f64);
        adjusted[at] = least;
    }
    adjusted
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn adjusted_p_values_keep_their_order() {
        let got = false_discovery(&[0.04, 0.01, 0.03, 0.5]);
        for (g, w) in got.iter().zip([0.053_333_333_333, 0.04, 0.053_333_333_333, 0.5]) {
            crate::assert_close!(*g, w, 1e-9, "adjusted p");
        }
    }
}
