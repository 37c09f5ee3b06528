//! Distribution functions and tails: normal, χ², F, Student.

use statrs::function::beta::{beta_reg, inv_beta_reg};
use statrs::function::erf::erfc_inv;
use statrs::function::gamma::gamma_ur;

/// Φ(x): the normal distribution function.
pub fn normal_below(x: f64) -> f64 {
    normal_above(-x)
}

/// 1 − Φ(x), accurate far out.
pub fn normal_above(x: f64) -> f64 {
    // ½ erfc(x/√2) as an incomplete gamma function, which the crate has to more digits than erfc.
    let outside = if x == 0.0 { 1.0 } else { gamma_ur(0.5, 0.5 * x * x) };
    if x >= 0.0 { 0.5 * outside } else { 1.0 - 0.5 * outside }
}

/// The x with Φ(x) = p, for p in (0, 1).
pub fn normal_quantile(p: f64) -> f64 {
    let x = -std::f64::consts::SQRT_2 * erfc_inv(2.0 * p);
    // One Newton step takes the rational approximation to rounding.
    let density = (-0.5 * x * x).exp() / (2.0 * std::f64::consts::PI).sqrt();
    if density > 0.0 { x - (normal_below(x) - p) / density } else { x }
}

/// P(χ² > x) with `df` > 0 degrees of freedom.
pub fn chi2_above(x: f64, df: f64) -> f64 {
    if x <= 0.0 { 1.0 } else { gamma_ur(0.5 * df, 0.5 * x) }
}

/// P(F > x) with `df1`, `df2` > 0 degrees of freedom; `df2` may be infinite.
pub fn f_above(x: f64, df1: f64, df2: f64) -> f64 {
    if x <= 0.0 {
        return 1.0;
    }
    if df2.is_infinite() {
        return chi2_above(df1 * x, df1);
    }
    beta_reg(0.5 * df2, 0.5 * df1, df2 / (df2 + df1 * x))
}

/// The t with P(|T| ≤ t) = `level` for Student's T with `df` > 0 degrees of freedom (not
/// necessarily whole).
pub fn student_two_sided(level: f64, df: f64) -> f64 {
    if df > 1e6 {
        return normal_quantile(0.5 + 0.5 * level);
    }
    // P(|T| > t) = I_{df/(df + t²)}(df/2, ½)
    let x = inv_beta_reg(0.5 * df, 0.5, 1.0 - level);
    (df * (1.0 - x) / x).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn quantiles_from_printed_tables() {
        assert_close!(normal_quantile(0.975), 1.959_963_984_540_054, 1e-13, "z 0.975");
        assert_close!(normal_quantile(1e-10), -6.361_340_902_404_056, 1e-11, "z 1e-10");
        assert_close!(student_two_sided(0.95, 10.0), 2.228_138_851_964_939, 1e-9, "t 10");
        assert_close!(student_two_sided(0.95, 1.0), 12.706_204_736_174_7, 1e-6, "t 1");
        assert_close!(student_two_sided(0.95, 1e7), 1.959_963_984_540_054, 1e-6, "t ∞");
        assert_close!(chi2_above(3.841_458_820_694_124, 1.0), 0.05, 1e-12, "χ² 1");
        assert_close!(f_above(4.413_873_419_170_566, 1.0, 18.0), 0.05, 1e-10, "F 1, 18");
    }

    #[test]
    fn a_tail_with_two_degrees_is_elementary() {
        assert_close!(f_above(3.0, 2.0, 8.0), (1.0 + 3.0 / 4.0f64).powf(-4.0), 1e-13, "F 2, 2ν");
        assert_close!(chi2_above(5.0, 2.0), (-2.5f64).exp(), 1e-14, "χ² 2");
    }
}
