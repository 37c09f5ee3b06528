//! Thinning of a mask to lines one cell wide: simple cells go, lowest first, so that what stays runs on the crests
//! and is connected as the mask was.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use crate::ground::{Stopped, Work};

/// Cells between two looks at the Stop button.
const BREATH: u32 = 65_536;

/// Neighbours in a circle from the east: (column, row) steps.
pub const RING: [(isize, isize); 8] = [(1, 0), (1, -1), (0, -1), (-1, -1), (-1, 0), (-1, 1), (0, 1), (1, 1)];

/// Whether a cell may go without parting or joining anything (set cells meet by edge or corner, empty ones by edge
/// only), for each pattern of its neighbours, bit k for `RING[k]`.
///
/// Connectivity number (Yokoi, Toriwaki and Fukumura 1975) of 1: Σ over the four edges k of (1 − x_k) − (1 − x_k)(1 − x_{k+1})(1 − x_{k+2}).
const SIMPLE: [bool; 256] = {
    let mut table = [false; 256];
    let mut pattern = 0;
    while pattern < 256 {
        let mut number = 0;
        let mut k = 0;
        while k < 8 {
            let (a, b, c) = (
                1 - ((pattern >> k) & 1),
                1 - ((pattern >> ((k + 1) % 8)) & 1),
                1 - ((pattern >> ((k + 2) % 8)) & 1),
            );
            number += a - a * b * c;
            k += 2;
        }
        table[pattern] = number == 1;
        pattern += 1;
    }
    table
};

/// A mask with the neighbour patterns of its cells.
pub struct Mask<'a> {
    pub cells: &'a mut [bool],
    pub width: usize,
}

impl Mask<'_> {
    /// The neighbours that are set, bit k for `RING[k]`; cells outside are empty.
    pub fn pattern(&self, cell: usize) -> usize {
        let mut pattern = 0;
        for (k, near) in around(cell, self.width, self.cells.len()).into_iter().enumerate() {
            if near.is_some_and(|n| self.cells[n]) {
                pattern |= 1 << k;
            }
        }
        pattern
    }
}

/// The neighbours of a cell in the order of `RING`; `None` outside.
pub fn around(cell: usize, width: usize, cells: usize) -> [Option<usize>; 8] {
    let (col, row) = ((cell % width) as isize, (cell / width) as isize);
    let height = (cells / width) as isize;
    RING.map(|(dc, dr)| {
        let (c, r) = (col + dc, row + dr);
        (c >= 0 && r >= 0 && c < width as isize && r < height).then(|| r as usize * width + c as usize)
    })
}

/// Thins `mask`, `width` cells a row, by the heights ≥ 0 of its cells. Cells that `keep` names stay. With `ends`
/// a cell with one neighbour or none stays too.
///
/// # Errors
/// [`Stopped`].
pub fn thin(
    mask: &mut [bool],
    width: usize,
    heights: &[f32],
    keep: impl Fn(usize) -> bool,
    ends: bool,
    work: &Work,
) -> Result<(), Stopped> {
    let cells = mask.len();
    let mask = Mask { cells: mask, width };
    let mut waiting = BinaryHeap::new();
    let key = |cell: usize| Reverse((heights[cell].max(0.0).to_bits(), cell));
    for cell in 0..cells {
        if cell % BREATH as usize == 0 {
            work.advance(0)?;
        }
        if mask.cells[cell] && !keep(cell) && SIMPLE[mask.pattern(cell)] {
            waiting.push(key(cell));
        }
    }
    let mut seen = 0u32;
    while let Some(Reverse((_, cell))) = waiting.pop() {
        seen += 1;
        if seen.is_multiple_of(BREATH) {
            work.advance(0)?;
        }
        let pattern = mask.pattern(cell);
        if !mask.cells[cell] || !SIMPLE[pattern] || (ends && pattern.count_ones() <= 1) {
            continue;
        }
        mask.cells[cell] = false;
        for near in around(cell, width, cells).into_iter().flatten() {
            if mask.cells[near] && !keep(near) && SIMPLE[mask.pattern(near)] {
                waiting.push(key(near));
            }
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn parts_and_holes(mask: &[bool], width: usize) -> (usize, usize) {
        let count = |set: bool, corners: bool| {
            let mut seen = vec![false; mask.len()];
            let mut parts = 0;
            for start in 0..mask.len() {
                if mask[start] != set || seen[start] {
                    continue;
                }
                parts += 1;
                let mut waiting = vec![start];
                seen[start] = true;
                while let Some(cell) = waiting.pop() {
                    for (k, near) in around(cell, width, mask.len()).into_iter().enumerate() {
                        if let Some(near) =
                            near.filter(|n| (corners || k % 2 == 0) && mask[*n] == set && !seen[*n])
                        {
                            seen[near] = true;
                            waiting.push(near);
                        }
                    }
                }
            }
            parts
        };
        (count(true, true), count(false, false))
    }

    #[test]
    fn a_wobbling_ring_and_a_bar_keep_their_parts_and_holes() {
        let (width, height) = (60, 40);
        let mut mask: Vec<bool> = (0..width * height)
            .map(|i| {
                let (x, y) = ((i % width) as f64 - 20.0, (i / width) as f64 - 20.0);
                let r = x.hypot(y);
                (r > 8.0 && r < 13.0 + (3.0 * x).sin()) || (x > 18.0 && x < 36.0 && y.abs() < 3.0)
            })
            .collect();
        let before = parts_and_holes(&mask, width);
        let heights: Vec<f32> = (0..width * height).map(|i| (i % 7) as f32).collect();
        thin(&mut mask, width, &heights, |_| false, true, &Work::quiet()).unwrap();
        assert_eq!(parts_and_holes(&mask, width), before);
        let thinned = Mask { cells: &mut mask.clone(), width };
        let could_go = |c: &usize| {
            let pattern = thinned.pattern(*c);
            mask[*c] && SIMPLE[pattern] && pattern.count_ones() > 1
        };
        let thick = (0..mask.len()).filter(could_go).count();
        assert_eq!(thick, 0, "cells that could still go");
    }

    #[test]
    fn what_stays_runs_on_the_crest() {
        let (width, height) = (50, 21);
        let mut mask = vec![true; width * height];
        // The crest is row 4 and not the middle.
        let heights: Vec<f32> = (0..mask.len()).map(|i| 30.0 - (i / width).abs_diff(4) as f32).collect();
        thin(&mut mask, width, &heights, |c| c / width == 4, true, &Work::quiet()).unwrap();
        assert!((0..mask.len()).all(|c| mask[c] == (c / width == 4)));
    }
}
