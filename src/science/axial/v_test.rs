//! The V test: does a trend named beforehand show?

use crate::ground::{Method, Symbol};
use crate::numeric::tail::normal_above;

use super::mean::Resultant;
use super::sources::ZAR;

pub static METHOD: Method = Method {
    id: "axial.v-test",
    name: "V test for a trend named beforehand",
    question: "Do the axes prefer the trend I expected?",
    formula: "V = R cos(φ̄ − φ₀); u = V √(2/n); p ≈ 1 − Φ(u)",
    symbols: &[
        Symbol { symbol: "R", meaning: "resultant length of n doubled angles", unit: "1" },
        Symbol { symbol: "φ₀", meaning: "doubled angle of the expected trend", unit: "rad" },
        Symbol { symbol: "n", meaning: "number of independent axes", unit: "1" },
    ],
    assumptions: &["The expected trend was not chosen from the same data."],
    limits: &["The far tail is inaccurate for small n: p is not reported below 0.0001."],
    sources: &[ZAR],
};

/// The smallest p the normal approximation is trusted with.
pub const SMALLEST_P: f64 = 1e-4;

/// The V test's numbers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VTest {
    pub v: f64,
    pub u: f64,
    /// At least [`SMALLEST_P`]; equal to it means "below 0.0001".
    pub p: f64,
}

/// Tests the resultant of `n` independent circle angles against the angle `expected` (radians).
pub fn v_test(resultant: Resultant, n: f64, expected: f64) -> VTest {
    let v = n * resultant.mean_length() * (resultant.direction() - expected).cos();
    let u = v * (2.0 / n).sqrt();
    VTest { v, u, p: normal_above(u).max(SMALLEST_P) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn the_wrong_way_round_is_no_evidence() {
        let r = Resultant { cos: 8.0, sin: 0.0, weight: 10.0 };
        let (toward, away) = (v_test(r, 10.0, 0.0), v_test(r, 10.0, std::f64::consts::PI));
        assert_eq!(toward.p, normal_above(8.0 * 0.2f64.sqrt()).max(SMALLEST_P));
        assert_close!(away.p, 1.0, 2e-4, "opposite");
    }
}
