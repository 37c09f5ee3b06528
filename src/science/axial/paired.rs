//! The same places in two pictures: the mean of the differences of their axes.

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Axis, Method, Point, Seed, Stopped, Symbol, Work};
use crate::numeric::tail::f_above;

use super::blocks;
use super::effective::{Number, effective_number, independent};
use super::interval::dispersion;
use super::mean::{Resultant, doubled};
use super::sources::DERIVED;
use super::summary::{AxialSample, Nodes, SummarySettings, summarise};
use super::two_samples::{Pair, TwoSampleSettings, turn};

pub static METHOD: Method = Method {
    id: "axial.paired",
    name: "Paired difference of axes",
    question: "Did the axes of one ground turn between two pictures?",
    formula: "δᵢ = θ₂ᵢ − θ₁ᵢ;  d = axial mean of δ;  t = sin 2d/√(D/N), D = ⟨sin² 2(δ − d)⟩/R̄²;  tiles: p = share of random signs with |Σ ± Σ sin 2δ| as great",
    symbols: &[
        Symbol { symbol: "δᵢ", meaning: "turn from the first to the second axis at a place", unit: "deg" },
        Symbol { symbol: "N", meaning: "independent differences the places are worth", unit: "1" },
        Symbol { symbol: "R̄", meaning: "doubled resultant length of the differences", unit: "1" },
    ],
    assumptions: &[
        "Both pictures show the same ground at the same places.",
        "Without a turn, first and second may change places in any tile.",
    ],
    limits: &[
        "The mean of differences is not the difference of means where axes scatter widely.",
        "Signs are drawn by tiles of four correlation lengths of the differences, where ten fit; the greater p of both is given.",
    ],
    sources: &[DERIVED],
};

/// A smaller mean turn (sine of the doubled angle) is the rounding of none.
const ROUNDING: f64 = 1e-9;

/// The mean difference of paired axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Paired {
    pub n: usize,
    pub n_eff: f64,
    /// In (−90, 90].
    pub difference_deg: f64,
    /// Half the 95 % interval; `None` when it is all axes.
    pub half_deg: Option<f64>,
    /// R̄ of the doubled differences.
    pub resultant_length: f64,
    pub t: f64,
    pub p: f64,
}

/// Tests `pairs` of indices into both samples; places and smoothing are the first sample's.
pub(super) fn paired(
    first: &AxialSample,
    second: &AxialSample,
    pairs: &[Pair],
    settings: TwoSampleSettings,
    seed: Seed,
    work: &Work,
) -> Result<Paired, Stopped> {
    let seed = seed.child("paired");
    let turns: Vec<Axis> =
        pairs.iter().map(|[i, j]| Axis::from_deg(second.axes[*j].deg() - first.axes[*i].deg())).collect();
    let at: Vec<Point> =
        first.nodes.map_or(Vec::new(), |nodes| pairs.iter().map(|[i, _]| nodes.at[*i]).collect());
    let nodes = first.nodes.map(|nodes| Nodes { at: &at, ..nodes });
    let sample = AxialSample { axes: &turns, weights: None, nodes };
    let s = SummarySettings { significance: settings.significance, resamples: settings.resamples };
    let summary = summarise(&sample, s, seed, work)?;
    let phi = doubled(&turns);
    let effective = match nodes {
        Some(n) => effective_number(&phi, None, &at, n.spacing, n.kernel_sigma, work)?,
        None => independent(phi.len() as f64),
    };
    let resultant = Resultant::of(&phi, None);
    let delta = dispersion(&phi, None);
    let (t, mut p) = by_number(resultant.direction().sin(), delta, effective.mean);
    if resultant.direction().cos() < 0.0 {
        // A mean turn beyond 45° is farther from none than its sine says; only chance without a mean leads there.
        p = p.min(summary.rayleigh_p.unwrap_or(1.0));
    }
    if let (Some(n), Some(b)) = (nodes, summary.interval.blocks) {
        let tiles = blocks::tiles(&phi, None, n.at, b.side);
        p = p.max(by_signs(&tiles, settings.permutations, seed, work)?);
    }
    Ok(Paired {
        n: pairs.len(),
        n_eff: effective.mean.value(),
        difference_deg: turn(Axis::from_deg(0.0), resultant.axis()),
        half_deg: summary.interval.half_deg,
        resultant_length: resultant.mean_length(),
        t,
        p,
    })
}

/// (t, p) of a mean turn whose doubled sine is `sine`: with the number as estimated and Student's table, or
/// with the most that smoothing allows and the normal one, whichever is the less sure.
fn by_number(sine: f64, delta: f64, number: Number) -> (f64, f64) {
    let t = |n: f64| if delta > 0.0 { sine / (delta / n).sqrt() } else { sine * f64::INFINITY };
    let p = |n: f64, df: f64| {
        let t = t(n);
        if sine.abs() < ROUNDING || t.is_nan() { 1.0 } else { f_above(t * t, 1.0, df) }
    };
    let known = p(number.most, f64::INFINITY);
    let estimated = if number.df.is_infinite() { known } else { p(number.estimated, number.df.max(1.0)) };
    let t = t(number.value());
    (if t.is_nan() { 0.0 } else { t }, known.max(estimated))
}

/// Share of random signs of the tiles that make their sum across as great as it is.
fn by_signs(tiles: &[Resultant], permutations: u32, seed: Seed, work: &Work) -> Result<f64, Stopped> {
    const CHUNK: u32 = 64;
    if permutations == 0 {
        return Ok(0.0);
    }
    let observed = tiles.iter().map(|t| t.sin).sum::<f64>().abs();
    let counts: Vec<u32> = (0..permutations.div_ceil(CHUNK))
        .into_par_iter()
        .map(|chunk| {
            work.advance(0)?;
            let mut random = seed.stream("axial.paired", u64::from(chunk));
            let count = CHUNK.min(permutations - chunk * CHUNK);
            Ok((0..count)
                .filter(|_| {
                    let sum: f64 =
                        tiles.iter().map(|t| if random.random::<bool>() { t.sin } else { -t.sin }).sum();
                    sum.abs() >= observed * (1.0 - 1e-12)
                })
                .count() as u32)
        })
        .collect::<Result<_, Stopped>>()?;
    Ok((1.0 + f64::from(counts.into_iter().sum::<u32>())) / (1.0 + f64::from(permutations)))
}
