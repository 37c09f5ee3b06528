//! The posterior over two-wind regimes: every cell of the map, both sides, every flux-up ratio, every
//! azimuth of the dominant wind.

use rayon::prelude::*;

use crate::ground::{Azimuth, Caution, Stopped, Work};
use crate::numeric::bessel::inverse_ratio;
use crate::science::alignment::likelihood::{density, kappa_of_axial_sd};

use super::curves::{class_areas, class_shares};
use super::evidence::{Cover, Observed, Sense, SenseKind};
use super::predictions::{Cell, DIVERGENCES, RATIOS, cell, cells, divergence_at, log_ratio_at};
use super::summary::{cautions, entropy_gain};

/// Whole degrees of azimuth.
pub(super) const TURN: usize = 360;

/// What is assumed beforehand.
#[derive(Clone, Debug, PartialEq)]
pub struct BackwardsSettings {
    /// Flux-up ratios held equally likely.
    pub flux_up: Vec<f64>,
    /// Axial standard deviation by which a right regime may still miss, degrees.
    pub model_error_deg: f64,
    /// Share of each prediction spread over all axes.
    pub tail_share: f64,
    /// Where the dominant wind carries sand, if something is known of it.
    pub wind: Option<WindPrior>,
}

/// An azimuth known beforehand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WindPrior {
    /// TOWARD.
    pub toward: Azimuth,
    /// Standard deviation, degrees.
    pub sd_deg: f64,
}

/// The posterior.
#[derive(Clone, Debug, PartialEq)]
pub struct Regimes {
    /// Shares of the cells, row by row of log₁₀ N from 0 up, each row from divergence 0° on; they sum
    /// to 1. Beforehand every cell has the same.
    pub map: Vec<f64>,
    /// RDP/DP of each cell.
    pub ratios: Vec<f64>,
    /// Chance of each whole degree for the azimuth toward which the dominant wind carries sand.
    pub dominant: Vec<f64>,
    /// The same for the resultant drift.
    pub resultant: Vec<f64>,
    /// (flux-up ratio, chance).
    pub flux_up: Vec<(f64, f64)>,
    /// Chance that the other wind turns away clockwise from the dominant.
    pub clockwise: f64,
    /// Longitudinal, oblique, transverse under gross transport; and beforehand.
    pub classes: [f64; 3],
    pub class_priors: [f64; 3],
    /// What the trends told about divergence and ratio, and about the drift's azimuth, bits.
    pub map_bits: f64,
    pub resultant_bits: f64,
    /// ln of the Bayes factor of "two winds made all of it" against random axes and senses.
    pub ln_bayes_factor: f64,
    /// ln of the likelihood of the best regime over that of one which meets everything exactly: 0 at
    /// best.
    pub ln_fit: f64,
    pub cautions: Vec<Caution>,
}

impl Regimes {
    pub const COLUMNS: usize = DIVERGENCES;
    pub const ROWS: usize = RATIOS;

    /// Divergence at the middle of column `i`, degrees.
    pub fn divergence(i: usize) -> f64 {
        divergence_at(i)
    }

    /// log₁₀ N at the middle of row `j`.
    pub fn log_ratio(j: usize) -> f64 {
        log_ratio_at(j)
    }

    /// The share a cell must reach to lie in the smallest region that holds `mass` of the posterior.
    pub fn level(&self, mass: f64) -> f64 {
        let mut sorted = self.map.clone();
        sorted.sort_by(|a, b| b.total_cmp(a));
        let mut sum = 0.0;
        for share in &sorted {
            sum += share;
            if sum >= mass - 1e-12 {
                return *share;
            }
        }
        0.0
    }

    /// Chance of each divergence column.
    pub fn divergences(&self) -> Vec<f64> {
        (0..DIVERGENCES).map(|i| self.map.iter().skip(i).step_by(DIVERGENCES).sum()).collect()
    }

    /// Quantile of the divergence, degrees.
    pub fn divergence_quantile(&self, share: f64) -> f64 {
        let columns = self.divergences();
        let pairs = columns.iter().enumerate().map(|(i, p)| (divergence_at(i), *p)).collect();
        quantile(pairs, share)
    }

    /// Quantile of RDP/DP after the data (`Some` posterior) or before it.
    pub fn ratio_quantile(&self, share: f64, before: bool) -> f64 {
        let even = 1.0 / self.map.len() as f64;
        let weight = |p: &f64| if before { even } else { *p };
        quantile(self.ratios.iter().zip(&self.map).map(|(r, p)| (*r, weight(p))).collect(), share)
    }

    /// The cell of greatest share as (column, row).
    pub fn best(&self) -> (usize, usize) {
        let mut best = 0;
        for (k, share) in self.map.iter().enumerate() {
            if *share > self.map[best] {
                best = k;
            }
        }
        (best % DIVERGENCES, best / DIVERGENCES)
    }
}

/// The value below which `share` of the weight lies.
fn quantile(mut pairs: Vec<(f64, f64)>, share: f64) -> f64 {
    pairs.sort_by(|a, b| a.0.total_cmp(&b.0));
    let total: f64 = pairs.iter().map(|p| p.1).sum();
    let mut sum = 0.0;
    for (value, weight) in &pairs {
        sum += weight;
        if sum >= share * total {
            return *value;
        }
    }
    pairs.last().map_or(0.0, |p| p.0)
}

/// Weighs every regime by the trends observed; without any the posterior is the prior.
///
/// # Errors
/// [`Stopped`].
pub fn backwards(
    observed: &[Observed],
    settings: &BackwardsSettings,
    work: &Work,
) -> Result<Regimes, Stopped> {
    work.phase("weighing two-wind regimes", RATIOS as u64);
    let tables: Vec<Likelihood> = observed.iter().map(|o| Likelihood::of(o, settings)).collect();
    // Axes alone repeat after half a turn, so half the azimuths do.
    let directed = settings.wind.is_some() || tables.iter().any(|t| t.sense.is_some());
    let prior = if directed { azimuth_prior(settings.wind) } else { vec![2.0 / TURN as f64; TURN / 2] };
    let cells: Vec<_> = settings.flux_up.iter().map(|ratio| cells(*ratio)).collect();
    let rows: Vec<Sums> = (0..RATIOS)
        .into_par_iter()
        .map(|row| {
            work.advance(1)?;
            Ok(Sums::of_row(row, &cells, &tables, &prior))
        })
        .collect::<Result<_, Stopped>>()?;
    let sums = rows.into_iter().reduce(Sums::with).unwrap_or_default();
    let most = |v: &[f64]| v.iter().copied().fold(0.0, f64::max);
    let possible = tables.iter().fold(most(&prior), |product, table| {
        product * most(&table.axis) * table.sense.as_deref().map_or(1.0, most)
    });
    Ok(finish(sums, possible, observed, settings, &cells))
}

/// How a regime of given divergence and ratio must lie on the ground to fit best.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lie {
    /// Where the dominant wind carries sand.
    pub dominant: Azimuth,
    /// Whether the other wind turns away clockwise.
    pub clockwise: bool,
    /// Its chance among all lies of this regime, counting those within 10°.
    pub chance: f64,
}

/// The likeliest lie of one regime; of several that fit as well, the first clockwise from north.
pub fn likeliest_lie(
    observed: &[Observed],
    settings: &BackwardsSettings,
    divergence: f64,
    ratio: f64,
    flux_up: f64,
) -> Lie {
    let cell = cell(divergence, ratio.log10(), flux_up);
    let prior = azimuth_prior(settings.wind);
    let tables: Vec<Likelihood> = observed.iter().map(|o| Likelihood::of(o, settings)).collect();
    let sides = [1, -1].map(|side| {
        let mut weights = prior.clone();
        tables.iter().for_each(|table| table.weigh(&mut weights, &cell, side));
        weights
    });
    let total: f64 = sides.iter().flatten().sum();
    let (mut best, mut at) = (0.0, (0, 0));
    for k in 0..TURN {
        for (side, weights) in sides.iter().enumerate() {
            // Rounding must not decide between lies that fit alike.
            if weights[k] > best * (1.0 + 1e-9) {
                (best, at) = (weights[k], (side, k));
            }
        }
    }
    let near = (TURN + at.1 - 10..=TURN + at.1 + 10).map(|k| sides[at.0][k % TURN]).sum::<f64>();
    Lie { dominant: Azimuth::from_deg(at.1 as f64), clockwise: at.0 == 0, chance: near / total }
}

fn finish(
    sums: Sums,
    possible: f64,
    observed: &[Observed],
    settings: &BackwardsSettings,
    cells: &[Arc],
) -> Regimes {
    let total: f64 = sums.map.iter().sum();
    let shares = |v: Vec<f64>| -> Vec<f64> { v.iter().map(|x| x / total).collect() };
    let round = |v: Vec<f64>| {
        let times = TURN / v.len();
        let whole = v.repeat(times);
        shares(whole).iter().map(|x| x / times as f64).collect::<Vec<f64>>()
    };
    let map = shares(sums.map);
    let mut classes = [0.0; 3];
    for (k, share) in map.iter().enumerate() {
        let (i, j) = (k % DIVERGENCES, k / DIVERGENCES);
        let (low, high) = (j as f64 / RATIOS as f64, (j + 1) as f64 / RATIOS as f64);
        for (sum, part) in classes.iter_mut().zip(class_shares(divergence_at(i), low, high)) {
            *sum += share * part;
        }
    }
    let resultant = round(sums.resultant);
    let mut found = Regimes {
        map_bits: entropy_gain(&map),
        resultant_bits: entropy_gain(&resultant),
        map,
        ratios: cells.first().map_or_else(Vec::new, |c| c.iter().map(|cell| cell.ratio).collect()),
        dominant: round(sums.dominant),
        resultant,
        flux_up: settings.flux_up.iter().copied().zip(shares(sums.flux_up)).collect(),
        clockwise: sums.clockwise / total,
        classes,
        class_priors: class_areas(),
        // Every sum is over cells × flux-up ratios × sides; the prior over azimuths sums to 1.
        ln_bayes_factor: (total / (2 * DIVERGENCES * RATIOS * settings.flux_up.len()) as f64).ln(),
        ln_fit: (sums.best / possible).ln(),
        cautions: Vec::new(),
    };
    found.cautions = cautions(observed, settings, &found);
    found
}

type Arc = std::sync::Arc<[Cell]>;

/// Chance of each whole degree toward which the dominant wind carries sand.
fn azimuth_prior(wind: Option<WindPrior>) -> Vec<f64> {
    let Some(wind) = wind else { return vec![1.0 / TURN as f64; TURN] };
    // Von Mises of the azimuth itself: R = e^{−s²/2}.
    let kappa = inverse_ratio((-0.5 * wind.sd_deg.to_radians().powi(2)).exp());
    let at = |k: usize| (kappa * ((k as f64 - wind.toward.deg()).to_radians().cos() - 1.0)).exp();
    let raw: Vec<f64> = (0..TURN).map(at).collect();
    let sum: f64 = raw.iter().sum();
    raw.iter().map(|p| p / sum).collect()
}

/// How well each predicted azimuth meets one population, against chance; two turns, so that a slice
/// of one turn can start at any degree.
struct Likelihood {
    axis: Vec<f64>,
    sense: Option<Vec<f64>>,
    cover: Cover,
    by_resultant: bool,
}

impl Likelihood {
    fn of(observed: &Observed, settings: &BackwardsSettings) -> Self {
        let model = kappa_of_axial_sd(settings.model_error_deg);
        let tail = settings.tail_share;
        // Averaged over the degree, since predictions are rounded to it.
        let axis = |k: usize| {
            let inside = [-0.375, -0.125, 0.125, 0.375].map(|off| {
                let predicted = Azimuth::from_deg(k as f64 + off).axis();
                density(predicted.separation(observed.axis), observed.kappa, model)
            });
            (1.0 - tail) * std::f64::consts::TAU * inside.iter().sum::<f64>() / 4.0 + tail
        };
        let half: Vec<f64> = (0..TURN / 2).map(axis).collect();
        let sense = |s: &Sense| {
            let at = |k: usize| {
                let cos = (k as f64 - s.toward.deg()).to_radians().cos();
                1.0 + (2.0 * s.chance_right.clamp(0.5, 1.0) - 1.0) * cos
            };
            let turn: Vec<f64> = (0..TURN).map(at).collect();
            turn.repeat(2)
        };
        Self {
            axis: half.repeat(4),
            sense: observed.sense.as_ref().map(sense),
            cover: observed.cover,
            by_resultant: observed.sense.is_some_and(|s| s.evidence == SenseKind::Obstacles),
        }
    }

    /// Multiplies `weights`, one for each azimuth of the dominant wind, by this population's likelihood
    /// under a cell seen from the `side` (1 or −1) to which the other wind turns away.
    fn weigh(&self, weights: &mut [f64], cell: &Cell, side: i32) {
        let from = |turn: i32| (side * turn).rem_euclid(TURN as i32) as usize;
        let bed = &self.axis[from(cell.bed)..];
        let finger = cell.finger.map(|f| &self.axis[from(f)..]);
        let Some(senses) = &self.sense else {
            return match (self.cover, finger) {
                (Cover::Full, _) => times(weights, |a| bed[a]),
                (Cover::Starved, Some(finger)) => times(weights, |a| finger[a]),
                (Cover::Unknown, Some(finger)) => times(weights, |a| 0.5 * (bed[a] + finger[a])),
                (Cover::Unknown, None) => times(weights, |a| 0.5 * (bed[a] + 1.0)),
                (Cover::Starved, None) => {}
            };
        };
        let sense = |own: i32| &senses[from(if self.by_resultant { cell.resultant } else { own })..];
        let (over_bed, along) = (sense(cell.over_bed), sense(cell.finger.unwrap_or(cell.resultant)));
        let starved = |a: usize| finger.map_or(1.0, |f| f[a]) * along[a];
        match self.cover {
            Cover::Full => times(weights, |a| bed[a] * over_bed[a]),
            Cover::Starved => times(weights, starved),
            Cover::Unknown => times(weights, |a| 0.5 * (bed[a] * over_bed[a] + starved(a))),
        }
    }
}

fn times(weights: &mut [f64], factor: impl Fn(usize) -> f64) {
    for (a, weight) in weights.iter_mut().enumerate() {
        *weight *= factor(a);
    }
}

/// Unnormalised sums over regimes.
#[derive(Default)]
struct Sums {
    map: Vec<f64>,
    dominant: Vec<f64>,
    resultant: Vec<f64>,
    flux_up: Vec<f64>,
    clockwise: f64,
    /// Greatest single weight.
    best: f64,
}

impl Sums {
    fn of_row(row: usize, cells: &[Arc], tables: &[Likelihood], prior: &[f64]) -> Self {
        let mut sums = Self {
            map: vec![0.0; DIVERGENCES],
            dominant: vec![0.0; prior.len()],
            resultant: vec![0.0; prior.len()],
            flux_up: vec![0.0; cells.len()],
            clockwise: 0.0,
            best: 0.0,
        };
        let mut weights = vec![0.0; prior.len()];
        for i in 0..DIVERGENCES {
            for (which, cells) in cells.iter().enumerate() {
                let cell = &cells[row * DIVERGENCES + i];
                for side in [1, -1] {
                    weights.copy_from_slice(prior);
                    for table in tables {
                        table.weigh(&mut weights, cell, side);
                    }
                    let sum: f64 = weights.iter().sum();
                    sums.best = weights.iter().copied().fold(sums.best, f64::max);
                    sums.map[i] += sum;
                    sums.flux_up[which] += sum;
                    if side > 0 {
                        sums.clockwise += sum;
                    }
                    let shift = (side * cell.resultant).rem_euclid(prior.len() as i32) as usize;
                    add(&mut sums.dominant, &weights);
                    let (before, after) = weights.split_at(prior.len() - shift);
                    add(&mut sums.resultant[shift..], before);
                    add(&mut sums.resultant[..shift], after);
                }
            }
        }
        sums
    }

    /// The sums of this row and those of the next: maps follow each other, all else adds.
    fn with(mut self, next: Self) -> Self {
        self.map.extend(next.map);
        add(&mut self.dominant, &next.dominant);
        add(&mut self.resultant, &next.resultant);
        add(&mut self.flux_up, &next.flux_up);
        self.clockwise += next.clockwise;
        self.best = self.best.max(next.best);
        self
    }
}

fn add(sums: &mut [f64], more: &[f64]) {
    for (sum, m) in sums.iter_mut().zip(more) {
        *sum += m;
    }
}
