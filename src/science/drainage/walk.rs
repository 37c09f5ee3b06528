//! Contributing area along single receivers, where cells differ in size (see [`super::count`] where they do not).

use multiversion::multiversion;

use crate::ground::{Stopped, Work};

use super::cells::Cells;
use super::routing::{Receivers, STEPS, VOID};

/// Cells between two looks at Stop.
pub(super) const PAUSE: usize = 1 << 14;
/// State of a cell that has passed on what it holds.
const DONE: u8 = u8::MAX;
/// One cell to wait for, above the four bits of a code.
pub(super) const WAITING: u8 = 16;
/// Rows and columns of the tiles that are walked one after another: long rows keep the number of memory pages low.
pub(super) const TILE: [usize; 2] = [32, 256];
/// Contributing area of every cell.
///
/// # Errors
/// [`Stopped`].
pub(super) fn along_one(receivers: &Receivers, cells: &Cells, work: &Work) -> Result<Vec<f64>, Stopped> {
    let width = receivers.0.width();
    let mut states = first_states(receivers, work)?;
    let mut area = vec![0.0; states.len()];
    walk_down(width, &mut states, &mut area, |row, area| area.fill(cells.area[row]), work)?;
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
pub(super) fn load(codes: Option<&[u8]>, into: &mut [u8]) {
    let inner = 1..into.len() - 1;
    match codes {
        Some(codes) => into[inner].copy_from_slice(codes),
        None => into.fill(VOID),
    }
}

/// States of the middle row: the number of neighbours that drain to each cell, and its own code.
#[multiversion(targets("x86_64+avx2"))]
pub(super) fn donors(above: &[u8], own: &[u8], below: &[u8], out: &mut [u8]) {
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
        out[i] = (waits * WAITING) | z[i];
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
            let begin_at = row * width + left;
            let here = &states[begin_at..row * width + width.min(left + TILE[1])];
            for (i, state) in here.iter().enumerate() {
                starts[number] = begin_at + i;
                number += usize::from(*state < WAITING);
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

/// Where `flags` are set, listed without a branch in `room`, which is longer by one at least.
pub(super) fn listed<'a>(flags: &[bool], room: &'a mut [usize]) -> &'a [usize] {
    let mut number = 0;
    for (i, flag) in flags.iter().enumerate() {
        room[number] = i;
        number += usize::from(*flag);
    }
    &room[..number]
}

/// Steps to the eight neighbours in a row-major list.
pub(super) fn offsets(width: usize) -> [isize; 8] {
    STEPS.map(|(dx, dy)| dy * width as isize + dx)
}
