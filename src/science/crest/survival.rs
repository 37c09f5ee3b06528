//! Lengths seen only in part: Kaplan and Meier's estimate of how they are distributed.

use crate::ground::{Method, Read, Source, Symbol};

/// The record of censored lengths.
pub static METHOD: Method = Method {
    id: "crest.censoring",
    name: "Censored lengths",
    question: "How long are crests and spacings that leave the patch?",
    formula: "S(t) = Π_{t_i ≤ t} (1 − d_i/n_i);  restricted mean = ∫₀^τ S dt;  exponential mean = Σ t / Σ d",
    symbols: &[
        Symbol { symbol: "t_i", meaning: "a length seen whole", unit: "m" },
        Symbol { symbol: "d_i", meaning: "lengths that end at t_i", unit: "1" },
        Symbol { symbol: "n_i", meaning: "lengths known to reach t_i", unit: "1" },
        Symbol { symbol: "τ", meaning: "longest length seen, whole or in part", unit: "m" },
    ],
    assumptions: &["where a length is cut says nothing about how long it would have been"],
    limits: &[
        "quantiles beyond the last whole length do not exist",
        "the restricted mean is too short where many of the longest are cut",
    ],
    sources: &[Source {
        key: "kaplan1958",
        authors: "Kaplan, E. L.; Meier, P.",
        year: 1958,
        title: "Nonparametric estimation from incomplete observations",
        published: "Journal of the American Statistical Association 53, 457",
        locator: "product-limit estimate",
        read: Read::Memory,
    }],
};

/// The estimate: a step curve.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Survival {
    /// (t, S(t)) at every whole length, ascending.
    pub steps: Vec<(f64, f64)>,
    /// Lengths seen whole, and those cut.
    pub whole: usize,
    pub cut: usize,
    /// The lengths that were cut, ascending.
    pub cuts: Vec<f64>,
    /// The longest seen, whole or in part.
    pub longest: f64,
    /// Sum of all lengths.
    pub total: f64,
}

/// The estimate from lengths, each with whether it was seen whole. Of equal lengths the whole ones count
/// first. Lengths that are not finite or below 0 are left out.
pub fn kaplan_meier(lengths: &[(f64, bool)]) -> Survival {
    let mut sorted: Vec<(f64, bool)> =
        lengths.iter().copied().filter(|(t, _)| t.is_finite() && *t >= 0.0).collect();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0).then(b.1.cmp(&a.1)));
    let mut out = Survival::default();
    let mut survival = 1.0;
    let mut i = 0;
    while i < sorted.len() {
        let t = sorted[i].0;
        let same = sorted[i..].iter().take_while(|s| s.0 == t).count();
        let ended = sorted[i..i + same].iter().filter(|s| s.1).count();
        if ended > 0 {
            survival *= 1.0 - ended as f64 / (sorted.len() - i) as f64;
            out.steps.push((t, survival));
        }
        out.whole += ended;
        out.cut += same - ended;
        out.cuts.extend(std::iter::repeat_n(t, same - ended));
        out.longest = t;
        out.total += t * same as f64;
        i += same;
    }
    out
}

impl Survival {
    /// The smallest length that at most a share 1 − `p` exceeds; `None` where the curve does not fall so far.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        self.steps.iter().find(|(_, s)| *s <= 1.0 - p + 1e-12).map(|(t, _)| *t)
    }

    /// ∫ S dt up to the longest length seen; `None` without any.
    pub fn restricted_mean(&self) -> Option<f64> {
        if self.whole + self.cut == 0 {
            return None;
        }
        let (mut mean, mut from, mut s) = (0.0, 0.0, 1.0);
        for (t, next) in &self.steps {
            mean += s * (t - from);
            (from, s) = (*t, *next);
        }
        Some(mean + s * (self.longest - from))
    }

    /// Σ t / Σ d: the mean were lengths exponential; `None` when none was seen whole.
    pub fn exponential_mean(&self) -> Option<f64> {
        (self.whole > 0).then(|| self.total / self.whole as f64)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn without_cuts_it_is_the_sample() {
        let s = kaplan_meier(&[(1.0, true), (2.0, true), (3.0, true), (10.0, true)]);
        assert_eq!(s.quantile(0.5), Some(2.0));
        crate::assert_close!(s.restricted_mean().unwrap(), 4.0, 1e-12, "mean");
    }

    #[test]
    fn a_curve_that_does_not_fall_to_half_has_no_median() {
        let s = kaplan_meier(&[(1.0, true), (2.0, false), (3.0, false)]);
        assert_eq!(s.quantile(0.5), None);
        assert_eq!((s.cuts.as_slice(), s.cut), ([2.0, 3.0].as_slice(), 2));
        assert_eq!(kaplan_meier(&[]).restricted_mean(), None);
        assert_eq!(kaplan_meier(&[(f64::NAN, true)]).whole, 0);
    }
}
