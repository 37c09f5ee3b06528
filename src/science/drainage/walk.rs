//! Contributing area along single receivers.
//!
//! Half of all cells have nothing above them, and most others a few cells. Those are added up row by row, many cells
//! at a time; what is left is walked.

use multiversion::multiversion;

use crate::ground::{Stopped, Work};

use super::cells::Cells;
use super::routing::{Receivers, STEPS, VOID};

/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 14;
/// State of a cell that has passed on what it holds.
const DONE: u8 = u8::MAX;
/// One cell to wait for, above the four bits of a code.
const WAITING: u8 = 16;
/// Rows and columns of the tiles that are walked one after another: long rows keep the number of memory pages low.
pub(super) const TILE: [usize; 2] = [32, 256];
/// Rounds of adding row by row. After seven, no cell holds more than those within seven steps, (2·7 + 1)² = 225: a
/// byte is enough. Each round costs the same and settles fewer.
const ROUNDS: usize = 4;

/// Contributing area of every cell.
///
/// # Errors
/// [`Stopped`].
pub(super) fn along_one(receivers: &Receivers, cells: &Cells, work: &Work) -> Result<Vec<f64>, Stopped> {
    let width = receivers.0.width();
    let mut states = first_states(receivers, work)?;
    let mut area = vec![0.0; states.len()];
    let mut counts = Vec::new();
    if cells.area.windows(2).all(|pair| pair[0] == pair[1]) {
        counts = vec![1u8; states.len()];
        for _ in 0..ROUNDS {
            add_once(width, &mut states, &mut counts, work)?;
        }
    }
    let begin = |row: usize, area: &mut [f64]| {
        let own = cells.area[row];
        match counts.get(row * width..(row + 1) * width) {
            Some(counts) => {
                area.iter_mut().zip(counts).for_each(|(area, count)| *area = f64::from(*count) * own)
            }
            None => area.fill(own),
        }
    };
    walk_down(width, &mut states, &mut area, begin, work)?;
    Ok(area)
}

/// The number of cells each waits for, and the code of its receiver.
fn first_states(receivers: &Receivers, work: &Work) -> Result<Vec<u8>, Stopped> {
    let width = receivers.0.width();
    let codes = receivers.0.values();
    let mut states = vec![0u8; codes.len()];
    let mut rows: [Vec<u8>; 3] = std::array::from_fn(|_| vec![VOID; width + 2]);
    let row_of = |row: usize| codes.get(row * width..(row + 1) * width);
    load(row_of(0), &mut rows[2]);
    for (row, states) in states.chunks_mut(width.max(1)).enumerate() {
        rows.rotate_left(1);
        load(row_of(row + 1), &mut rows[2]);
        let [above, own, below] = &rows;
        donors(above, own, below, states);
        work.advance(1)?;
    }
    Ok(states)
}

/// Copies codes between the margins.
fn load(codes: Option<&[u8]>, into: &mut [u8]) {
    let inner = 1..into.len() - 1;
    match codes {
        Some(codes) => into[inner].copy_from_slice(codes),
        None => into.fill(VOID),
    }
}

/// States of the middle row: the number of neighbours that drain to each cell, and its own code.
#[multiversion(targets("x86_64+avx2"))]
fn donors(above: &[u8], own: &[u8], below: &[u8], out: &mut [u8]) {
    let n = out.len();
    let (e, z, w) = (&own[2..n + 2], &own[1..=n], &own[..n]);
    let (nw, nn, ne) = (&above[..n], &above[1..=n], &above[2..n + 2]);
    let (sw, ss, se) = (&below[..n], &below[1..=n], &below[2..n + 2]);
    for i in 0..n {
        // A neighbour drains here when its code is the step opposite to where it lies.
        let waits = u8::from(w[i] == 0)
            + u8::from(nw[i] == 1)
            + u8::from(nn[i] == 2)
            + u8::from(ne[i] == 3)
            + u8::from(e[i] == 4)
            + u8::from(se[i] == 5)
            + u8::from(ss[i] == 6)
            + u8::from(sw[i] == 7);
        out[i] = waits * WAITING | z[i];
    }
}

/// Lets every cell that waits for nothing pass on the cells it holds.
fn add_once(width: usize, states: &mut [u8], counts: &mut [u8], work: &Work) -> Result<(), Stopped> {
    // Codes of the cells that pass on, and what they hold, in three rows with margins.
    let mut codes: [Vec<u8>; 3] = std::array::from_fn(|_| vec![VOID; width + 2]);
    let mut held: [Vec<u8>; 3] = std::array::from_fn(|_| vec![0; width + 2]);
    load_ready(states, counts, width, 0, &mut codes[2], &mut held[2]);
    for row in 0..states.len().checked_div(width).unwrap_or(0) {
        codes.rotate_left(1);
        held.rotate_left(1);
        load_ready(states, counts, width, row + 1, &mut codes[2], &mut held[2]);
        let span = row * width..(row + 1) * width;
        pass_on(&codes, &held, &mut states[span.clone()], &mut counts[span]);
        work.advance(0)?;
    }
    Ok(())
}

fn load_ready(states: &[u8], counts: &[u8], width: usize, row: usize, codes: &mut [u8], held: &mut [u8]) {
    let span = row * width..(row + 1) * width;
    match (states.get(span.clone()), counts.get(span)) {
        (Some(states), Some(counts)) => {
            held[1..=width].copy_from_slice(counts);
            for (code, state) in codes[1..=width].iter_mut().zip(states) {
                *code = if *state < WAITING { *state } else { VOID };
            }
        }
        _ => codes.fill(VOID),
    }
}

/// What the cells of the middle row get, and the states that follow.
#[multiversion(targets("x86_64+avx2"))]
fn pass_on(codes: &[Vec<u8>; 3], held: &[Vec<u8>; 3], states: &mut [u8], counts: &mut [u8]) {
    let n = states.len();
    let counts = &mut counts[..n];
    let [c0, c1, c2] = [&codes[0][..n + 2], &codes[1][..n + 2], &codes[2][..n + 2]];
    let [h0, h1, h2] = [&held[0][..n + 2], &held[1][..n + 2], &held[2][..n + 2]];
    for i in 0..n {
        let (mut waits, mut sum) = (0u8, 0u8);
        let around = [
            (c1[i], h1[i], 0u8),
            (c0[i], h0[i], 1),
            (c0[i + 1], h0[i + 1], 2),
            (c0[i + 2], h0[i + 2], 3),
            (c1[i + 2], h1[i + 2], 4),
            (c2[i + 2], h2[i + 2], 5),
            (c2[i + 1], h2[i + 1], 6),
            (c2[i], h2[i], 7),
        ];
        for (code, held, toward) in around {
            let hit = u8::from(code == toward);
            waits += hit;
            sum += hit.wrapping_neg() & held;
        }
        counts[i] += sum;
        let left = states[i].wrapping_sub(waits.wrapping_mul(WAITING));
        states[i] = if states[i] < WAITING { DONE } else { left };
    }
}

/// Follows the flow from every cell that waits for nothing to the first that still does. Tile by tile, so that what
/// a walk touches is at hand. `states` hold the number of cells waited for and the code of the receiver.
/// `begin` sets the first values of a row, shortly before it is needed.
fn walk_down(
    width: usize,
    states: &mut [u8],
    area: &mut [f64],
    begin: impl Fn(usize, &mut [f64]),
    work: &Work,
) -> Result<(), Stopped> {
    let height = states.len().checked_div(width).unwrap_or(0);
    let offsets = offsets(width);
    let (mut done, mut begun) = (0, 0);
    let mut starts = [0; TILE[1] + 1];
    for (top, left) in tiles(width, height) {
        while begun < height.min(top + TILE[0] + 1) * width {
            begin(begun / width, &mut area[begun..begun + width]);
            begun += width;
        }
        for row in top..height.min(top + TILE[0]) {
            // The cells of the row that can start, listed without a branch.
            let mut number = 0;
            for first in row * width + left..row * width + width.min(left + TILE[1]) {
                starts[number] = first;
                number += usize::from(states[first] < WAITING);
            }
            for first in starts[..number].iter().copied() {
                let (mut at, mut passed, mut code) = (first, area[first], states[first]);
                states[first] = DONE;
                while let Some(offset) = offsets.get(usize::from(code)) {
                    at = at.wrapping_add_signed(*offset);
                    while begun <= at {
                        begin(begun / width, &mut area[begun..begun + width]);
                        begun += width;
                    }
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
    (0..height).step_by(TILE[0]).flat_map(move |top| (0..width).step_by(TILE[1]).map(move |left| (top, left)))
}

/// Steps to the eight neighbours in a row-major list.
pub(super) fn offsets(width: usize) -> [isize; 8] {
    STEPS.map(|(dx, dy)| dy * width as isize + dx)
}
