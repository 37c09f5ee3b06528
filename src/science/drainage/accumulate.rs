//! Contributing area: what every cell passes on, added up along the flow.

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::condition::Conditioned;
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
) -> Result<Grid<f64>, Stopped> {
    let surface = &conditioned.surface;
    let width = surface.width();
    work.phase("contributing area", 2 * surface.height() as u64);
    let area = match router {
        Router::D8 => walk::along_one(receivers, cells, work)?,
        _ => along_many(conditioned, cells, router, receivers, work)?,
    };
    Ok(Grid::from_parts(width, surface.height(), area, surface.mask().map(<[bool]>::to_vec)))
}

/// Contributing area over the width of the cell across its flow, m. Across a step to a side that is cell area over
/// step length, across one to a corner √2 times that, so that a square cell is one side wide in every direction;
/// where water leaves the ground, the root of the cell's area. The direction is that of the steepest neighbour.
pub fn specific_area(area: &Grid<f64>, cells: &Cells, receivers: &Receivers) -> Grid<f64> {
    let mut specific = area.clone();
    let width = area.width();
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
    Facets(Facets),
    Spread(Spread),
}

impl Shares {
    fn of(router: Router, cells: &Cells, row: usize) -> Self {
        match router {
            Router::DInfinity => Self::Facets(Facets::of(cells, row)),
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
    for row in 0..height {
        for col in 0..width {
            let i = row * width + col;
            let code = receivers.0.values()[i];
            if code >= OUT {
                continue;
            }
            let shares = rules[row].at(rows.z(col), &rows.around(col));
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
