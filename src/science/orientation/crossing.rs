//! Spacing and sense from lines: the factor of random transects, the fork test, the scale of a bar.

use std::f64::consts::{PI, SQRT_2};

use statrs::function::gamma::ln_gamma;

/// Mean distance between crossings on transects of random direction, over area per crest length
/// (Buffon): π/2. Transects across the crests give 1.
pub const RANDOM_TRANSECT: f64 = PI / 2.0;

/// Two-sided sign test: the chance that k of n fair coins, or a count as rare, fall one way. Forks of
/// crests opening one way along the trend are such a count.
pub fn sign_test(k: u64, n: u64) -> f64 {
    let ln_choose =
        |k: u64| ln_gamma(n as f64 + 1.0) - ln_gamma(k as f64 + 1.0) - ln_gamma((n - k) as f64 + 1.0);
    let few = k.min(n.saturating_sub(k));
    let tail: f64 = (0..=few).map(|i| (ln_choose(i) - n as f64 * std::f64::consts::LN_2).exp()).sum();
    (2.0 * tail).min(1.0)
}

/// The Gaussian scale at which a bar of half width w answers best, σ = w/√3, and its second derivative
/// there times w² over the bar's height: (6√3/√(2π)) e^{−3/2} (Steger 1998).
pub fn bar_scale(half_width: f64) -> (f64, f64) {
    let answer = 6.0 * 3f64.sqrt() / (SQRT_2 * PI.sqrt()) * (-1.5f64).exp();
    (half_width / 3f64.sqrt(), answer)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_even_split_is_no_evidence() {
        crate::assert_close!(sign_test(5, 10), 1.0, 1e-9, "p");
        crate::assert_close!(sign_test(0, 5), 2.0 / 32.0, 1e-12, "p");
    }
}
