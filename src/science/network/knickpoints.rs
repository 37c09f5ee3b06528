//! Knickpoints: places where a channel's steepness changes at once.

use crate::ground::{Method, Symbol};
use crate::numeric::huber::solve;
use crate::numeric::tail::{f_above, normal_above, normal_quantile};

use super::line::Line;
use super::sources::{DERIVED, PERRON_ROYDEN, at, memory};

pub const METHOD: Method = Method {
    id: "network.knickpoints",
    name: "Knickpoints by broken lines in χ",
    question: "Where along the channel does steepness change, more than its roughness explains?",
    formula: "z = α + β χ + δ max(0, χ − ψ); ψ = argmax |t_δ|; p = P(|Z| > t) + V e^{−t²/2}/√(2π)",
    symbols: &[
        Symbol { symbol: "ψ", meaning: "place of the break", unit: "m" },
        Symbol { symbol: "β, β + δ", meaning: "steepness below and above", unit: "m^(2θ)" },
        Symbol {
            symbol: "t_δ", meaning: "δ over its standard error, turned to a normal deviate", unit: "1"
        },
        Symbol {
            symbol: "V",
            meaning: "total variation of t_δ over the candidates: what the search costs",
            unit: "1",
        },
    ],
    assumptions: &["Means over blocks of stations err independently."],
    limits: &[
        "Stations are gathered into blocks, doubled in size until the residuals of neighbouring blocks correlate by 0.3 at most, which then widens the errors; with fewer than 12 blocks nothing is said.",
        "A change of steepness by less than a tenth is not told.",
        "A bend is told only when a break fits better than a parabola: smooth change and a wrong concavity give bends too.",
        "A single step (a fall without change of steepness above) shows as two breaks when it is longer than a few blocks, else not at all.",
        "Level 1 % for the first break of a channel; further breaks are sought within the parts at the same level.",
        "A dam, a lake, a filled pit or a breach in the raster looks like a knickpoint: see the overlay of changed cells.",
    ],
    sources: &[
        PERRON_ROYDEN,
        memory(
            "davies1987",
            "Davies, R. B.",
            1987,
            "Hypothesis testing when a nuisance parameter is present only under the alternative",
            "Biometrika 74, 33–43",
        ),
        at(DERIVED, "blocks by doubling; false alarms counted on noisy straight profiles"),
    ],
};

/// Chance at which a break is believed.
pub const LEVEL: f64 = 0.01;
/// Blocks a stretch is first cut into, and needs at least.
const MOST_BLOCKS: usize = 96;
const LEAST_BLOCKS: usize = 12;
/// Blocks that must lie on each side of a break.
const EDGE: usize = 3;

/// ln of the least change of steepness that is called a knickpoint: a tenth.
const LEAST_CHANGE: f64 = 0.095_31;

/// Greatest correlation of neighbouring blocks' residuals; what is left widens the errors by √((1 + ρ)/(1 − ρ)).
const MOST_CORRELATION: f64 = 0.3;

/// A break of a profile.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Break {
    /// Station.
    pub index: usize,
    /// Steepness above over below.
    pub ratio: f64,
    pub p: f64,
}

/// The breaks of a profile with χ rising from station to station, in order upward.
pub(super) fn breaks(chi: &[f64], z: &[f64]) -> Vec<Break> {
    let mut found = Vec::new();
    let mut waiting = vec![(0, chi.len(), 1)];
    while let Some((from, to, least)) = waiting.pop() {
        if let Some((it, size)) = strongest(&chi[from..to], &z[from..to], least) {
            let index = from + it.index;
            found.push(Break { index, ..it });
            // The block of the break itself belongs to neither part. What errs alike in the whole does in its parts.
            waiting.push((from, index.saturating_sub(size).max(from), size));
            waiting.push(((index + size).min(to), to, size));
        }
    }
    found.sort_by_key(|b| b.index);
    found
}

/// The strongest break of a stretch, when it is believed, and the stations of a block, `least` or more.
fn strongest(chi: &[f64], z: &[f64], least: usize) -> Option<(Break, usize)> {
    let mut size = chi.len().div_ceil(MOST_BLOCKS).max(least);
    loop {
        let blocks = blocks(chi, z, size);
        if blocks.len() < LEAST_BLOCKS {
            return None;
        }
        let scan = Scan::of(&blocks)?;
        if scan.correlation <= MOST_CORRELATION {
            return scan.believed(chi, z).map(|it| (it, size));
        }
        size *= 2;
    }
}

/// Means (χ, z) of `size` stations each; what is left over joins the last.
fn blocks(chi: &[f64], z: &[f64], size: usize) -> Vec<[f64; 2]> {
    let count = chi.len() / size;
    let mean = |v: &[f64]| v.iter().sum::<f64>() / v.len() as f64;
    (0..count)
        .map(|b| {
            let end = if b + 1 == count { chi.len() } else { (b + 1) * size };
            [mean(&chi[b * size..end]), mean(&z[b * size..end])]
        })
        .collect()
}

/// Broken lines at every candidate.
struct Scan {
    /// Best place, and the slopes below and above.
    psi: f64,
    slopes: [f64; 2],
    p: f64,
    /// Of neighbouring residuals about the best broken line.
    correlation: f64,
    /// Whether a parabola fits no better.
    is_sharp: bool,
}

impl Scan {
    fn of(blocks: &[[f64; 2]]) -> Option<Self> {
        let y: Vec<f64> = blocks.iter().map(|b| b[1]).collect();
        let (low, high) = (blocks[0][0], blocks[blocks.len() - 1][0]);
        let unit = high - low;
        if !(unit > 0.0 && unit.is_finite()) {
            return None;
        }
        // χ within 0 to 1, for the arithmetic.
        let x: Vec<f64> = blocks.iter().map(|b| (b[0] - low) / unit).collect();
        let straight = Line::through(&x.iter().zip(&y).map(|(x, y)| [*x, *y, 1.0]).collect::<Vec<_>>())?;
        let df = (blocks.len() - 4) as f64;
        let size = y.iter().map(|y| y * y).sum::<f64>();
        let mut best: Option<(f64, [f64; 3], f64)> = None;
        let mut deviates = Vec::new();
        for psi in &x[EDGE..x.len() - EDGE] {
            let rows: Vec<[f64; 3]> = x.iter().map(|x| [1.0, *x, (x - psi).max(0.0)]).collect();
            let Some(fit) = solve(&rows, &y, |_| 1.0) else { continue };
            let residual = squares(&rows, &y, &fit);
            // A line through rounding alone proves nothing.
            let floor = 1e-22 * size;
            let t = ((straight.residual - residual).max(0.0) / ((residual + floor) / df)).sqrt();
            deviates.push(fit[2].signum() * normal_of(t, df));
            if best.is_none_or(|b| residual < b.2) {
                best = Some((*psi, fit, residual));
            }
        }
        let (psi, fit, residual) = best?;
        let rows: Vec<[f64; 3]> = x.iter().map(|x| [1.0, *x, (x - psi).max(0.0)]).collect();
        let e: Vec<f64> = rows.iter().zip(&y).map(|(r, y)| y - dot(r, &fit)).collect();
        let neighbours: f64 = e.windows(2).map(|w| w[0] * w[1]).sum();
        let bent: Vec<[f64; 3]> = x.iter().map(|x| [1.0, *x, x * x]).collect();
        let parabola = solve(&bent, &y, |_| 1.0).map_or(f64::INFINITY, |fit| squares(&bent, &y, &fit));
        let correlation = if residual > 0.0 { neighbours / residual } else { 0.0 };
        let left = correlation.clamp(0.0, MOST_CORRELATION);
        let wider = ((1.0 - left) / (1.0 + left)).sqrt();
        deviates.iter_mut().for_each(|d| *d *= wider);
        Some(Self {
            psi: low + psi * unit,
            slopes: [fit[1] / unit, (fit[1] + fit[2]) / unit],
            p: chance(&deviates),
            correlation,
            is_sharp: residual < parabola,
        })
    }

    fn believed(&self, chi: &[f64], z: &[f64]) -> Option<Break> {
        let [below, above] = self.slopes;
        let ratio = above / below;
        if self.p >= LEVEL
            || !self.is_sharp
            || below <= 0.0
            || above <= 0.0
            || ratio.ln().abs() < LEAST_CHANGE
        {
            return None;
        }
        let psi = refined(chi, z, self.psi);
        let index = chi.partition_point(|c| *c < psi).clamp(1, chi.len() - 1);
        Some(Break { index, ratio, p: self.p })
    }
}

/// The station near `psi` at which a broken line through all stations fits best.
fn refined(chi: &[f64], z: &[f64], psi: f64) -> f64 {
    let reach = (chi[chi.len() - 1] - chi[0]) / LEAST_BLOCKS as f64;
    let misfit = |psi: f64| {
        let rows: Vec<[f64; 3]> = chi.iter().map(|c| [1.0, c - chi[0], (c - psi).max(0.0)]).collect();
        solve(&rows, z, |_| 1.0).map_or(f64::INFINITY, |fit| squares(&rows, z, &fit))
    };
    crate::numeric::maximum::golden(|p| -misfit(p), psi - reach, psi + reach, 1e-3 * reach)
}

/// Davies' bound on the chance that the greatest of |deviates| comes from a straight line.
fn chance(deviates: &[f64]) -> f64 {
    let top = deviates.iter().fold(0.0f64, |m, d| m.max(d.abs()));
    let variation: f64 = deviates.windows(2).map(|w| (w[1].abs() - w[0].abs()).abs()).sum();
    let search = variation * (-0.5 * top * top).exp() / std::f64::consts::TAU.sqrt();
    (2.0 * normal_above(top) + search).min(1.0)
}

/// The normal deviate with the same two-sided chance as Student's t.
fn normal_of(t: f64, df: f64) -> f64 {
    let p = f_above(t * t, 1.0, df);
    if p > 1e-300 { -normal_quantile(0.5 * p) } else { 37.0 }
}

fn dot(row: &[f64; 3], fit: &[f64; 3]) -> f64 {
    row.iter().zip(fit).map(|(a, b)| a * b).sum()
}

fn squares(rows: &[[f64; 3]], y: &[f64], fit: &[f64; 3]) -> f64 {
    rows.iter().zip(y).map(|(r, y)| (y - dot(r, fit)).powi(2)).sum()
}
