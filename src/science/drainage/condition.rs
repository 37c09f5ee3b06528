//! Elevation made to drain: filling, breaching, and both.

use std::borrow::Cow;

use serde::{Deserialize, Serialize};

use crate::ground::{Grid, Polygon, Stopped, Work};

use super::cells::Cells;
use super::fill::{Basins, Filled};
use super::routing::STEPS;
use super::{breach, flats};

/// How sinks are dealt with.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Conditioning {
    /// Raised to their lowest rim; flats stay flat and drain by the shortest way.
    Fill,
    /// Raised, with the least slope a flat can hold toward its outlet. Single precision cannot hold it on large
    /// rasters, so the surface itself stays level there: the slope is kept in whole numbers, gathers water along the
    /// middle of the flat, and only routing sees it (see [`super::flats`]).
    #[default]
    FillSloped,
    /// A trench cut from the sink to lower ground along the way of least cost.
    Breach,
    /// Breached where the trench is shallow and short enough, filled elsewhere.
    BreachThenFill,
}

/// What conditioning changed.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Changed {
    /// Cells raised and cells cut.
    pub raised_cells: usize,
    pub cut_cells: usize,
    pub valid_cells: usize,
    /// m³.
    pub raised_volume: f64,
    pub cut_volume: f64,
    /// m.
    pub deepest_fill: f64,
    pub deepest_cut: f64,
    /// Sinks before, and of those breached, filled, and left closed because the user said so.
    pub sinks: usize,
    pub breached: usize,
    pub filled: usize,
    pub left_closed: usize,
}

/// A surface that drains.
#[derive(Clone, Debug, PartialEq)]
pub struct Conditioned {
    pub surface: Grid<f32>,
    pub changed: Changed,
    /// The receiver of every cell without a lower neighbour, row by row (see [`super::flats`]).
    pub(super) flats: Vec<u8>,
}

/// How far a breach may go. It counts for [`Conditioning::BreachThenFill`]; [`Conditioning::Breach`] has no limits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BreachLimits {
    /// Deepest trench, m.
    pub depth_m: f64,
    /// Longest trench, cells.
    pub cells: u32,
}

/// Cells compared at once.
const CHUNK: usize = 16;

/// Makes a surface that drains everywhere.
///
/// Water leaves over the raster's edge and into missing ground: a cell there that has no lower neighbour drains
/// out. Of each `closed` polygon (pixels of the grid) the lowest cell without a lower neighbour stays a sink, and
/// the ground around drains into it. Cells that are not finite numbers are missing.
///
/// # Errors
/// [`Stopped`].
pub fn condition(
    elevation: &Grid<f32>,
    cells: &Cells,
    how: Conditioning,
    limits: BreachLimits,
    closed: &[Polygon],
    work: &Work,
) -> Result<Conditioned, Stopped> {
    let elevation = &finite(elevation);
    let outlets = closed_sinks(elevation, closed);
    let mut basins = Basins::of(elevation, &outlets, work)?;
    let sinks = basins.sinks(elevation);
    let mut counts = Changed { left_closed: outlets.len(), filled: sinks.len(), ..Changed::default() };
    counts.sinks = counts.left_closed + counts.filled;
    let limits = match how {
        Conditioning::Fill | Conditioning::FillSloped => None,
        Conditioning::Breach => Some(None),
        Conditioning::BreachThenFill => Some(Some(limits)),
    };
    let Filled { surface, bytes, words } = match limits {
        None => basins.fill(elevation, work)?,
        Some(limits) => {
            drop(basins);
            let mut cut = Grid::clone(elevation);
            counts.breached = breach::breach(&mut cut, cells, &sinks, &outlets, limits, work)?;
            counts.filled -= counts.breached;
            basins = Basins::of(&cut, &outlets, work)?;
            basins.fill(&cut, work)?
        }
    };
    let changed = changed(elevation, &surface, cells, counts);
    let flats = flats::drain(&surface, (bytes, words), cells, &outlets, how != Conditioning::Fill, work)?;
    Ok(Conditioned { surface, changed, flats })
}

impl Conditioned {
    /// A surface taken as it is; its sinks stay closed.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn untouched(elevation: &Grid<f32>, cells: &Cells, work: &Work) -> Result<Self, Stopped> {
        let surface = finite(elevation).into_owned();
        let changed = Changed { valid_cells: surface.valid_count(), ..Changed::default() };
        let flats = flats::drain(&surface, (Vec::new(), Vec::new()), cells, &[], true, work)?;
        Ok(Self { surface, changed, flats })
    }
}

/// The grid without cells that are no finite number.
fn finite(elevation: &Grid<f32>) -> Cow<'_, Grid<f32>> {
    let mut grid = Cow::Borrowed(elevation);
    if elevation.values().iter().any(|z| !z.is_finite()) {
        grid.to_mut().mask_where(|col, row| elevation.at(col, row).is_finite());
    }
    grid
}

/// The sinks that stay: of each polygon the lowest cell that has no lower neighbour.
fn closed_sinks(elevation: &Grid<f32>, closed: &[Polygon]) -> Vec<usize> {
    let mut sinks: Vec<usize> = closed.iter().filter_map(|polygon| lowest_sink(elevation, polygon)).collect();
    sinks.sort_unstable();
    sinks.dedup();
    sinks
}

fn lowest_sink(elevation: &Grid<f32>, polygon: &Polygon) -> Option<usize> {
    let bounds = polygon.bounds()?;
    let (first, last) = (bounds.min.y.max(0.0) as usize, bounds.max.y.max(0.0).ceil() as usize);
    let width = elevation.width();
    let mut lowest: Option<(f32, usize)> = None;
    for row in first..last.min(elevation.height()) {
        for col in polygon.row_spans(row, width).into_iter().flat_map(|(from, to)| from..to) {
            let Some(z) = elevation.get(col, row).filter(|z| lowest.is_none_or(|(least, _)| *z < least))
            else {
                continue;
            };
            let lower = |(dx, dy): &(isize, isize)| {
                let at = (col.checked_add_signed(*dx), row.checked_add_signed(*dy));
                matches!(at, (Some(col), Some(row)) if elevation.get(col, row).is_some_and(|n| n < z))
            };
            if !STEPS.iter().any(lower) {
                lowest = Some((z, row * width + col));
            }
        }
    }
    lowest.map(|(_, i)| i)
}

/// What became of the elevation, with the ground areas of the cells.
fn changed(elevation: &Grid<f32>, surface: &Grid<f32>, cells: &Cells, counts: Changed) -> Changed {
    let mut changed = Changed { valid_cells: surface.valid_count(), ..counts };
    let width = elevation.width().max(1);
    for (row, (before, after)) in
        elevation.values().chunks(width).zip(surface.values().chunks(width)).enumerate()
    {
        let (mut raised, mut cut) = (0.0, 0.0);
        for (number, (before, after)) in before.chunks(CHUNK).zip(after.chunks(CHUNK)).enumerate() {
            if before.iter().zip(after).fold(true, |same, (a, b)| same & (a == b)) {
                continue;
            }
            for (i, (before, after)) in before.iter().zip(after).enumerate() {
                let by = f64::from(*after) - f64::from(*before);
                let by = if surface.is_valid(number * CHUNK + i, row) { by } else { 0.0 };
                let (up, down) = (if by > 0.0 { by } else { 0.0 }, if by < 0.0 { -by } else { 0.0 });
                changed.raised_cells += usize::from(up > 0.0);
                changed.cut_cells += usize::from(down > 0.0);
                changed.deepest_fill = changed.deepest_fill.max(up);
                changed.deepest_cut = changed.deepest_cut.max(down);
                raised += up;
                cut += down;
            }
        }
        changed.raised_volume += raised * cells.area[row];
        changed.cut_volume += cut * cells.area[row];
    }
    changed
}
