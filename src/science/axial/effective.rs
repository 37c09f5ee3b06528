//! How many independent axes the nodes of a field are worth.
//!
//! Neighbouring nodes share pixels and bedforms, so n nodes are far fewer samples. The variance of
//! their weighted sum is added up from the products of residuals at all lags as far as they are
//! related: n_eff = (Σw)² σ² / Var(Σ w z).

use rayon::prelude::*;

use crate::ground::{Bounds, Method, Point, Source, Stopped, Symbol, Work};
use crate::numeric::lattice::Lattice;
use crate::numeric::tail::{normal_quantile, student_two_sided};

use super::mean::Resultant;
use super::sources::DERIVED;

pub static METHOD: Method = Method {
    id: "axial.effective-number",
    name: "Effective number of axes",
    question: "How many independent axes are the nodes worth?",
    formula: "n_eff = (Σw)² C(0) / [Σ_{|h| ≤ H} N(h) C(h) / (1 − 1/ν)]; ν = (Σw)²/Σ_{|h| ≤ H} N(h)",
    symbols: &[
        Symbol {
            symbol: "C(h)",
            meaning: "covariance of residuals at lag h: of sin(φ − φ̄) for the mean axis, of the whole unit vector less its mean for the test",
            unit: "1",
        },
        Symbol { symbol: "N(h)", meaning: "Σ wᵢwⱼ over pairs at lag h", unit: "1" },
        Symbol {
            symbol: "H",
            meaning: "lag beyond which nodes are unrelated, at most 3 e-folding lengths",
            unit: "m",
        },
        Symbol {
            symbol: "ν",
            meaning: "independent discs of radius H in the patch: degrees of freedom of the estimate",
            unit: "1",
        },
    ],
    assumptions: &[
        "The field of axes is statistically the same all over the patch.",
        "Correlation is no shorter than the smoothing of the field implies.",
    ],
    limits: &[
        "Known to about 25 % for 300 effective axes: intervals use Student's quantile with ν − 1 degrees of freedom.",
        "Removing the mean removes 1/ν of the sum; the factor 1 − 1/ν restores it.",
        "H is held where ν would fall below 3: a patch smaller than that cannot tell.",
    ],
    sources: &[Source { locator: "autocovariance of residuals", ..DERIVED }],
};

/// A number of independent axes, and how well it is known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Number {
    /// From the residuals.
    pub estimated: f64,
    /// Degrees of freedom of that estimate; infinite when independence was given.
    pub df: f64,
    /// The most that the smoothing of the field and the weights allow.
    pub most: f64,
}

/// The effective number of nodes for the two uses it has.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EffectiveNumber {
    /// For the interval of the mean axis: from the residual component across the mean.
    pub mean: Number,
    /// For the test of a preferred trend: from both components of the residual unit vector, the
    /// field as it would be without a mean.
    pub test: Number,
    /// Lag where the correlation of the across-mean residual falls to 1/e, unit of the positions.
    pub correlation_length: f64,
    /// The patch is too small for its correlation: the sum was held before the nodes were unrelated.
    pub held: bool,
}

impl Number {
    /// `n` axes known to be independent.
    pub fn known(n: f64) -> Self {
        Self { estimated: n, df: f64::INFINITY, most: n }
    }

    /// The number to report.
    pub fn value(self) -> f64 {
        self.estimated.min(self.most)
    }

    /// q/√n for a two-sided interval of `level`: Student's quantile with the estimated number or the
    /// normal quantile with the bound, whichever is wider. The bound is known, so it is not charged
    /// for the uncertainty of an estimate.
    pub fn standard_reach(self, level: f64) -> f64 {
        let known = normal_quantile(0.5 + 0.5 * level) / self.most.sqrt();
        if self.df.is_infinite() {
            return known;
        }
        known.max(student_two_sided(level, self.df) / self.estimated.sqrt())
    }
}

/// Rings of lags looked at before the lattice is made coarser.
const RINGS: usize = 16;
/// Correlation at which nodes count as unrelated.
const UNRELATED: f64 = 0.05;
/// Share of the correlation's volume still to come where it has sunk to [`UNRELATED`]: (1 + 3) e⁻³ for the
/// exponential fall-off of natural textures (a Gaussian one would leave 0.05).
const TAIL: f64 = 0.2;
/// e-folding lengths the sum may reach out to.
const MOST_FOLDS: f64 = 5.0;
/// The least number of independent discs the sum may leave.
const LEAST_DISCS: f64 = 3.0;
/// Most cells of a lattice; a longer one is made coarser at once.
const MOST_CELLS: f64 = 4e6;
/// A lattice of fewer cells is not made coarser: its rings reach half across it.
const LARGE: f64 = 1024.0;

/// Estimates the effective number of circle angles `phi` with `weights` at the points `at`, nodes
/// about `spacing` apart. `kernel_sigma` is the standard deviation of the Gaussian the field was
/// smoothed with (same unit; 0 for none): correlation is never taken to be shorter.
///
/// Nodes of a regular grid keep their cells; scattered points are gathered into cells of `spacing`.
/// The time is O(n) for each of some 400 lags at most: the lattice is made coarser when the
/// correlation is long.
///
/// # Errors
/// [`Stopped`].
pub fn effective_number(
    phi: &[f64],
    weights: Option<&[f64]>,
    at: &[Point],
    spacing: f64,
    kernel_sigma: f64,
    work: &Work,
) -> Result<EffectiveNumber, Stopped> {
    let resultant = Resultant::of(phi, weights);
    let Some(bounds) = Bounds::of(at.iter().copied()).filter(|_| resultant.weight > 0.0) else {
        return Ok(independent(0.0));
    };
    let cells = |coarse: usize| bounds.width() * bounds.height() / (spacing * coarse as f64).powi(2);
    let mut coarse = 1usize;
    // Three e-folds of the smoothing alone, 6σ, must lie within the rings.
    while cells(coarse) > MOST_CELLS || 6.0 * kernel_sigma > RINGS as f64 * spacing * coarse as f64 {
        coarse *= 2;
    }
    loop {
        let field = Field::new(phi, weights, at, bounds.min, spacing, coarse, resultant);
        let rings = field.rings(work)?;
        let [across, whole] = [ACROSS, WHOLE].map(|part| field.reach(&rings, part, kernel_sigma));
        if (across.out_of_rings || whole.out_of_rings) && cells(coarse) > LARGE {
            coarse *= 2;
            continue;
        }
        return Ok(EffectiveNumber {
            mean: field.number(&rings, ACROSS, &across, kernel_sigma),
            test: field.number(&rings, WHOLE, &whole, kernel_sigma),
            correlation_length: across.e_fold,
            held: across.held,
        });
    }
}

/// The number for `n` angles known to be independent.
pub fn independent(n: f64) -> EffectiveNumber {
    let number = Number::known(n);
    EffectiveNumber { mean: number, test: number, correlation_length: 0.0, held: false }
}

/// The residual across the mean direction.
const ACROSS: usize = 0;
/// Both components of the residual unit vector.
const WHOLE: usize = 1;

/// Weighted residuals on a lattice.
struct Field {
    lattice: Lattice,
    /// Cell side, unit of the positions.
    cell: f64,
    weight: Vec<f64>,
    across: Vec<f64>,
    along: Vec<f64>,
    /// Σw.
    total: f64,
    /// Σw², and Σw²d² for each residual d.
    square_weight: f64,
    square: [f64; 2],
    /// Σwd²/Σw for each residual d.
    variance: [f64; 2],
}

/// Sums over the lags of one ring, both half planes. Ring 0 is lag zero.
#[derive(Clone, Copy, Default)]
struct Ring {
    /// Mean lag and mean squared lag, unit of the positions.
    lag: f64,
    square_lag: f64,
    /// Σ N(h).
    pairs: f64,
    /// Σ N(h) C(h) for each residual.
    products: [f64; 2],
}

/// How far lags are summed.
struct Reach {
    /// Rings summed, ring 0 included.
    rings: usize,
    /// e-folding lag, unit of the positions.
    e_fold: f64,
    /// ν.
    discs: f64,
    held: bool,
    out_of_rings: bool,
}

impl Field {
    fn new(
        phi: &[f64],
        weights: Option<&[f64]>,
        at: &[Point],
        origin: Point,
        spacing: f64,
        coarse: usize,
        resultant: Resultant,
    ) -> Self {
        let step = |d: f64| (d / spacing).round().max(0.0) as usize / coarse;
        let cells: Vec<(usize, usize)> =
            at.iter().map(|p| (step(p.x - origin.x), step(p.y - origin.y))).collect();
        let (mean, length) = (resultant.direction(), resultant.mean_length());
        let w = |i: usize| weights.map_or(1.0, |w| w[i]);
        let residuals: Vec<[f64; 2]> = phi
            .iter()
            .map(|p| {
                let (sin, cos) = (p - mean).sin_cos();
                [sin, cos - length]
            })
            .collect();
        let (mut square_weight, mut square, mut variance) = (0.0, [0.0; 2], [0.0; 2]);
        for (i, [across, along]) in residuals.iter().enumerate() {
            square_weight += w(i) * w(i);
            for (part, d2) in [across * across, across * across + along * along].into_iter().enumerate() {
                square[part] += w(i) * w(i) * d2;
                variance[part] += w(i) * d2 / resultant.weight;
            }
        }
        let lattice = Lattice::of(&cells);
        let spread = |f: &dyn Fn(usize) -> f64| lattice.spread(&cells, (0..phi.len()).map(f));
        Self {
            weight: spread(&w),
            across: spread(&|i| w(i) * residuals[i][0]),
            along: spread(&|i| w(i) * residuals[i][1]),
            cell: spacing * coarse as f64,
            total: resultant.weight,
            lattice,
            square_weight,
            square,
            variance,
        }
    }

    fn rings(&self, work: &Work) -> Result<Vec<Ring>, Stopped> {
        let reach = RINGS as isize;
        let lags: Vec<(isize, usize)> = (0..=reach)
            .flat_map(|down| (-reach..=reach).map(move |right| (right, down)))
            .filter(|(right, down)| (*down > 0 || *right >= 0) && ring_of(*right, *down) <= RINGS)
            .map(|(right, down)| (right, down as usize))
            .collect();
        let sums: Vec<[f64; 3]> = lags
            .par_iter()
            .map(|(right, down)| {
                work.advance(0)?;
                let product = |field: &[f64]| self.lattice.product(field, *right, *down);
                Ok([product(&self.weight), product(&self.across), product(&self.along)])
            })
            .collect::<Result<_, Stopped>>()?;
        let mut rings = vec![Ring::default(); RINGS + 1];
        for ((right, down), [pairs, across, along]) in lags.into_iter().zip(sums) {
            let ring = &mut rings[ring_of(right, down as isize)];
            let twice = if right == 0 && down == 0 { 1.0 } else { 2.0 };
            let square = ((right * right) as f64 + (down * down) as f64) * self.cell * self.cell;
            ring.lag += twice * pairs * square.sqrt();
            ring.square_lag += twice * pairs * square;
            ring.pairs += twice * pairs;
            ring.products[ACROSS] += twice * across;
            ring.products[WHOLE] += twice * (across + along);
        }
        for ring in rings.iter_mut().filter(|ring| ring.pairs > 0.0) {
            ring.lag /= ring.pairs;
            ring.square_lag /= ring.pairs;
        }
        Ok(rings)
    }

    /// The lag H: where the correlation has sunk below [`UNRELATED`], at most [`MOST_FOLDS`] e-folds
    /// out.
    fn reach(&self, rings: &[Ring], part: usize, kernel_sigma: f64) -> Reach {
        let own = self.square[part] / self.square_weight;
        // Removing the mean lowers the covariance at every lag by the variance of the mean. It is
        // added back, from the sum so far, before asking where the correlation ends.
        let mut removed = 0.0;
        let mut reach = self.reach_above(rings, part, kernel_sigma, own, removed);
        for _ in 0..2 {
            removed = (self.covered(rings, part, &reach) / (self.total * self.total)).clamp(0.0, own);
            reach = self.reach_above(rings, part, kernel_sigma, own, removed);
        }
        reach
    }

    fn reach_above(&self, rings: &[Ring], part: usize, kernel_sigma: f64, own: f64, removed: f64) -> Reach {
        let varies = own > 0.0;
        // Correlations outwards, skipping rings no pair falls in.
        let correlations: Vec<(f64, f64)> = rings
            .iter()
            .skip(1)
            .filter(|r| r.pairs > 0.0 && varies)
            .map(|r| (r.lag, (r.products[part] / r.pairs + removed) / (own + removed)))
            .collect();
        let e_fold = crossing(&correlations, (-1f64).exp());
        let end = crossing(&correlations, UNRELATED);
        let far = rings.iter().map(|r| r.lag).fold(0.0, f64::max);
        let fold = e_fold.unwrap_or(if varies { far } else { 0.0 }).max(2.0 * kernel_sigma);
        let limit = (MOST_FOLDS * fold).min(end.unwrap_or(f64::INFINITY).max(1.5 * fold));
        let wanted = rings.iter().take_while(|r| r.lag <= limit + 1e-9 * self.cell).count().max(1);
        let discs =
            |count: usize| self.total * self.total / rings[..count].iter().map(|r| r.pairs).sum::<f64>();
        let mut summed = wanted;
        while summed > 1 && discs(summed) < LEAST_DISCS {
            summed -= 1;
        }
        Reach {
            rings: summed,
            e_fold: fold,
            discs: discs(summed).max(LEAST_DISCS),
            held: summed < wanted || e_fold.is_none() && varies,
            out_of_rings: limit > far && varies,
        }
    }

    /// Σ N(h) C(h) out to H, with what removing the mean took and what lies beyond H restored.
    fn covered(&self, rings: &[Ring], part: usize, reach: &Reach) -> f64 {
        let products: f64 = rings[..reach.rings].iter().map(|r| r.products[part]).sum();
        products / (1.0 - 1.0 / reach.discs) / (1.0 - TAIL)
    }

    fn number(&self, rings: &[Ring], part: usize, reach: &Reach, kernel_sigma: f64) -> Number {
        let variance = self.variance[part];
        // White noise smoothed by the kernel is correlated as exp(−h²/4σ²); unit vectors of pure
        // noise keep at least π/4 of it.
        let kept = if part == WHOLE { std::f64::consts::FRAC_PI_4 } else { 1.0 };
        let smoothed = |square_lag: f64| {
            if kernel_sigma > 0.0 {
                kept * (-square_lag / (4.0 * kernel_sigma * kernel_sigma)).exp()
            } else {
                0.0
            }
        };
        // Nodes of one coarse cell are on average √(1/3) of its side apart.
        let within = (rings[0].pairs - self.square_weight) * smoothed(self.cell * self.cell / 3.0);
        let least = self.square_weight
            + within
            + rings[1..].iter().map(|r| r.pairs * smoothed(r.square_lag)).sum::<f64>();
        let relative = if variance > 0.0 { self.covered(rings, part, reach) / variance } else { 0.0 };
        let number = |sum: f64| (self.total * self.total / sum.max(self.square_weight)).max(1.0);
        Number { estimated: number(relative), df: reach.discs - 1.0, most: number(least) }
    }
}

/// The lag where the correlation, 1 at lag 0, first sinks to `level`, by straight lines.
fn crossing(correlations: &[(f64, f64)], level: f64) -> Option<f64> {
    let mut before = (0.0, 1.0);
    for &(lag, correlation) in correlations {
        if correlation <= level {
            return Some(before.0 + (lag - before.0) * (before.1 - level) / (before.1 - correlation));
        }
        before = (lag, correlation);
    }
    None
}

fn ring_of(right: isize, down: isize) -> usize {
    ((right * right + down * down) as f64).sqrt().round() as usize
}
