//! Modified Bessel functions I₀, I₁, I₂ scaled by e⁻ˣ, so that no concentration overflows, and the
//! ratio A(κ) = I₁/I₀ of the von Mises distribution with its derivative and inverse.

use std::f64::consts::PI;

/// The greatest concentration the inverse of A returns; a resultant nearer to 1 is put down to it.
pub const GREATEST_KAPPA: f64 = 1e6;

/// e⁻ˣ I₀(x) for x ≥ 0.
pub fn i0_scaled(x: f64) -> f64 {
    scaled(0, x)
}

/// e⁻ˣ I₁(x) for x ≥ 0.
pub fn i1_scaled(x: f64) -> f64 {
    scaled(1, x)
}

/// e⁻ˣ I₂(x) for x ≥ 0.
pub fn i2_scaled(x: f64) -> f64 {
    scaled(2, x)
}

/// ln I₀(x) for x ≥ 0.
pub fn ln_i0(x: f64) -> f64 {
    x + i0_scaled(x).ln()
}

/// A(κ) = I₁(κ)/I₀(κ): the mean resultant length of a von Mises distribution, in [0, 1).
pub fn ratio(kappa: f64) -> f64 {
    if kappa > 300.0 {
        // The quotient of two rounded numbers would lose 1 − A, which is all that matters here.
        let x = 1.0 / kappa;
        return 1.0 - x * (0.5 + x * (0.125 + x * (0.125 + x * (25.0 / 128.0 + x * (13.0 / 32.0)))));
    }
    i1_scaled(kappa) / i0_scaled(kappa)
}

/// A′(κ) = 1 − A² − A/κ, in (0, ½].
pub fn ratio_slope(kappa: f64) -> f64 {
    if kappa < 1e-4 {
        return 0.5 - 3.0 / 16.0 * kappa * kappa;
    }
    if kappa > 300.0 {
        // 1 − A² and A/κ agree to the leading order: the difference is taken from the expansion.
        let x = 1.0 / kappa;
        return x * x * (0.5 + x * (0.25 + x * (0.375 + x * (25.0 / 32.0 + x * (65.0 / 32.0)))));
    }
    let a = ratio(kappa);
    1.0 - a * a - a / kappa
}

/// The κ with A(κ) = `length`, in [0, [`GREATEST_KAPPA`]].
///
/// Newton from κ₀ = R̄(2 − R̄²)/(1 − R̄²), which lies within 4 % of the root everywhere.
pub fn inverse_ratio(length: f64) -> f64 {
    if length.is_nan() || length <= 0.0 {
        return 0.0;
    }
    if length >= ratio(GREATEST_KAPPA) {
        return GREATEST_KAPPA;
    }
    let mut kappa = length * (2.0 - length * length) / (1.0 - length * length);
    for _ in 0..50 {
        let step = (ratio(kappa) - length) / ratio_slope(kappa);
        // A is concave: a full step from above could pass zero.
        let next = (kappa - step).max(0.5 * kappa);
        let settled = (next - kappa).abs() <= 1e-13 * next;
        kappa = next;
        if settled {
            break;
        }
    }
    kappa.min(GREATEST_KAPPA)
}

/// Power series below 30 (all terms positive, so nothing cancels), asymptotic series above (its
/// smallest term is e⁻⁶⁰ there).
fn scaled(order: u32, x: f64) -> f64 {
    if x < 30.0 {
        let quarter = 0.25 * x * x;
        let mut term = match order {
            0 => 1.0,
            1 => 0.5 * x,
            _ => 0.5 * quarter,
        };
        let mut sum = term;
        let mut k = 0.0;
        while term > 1e-17 * sum {
            k += 1.0;
            term *= quarter / (k * (k + f64::from(order)));
            sum += term;
        }
        return sum * (-x).exp();
    }
    let mu = 4.0 * f64::from(order * order);
    let (mut term, mut sum, mut k) = (1.0, 1.0, 0.0f64);
    while f64::abs(term) > 1e-17 {
        k += 1.0;
        let odd = 2.0 * k - 1.0;
        term *= -(mu - odd * odd) / (8.0 * k * x);
        sum += term;
    }
    sum / (2.0 * PI * x).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    #[test]
    fn the_two_series_meet() {
        for order in 0..3 {
            let (below, above) = (scaled(order, 30.0 - 1e-9), scaled(order, 30.0));
            assert_close!(below / above, 1.0, 2e-10, "order {order} at the seam");
        }
    }

    #[test]
    fn ratio_meets_its_expansion() {
        assert_close!(ratio(300.0), ratio(300.0 + 1e-9), 1e-13, "A at the seam");
        let (below, above) = (ratio_slope(300.0), ratio_slope(300.0 + 1e-9));
        assert_close!(below / above, 1.0, 1e-9, "A′ at the seam");
    }

    proptest! {
        #[test]
        fn the_recurrence_holds(x in 0.01..700.0f64) {
            // I₀ − I₂ = (2/x) I₁
            let gap = i0_scaled(x) - i2_scaled(x) - 2.0 / x * i1_scaled(x);
            prop_assert!(gap.abs() < 1e-14, "{gap:e}");
        }

        #[test]
        fn the_inverse_inverts(exponent in -3.0..6.0f64) {
            let kappa = 10f64.powf(exponent);
            let back = inverse_ratio(ratio(kappa));
            // Near 1 the resultant itself holds κ to ε·2κ² only.
            let bound = 1e-12 * kappa + 4.0 * f64::EPSILON * kappa * kappa;
            prop_assert!((back - kappa).abs() <= bound, "{back} {kappa}");
        }
    }
}
