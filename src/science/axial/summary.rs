//! The family's one face: everything a finding says about a set of axes.

use crate::ground::{Axis, Caution, Point, Seed, Stopped, Work};

use super::blocks::{self, BlockBootstrap};
use super::bootstrap;
use super::effective::{EffectiveNumber, effective_number, independent};
use super::interval::{dispersion, half_width};
use super::kappa::Kappa;
use super::mean::{Resultant, doubled};
use super::rayleigh::rayleigh_p_estimated;
use super::spread::Spread;

/// Axes with what is known about how they were sampled.
#[derive(Clone, Copy, Debug)]
pub struct AxialSample<'a> {
    pub axes: &'a [Axis],
    /// As many, ≥ 0; `None` when all count alike.
    pub weights: Option<&'a [f64]>,
    /// Where the nodes stand, any unit; `None` for independent axes.
    pub nodes: Option<Nodes<'a>>,
}

/// Positions of nodes that may be correlated. All in one unit.
#[derive(Clone, Copy, Debug)]
pub struct Nodes<'a> {
    pub at: &'a [Point],
    /// Node step.
    pub spacing: f64,
    /// Standard deviation of the Gaussian the field was smoothed with; 0 when it was not.
    pub kernel_sigma: f64,
}

/// What the statistics need to know besides the axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SummarySettings {
    /// Level of the test for a preferred trend.
    pub significance: f64,
    /// Draws of the block bootstrap.
    pub resamples: u32,
}

/// The numbers of a set of axes.
#[derive(Clone, Debug, PartialEq)]
pub struct Summary {
    /// Whether a trend is preferred at the level asked for. When not, `mean` must not be drawn.
    pub preferred: bool,
    /// The mean axis, a number even when no trend is preferred; `None` for no axes.
    pub mean: Option<Axis>,
    /// R̄ of the doubled angle.
    pub resultant_length: f64,
    /// κ of the doubled angle, by `kappa_estimator` with the effective number.
    pub kappa: f64,
    pub kappa_estimator: &'static str,
    /// Axial standard deviation ½√(−2 ln R̄), degrees; `None` for R̄ = 0.
    pub spread_deg: Option<f64>,
    /// Axes with weight.
    pub n: usize,
    pub n_eff_mean: f64,
    pub n_eff_test: f64,
    /// e-folding length of the field, unit of the positions; `None` for independent axes.
    pub correlation_length: Option<f64>,
    /// p of Rayleigh's test; `None` when the patch holds fewer than 10 tiles.
    pub rayleigh_p: Option<f64>,
    pub interval: Interval,
    pub cautions: Vec<Caution>,
}

/// The 95 % interval of the mean axis.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Interval {
    /// Half width, degrees of axis; `None` when it is all axes.
    pub half_deg: Option<f64>,
    /// `"effective n"`, `"block bootstrap"` (the wider of the two), `"independent axes"` or
    /// `"bootstrap of few axes"`.
    pub source: &'static str,
    /// By the effective number alone.
    pub effective_deg: Option<f64>,
    /// By tiles of side ℓ, and of 2ℓ where ten of them fit.
    pub blocks: Option<BlockBootstrap>,
    pub double_blocks: Option<BlockBootstrap>,
}

const LEVEL: f64 = 0.95;

/// Summarises axes: mean, spread, concentration, effective number, test and interval.
///
/// # Errors
/// [`Stopped`].
pub fn summarise(
    sample: &AxialSample,
    settings: SummarySettings,
    seed: Seed,
    work: &Work,
) -> Result<Summary, Stopped> {
    let phi = doubled(sample.axes);
    let weights = sample.weights;
    let resultant = Resultant::of(&phi, weights);
    let length = resultant.mean_length();
    let n = weights.map_or(phi.len(), |w| w.iter().filter(|w| **w > 0.0).count());
    let effective = match sample.nodes {
        Some(nodes) => effective_number(&phi, weights, nodes.at, nodes.spacing, nodes.kernel_sigma, work)?,
        None => independent(kish(weights, phi.len())),
    };
    let delta = dispersion(&phi, weights);
    let by_number = half_width(delta, effective.mean.standard_reach(LEVEL)).filter(|_| n > 0);
    // A large-sample form would be too narrow for few axes.
    let few = sample.nodes.is_none() && n < 25 && by_number.is_some();
    let resampled = if few {
        Some(bootstrap::half_width(&phi, weights, settings.resamples, LEVEL, seed, work)?)
    } else {
        None
    };
    let [blocks, double_blocks] = match sample.nodes {
        Some(nodes) => block_bootstraps(&phi, weights, nodes, &effective, settings, seed, work)?,
        None => [None; 2],
    };
    let interval = match resampled {
        Some(half) => few_axes_interval(by_number, half),
        None => interval(by_number, blocks, double_blocks, sample.nodes.is_some()),
    };
    let p = rayleigh_p_estimated(length, effective.test);
    let n_eff_mean = effective.mean.value();
    let estimator = Kappa::recommended(n_eff_mean);
    Ok(Summary {
        preferred: n > 0 && p <= settings.significance,
        mean: (n > 0).then(|| resultant.axis()),
        resultant_length: length,
        kappa: estimator.of(length, n_eff_mean),
        kappa_estimator: estimator.name(),
        spread_deg: Spread::Standard.axial_deg(length),
        n,
        n_eff_mean,
        n_eff_test: effective.test.value(),
        correlation_length: sample.nodes.map(|_| effective.correlation_length),
        rayleigh_p: (sample.nodes.is_none() || blocks.is_some()).then_some(p),
        cautions: cautions(&effective, blocks, sample.nodes.is_some(), n),
        interval,
    })
}

/// (Σw)²/Σw²: the number of independent axes of equal weight that would scatter alike.
fn kish(weights: Option<&[f64]>, n: usize) -> f64 {
    let Some(w) = weights else { return n as f64 };
    let (sum, square) = w.iter().fold((0.0, 0.0), |(s, q), w| (s + w, q + w * w));
    if square > 0.0 { sum * sum / square } else { 0.0 }
}

/// Bootstraps with tiles of side ℓ and 2ℓ; ℓ is as large as leaves 16 tiles, between 4 and 8 e-folds.
fn block_bootstraps(
    phi: &[f64],
    weights: Option<&[f64]>,
    nodes: Nodes,
    effective: &EffectiveNumber,
    settings: SummarySettings,
    seed: Seed,
    work: &Work,
) -> Result<[Option<BlockBootstrap>; 2], Stopped> {
    let fold = effective.correlation_length.max(nodes.spacing);
    let area = phi.len() as f64 * nodes.spacing * nodes.spacing;
    let side = (area / blocks::GOOD_TILES).sqrt().clamp(4.0 * fold, 8.0 * fold);
    let mut results = [None; 2];
    for (result, side) in results.iter_mut().zip([side, 2.0 * side]) {
        let tiles = blocks::tiles(phi, weights, nodes.at, side);
        if blocks::effective_tiles(&tiles) >= blocks::LEAST_TILES {
            *result = Some(blocks::bootstrap(&tiles, side, settings.resamples, LEVEL, seed, work)?);
        }
    }
    Ok(results)
}

/// The wider of the bootstrap and the large-sample form.
fn few_axes_interval(by_number: Option<f64>, resampled: f64) -> Interval {
    let half = by_number.map_or(resampled, |h| h.max(resampled));
    Interval {
        half_deg: Some(0.5 * half.to_degrees()),
        source: "bootstrap of few axes",
        effective_deg: by_number.map(|h| 0.5 * h.to_degrees()),
        blocks: None,
        double_blocks: None,
    }
}

/// The wider of the two intervals.
fn interval(
    by_number: Option<f64>,
    blocks: Option<BlockBootstrap>,
    double_blocks: Option<BlockBootstrap>,
    correlated: bool,
) -> Interval {
    // Half of the circle angle is the axis.
    let axial = |half: f64| 0.5 * half.to_degrees();
    let effective_deg = by_number.map(axial);
    let by_blocks = blocks.map(|b| axial(b.half));
    let (half_deg, source) = match (effective_deg, by_blocks) {
        (Some(number), Some(blocks)) if blocks > number => (Some(blocks), "block bootstrap"),
        (number, _) => (number, if correlated { "effective n" } else { "independent axes" }),
    };
    Interval { half_deg, source, effective_deg, blocks, double_blocks }
}

fn cautions(
    effective: &EffectiveNumber,
    blocks: Option<BlockBootstrap>,
    correlated: bool,
    n: usize,
) -> Vec<Caution> {
    let mut cautions = Vec::new();
    if n == 0 {
        cautions.push(Caution::new("no-axes", "There is no axis to summarise."));
        return cautions;
    }
    match blocks {
        None if correlated => cautions.push(Caution::new(
            "few-tiles",
            "The patch holds fewer than 10 tiles of four correlation lengths: the interval rests on the \
             effective number of samples alone, and no p-value is given.",
        )),
        Some(b) if b.tiles < blocks::GOOD_TILES => cautions.push(Caution::new(
            "some-tiles",
            format!("The block bootstrap had only {:.0} tiles to draw from; 16 are wanted.", b.tiles),
        )),
        _ => {}
    }
    if effective.held {
        cautions.push(Caution::new(
            "long-correlation",
            "The trend changes as slowly as the patch is wide: the number of independent samples is a guess.",
        ));
    }
    if !correlated && n < 25 {
        cautions.push(Caution::new(
            "few-axes",
            format!("Only {n} axes: the interval comes from redrawing them, and below 8 it is too narrow."),
        ));
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    const SETTINGS: SummarySettings = SummarySettings { significance: 0.05, resamples: 500 };

    fn run(axes: &[Axis], weights: Option<&[f64]>, nodes: Option<Nodes>) -> Summary {
        summarise(&AxialSample { axes, weights, nodes }, SETTINGS, Seed(7), &Work::quiet())
            .expect("nobody stops")
    }

    /// A bend: the trend turns by 30° from the left edge of a 40 × 40 lattice to the right.
    fn bend() -> (Vec<Axis>, Vec<Point>) {
        let at: Vec<Point> = (0..1600).map(|i| Point::new(f64::from(i % 40), f64::from(i / 40))).collect();
        (at.iter().map(|p| Axis::from_deg(60.0 + 0.75 * p.x)).collect(), at)
    }

    #[test]
    fn a_bend_is_a_trend_with_an_honest_interval() {
        let (axes, at) = bend();
        let nodes = Nodes { at: &at, spacing: 1.0, kernel_sigma: 1.0 };
        let summary = run(&axes, None, Some(nodes));
        assert_close!(summary.mean.expect("axes").deg(), 74.6, 0.1, "mean axis");
        assert!(summary.n_eff_mean < 20.0, "{summary:?}");
        assert!(summary.interval.half_deg.expect("an arc") > 3.0, "{summary:?}");
    }

    #[test]
    fn no_axes_and_one_axis_are_legal() {
        let none = run(&[], None, None);
        assert!(!none.preferred && none.mean.is_none() && none.interval.half_deg.is_none());
        let one = run(&[Axis::from_deg(30.0)], None, None);
        assert!(!one.preferred && one.rayleigh_p == Some(1.0), "{one:?}");
        let point = [Point::new(3.0, 3.0)];
        let node =
            run(&[Axis::from_deg(30.0)], None, Some(Nodes { at: &point, spacing: 1.0, kernel_sigma: 2.0 }));
        assert!(!node.preferred, "{node:?}");
    }

    #[test]
    fn equal_axes_have_no_width() {
        let (_, at) = bend();
        let axes = vec![Axis::from_deg(42.0); at.len()];
        let same = run(&axes, None, Some(Nodes { at: &at, spacing: 1.0, kernel_sigma: 1.0 }));
        assert!(same.preferred, "{same:?}");
        assert_close!(same.interval.half_deg.expect("an arc"), 0.0, 1e-6, "half width");
    }

    #[test]
    fn turning_the_field_turns_only_the_mean() {
        let (axes, at) = bend();
        let nodes = Nodes { at: &at, spacing: 1.0, kernel_sigma: 1.0 };
        let turned: Vec<Axis> = axes.iter().map(|a| a.rotated(77.0)).collect();
        let (a, b) = (run(&axes, None, Some(nodes)), run(&turned, None, Some(nodes)));
        assert!(a.mean.expect("axes").rotated(77.0).separation(b.mean.expect("axes")) < 1e-9);
        assert_close!(a.n_eff_mean / b.n_eff_mean, 1.0, 1e-9, "n_eff");
    }
}
