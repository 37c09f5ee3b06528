//! Contributing area: what every cell passes on, added up along the flow.

use multiversion::multiversion;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::condition::Conditioned;
use super::d_infinity::Facets;
use super::d8::Rows;
use super::multiple::Spread;
use super::routing::{OUT, Receivers, Router, STEPS, VOID};

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
/// One cell to wait for, above the four bits of a code.
const WAITING: u8 = 16;
/// Side of the tiles that are walked one after another.
pub(super) const TILE: usize = 64;

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
        Router::D8 => along_one(receivers, cells, work)?,
        _ => along_many(conditioned, cells, router, receivers, work)?,
    };
    Ok(Grid::from_parts(width, surface.height(), area, surface.mask().map(<[bool]>::to_vec)))
}

/// Adds up along single receivers: from every cell that nothing drains to, down to the first that still waits.
/// Cells that nothing drains to are half of all; what they pass on is added row by row beforehand.
fn along_one(receivers: &Receivers, cells: &Cells, work: &Work) -> Result<Vec<f64>, Stopped> {
    let (width, height) = (receivers.0.width(), receivers.0.height());
    let codes = receivers.0.values();
    let offsets = offsets(width);
    let mut waiting = vec![0u8; codes.len()];
    let mut rows: [Vec<u8>; 3] = std::array::from_fn(|_| vec![VOID; width + 2]);
    let row_of = |row: usize| codes.get(row * width..(row + 1) * width);
    load(row_of(0), &mut rows[2]);
    for (row, waiting) in waiting.chunks_mut(width.max(1)).enumerate() {
        rows.rotate_left(1);
        load(row_of(row + 1), &mut rows[2]);
        let [above, own, below] = &rows;
        donors(above, own, below, waiting);
        work.advance(1)?;
    }
    let mut area = vec![0.0; codes.len()];
    rows.iter_mut().for_each(|row| row.fill(VOID));
    load_springs(row_of(0), &waiting, &mut rows[2]);
    let mut counts: [Vec<u8>; 3] = std::array::from_fn(|_| vec![0; width]);
    for (row, area) in area.chunks_mut(width.max(1)).enumerate() {
        rows.rotate_left(1);
        load_springs(row_of(row + 1), &waiting[((row + 1) * width).min(codes.len())..], &mut rows[2]);
        let own = cells.area[row];
        let areas = [cells.area[row.saturating_sub(1)], own, cells.area[(row + 1).min(height - 1)]];
        let [above, springs, below] = &rows;
        count_springs([above, springs, below], &mut counts);
        add_springs(&counts, areas, area);
        settle(&counts, &codes[row * width..][..width], &mut waiting[row * width..][..width]);
        work.advance(1)?;
    }
    walk_down(&offsets, width, &mut waiting, &mut area, work)?;
    Ok(area)
}

/// Follows the flow from every cell that waits for nothing to the first that still does. Tile by tile, so that what
/// a walk touches is at hand. `states` hold the number of cells waited for and the code of the receiver.
fn walk_down(
    offsets: &[isize; 8],
    width: usize,
    states: &mut [u8],
    area: &mut [f64],
    work: &Work,
) -> Result<(), Stopped> {
    let height = states.len().checked_div(width).unwrap_or(0);
    let mut done = 0;
    for (top, left) in tiles(width, height) {
        for row in top..height.min(top + TILE) {
            let span = row * width + left..row * width + width.min(left + TILE);
            for first in span {
                if states[first] >= WAITING {
                    continue;
                }
                let (mut at, mut passed, mut code) = (first, area[first], states[first]);
                states[first] = DONE;
                while let Some(offset) = offsets.get(usize::from(code)) {
                    at = at.wrapping_add_signed(*offset);
                    passed += area[at];
                    area[at] = passed;
                    code = states[at].wrapping_sub(WAITING);
                    if code >= WAITING {
                        states[at] = code;
                        break;
                    }
                    states[at] = DONE;
                    done += 1;
                    if done % PAUSE == 0 {
                        work.advance(0)?;
                    }
                }
            }
        }
        work.advance(0)?;
    }
    Ok(())
}

/// Upper left corners of the tiles of a raster, (row, column).
pub(super) fn tiles(width: usize, height: usize) -> impl Iterator<Item = (usize, usize)> {
    (0..height).step_by(TILE).flat_map(move |top| (0..width).step_by(TILE).map(move |left| (top, left)))
}

/// Copies codes between the margins.
fn load(codes: Option<&[u8]>, into: &mut [u8]) {
    let inner = 1..into.len() - 1;
    match codes {
        Some(codes) => into[inner].copy_from_slice(codes),
        None => into.fill(VOID),
    }
}

/// Copies the codes of cells that wait for nothing.
fn load_springs(codes: Option<&[u8]>, waiting: &[u8], into: &mut [u8]) {
    load(codes, into);
    let inner = 1..into.len() - 1;
    for (code, waiting) in into[inner].iter_mut().zip(waiting) {
        *code = if *waiting == 0 { *code } else { VOID };
    }
}

/// Number of neighbours that drain to each cell of the middle row.
#[multiversion(targets("x86_64+avx2"))]
fn donors(above: &[u8], own: &[u8], below: &[u8], out: &mut [u8]) {
    let n = out.len();
    let (e, w) = (&own[2..n + 2], &own[..n]);
    let (nw, nn, ne) = (&above[..n], &above[1..=n], &above[2..n + 2]);
    let (sw, ss, se) = (&below[..n], &below[1..=n], &below[2..n + 2]);
    for i in 0..n {
        // A neighbour drains here when its code is the step opposite to where it lies.
        out[i] = u8::from(w[i] == 0)
            + u8::from(nw[i] == 1)
            + u8::from(nn[i] == 2)
            + u8::from(ne[i] == 3)
            + u8::from(e[i] == 4)
            + u8::from(se[i] == 5)
            + u8::from(ss[i] == 6)
            + u8::from(sw[i] == 7);
    }
}

/// Number of springs above, beside and below that drain to each cell of the middle row.
#[multiversion(targets("x86_64+avx2"))]
fn count_springs(springs: [&[u8]; 3], counts: &mut [Vec<u8>; 3]) {
    let [above, own, below] = springs;
    let [from_above, beside, from_below] = counts;
    let n = beside.len();
    let (e, w) = (&own[2..n + 2], &own[..n]);
    let (nw, nn, ne) = (&above[..n], &above[1..=n], &above[2..n + 2]);
    let (sw, ss, se) = (&below[..n], &below[1..=n], &below[2..n + 2]);
    for i in 0..n {
        from_above[i] = u8::from(nw[i] == 1) + u8::from(nn[i] == 2) + u8::from(ne[i] == 3);
    }
    for i in 0..n {
        beside[i] = u8::from(w[i] == 0) + u8::from(e[i] == 4);
    }
    for i in 0..n {
        from_below[i] = u8::from(se[i] == 5) + u8::from(ss[i] == 6) + u8::from(sw[i] == 7);
    }
}

/// Area of each cell of a row with what the springs around it pass on; `areas` are those of a cell of the row
/// above, the row itself and the row below.
#[multiversion(targets("x86_64+avx2"))]
fn add_springs(counts: &[Vec<u8>; 3], areas: [f64; 3], out: &mut [f64]) {
    let n = out.len();
    let [above, beside, below] = [&counts[0][..n], &counts[1][..n], &counts[2][..n]];
    for i in 0..n {
        out[i] = areas[1] * f64::from(1 + beside[i])
            + areas[0] * f64::from(above[i])
            + areas[2] * f64::from(below[i]);
    }
}

/// Turns the numbers waited for into states: springs are done, the others wait for one less for each spring.
#[multiversion(targets("x86_64+avx2"))]
fn settle(counts: &[Vec<u8>; 3], codes: &[u8], waiting: &mut [u8]) {
    let n = waiting.len();
    let [above, beside, below] = [&counts[0][..n], &counts[1][..n], &counts[2][..n]];
    let codes = &codes[..n];
    for i in 0..n {
        let left = waiting[i].wrapping_sub(above[i] + beside[i] + below[i]);
        let state = left.wrapping_mul(WAITING) | codes[i];
        waiting[i] = if waiting[i] == 0 { DONE } else { state };
    }
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

/// Steps to the eight neighbours in a row-major list.
fn offsets(width: usize) -> [isize; 8] {
    STEPS.map(|(dx, dy)| dy * width as isize + dx)
}
