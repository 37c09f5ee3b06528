//! How residuals of the trend are related over distance, so that nodes are not taken for samples.

use crate::ground::{Bounds, Method, Point, Symbol};

use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.residual-correlation",
    name: "Correlation of trend residuals",
    question: "How far must two places lie apart to be two samples?",
    formula: "ρ(h) = (1 − g) exp(−(h/L)^p), p ∈ {1, 3/2, 2}, fitted to the mean products of residuals by lag, the variance of their mean added back",
    symbols: &[
        Symbol { symbol: "h", meaning: "distance of two nodes", unit: "m" },
        Symbol { symbol: "g", meaning: "share of the variance that is noise of single nodes", unit: "1" },
        Symbol { symbol: "L", meaning: "length of the correlation", unit: "m" },
        Symbol { symbol: "p", meaning: "shape: exponential to Gaussian", unit: "1" },
    ],
    assumptions: &[
        "The regional texture is of one kind: near the outcrop it is related as it is away from it.",
    ],
    limits: &["A wandering of the trend longer than the patch does not show in it."],
    sources: &[at(DERIVED, "method of moments")],
};

/// A fitted correlation function, positive definite in the plane.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Correlation {
    /// g.
    pub noise_share: f64,
    /// L, ground units.
    pub length: f64,
    /// p.
    pub shape: f64,
}

/// Most residuals whose pairs are looked at: half a million pairs tell a length of any use.
const MOST: usize = 1000;
/// Lags of the table the fit is made to.
const BINS: usize = 30;
/// Most lags of the whole table.
const MOST_BINS: f64 = 3000.0;
/// χ² a relation must explain, the 99 % point for three parameters.
const LEAST_GAIN: f64 = 11.34;
const SHAPES: [f64; 3] = [1.0, 1.5, 2.0];

impl Correlation {
    /// Nodes known to be independent.
    pub const NONE: Self = Self { noise_share: 1.0, length: 1.0, shape: 1.0 };

    /// ρ of two places `distance` apart; 1 of a place with itself.
    pub fn at(&self, distance: f64) -> f64 {
        if distance == 0.0 {
            return 1.0;
        }
        let x = distance / self.length;
        // The three shapes without a general power, for millions of pairs.
        let power = match self.shape {
            1.0 => x,
            2.0 => x * x,
            1.5 => x * x.sqrt(),
            shape => x.powf(shape),
        };
        (1.0 - self.noise_share) * (-power).exp()
    }

    /// From residuals (any unit, mean removed) at `places`, pairs up to `reach` apart, with the mean of ρ over all
    /// pairs: the variance of the mean over that of one residual. [`Self::NONE`] for fewer than three or without
    /// variance.
    pub fn fit(residuals: &[f64], places: &[Point], reach: f64) -> (Self, f64) {
        let picked: Vec<usize> = thinned(residuals.len(), MOST);
        let n = picked.len();
        let variance = picked.iter().map(|i| residuals[*i].powi(2)).sum::<f64>() / n.max(1) as f64;
        let positive = |x: f64| x > 0.0;
        if n < 3 || !positive(variance) || !positive(reach) {
            return (Self::NONE, 1.0 / n.max(1) as f64);
        }
        let extent = Bounds::of(places.iter().copied()).map_or(reach, |b| b.width().hypot(b.height()));
        let width = (reach / BINS as f64).max(extent / MOST_BINS);
        let mut table = vec![Bin::default(); (extent / width) as usize + 1];
        for (k, i) in picked.iter().enumerate() {
            for j in &picked[..k] {
                let lag = places[*i].distance(places[*j]);
                let bin = &mut table[(lag / width) as usize];
                bin.pairs += 1.0;
                bin.lag += lag;
                bin.product += residuals[*i] * residuals[*j];
            }
        }
        let all: Vec<Bin> = table.into_iter().filter(|b| b.pairs > 0.0).map(Bin::mean).collect();
        let near = &all[..all.iter().filter(|b| b.lag < reach).count()];
        let mut removed = 0.0;
        let (mut best, mut mean) = (Self::NONE, 0.0);
        for _ in 0..3 {
            best = Self::nearest(near, variance, removed, reach);
            let own = 1.0 / places.len() as f64;
            let pairs: f64 = all.iter().map(|b| b.pairs).sum();
            mean = own + (1.0 - own) * all.iter().map(|b| b.pairs * best.at(b.lag)).sum::<f64>() / pairs;
            // What removing the mean took from every product: the variance of the mean. Beyond half of the
            // variance the patch is too small to know; more would run away.
            removed = variance * (mean / (1.0 - mean).max(0.5)).min(0.5);
        }
        (best, mean)
    }

    /// The least squares fit over lengths and shapes, pairs as weights.
    fn nearest(bins: &[Bin], variance: f64, removed: f64, reach: f64) -> Self {
        const LENGTHS: usize = 60;
        let own = variance + removed;
        let shortest = bins.first().map_or(reach, |b| 0.25 * b.lag).max(1e-3 * reach);
        let mut best = (f64::INFINITY, Self::NONE);
        for shape in SHAPES {
            for step in 0..LENGTHS {
                let length = shortest * (2.0 * reach / shortest).powf(step as f64 / (LENGTHS - 1) as f64);
                let one = Self { noise_share: 0.0, length, shape };
                let (mut top, mut bottom) = (0.0, 0.0);
                for b in bins {
                    let model = one.at(b.lag);
                    top += b.pairs * model * (b.product + removed) / own;
                    bottom += b.pairs * model * model;
                }
                let share = if bottom > 0.0 { (top / bottom).clamp(0.0, 1.0) } else { 0.0 };
                let miss: f64 = bins
                    .iter()
                    .map(|b| b.pairs * ((b.product + removed) / own - share * one.at(b.lag)).powi(2))
                    .sum();
                if miss < best.0 {
                    best = (miss, Self { noise_share: 1.0 - share, ..one });
                }
            }
        }
        // Products of unrelated residuals scatter with variance 1/pairs, so these sums are χ²: a relation that
        // explains no more than chance among three parameters is none.
        let white: f64 = bins.iter().map(|b| b.pairs * (b.product / own).powi(2)).sum();
        if white - best.0 < LEAST_GAIN { Self::NONE } else { best.1 }
    }
}

#[derive(Clone, Copy, Debug, Default)]
struct Bin {
    pairs: f64,
    lag: f64,
    product: f64,
}

impl Bin {
    fn mean(self) -> Self {
        Self { pairs: self.pairs, lag: self.lag / self.pairs, product: self.product / self.pairs }
    }
}

/// At most `most` of `n` indices, evenly by the golden section so that no row or column of a lattice is favoured.
pub fn thinned(n: usize, most: usize) -> Vec<usize> {
    const GOLDEN: f64 = 0.618_033_988_749_894_9;
    if n <= most {
        return (0..n).collect();
    }
    let share = most as f64 / n as f64;
    (0..n).filter(|i| (*i as f64 * GOLDEN).fract() < share).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Seed;
    use rand::Rng as _;
    use rand_distr::{Distribution as _, StandardNormal};
    use std::f64::consts::TAU;

    #[test]
    fn the_length_of_a_gaussian_field_is_found_again() {
        let mut lengths = Vec::new();
        for run in 0..8 {
            let mut random = Seed(7).stream("test.correlation", run);
            // Plane waves with normal wave numbers: ρ = exp(−h²/L²) for k of variance 2/L².
            let waves: Vec<[f64; 3]> = (0..400)
                .map(|_| {
                    let mut k = || -> f64 { StandardNormal.sample(&mut random) };
                    let (kx, ky) = (k(), k());
                    [kx * 2f64.sqrt() / 4.0, ky * 2f64.sqrt() / 4.0, random.random_range(0.0..TAU)]
                })
                .collect();
            let places: Vec<Point> =
                (0..1600).map(|i| Point::new(f64::from(i % 40), f64::from(i / 40))).collect();
            let value = |p: &Point| {
                waves.iter().map(|[kx, ky, phase]| (kx * p.x + ky * p.y + phase).cos()).sum::<f64>()
            };
            let field: Vec<f64> = places.iter().map(value).collect();
            let mean = field.iter().sum::<f64>() / field.len() as f64;
            let residuals: Vec<f64> = field.iter().map(|v| v - mean).collect();
            lengths.push(Correlation::fit(&residuals, &places, 20.0).0.length);
        }
        let mean = lengths.iter().sum::<f64>() / lengths.len() as f64;
        assert_close!(mean, 4.0, 0.6, "length over eight fields: {lengths:?}");
    }

    #[test]
    fn thinning_keeps_about_as_many_as_asked() {
        let kept = thinned(10_000, 2000);
        assert_close!(kept.len() as f64, 2000.0, 5.0, "kept");
        let even = kept.iter().filter(|i| **i % 100 < 50).count() as f64;
        assert_close!(even / kept.len() as f64, 0.5, 0.02, "either half of each row");
    }
}
