//! Routed ground walked cell by cell. Cells are numbered row by row from the upper left.

use crate::ground::{Point, Stopped, Work};
use crate::numeric::sum::total;

use super::cells::Cells;
use super::routing::{Receivers, STEPS, VOID};

/// Cells between two looks at the user's Stop.
const STRIDE: usize = 1 << 16;
/// A cell whose water has gone on.
const DONE: u8 = u8::MAX;

/// Where each cell drains to, and how far that is.
#[derive(Clone, Copy)]
pub(super) struct Paths<'a> {
    codes: &'a [u8],
    mask: Option<&'a [bool]>,
    cells: &'a Cells,
    pub width: usize,
    pub height: usize,
}

impl<'a> Paths<'a> {
    /// `None` when the sizes of the cells are not those of as many rows.
    pub fn new(receivers: &'a Receivers, cells: &'a Cells) -> Option<Self> {
        let grid = &receivers.0;
        let (width, height) = (grid.width(), grid.height());
        let rows = [cells.across.len(), cells.area.len(), cells.down.len() + 1, cells.diagonal.len() + 1];
        rows.iter().all(|n| *n >= height).then_some(Self {
            codes: grid.values(),
            mask: grid.mask(),
            cells,
            width,
            height,
        })
    }

    pub fn len(self) -> usize {
        self.codes.len()
    }

    /// Whether the cell has an elevation.
    pub fn is_ground(self, cell: usize) -> bool {
        self.codes[cell] != VOID && self.mask.is_none_or(|mask| mask[cell])
    }

    /// The cell `cell` drains to; `None` when its water leaves the ground.
    pub fn next(self, cell: usize) -> Option<usize> {
        let (dx, dy) = *STEPS.get(usize::from(self.codes[cell]))?;
        self.neighbour(cell, dx, dy).filter(|to| self.is_ground(*to))
    }

    /// The cells that drain straight into `cell`, in the order of [`STEPS`].
    pub fn donors(self, cell: usize) -> impl Iterator<Item = usize> + 'a {
        STEPS.iter().enumerate().filter_map(move |(code, (dx, dy))| {
            let from = self.neighbour(cell, -dx, -dy)?;
            (usize::from(self.codes[from]) == code && self.is_ground(from)).then_some(from)
        })
    }

    /// The cell so many columns and rows away, if the raster has it.
    pub fn neighbour(self, cell: usize, dx: isize, dy: isize) -> Option<usize> {
        let col = (cell % self.width).checked_add_signed(dx).filter(|c| *c < self.width)?;
        let row = (cell / self.width).checked_add_signed(dy).filter(|r| *r < self.height)?;
        Some(row * self.width + col)
    }

    /// Whether a neighbour is missing or beyond the raster's edge.
    pub fn is_at_edge(self, cell: usize) -> bool {
        let ground = |(dx, dy): &(isize, isize)| {
            self.neighbour(cell, *dx, *dy).is_some_and(|other| self.is_ground(other))
        };
        !STEPS.iter().all(ground)
    }

    /// Ground distance from a cell to the one it drains to, m; 0 when it leaves the ground.
    pub fn step(self, cell: usize) -> f64 {
        let row = cell / self.width;
        let Some((dx, dy)) = STEPS.get(usize::from(self.codes[cell])) else { return 0.0 };
        let upper = if *dy < 0 { row.wrapping_sub(1) } else { row };
        let slant = usize::from(dx * dy < 0);
        let length = match (dx, dy) {
            (_, 0) => self.cells.across.get(row).copied(),
            (0, _) => self.cells.down.get(upper).copied(),
            _ => self.cells.diagonal.get(upper).map(|d| d[slant]),
        };
        length.unwrap_or(0.0)
    }

    /// Ground area of a cell, m².
    pub fn area(self, cell: usize) -> f64 {
        self.cells.area[cell / self.width]
    }

    /// Mean ground size of a cell along its row and across, m.
    pub fn mean_size(self) -> [f64; 2] {
        let mean = |x: &[f64]| if x.is_empty() { 0.0 } else { total(x.iter().copied()) / x.len() as f64 };
        [mean(&self.cells.across), mean(&self.cells.down)]
    }

    /// Middle of a cell, pixels.
    pub fn centre(self, cell: usize) -> Point {
        Point::new((cell % self.width) as f64 + 0.5, (cell / self.width) as f64 + 0.5)
    }

    /// Hands every step (from, to) to `each`, all steps into a cell before the one out of it.
    pub fn downstream(self, work: &Work, mut each: impl FnMut(usize, usize)) -> Result<(), Stopped> {
        let mut waiting = vec![0u8; self.len()];
        let mut steps = 0usize;
        for cell in 0..self.len() {
            if let Some(to) = self.next(cell).filter(|_| self.is_ground(cell)) {
                waiting[to] += 1;
            }
            pause(&mut steps, work)?;
        }
        for start in 0..self.len() {
            pause(&mut steps, work)?;
            if waiting[start] != 0 || !self.is_ground(start) {
                continue;
            }
            // From a source as far down as every other inflow has come.
            let mut cell = start;
            loop {
                waiting[cell] = DONE;
                let Some(to) = self.next(cell) else { break };
                each(cell, to);
                pause(&mut steps, work)?;
                waiting[to] -= 1;
                if waiting[to] != 0 {
                    break;
                }
                cell = to;
            }
        }
        Ok(())
    }
}

/// Counts a step; every so many the user's Stop is heard.
pub(super) fn pause(steps: &mut usize, work: &Work) -> Result<(), Stopped> {
    *steps += 1;
    if (*steps).is_multiple_of(STRIDE) { work.advance(0) } else { Ok(()) }
}
