//! Contributing area: what every cell passes on, added up along the flow.

use std::borrow::Cow;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::condition::Conditioned;
use super::count;
use super::d_infinity::Facets;
use super::d8::Rows;
use super::multiple::Spread;
use super::routing::{OUT, Receivers, Router, STEPS};
use super::walk::{self, offsets};

/// The record of the sum.
pub const METHOD: Method = Method {
    id: "drainage.area",
    name: "Contributing area",
    question: "How much ground drains through a cell?",
    formula: "A_i = a_i + Σ f_ji A_j over the cells j that pass on to i, each summed after all above it",
    symbols: &[
        Symbol { symbol: "A", meaning: "contributing area", unit: "m²" },
        Symbol { symbol: "a", meaning: "ground area of the cell itself", unit: "m²" },
        Symbol { symbol: "f_ji", meaning: "share of j's flow that goes to i", unit: "1" },
    ],
    assumptions: &["no ground outside the raster drains into it"],
    limits: &[
        "channels that enter over the raster's edge come out too small",
        "cells without a lower neighbour pass all on to one neighbour, whatever the router",
    ],
    sources: &[Source {
        key: "kahn1962",
        authors: "Kahn, A. B.",
        year: 1962,
        title: "Topological sorting of large networks",
        published: "Communications of the ACM 5, 558",
        locator: "",
        read: Read::Memory,
    }],
};

/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 14;
/// In place of the number of cells waited for, once a cell is done.
const DONE: u8 = u8::MAX;

/// Contributing areas, cell by cell, held exactly in as little memory as will do. Those of missing cells mean
/// nothing.
#[derive(Clone, Debug, PartialEq)]
pub struct Areas {
    width: usize,
    height: usize,
    held: Held,
}

#[derive(Clone, Debug, PartialEq)]
enum Held {
    /// Numbers of cells of one size each.
    Cells { counts: Vec<u32>, own_m2: f64 },
    /// m².
    Metres(Vec<f64>),
}

impl Areas {
    /// Takes rows of areas, m².
    ///
    /// # Panics
    /// When the length is not `width * height`: a bug in the caller.
    pub fn from_parts(width: usize, height: usize, areas: Vec<f64>) -> Self {
        assert_eq!(areas.len(), width * height, "areas");
        Self { width, height, held: Held::Metres(areas) }
    }

    /// Number of cells, missing ones included.
    pub fn len(&self) -> usize {
        self.width * self.height
    }

    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Area that drains through a cell, its own included, m². Cells are numbered row by row.
    pub fn of(&self, cell: usize) -> f64 {
        match &self.held {
            Held::Cells { counts, own_m2 } => f64::from(counts[cell]) * own_m2,
            Held::Metres(areas) => areas[cell],
        }
    }

    /// The same by column and row.
    pub fn at(&self, col: usize, row: usize) -> f64 {
        self.of(row * self.width + col)
    }

    /// All of them, row by row, m².
    pub fn values(&self) -> Cow<'_, [f64]> {
        match &self.held {
            Held::Cells { .. } => Cow::Owned((0..self.len()).map(|cell| self.of(cell)).collect()),
            Held::Metres(areas) => Cow::Borrowed(areas),
        }
    }
}

/// Contributing area of every cell, its own included, m². What leaves through the outlets adds up to the area of
/// all valid cells.
///
/// # Errors
/// [`Stopped`].
pub fn area(
    conditioned: &Conditioned,
    cells: &Cells,
    router: Router,
    receivers: &Receivers,
    work: &Work,
) -> Result<Areas, Stopped> {
    let surface = &conditioned.surface;
    work.phase("contributing area", 2 * surface.height() as u64);
    let alike = surface.len() <= count::MOST_CELLS && cells.area.windows(2).all(|pair| pair[0] == pair[1]);
    let (width, height) = (surface.width(), surface.height());
    Ok(match router {
        Router::D8 if alike => {
            let own_m2 = cells.area.first().copied().unwrap_or_default();
            Areas { width, height, held: Held::Cells { counts: count::counts(receivers, work)?, own_m2 } }
        }
        Router::D8 => Areas::from_parts(width, height, walk::along_one(receivers, cells, work)?),
        _ => Areas::from_parts(width, height, along_many(conditioned, cells, router, receivers, work)?),
    })
}

/// Contributing area over the width of the cell across its flow, m. Across a step to a side that is cell area over
/// step length, across one to a corner √2 times that, so that a square cell is one side wide in every direction;
/// where water leaves the ground, the root of the cell's area. The direction is that of the steepest neighbour.
pub fn specific_area(area: &Areas, cells: &Cells, receivers: &Receivers) -> Grid<f64> {
    let width = area.width;
    let mut specific = Grid::from_fn(width, area.height, |col, row| area.at(col, row));
    let codes = receivers.0.values().chunks(width.max(1));
    for (row, (values, codes)) in specific.values_mut().chunks_mut(width.max(1)).zip(codes).enumerate() {
        let own = cells.area[row];
        let steps = cells.steps(row);
        for (value, code) in values.iter_mut().zip(codes) {
            let code = usize::from(*code);
            *value /= match steps.get(code) {
                Some(step) if code % 2 == 0 => own / step,
                Some(step) => std::f64::consts::SQRT_2 * own / step,
                None => own.sqrt(),
            };
        }
    }
    specific
}

/// How the cells of one row share their flow.
enum Shares {
    Facets(Box<Facets>),
    Spread(Spread),
}

impl Shares {
    fn of(router: Router, cells: &Cells, row: usize) -> Self {
        match router {
            Router::DInfinity => Self::Facets(Box::new(Facets::of(cells, row))),
            Router::Quinn => Self::Spread(Spread::quinn(cells, row)),
            _ => Self::Spread(Spread::freeman(cells, row)),
        }
    }

    fn at(&self, z: f64, around: &[f64; 8]) -> [f64; 8] {
        match self {
            Self::Facets(facets) => facets.shares(z, around),
            Self::Spread(spread) => spread.shares(z, around),
        }
    }
}

/// Adds up along several receivers a cell (Kahn's order: a cell is done when all above it are).
fn along_many(
    conditioned: &Conditioned,
    cells: &Cells,
    router: Router,
    receivers: &Receivers,
    work: &Work,
) -> Result<Vec<f64>, Stopped> {
    let surface = &conditioned.surface;
    let (width, height) = (surface.width(), surface.height());
    let offsets = offsets(width);
    // Bit k: the cell passes on to neighbour k.
    let mut goes = vec![0u8; surface.len()];
    let mut waiting = vec![0u8; surface.len()];
    let mut rows = Rows::new(surface, 0);
    let rules: Vec<Shares> = (0..height).map(|row| Shares::of(router, cells, row)).collect();
    for (row, rule) in rules.iter().enumerate() {
        for col in 0..width {
            let i = row * width + col;
            let code = receivers.0.values()[i];
            if code >= OUT {
                continue;
            }
            let shares = rule.at(rows.z(col), &rows.around(col));
            let mut bits = (0..8).filter(|k| shares[*k] > 0.0).fold(0u8, |bits, k| bits | 1 << k);
            if bits == 0 {
                bits = 1 << code;
            }
            goes[i] = bits;
            for k in (0..8).filter(|k| bits >> k & 1 == 1) {
                waiting[i.wrapping_add_signed(offsets[k])] += 1;
            }
        }
        rows.advance(surface);
        work.advance(1)?;
    }
    let own = cells.area.iter().flat_map(|area| std::iter::repeat_n(*area, width));
    let mut area: Vec<f64> = own.take(surface.len()).collect();
    let mut ready = Vec::new();
    let mut done = 0;
    for first in 0..surface.len() {
        // Cells done already hold DONE.
        if waiting[first] == 0 {
            ready.push(first);
        }
        while let Some(i) = ready.pop() {
            waiting[i] = DONE;
            done += 1;
            if done % PAUSE == 0 {
                work.advance(0)?;
            }
            let bits = goes[i];
            if bits == 0 {
                continue;
            }
            let shares = if bits.is_power_of_two() {
                std::array::from_fn(|k| f64::from(bits >> k & 1))
            } else {
                let (z, around) = ring(surface, i);
                rules[i / width].at(z, &around)
            };
            for k in (0..8).filter(|k| bits >> k & 1 == 1) {
                let next = i.wrapping_add_signed(offsets[k]);
                area[next] += shares[k] * area[i];
                waiting[next] -= 1;
                if waiting[next] == 0 {
                    ready.push(next);
                }
            }
        }
    }
    Ok(area)
}

/// A cell and its neighbours, missing ones at +∞.
fn ring(surface: &Grid<f32>, i: usize) -> (f64, [f64; 8]) {
    let (col, row) = (i % surface.width(), i / surface.width());
    let around = STEPS.map(|(dx, dy)| {
        let at = (col.checked_add_signed(dx), row.checked_add_signed(dy));
        match at {
            (Some(col), Some(row)) => surface.get(col, row).map_or(f64::INFINITY, f64::from),
            _ => f64::INFINITY,
        }
    });
    (f64::from(surface.values()[i]), around)
}
