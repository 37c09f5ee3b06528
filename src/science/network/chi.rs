//! χ: distance stretched by area, in which a steady channel is straight; and the concavity that makes it so.

use crate::ground::{Method, Symbol};
use crate::numeric::maximum::golden;
use crate::numeric::root::brent;
use crate::numeric::tail::{f_above, student_two_sided};

use super::ascent::Ascent;
use super::line::Line;
use super::sources::{DERIVED, PERRON_ROYDEN, at};

pub const METHOD: Method = Method {
    id: "network.chi",
    name: "χ and concavity by least scatter",
    question: "Is every channel of the network equally steep for its area, and with which concavity?",
    formula: "χ(x) = ∫₀ˣ (A₀/A)^θ dx; z = z₀ + k_s A₀^{−θ} χ; θ = argmin Σ(z − ẑ(χ))²",
    symbols: &[
        Symbol { symbol: "χ", meaning: "transformed distance from the outlet", unit: "m" },
        Symbol { symbol: "A", meaning: "ground that drains through a station", unit: "m²" },
        Symbol { symbol: "A₀", meaning: "1 m², so that the slope of z on χ is k_s", unit: "m²" },
        Symbol { symbol: "θ", meaning: "concavity", unit: "1" },
        Symbol { symbol: "k_s", meaning: "steepness", unit: "m^(2θ)" },
    ],
    assumptions: &["One line for trunk and tributaries: uplift, rock and climate alike over the basin."],
    limits: &[
        "Where steepness changes along the channels one line is wrong, and θ takes up part of the change: look at the profiles.",
        "Neighbouring stations err alike. They count as n/(1 + 2 Σ ρ_k) independent ones, ρ_k their correlation k stations apart along the channels, up to the first that is not positive; the range of θ and the interval of the slope follow from that number.",
        "Only the tree of the trunk is fitted, its longest channels first, up to 200 000 stations.",
    ],
    sources: &[
        PERRON_ROYDEN,
        at(DERIVED, "range of θ: F test on the residual sum with the effective number"),
    ],
};

/// Concavities looked at.
const THETAS: (f64, f64) = (0.05, 0.95);
const STEP: f64 = 0.02;
/// Stations the correlation is taken from, at most.
const MOST_FOR_CORRELATION: usize = 4000;
/// Stations in the search, at most.
const MOST: usize = 200_000;

/// The concavity that lays all profiles on one line in χ.
#[derive(Clone, Debug, PartialEq)]
pub struct ChiFit {
    /// Concavity used for χ.
    pub theta: f64,
    /// Whether it was found by least scatter (else it is stated).
    pub found: bool,
    /// Range within which the scatter is indistinguishable from the least.
    pub theta_range: Option<[f64; 2]>,
    /// (θ, root mean square distance from one line, m).
    pub scatter: Vec<[f64; 2]>,
    /// Slope of elevation on χ with its 95 % interval: steepness, m^(2θ)/m.
    pub slope: f64,
    pub slope_ci95: Option<[f64; 2]>,
    pub r2: f64,
}

/// Fits the tree of the trunk, the first run of `ascent`; `tree` gives the main path of each path. `None` for
/// fewer than four stations, or where elevation or χ does not vary.
pub(super) fn fit(ascent: &Ascent, tree: &[usize], theta: Option<f64>) -> Option<ChiFit> {
    let part = trunk_tree(ascent, tree)?;
    let line = |theta: f64| part.line(theta);
    let rms = |line: &Line| (line.residual / line.n as f64).sqrt();
    let count = ((THETAS.1 - THETAS.0) / STEP).round() as usize;
    let scatter: Vec<[f64; 2]> = (0..=count)
        .map(|k| THETAS.0 + k as f64 * STEP)
        .filter_map(|theta| Some([theta, rms(&line(theta)?)]))
        .collect();
    let least = scatter.iter().min_by(|a, b| a[1].total_cmp(&b[1]))?[0];
    let misfit = |theta: f64| line(theta).map_or(f64::INFINITY, |l| l.residual);
    let best = golden(|t| -misfit(t), (least - STEP).max(THETAS.0), (least + STEP).min(THETAS.1), 1e-5);
    let used = theta.unwrap_or(best);
    let fitted = line(used)?;
    if fitted.r2.is_nan() || part.steps.iter().all(|s| s.z == part.steps[0].z) {
        return None;
    }
    let n_eff = part.effective_number(used, &fitted);
    let range =
        theta.is_none().then(|| range(best, part.effective_number(best, &line(best)?), misfit)).flatten();
    let df = n_eff - 2.0;
    let half = (df > 0.0).then(|| {
        let n = fitted.n as f64;
        student_two_sided(0.95, df) * (fitted.residual / n / df / (fitted.spread / n)).sqrt()
    });
    Some(ChiFit {
        theta: used,
        found: theta.is_none(),
        theta_range: range,
        scatter,
        slope: fitted.slope,
        slope_ci95: half.map(|half| [fitted.slope - half, fitted.slope + half]),
        r2: fitted.r2,
    })
}

/// The concavities whose scatter an F test at 5 % does not tell from the least:
/// Σe²(θ) ≤ Σe²(θ̂) (1 + F/(n_eff − 3)).
fn range(best: f64, n_eff: f64, misfit: impl Fn(f64) -> f64) -> Option<[f64; 2]> {
    let df = n_eff - 3.0;
    if df <= 0.0 {
        return None;
    }
    let limit_of_f = brent(|ln_f| f_above(ln_f.exp(), 1.0, df) - 0.05, -10.0, 20.0, 1e-6)?.exp();
    let bound = misfit(best) * (1.0 + limit_of_f / df);
    let over = |theta: f64| misfit(theta) - bound;
    let side = |end: f64| if over(end) <= 0.0 { Some(end) } else { brent(over, best, end, 1e-4) };
    Some([side(THETAS.0).unwrap_or(best), side(THETAS.1).unwrap_or(best)])
}

/// The stations of the trunk's tree, longest paths first.
fn trunk_tree(ascent: &Ascent, tree: &[usize]) -> Option<Ascent> {
    let root = tree[ascent.runs.first()?.path];
    let mut moved = vec![None; ascent.steps.len()];
    let mut part = Ascent { steps: Vec::new(), runs: Vec::new() };
    for run in ascent.runs.iter().filter(|run| tree[run.path] == root) {
        if !part.runs.is_empty() && part.steps.len() + (run.end - run.first) > MOST {
            break;
        }
        let first = part.steps.len();
        for i in run.first..run.end {
            let mut step = ascent.steps[i];
            step.below = step.below.and_then(|below| moved[below]);
            // A tributary whose foot is not in the part has no χ of its own.
            if step.below.is_none() && !part.runs.is_empty() {
                continue;
            }
            moved[i] = Some(part.steps.len());
            part.steps.push(step);
        }
        if part.steps.is_empty() {
            (run.first..run.end).for_each(|i| part.steps.push(ascent.steps[i]));
        }
        part.runs.push(super::ascent::Run { path: run.path, first, end: part.steps.len() });
    }
    (part.steps.len() >= 4).then_some(part)
}

impl Ascent {
    /// z on χ over all stations.
    fn line(&self, theta: f64) -> Option<Line> {
        let rows: Vec<[f64; 3]> =
            self.chi(theta).iter().zip(&self.steps).map(|(chi, step)| [*chi, step.z, 1.0]).collect();
        Line::through(&rows)
    }

    /// n/(1 + 2 Σ ρ_k): ρ_k the correlation of residuals k stations apart along the channels, summed up to the first
    /// that is not positive.
    fn effective_number(&self, theta: f64, line: &Line) -> f64 {
        let chi = self.chi(theta);
        let e: Vec<f64> = chi.iter().zip(&self.steps).map(|(chi, s)| s.z - line.at(*chi)).collect();
        let n = e.len();
        // Of very many stations every so many tell the sum as well.
        let every = n.div_ceil(MOST_FOR_CORRELATION);
        let runs: Vec<Vec<f64>> =
            self.runs.iter().map(|r| e[r.first..r.end].iter().copied().step_by(every).collect()).collect();
        let longest = runs.iter().map(Vec::len).max().unwrap_or(0);
        let mut sum = 0.0;
        for lag in 1..longest {
            // Σ e_i e_{i+k} over half the sum of the squares that enter.
            let (mut product, mut square) = (0.0, 0.0);
            for run in runs.iter().filter(|run| run.len() > lag) {
                for (a, b) in run.iter().zip(&run[lag..]) {
                    product += a * b;
                    square += 0.5 * (a * a + b * b);
                }
            }
            if product <= 0.0 {
                break;
            }
            sum += product / square;
        }
        (n as f64 / every as f64 / (1.0 + 2.0 * sum)).min(n as f64)
    }
}
