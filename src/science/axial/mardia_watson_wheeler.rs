//! The Mardia–Watson–Wheeler test on circular ranks.

use std::f64::consts::TAU;

use rand::seq::SliceRandom as _;

use crate::ground::{Method, Seed, Symbol};
use crate::numeric::tail::chi2_above;

use super::sources::{MARDIA_JUPP, ZAR};

pub static METHOD: Method = Method {
    id: "axial.mardia-watson-wheeler",
    name: "Mardia–Watson–Wheeler test",
    question: "Do sets of axes differ in any way, by ranks alone?",
    formula: "β = 2πr/N; W = 2 Σ Rᵢ²/nᵢ, or for two sets 2(N − 1)R₁²/(n₁n₂); χ² with 2(q − 1) df",
    symbols: &[
        Symbol { symbol: "r", meaning: "rank of an axis among all N", unit: "1" },
        Symbol { symbol: "Rᵢ", meaning: "resultant of the ranks β of set i", unit: "1" },
    ],
    assumptions: &["Independent axes."],
    limits: &[
        "Two published forms differ by the factor (N − 1)/N: the one used is named.",
        "Ties get random ranks; W is the mean over repeats.",
        "Each set should hold at least 10 axes.",
    ],
    sources: &[MARDIA_JUPP, ZAR],
};

/// Which published form of W.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// 2(N − 1)R₁²/(n₁n₂), for two samples.
    TwoSample,
    /// 2 Σ Rᵢ²/nᵢ, for any number.
    QSample,
}

/// Random rankings over which W is averaged when there are ties.
const REPEATS: u64 = 101;

/// (W, p) of samples of circle angles. The two-sample form looks at the first two samples only.
pub fn mardia_watson_wheeler(samples: &[&[f64]], form: Form, seed: Seed) -> (f64, f64) {
    let used = if form == Form::TwoSample { &samples[..samples.len().min(2)] } else { samples };
    let mut pooled: Vec<(f64, usize)> = used
        .iter()
        .enumerate()
        .flat_map(|(set, s)| s.iter().map(move |p| (p.rem_euclid(TAU), set)))
        .collect();
    pooled.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let tied = pooled.windows(2).any(|w| w[0].0 == w[1].0 && w[0].1 != w[1].1);
    let repeats = if tied { REPEATS } else { 1 };
    let mut sum = 0.0;
    for repeat in 0..repeats {
        let mut random = seed.stream("axial.mardia-watson-wheeler", repeat);
        for ties in pooled.chunk_by_mut(|a, b| a.0 == b.0) {
            ties.shuffle(&mut random);
        }
        sum += statistic(&pooled, used, form);
    }
    let w = sum / repeats as f64;
    (w, chi2_above(w, 2.0 * (used.len() as f64 - 1.0)))
}

fn statistic(ranked: &[(f64, usize)], samples: &[&[f64]], form: Form) -> f64 {
    let n = ranked.len() as f64;
    let mut resultants = vec![(0.0, 0.0); samples.len()];
    for (rank, (_, set)) in ranked.iter().enumerate() {
        let (sin, cos) = (TAU * (rank as f64 + 1.0) / n).sin_cos();
        resultants[*set].0 += cos;
        resultants[*set].1 += sin;
    }
    let square = |k: usize| resultants[k].0.powi(2) + resultants[k].1.powi(2);
    let size = |k: usize| samples[k].len() as f64;
    match form {
        Form::TwoSample => 2.0 * (n - 1.0) * square(0) / (size(0) * size(1)),
        Form::QSample => 2.0 * (0..samples.len()).map(|k| square(k) / size(k)).sum::<f64>(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn the_forms_differ_by_a_factor() {
        let (a, b) = ([0.1, 0.5, 0.9, 2.0], [1.0, 3.0, 4.0, 4.5, 5.0]);
        let w = |form| mardia_watson_wheeler(&[&a, &b], form, Seed(1)).0;
        assert_close!(w(Form::TwoSample) / w(Form::QSample), 8.0 / 9.0, 1e-12, "(N − 1)/N");
    }

    #[test]
    fn ties_between_samples_do_not_favour_either() {
        let a = [1.0; 12];
        let (w, p) = mardia_watson_wheeler(&[&a, &a], Form::QSample, Seed(1));
        assert!(w < 5.0 && p > 0.05, "{w} {p}");
    }
}
