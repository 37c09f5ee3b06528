//! Rayleigh's test: could a resultant this long come from axes without a preferred trend?

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::tail::f_above;

use super::effective::Number;
use super::sources::{DERIVED, ZAR};

pub static METHOD: Method = Method {
    id: "axial.rayleigh",
    name: "Rayleigh test",
    question: "Is there a preferred trend at all?",
    formula: "Z = nR̄²; p = e^(−Z)[1 + (2Z − Z²)/4n − (24Z − 132Z² + 76Z³ − 9Z⁴)/288n²]",
    symbols: &[
        Symbol {
            symbol: "n",
            meaning: "number of independent axes, the effective number for nodes",
            unit: "1",
        },
        Symbol { symbol: "R̄", meaning: "mean resultant length of the doubled angle", unit: "1" },
        Symbol { symbol: "p", meaning: "chance of a resultant as long without preference", unit: "1" },
    ],
    assumptions: &[
        "Independent axes, or a number of independent ones given.",
        "The alternative has one mode.",
    ],
    limits: &[
        "Blind to two equal trends at right angles.",
        "Below 5 axes the larger of the series and e^(−Z) is given; at 1 or fewer, p = 1.",
        "Where n itself is estimated with ν degrees of freedom, p is not below (1 + Z/ν)^(−ν).",
    ],
    sources: &[
        Source {
            key: "wilkie1983",
            authors: "Wilkie, D.",
            year: 1983,
            title: "Rayleigh test for randomness of circular data",
            published: "Journal of the Royal Statistical Society C 32, 311–312",
            locator: "",
            read: Read::Memory,
        },
        ZAR,
        DERIVED,
    ],
};

/// p of the mean resultant length `mean_length` of `n` independent angles (`n` need not be whole).
pub fn rayleigh_p(mean_length: f64, n: f64) -> f64 {
    if n <= 1.0 {
        return 1.0;
    }
    let z = n * mean_length * mean_length;
    let plain = (-z).exp();
    // The series is kept at every n: at n ≥ 50 it still beats the bare exponential.
    let first = (2.0 * z - z * z) / (4.0 * n);
    let second = (24.0 * z - 132.0 * z.powi(2) + 76.0 * z.powi(3) - 9.0 * z.powi(4)) / (288.0 * n * n);
    let series = plain * (1.0 + first - second);
    let p = if n < 5.0 { series.max(plain) } else { series };
    p.clamp(0.0, 1.0)
}

/// The same where the number of independent angles was itself estimated: Z is then a ratio of two
/// mean squares, F(2, 2ν), with tail (1 + Z/ν)^(−ν). The larger of the two p.
pub fn rayleigh_p_estimated(mean_length: f64, number: Number) -> f64 {
    let z = number.estimated * mean_length * mean_length;
    rayleigh_p(mean_length, number.value()).max(f_above(z, 2.0, 2.0 * number.df))
}

/// Zar's closed form exp(√(1 + 4n + 4(n² − R²)) − (1 + 2n)), for comparison.
pub fn rayleigh_p_closed(mean_length: f64, n: f64) -> f64 {
    let r = n * mean_length;
    ((1.0 + 4.0 * n + 4.0 * (n * n - r * r)).sqrt() - (1.0 + 2.0 * n)).exp().clamp(0.0, 1.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn p_is_a_probability(r in 0.0..=1.0f64, n in 0.0..1e5f64, df in 1.0..1e4f64) {
            let number = Number { estimated: n, df, most: n };
            for p in [rayleigh_p(r, n), rayleigh_p_estimated(r, number), rayleigh_p_closed(r, n)] {
                prop_assert!((0.0..=1.0).contains(&p), "{p}");
            }
        }

        #[test]
        fn an_uncertain_number_never_sharpens_the_test(r in 0.0..=1.0f64, n in 1.0..1e4f64) {
            let uncertain = rayleigh_p_estimated(r, Number { estimated: n, df: 5.0, most: n });
            prop_assert!(uncertain >= rayleigh_p(r, n));
        }
    }
}
