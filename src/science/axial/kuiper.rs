//! Kuiper's test of uniformity.

use std::f64::consts::TAU;

use crate::ground::{Method, Symbol};

use super::sources::{FISHER, MARDIA_JUPP};

pub static METHOD: Method = Method {
    id: "axial.kuiper",
    name: "Kuiper's test",
    question: "Are the axes uniform, against any other shape?",
    formula: "V = max(i/n − uᵢ) + max(uᵢ − (i − 1)/n); V* = V(√n + 0.155 + 0.24/√n)",
    symbols: &[
        Symbol { symbol: "uᵢ", meaning: "sorted doubled angles over 2π", unit: "1" },
        Symbol { symbol: "n", meaning: "number of independent axes", unit: "1" },
    ],
    assumptions: &["Independent axes."],
    limits: &["p is asymptotic for V*."],
    sources: &[FISHER, MARDIA_JUPP],
};

/// (V*, p) of circle angles against the uniform distribution.
pub fn kuiper(phi: &[f64]) -> (f64, f64) {
    let mut u: Vec<f64> = phi.iter().map(|p| p.rem_euclid(TAU) / TAU).collect();
    u.sort_unstable_by(f64::total_cmp);
    let n = u.len() as f64;
    let (above, below) = u.iter().enumerate().fold((0.0f64, 0.0f64), |(above, below), (i, u)| {
        (above.max((i as f64 + 1.0) / n - u), below.max(u - i as f64 / n))
    });
    let v = (above + below) * (n.sqrt() + 0.155 + 0.24 / n.sqrt());
    (v, tail(v))
}

/// 2 Σ (4m²V² − 1) exp(−2m²V²), in [0, 1].
fn tail(v: f64) -> f64 {
    if v < 0.4 {
        // The tail is 1 to six digits there, and the series settles slowly.
        return 1.0;
    }
    let term = |m: i32| {
        let square = f64::from(m * m) * v * v;
        2.0 * (4.0 * square - 1.0) * (-2.0 * square).exp()
    };
    (1..=30).map(term).sum::<f64>().clamp(0.0, 1.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn five_per_cent_point_is_the_tabulated_one() {
        // 1.747: the 5 % point of V* in the tables (memory).
        assert_close!(tail(1.747), 0.05, 2e-4, "tail");
    }
}
