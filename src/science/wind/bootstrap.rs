//! Resampling a wind record in whole blocks, so that storms and seasons stay together.

use rand::Rng as _;

use rayon::prelude::*;

use crate::ground::{Method, Read, Seed, Source, Stopped, Symbol, Work};
use crate::numeric::quantile::of_sorted;

use super::movers::Cumulated;
use super::regime::Drift;

/// The block bootstrap of a record.
pub const METHOD: Method = Method {
    id: "wind.block-bootstrap",
    name: "Circular block bootstrap of the wind record",
    question: "How far could drift and prediction differ had another stretch of weather been recorded?",
    formula: "record = cells of b/30 of block length b, in order of time, closed to a ring; each draw = ⌈n/30⌉ blocks from \
              random starts, each within a month of the time of year it stands for; interval = 95 % of |turn| \
              about the estimate, and percentiles of the ratio",
    symbols: &[
        Symbol { symbol: "b", meaning: "block length", unit: "d" },
        Symbol { symbol: "n", meaning: "number of cells", unit: "1" },
    ],
    assumptions: &["Blocks are longer than weather remembers", "The years to come are like the record"],
    limits: &[
        "Change between years is not in a short record",
        "Without a clock, or in less than a year, the seasons are drawn as if they were chance",
    ],
    sources: &[
        KUNSCH,
        Source {
            key: "politis1992",
            authors: "Politis, D. N.; Romano, J. P.",
            year: 1992,
            title: "A circular block-resampling procedure for stationary data",
            published: "Exploring the Limits of Bootstrap, Wiley, 263–270",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// The source of drawing in blocks.
pub(super) const KUNSCH: Source = Source {
    key: "kunsch1989",
    authors: "Künsch, H. R.",
    year: 1989,
    title: "The jackknife and the bootstrap for general stationary observations",
    published: "Annals of Statistics 17, 1217–1241",
    locator: "",
    read: Read::Memory,
};

/// Cells in a block.
pub const CELLS_PER_BLOCK: usize = 30;
/// Fewer blocks than this say nothing about scatter.
pub const FEWEST_BLOCKS: usize = 4;

/// Which blocks may stand at which place of a draw.
///
/// The seasons come every year: drawn freely they would be treated as chance, and a record of two
/// opposite seasons would seem to say nothing. So a block is drawn from the same time of year as
/// the place it fills (seasonal block bootstrap).
#[derive(Clone, Debug)]
pub struct Plan {
    /// Per block of the record, the cells it may begin at.
    candidates: Vec<Vec<usize>>,
}

impl Plan {
    /// For a record of `cells` cells; `seasons` holds the time of year at which each begins, as a share
    /// of the year, where the record has a clock and spans the year.
    pub fn new(cells: usize, seasons: Option<&[f64]>) -> Self {
        let candidates = (0..cells)
            .step_by(CELLS_PER_BLOCK)
            .map(|place| {
                let same_season = |cell: &usize| {
                    seasons.is_none_or(|at| {
                        let apart = (at[*cell] - at[place]).abs();
                        apart.min(1.0 - apart) <= 1.0 / 12.0
                    })
                };
                (0..cells).filter(same_season).collect()
            })
            .collect();
        Self { candidates }
    }

    /// Block starts of draw `index`.
    pub fn starts(&self, seed: Seed, index: u64) -> Vec<usize> {
        let mut stream = seed.stream("wind.block-bootstrap", index);
        self.candidates.iter().map(|cells| cells[stream.random_range(0..cells.len())]).collect()
    }
}

/// Fills in the intervals of `drift` from `resamples` draws of the record under one flux. The same bits
/// for any number of threads.
///
/// # Errors
/// [`Stopped`] when asked to.
pub fn intervals(
    drift: &mut Drift,
    cumulated: &Cumulated,
    plan: &Plan,
    resamples: u32,
    seed: Seed,
    work: &Work,
) -> Result<(), Stopped> {
    work.phase("resampling winds", u64::from(resamples));
    let draw = |index: u32| {
        work.advance(1)?;
        Ok(Drift::of_sums(cumulated.draw(&plan.starts(seed, u64::from(index))), drift.unit))
    };
    let draws: Vec<Drift> = (0..resamples).into_par_iter().map(draw).collect::<Result<_, Stopped>>()?;
    let mut ratios: Vec<f64> = draws.iter().filter_map(|d| d.ratio).collect();
    let turn = |drawn: &Drift| Some(drawn.toward?.turn_from(drift.toward?).abs());
    let mut turns: Vec<f64> = draws.iter().filter_map(turn).collect();
    turns.sort_by(f64::total_cmp);
    ratios.sort_by(f64::total_cmp);
    if !turns.is_empty() {
        drift.toward_ci95_half_deg = Some(of_sorted(&turns, 0.95));
    }
    if !ratios.is_empty() {
        drift.ratio_ci95 = Some([of_sorted(&ratios, 0.025), of_sorted(&ratios, 0.975)]);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::super::movers::Movers;
    use super::super::movers::tests::sample;
    use super::*;

    /// A record of winds of 10 m/s toward the given azimuths, each carrying one unit.
    fn movers(towards: &[f64], per_cell: usize) -> Movers {
        let kept: Vec<_> =
            towards.iter().enumerate().map(|(at, toward)| sample(at as u32, *toward, 10.0)).collect();
        Movers::new(&kept, per_cell, 1.0, 0.9, |_| 1.0)
    }

    #[test]
    fn draws_depend_on_seed_and_index_only() {
        let plan = Plan::new(100, None);
        assert_eq!(plan.starts(Seed(4), 7), plan.starts(Seed(4), 7));
        assert_ne!(plan.starts(Seed(4), 7), plan.starts(Seed(4), 8));
        assert_ne!(plan.starts(Seed(4), 7), plan.starts(Seed(5), 7));
    }

    #[test]
    fn opposite_seasons_stay_in_every_draw() {
        // Half a year toward 20°, half toward 140°: the resultant is 80° in every draw, near enough.
        let towards: Vec<f64> = (0..1500).map(|i| if i < 750 { 20.0 } else { 140.0 }).collect();
        let movers = movers(&towards, 1);
        let year: Vec<f64> = (0..1500).map(|i| f64::from(i) / 1500.0).collect();
        let half_with = |seasons: Option<&[f64]>| {
            let mut drift = movers.drift("u", |_| 1.0);
            let plan = Plan::new(movers.count(), seasons);
            intervals(&mut drift, &movers.cumulated(|_| 1.0), &plan, 500, Seed(3), &Work::quiet())
                .expect("not stopped");
            drift.toward_ci95_half_deg.expect("an interval")
        };
        let (seasonal, free) = (half_with(Some(&year)), half_with(None));
        assert!(seasonal < 0.6 * free, "with the seasons kept ± {seasonal}, without ± {free}");
    }

    /// Two directions at random a cell at a time: the ratio's scatter is known from counting.
    #[test]
    fn the_interval_has_the_width_of_independent_blocks() {
        let mut stream = Seed(9).stream("test", 0);
        let blocks = 200;
        let towards: Vec<f64> = (0..blocks)
            .flat_map(|_| {
                let toward = if stream.random::<bool>() { 0.0 } else { 90.0 };
                std::iter::repeat_n(toward, CELLS_PER_BLOCK)
            })
            .collect();
        let movers = movers(&towards, 1);
        let mut drift = movers.drift("u", |_| 1.0);
        let plan = Plan::new(movers.count(), None);
        intervals(&mut drift, &movers.cumulated(|_| 1.0), &plan, 1000, Seed(2), &Work::quiet())
            .expect("not stopped");
        // toward = atan(p/(1−p)) near 45°: sd = sd(p)·d/dp = √(¼/200)·2 rad = 4.05°. Starts inside
        // blocks mix neighbours, which lowers the variance by a third.
        let half = drift.toward_ci95_half_deg.expect("an interval");
        crate::assert_close!(half, 1.96 * 4.05 * (2.0f64 / 3.0).sqrt(), 0.8, "95 % half width");
    }
}
