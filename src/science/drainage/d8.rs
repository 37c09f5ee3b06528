//! All flow to the neighbour of steepest descent.

use multiversion::multiversion;
use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::condition::Conditioned;
use super::routing::{Receivers, VOID};

/// The record of the steepest neighbour.
pub const METHOD: Method = Method {
    id: "drainage.d8",
    name: "Steepest neighbour (D8)",
    question: "Which way does the water of a cell go?",
    formula: "receiver of cell 0 = the k of greatest (z₀ − z_k) / d_k, if that is above zero",
    symbols: &[
        Symbol { symbol: "z", meaning: "elevation", unit: "m" },
        Symbol { symbol: "d_k", meaning: "ground distance to neighbour k of eight", unit: "m" },
    ],
    assumptions: &["all water of a cell leaves it by one side or corner"],
    limits: &[
        "equal descents go to the earlier of east, south-east, south, … clockwise on the image",
        "a cell without a lower neighbour follows the gradient of its flat; beside the raster's edge or missing ground it drains out",
        "directions are multiples of 45°: on a slope between them the flow runs parallel instead of spreading, and lengths come out up to 8 % too long",
    ],
    sources: &[Source {
        key: "ocallaghan1984",
        authors: "O'Callaghan, J. F.; Mark, D. M.",
        year: 1984,
        title: "The extraction of drainage networks from digital elevation data",
        published: "Computer Vision, Graphics, and Image Processing 28, 323",
        locator: "",
        read: Read::Memory,
    }],
};

/// Rows worked on at once.
const BLOCK: usize = 64;
/// No neighbour is lower.
pub(super) const LEVEL: u8 = 10;

/// The receiver of every cell.
///
/// # Errors
/// [`Stopped`].
pub fn receivers(conditioned: &Conditioned, cells: &Cells, work: &Work) -> Result<Receivers, Stopped> {
    let surface = &conditioned.surface;
    let (width, height) = (surface.width(), surface.height());
    let mut codes = vec![0; surface.len()];
    work.phase("directions", height as u64);
    codes.par_chunks_mut((BLOCK * width).max(1)).enumerate().try_for_each(|(block, out)| {
        let first = block * BLOCK;
        let mut rows = Rows::new(surface, first);
        for (i, out) in out.chunks_mut(width).enumerate() {
            let row = first + i;
            steepest(&rows, &weights(cells, row), out);
            take_flats(&conditioned.flats[row * width..][..width], out);
            rows.advance(surface);
            work.advance(1)?;
        }
        Ok(())
    })?;
    Ok(Receivers(Grid::from_parts(width, height, codes, surface.mask().map(<[bool]>::to_vec))))
}

/// 1/d of the eight steps, the greatest distance as 1: a drop, however small, stays above zero.
pub(super) fn weights(cells: &Cells, row: usize) -> [f32; 8] {
    let steps = cells.steps(row);
    let longest = steps.iter().fold(0.0f64, |a, b| a.max(*b));
    steps.map(|d| (longest / d) as f32)
}

/// Puts the receivers on flats where no neighbour is lower.
#[multiversion(targets("x86_64+avx2"))]
fn take_flats(flats: &[u8], codes: &mut [u8]) {
    for (code, flat) in codes.iter_mut().zip(flats) {
        *code = if *code == LEVEL { *flat } else { *code };
    }
}

/// The code of the steepest descent of each cell of the middle row, or [`LEVEL`] or [`VOID`].
#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
pub(super) fn steepest(rows: &Rows, weights: &[f32; 8], out: &mut [u8]) {
    let n = out.len();
    let [above, own, below] = rows.three();
    let (z, east, west) = (&own[1..=n], &own[2..n + 2], &own[..n]);
    let (s, se, sw) = (&below[1..=n], &below[2..n + 2], &below[..n]);
    let (nn, ne, nw) = (&above[1..=n], &above[2..n + 2], &above[..n]);
    for i in 0..n {
        let drops = [east[i], se[i], s[i], sw[i], west[i], nw[i], nn[i], ne[i]];
        let mut best = 0.0f32;
        let mut code = u32::from(LEVEL);
        for k in 0..8 {
            let slope = (z[i] - drops[k]) * weights[k];
            code = if slope > best { k as u32 } else { code };
            best = if slope > best { slope } else { best };
        }
        out[i] = if z[i] == f32::INFINITY { VOID } else { code as u8 };
    }
}

/// Three neighbouring rows of a surface with a margin of one cell, missing ground and the outside at +∞.
pub(super) struct Rows {
    rows: [Vec<f32>; 3],
    middle: usize,
}

impl Rows {
    /// Around `row`.
    pub(super) fn new(surface: &Grid<f32>, row: usize) -> Self {
        let mut rows: [Vec<f32>; 3] = std::array::from_fn(|_| vec![f32::INFINITY; surface.width() + 2]);
        for (i, into) in rows.iter_mut().enumerate() {
            load(surface, (row + i).checked_sub(1), into);
        }
        Self { rows, middle: row }
    }

    /// Moves down by one row.
    pub(super) fn advance(&mut self, surface: &Grid<f32>) {
        self.rows.rotate_left(1);
        self.middle += 1;
        load(surface, Some(self.middle + 1), &mut self.rows[2]);
    }

    /// Elevation of column `col` of the middle row.
    pub(super) fn z(&self, col: usize) -> f64 {
        f64::from(self.rows[1][col + 1])
    }

    /// Its eight neighbours, in the order of [`super::routing::STEPS`].
    pub(super) fn around(&self, col: usize) -> [f64; 8] {
        let [n, z, s] = &self.rows;
        [z[col + 2], s[col + 2], s[col + 1], s[col], z[col], n[col], n[col + 1], n[col + 2]].map(f64::from)
    }

    /// Above, middle and below; cell i of the raster at i + 1.
    pub(super) fn three(&self) -> [&[f32]; 3] {
        [&self.rows[0], &self.rows[1], &self.rows[2]]
    }
}

fn load(surface: &Grid<f32>, row: Option<usize>, into: &mut [f32]) {
    let width = surface.width();
    let inner = &mut into[1..=width];
    let Some(row) = row.filter(|row| *row < surface.height()) else {
        inner.fill(f32::INFINITY);
        return;
    };
    inner.copy_from_slice(&surface.values()[row * width..][..width]);
    if let Some(mask) = surface.mask() {
        for (z, valid) in inner.iter_mut().zip(&mask[row * width..][..width]) {
            *z = if *valid { *z } else { f32::INFINITY };
        }
    }
}
