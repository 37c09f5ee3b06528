//! Sinks opened by a trench along the way of least cost.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::condition::BreachLimits;
use super::routing::STEPS;

/// The record of breaching.
pub const METHOD: Method = Method {
    id: "drainage.breach",
    name: "Least-cost breaching",
    question: "Where would a trench let a sink run off with the least digging?",
    formula: "way = argmin Σ max(0, z_j − z₀) ℓ_j from the sink to the first ground below z₀;  z' falls evenly along it",
    symbols: &[
        Symbol { symbol: "z₀", meaning: "elevation of the sink's floor", unit: "m" },
        Symbol { symbol: "z_j", meaning: "elevation of a cell of the way", unit: "m" },
        Symbol { symbol: "ℓ_j", meaning: "ground length of the step to it", unit: "m" },
    ],
    assumptions: &["what closes the sink is a bridge, vegetation or noise rather than ground"],
    limits: &[
        "sinks are opened from the lowest up, each on the ground the former left",
        "where no ground is lower, the trench leads to the raster's edge or to missing ground, at the level of the sink",
        "a limit of depth or length is put to the way of least cost; a dearer way that would keep it is not looked for",
    ],
    sources: &[Source {
        key: "lindsay2016",
        authors: "Lindsay, J. B.",
        year: 2016,
        title: "Efficient hybrid breaching-filling sink removal methods for flow path enforcement in digital elevation models",
        published: "Hydrological Processes 30, 846",
        locator: "",
        read: Read::Memory,
    }],
};

/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 12;
/// Not reached by the present search.
const UNSEEN: u8 = 255;
const START: u8 = 8;

/// Opens the `sinks` of `surface` as far as the limits allow; the number opened.
///
/// # Errors
/// [`Stopped`].
pub(super) fn breach(
    surface: &mut Grid<f32>,
    cells: &Cells,
    sinks: &[usize],
    outlets: &[usize],
    limits: Option<BreachLimits>,
    work: &Work,
) -> Result<usize, Stopped> {
    work.phase("breaching", sinks.len() as u64);
    let mut order = sinks.to_vec();
    order.sort_by(|a, b| surface.values()[*a].total_cmp(&surface.values()[*b]).then(a.cmp(b)));
    let mut search = Search::new(surface, outlets, limits);
    let mut opened = 0;
    for sink in order {
        if let Some(way) = search.way(surface, cells, sink, work)? {
            opened += usize::from(dig(surface, cells, &way, limits));
        }
        work.advance(1)?;
    }
    Ok(opened)
}

/// Cuts the way (from the sink to the goal) down to an even fall; false, and nothing cut, if that is too deep.
fn dig(surface: &mut Grid<f32>, cells: &Cells, way: &[(usize, u8)], limits: Option<BreachLimits>) -> bool {
    let width = surface.width();
    let z = |i: usize| f64::from(surface.values()[i]);
    let mut along = vec![0.0];
    for pair in way.windows(2) {
        let step = cells.steps(pair[0].0 / width)[usize::from(pair[1].1)];
        along.push(along[along.len() - 1] + step);
    }
    let (from, to, length) = (z(way[0].0), z(way[way.len() - 1].0), along[along.len() - 1]);
    let fall = (from - to).max(0.0);
    let trench: Vec<f32> = along.iter().map(|s| (from - fall * (s / length)) as f32).collect();
    let depth = way.iter().zip(&trench).map(|((i, _), t)| z(*i) - f64::from(*t)).fold(0.0, f64::max);
    if limits.is_some_and(|l| depth > l.depth_m) {
        return false;
    }
    for ((i, _), t) in way.iter().zip(trench) {
        let z = &mut surface.values_mut()[*i];
        *z = z.min(t);
    }
    true
}

/// Room for one search after another.
struct Search {
    limits: Option<BreachLimits>,
    is_outlet: Vec<bool>,
    /// Step by which a cell was reached, and at which cost and number of steps.
    by: Vec<u8>,
    cost: Vec<f64>,
    steps: Vec<u32>,
    touched: Vec<usize>,
    done: usize,
}

impl Search {
    fn new(surface: &Grid<f32>, outlets: &[usize], limits: Option<BreachLimits>) -> Self {
        let n = surface.len();
        let mut is_outlet = vec![false; n];
        outlets.iter().for_each(|i| is_outlet[*i] = true);
        let (by, cost, steps) = (vec![UNSEEN; n], vec![0.0; n], vec![0; n]);
        Self { limits, is_outlet, by, cost, steps, touched: Vec::new(), done: 0 }
    }

    /// The cells of the cheapest way from `sink` to where its water gets away, each with the step that led to it.
    fn way(
        &mut self,
        surface: &Grid<f32>,
        cells: &Cells,
        sink: usize,
        work: &Work,
    ) -> Result<Option<Vec<(usize, u8)>>, Stopped> {
        self.touched.drain(..).for_each(|i| self.by[i] = UNSEEN);
        let width = surface.width();
        let floor = f64::from(surface.values()[sink]);
        let (most_deep, most_steps) = self.limits.map_or((f64::INFINITY, u32::MAX), |l| (l.depth_m, l.cells));
        self.reach(sink, START, 0.0, 0);
        let mut waiting = BinaryHeap::from([(Reverse((0u64, 0u32)), sink)]);
        while let Some((Reverse((cost, steps)), i)) = waiting.pop() {
            // Costs are not negative, so their bits sort as they do. A dearer, older entry is passed over.
            if cost != self.cost[i].to_bits() || steps != self.steps[i] {
                continue;
            }
            self.done += 1;
            if self.done.is_multiple_of(PAUSE) {
                work.advance(0)?;
            }
            let z = f64::from(surface.values()[i]);
            let (col, row) = (i % width, i / width);
            let around = STEPS.map(|(dx, dy)| {
                let (col, row) = (col.wrapping_add_signed(dx), row.wrapping_add_signed(dy));
                surface.get(col, row).map(|z| (row * width + col, f64::from(z)))
            });
            if z < floor || self.is_outlet[i] && z <= floor || around.contains(&None) {
                return Ok(Some(self.back(i, width)));
            }
            if steps >= most_steps {
                continue;
            }
            let lengths = cells.steps(row);
            for (k, (j, height)) in around.into_iter().flatten().enumerate() {
                let deep = (height - floor).max(0.0);
                let cost = self.cost[i] + deep * lengths[k];
                let better = self.by[j] == UNSEEN || (cost, steps + 1) < (self.cost[j], self.steps[j]);
                if deep <= most_deep && better {
                    self.reach(j, k as u8, cost, steps + 1);
                    waiting.push((Reverse((cost.to_bits(), steps + 1)), j));
                }
            }
        }
        Ok(None)
    }

    fn reach(&mut self, i: usize, by: u8, cost: f64, steps: u32) {
        if self.by[i] == UNSEEN {
            self.touched.push(i);
        }
        self.by[i] = by;
        self.cost[i] = cost;
        self.steps[i] = steps;
    }

    /// The way that led to `goal`, from its start.
    fn back(&self, goal: usize, width: usize) -> Vec<(usize, u8)> {
        let mut way = vec![(goal, self.by[goal])];
        let mut at = goal;
        while let Some((dx, dy)) = STEPS.get(usize::from(self.by[at])) {
            at = at.wrapping_add_signed(-(dy * width as isize + dx));
            way.push((at, self.by[at]));
        }
        way.reverse();
        way
    }
}
