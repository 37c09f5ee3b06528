//! Several outcrops of one patch, weighed together.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::tail::{chi2_above, normal_quantile};

use super::obliquity::{Estimate, Obliquity};
use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.combined",
    name: "Several outcrops together",
    question: "What do the outcrops say together, and do they agree?",
    formula: "b̄ = Σwb/Σw, w = 1/(s² + τ²); τ² = max(0, (Q − ν)/C), Q = Σ(b − b̄)²/s², C = Σs⁻² − Σs⁻⁴/Σs⁻², both coefficients summed, ν = 2(M − 1); I² = max(0, 1 − ν/Q)",
    symbols: &[
        Symbol { symbol: "b, s", meaning: "b_s or b_c of an outcrop and its standard error", unit: "1" },
        Symbol { symbol: "τ²", meaning: "variance between outcrops beyond their errors", unit: "1" },
        Symbol { symbol: "I²", meaning: "share of the scatter that is not error", unit: "1" },
        Symbol { symbol: "M", meaning: "number of outcrops", unit: "1" },
    ],
    assumptions: &["One wind regime shaped the bedforms at all of them, about crests of one kind."],
    limits: &[
        "With fewer than five outcrops the variance between them is hardly known.",
        "The sign test asks only whether more crests wrap than stay across; it needs six outcrops to reach 5 %.",
    ],
    sources: &[
        Source {
            key: "dersimonian1986",
            authors: "DerSimonian, R.; Laird, N.",
            year: 1986,
            title: "Meta-analysis in clinical trials",
            published: "Controlled Clinical Trials 7, 177–188",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "higgins2002",
            authors: "Higgins, J. P. T.; Thompson, S. G.",
            year: 2002,
            title: "Quantifying heterogeneity in a meta-analysis",
            published: "Statistics in Medicine 21, 1539–1558",
            locator: "I²",
            read: Read::Memory,
        },
        at(DERIVED, "one τ² for both coefficients"),
    ],
};

/// Outcrops together.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Combined {
    pub count: usize,
    pub b_s: f64,
    pub b_c: f64,
    pub se_s: f64,
    pub se_c: f64,
    pub obliquity: Obliquity,
    /// τ².
    pub tau2: f64,
    /// I², in [0, 1].
    pub i2: f64,
    /// p of Q: scatter as great as this by error alone.
    pub scatter_p: f64,
    /// Outcrops whose crests wrap (b_s < 0).
    pub wrapping: usize,
    /// Two-sided p of that count if either were as likely.
    pub sign_p: f64,
}

/// Weighs two or more estimates; `None` for fewer.
pub fn combine(estimates: &[Estimate], crest_se_deg: f64) -> Option<Combined> {
    let count = estimates.len();
    if count < 2 {
        return None;
    }
    let of: [Vec<(f64, f64)>; 2] = [
        estimates.iter().map(|e| (e.b_s, e.se_s * e.se_s)).collect(),
        estimates.iter().map(|e| (e.b_c, e.se_c * e.se_c)).collect(),
    ];
    let (mut q, mut c) = (0.0, 0.0);
    for part in &of {
        let (mean, _) = weighed(part, 0.0);
        q += part.iter().map(|(b, v)| (b - mean).powi(2) / v).sum::<f64>();
        let (first, second) = part.iter().fold((0.0, 0.0), |(a, b), (_, v)| (a + 1.0 / v, b + 1.0 / (v * v)));
        c += first - second / first;
    }
    let df = 2.0 * (count as f64 - 1.0);
    let tau2 = if c > 0.0 { ((q - df) / c).max(0.0) } else { 0.0 };
    let [(b_s, v_s), (b_c, v_c)] = [weighed(&of[0], tau2), weighed(&of[1], tau2)];
    let wrapping = estimates.iter().filter(|e| e.b_s < 0.0).count();
    let obliquity = Obliquity::of([b_s, b_c], [v_s, v_c, 0.0], normal_quantile(0.975));
    Some(Combined {
        count,
        b_s,
        b_c,
        se_s: v_s.sqrt(),
        se_c: v_c.sqrt(),
        obliquity: obliquity.widened(1.96 * crest_se_deg),
        tau2,
        i2: if q > 0.0 { (1.0 - df / q).max(0.0) } else { 0.0 },
        scatter_p: chi2_above(q, df),
        wrapping,
        sign_p: sign_p(wrapping, count),
    })
}

/// Weighted mean and its variance.
fn weighed(part: &[(f64, f64)], tau2: f64) -> (f64, f64) {
    let (top, bottom) =
        part.iter().fold((0.0, 0.0), |(t, w), (b, v)| (t + b / (v + tau2), w + 1.0 / (v + tau2)));
    (top / bottom, 1.0 / bottom)
}

/// Two-sided binomial p of `k` of `n` at one half.
fn sign_p(k: usize, n: usize) -> f64 {
    let few = k.min(n - k);
    let mut term = 0.5f64.powi(n as i32);
    let mut below = term;
    for i in 0..few {
        term *= (n - i) as f64 / (i + 1) as f64;
        below += term;
    }
    (2.0 * below).min(1.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::science::obstacle::obliquity::Quadrupole;

    fn one(b_s: f64, b_c: f64, se: f64) -> Estimate {
        Estimate {
            offset_deg: 0.0,
            b_s,
            b_c,
            se_s: se,
            se_c: se,
            covariance: 0.0,
            df: 40.0,
            n: 100,
            n_eff: 50.0,
            residual_deg: 8.0,
            quadrupole: Quadrupole { offset: 0.0, b_s, b_c },
        }
    }

    #[test]
    fn equal_outcrops_halve_the_variance_and_do_not_scatter() {
        let got = combine(&[one(-1.0, 0.1, 0.2), one(-1.0, 0.1, 0.2)], 0.0).unwrap();
        assert_close!(got.se_s, 0.2 / 2f64.sqrt(), 1e-12, "error");
        assert_eq!((got.tau2, got.i2, got.wrapping), (0.0, 0.0, 2));
        assert_close!(got.obliquity.folded_deg(), 0.5 * (0.1f64).atan2(1.0).to_degrees(), 1e-12, "φ");
    }

    /// By hand: b = 0 and 2, s² = 1 twice, so Q = 2 in b_s and 0 in b_c, ν = 2, C = 1 + 1, τ² = 0.
    #[test]
    fn scatter_by_hand() {
        let got = combine(&[one(0.0, 0.0, 1.0), one(2.0, 0.0, 1.0)], 0.0).unwrap();
        assert_eq!(got.tau2, 0.0);
        assert_close!(got.scatter_p, (-1.0f64).exp(), 1e-12, "P(χ²₂ > 2)");
        // b = 0 and 4: Q = 8, τ² = (8 − 2)/2 = 3, variance (1 + 3)/2 = 2, I² = 1 − 2/8.
        let wide = combine(&[one(0.0, 0.0, 1.0), one(4.0, 0.0, 1.0)], 0.0).unwrap();
        assert_close!(wide.tau2, 3.0, 1e-12, "τ²");
        assert_close!(wide.se_s, 2f64.sqrt(), 1e-12, "error");
        assert_close!(wide.i2, 0.75, 1e-12, "I²");
    }

    #[test]
    fn six_of_six_reach_five_percent_and_five_of_five_do_not() {
        assert_close!(sign_p(6, 6), 0.031_25, 1e-15, "6 of 6");
        assert_close!(sign_p(5, 5), 0.0625, 1e-15, "5 of 5");
        assert_close!(sign_p(2, 4), 1.0, 1e-15, "2 of 4");
    }
}
