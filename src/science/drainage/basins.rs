//! Basins and their divides.

use std::collections::BTreeMap;

use crate::ground::{Grid, Method, Network, Point, Polygon, Stopped, Symbol, Work};
use crate::numeric::sum::total;

use super::accumulate::Areas;
use super::cells::Cells;
use super::outlets::{all_snapped, climb};
use super::outline::outline;
use super::paths::{Paths, pause};
use super::routing::Receivers;
use super::sources::{DERIVED, OCALLAGHAN, at};

pub static METHOD: Method = Method {
    id: "drainage.basins",
    name: "Basins and divides",
    question: "Which ground drains through an outlet, and how high does it lie?",
    formula: "basin = all cells whose path of receivers passes the outlet; z(p): share p of its area lies above z",
    symbols: &[
        Symbol { symbol: "z", meaning: "elevation, made to drain", unit: "m" },
        Symbol { symbol: "p", meaning: "share of the basin's ground area, 0 to 1 by hundredths", unit: "1" },
    ],
    assumptions: &["Water goes to one receiver a cell."],
    limits: &[
        "A basin that reaches missing ground or the edge elsewhere than at its outlet may be larger.",
        "Divides run along cell sides; a basin joined through a corner only has an outline that touches itself there.",
        "Elevations by share are within 1/65 536 of the basin's relief.",
    ],
    sources: &[
        at(OCALLAGHAN, "basins from drainage directions"),
        at(DERIVED, "shares by a histogram in one pass"),
    ],
};

/// The ground that drains through one outlet.
#[derive(Clone, Debug, PartialEq)]
pub struct Basin {
    /// Full-resolution pixels.
    pub outlet: Point,
    /// Node of the network, when a channel ends there.
    pub node: Option<usize>,
    /// Its divide; holes are closed basins within.
    pub outline: Polygon,
    pub area_m2: f64,
    /// Whether missing ground or the raster's edge cuts it off, so that it may be larger.
    pub touches_edge: bool,
    /// Elevations by equal shares of area, highest first, 101 values, m.
    pub elevations: Vec<f64>,
}

/// Values of [`Basin::elevations`].
const SHARES: usize = 101;
/// Steps of the histogram of elevations.
const BINS: usize = 1 << 16;
/// Basins are numbered in 16 bits, 0 for none.
const MOST: usize = u16::MAX as usize - 1;

/// The basins of the picked outlets, or of the places where most ground drains off, greatest first, at most
/// `most`. Pixels of the grid. An outlet above another has its own basin, which is part of the other's.
///
/// # Errors
/// [`Stopped`].
#[allow(clippy::too_many_arguments)]
pub fn basins(
    surface: &Grid<f32>,
    cells: &Cells,
    receivers: &Receivers,
    area: &Areas,
    network: &Network,
    outlets: &[Point],
    snap_cells: usize,
    most: usize,
    work: &Work,
) -> Result<Vec<Basin>, Stopped> {
    work.phase("Basins", 0);
    let paths = Paths::new(receivers, cells)
        .filter(|p| [surface.len(), area.len()] == [p.len(); 2] && surface.width() == p.width);
    let Some(paths) = paths else { return Ok(Vec::new()) };
    let mut ends = if outlets.is_empty() {
        greatest_ends(area, paths, most.min(MOST), work)?
    } else {
        all_snapped(outlets, area, paths, snap_cells)
    };
    ends.sort_by(|a, b| area.of(*b).total_cmp(&area.of(*a)).then(a.cmp(b)));
    ends.truncate(most.min(MOST));
    let labels = labels(&ends, paths, work)?;

    // Picked outlets may lie above one another: what each label drains to, itself included.
    let through: Vec<Vec<usize>> = ends.iter().map(|end| downstream_ends(*end, &ends, paths)).collect();
    let mut parts: Vec<Vec<u16>> = vec![Vec::new(); ends.len()];
    for (i, through) in through.iter().enumerate() {
        through.iter().for_each(|j| parts[*j].push(i as u16 + 1));
    }
    let boxes = boxes(&labels, ends.len(), paths, work)?;
    let nodes: BTreeMap<(u64, u64), usize> =
        network.nodes.iter().enumerate().map(|(i, n)| ((n.at.x.to_bits(), n.at.y.to_bits()), i)).collect();
    let mut basins = Vec::new();
    for (i, end) in ends.iter().enumerate() {
        let mut member = vec![false; ends.len() + 1];
        parts[i].iter().for_each(|label| member[usize::from(*label)] = true);
        let Some(bounds) = parts[i].iter().filter_map(|l| boxes[usize::from(*l) - 1]).reduce(Extent::joined)
        else {
            continue;
        };
        let at = paths.centre(*end);
        let ground = Ground { surface, paths, labels: &labels, member: &member, bounds };
        basins.push(Basin {
            outlet: at,
            node: nodes.get(&(at.x.to_bits(), at.y.to_bits())).copied(),
            outline: outline(bounds.cols(), bounds.rows(), |c, r| ground.holds(r * paths.width + c), work)?,
            area_m2: ground.area(work)?,
            touches_edge: ground.is_cut(*end, work)?,
            elevations: ground.elevations(work)?,
        });
    }
    basins.sort_by(|a, b| b.area_m2.total_cmp(&a.area_m2));
    Ok(basins)
}

/// Cells whose water leaves the ground, those with the greatest areas.
fn greatest_ends(area: &Areas, paths: Paths, most: usize, work: &Work) -> Result<Vec<usize>, Stopped> {
    let mut ends: Vec<usize> = Vec::new();
    let mut steps = 0;
    let order = |a: &usize, b: &usize| area.of(*b).total_cmp(&area.of(*a)).then(a.cmp(b));
    for cell in 0..paths.len() {
        pause(&mut steps, work)?;
        if paths.is_ground(cell) && paths.next(cell).is_none() {
            ends.push(cell);
        }
        // Only the greatest are kept, so that the edge of a large raster takes no memory.
        if ends.len() >= 4 * most.max(1024) {
            ends.sort_by(order);
            ends.truncate(most);
        }
    }
    ends.sort_by(order);
    ends.truncate(most);
    Ok(ends)
}

/// For each cell 1 + the number of the first end below it; 0 for none.
fn labels(ends: &[usize], paths: Paths, work: &Work) -> Result<Vec<u16>, Stopped> {
    let mut labels = vec![0u16; paths.len()];
    // Ends first, so that the way up from one stops below the next.
    for (i, end) in ends.iter().enumerate() {
        labels[*end] = i as u16 + 1;
    }
    for (i, end) in ends.iter().enumerate() {
        climb(*end, paths, work, |cell| {
            let is_new = labels[cell] == 0;
            if is_new {
                labels[cell] = i as u16 + 1;
            }
            is_new || cell == *end
        })?;
    }
    Ok(labels)
}

/// Numbers of the ends that the water of an end passes, itself included.
fn downstream_ends(end: usize, ends: &[usize], paths: Paths) -> Vec<usize> {
    if ends.iter().all(|end| paths.next(*end).is_none()) {
        return ends.iter().position(|e| *e == end).into_iter().collect();
    }
    let number: BTreeMap<usize, usize> = ends.iter().enumerate().map(|(i, e)| (*e, i)).collect();
    let mut passed = Vec::new();
    let mut cell = Some(end);
    // No path is longer than the raster has cells.
    for _ in 0..paths.len() {
        let Some(here) = cell else { break };
        passed.extend(number.get(&here));
        cell = paths.next(here);
    }
    passed
}

/// Columns and rows from the first to behind the last.
#[derive(Clone, Copy)]
struct Extent {
    from: [usize; 2],
    to: [usize; 2],
}

impl Extent {
    fn joined(self, other: Self) -> Self {
        Self {
            from: [self.from[0].min(other.from[0]), self.from[1].min(other.from[1])],
            to: [self.to[0].max(other.to[0]), self.to[1].max(other.to[1])],
        }
    }

    fn cols(self) -> std::ops::Range<usize> {
        self.from[0]..self.to[0]
    }

    fn rows(self) -> std::ops::Range<usize> {
        self.from[1]..self.to[1]
    }
}

/// The box of each label.
fn boxes(labels: &[u16], count: usize, paths: Paths, work: &Work) -> Result<Vec<Option<Extent>>, Stopped> {
    let mut boxes: Vec<Option<Extent>> = vec![None; count];
    let mut steps = 0;
    for (cell, label) in labels.iter().enumerate() {
        pause(&mut steps, work)?;
        if let Some(i) = usize::from(*label).checked_sub(1) {
            let (col, row) = (cell % paths.width, cell / paths.width);
            let here = Extent { from: [col, row], to: [col + 1, row + 1] };
            boxes[i] = Some(boxes[i].map_or(here, |b| b.joined(here)));
        }
    }
    Ok(boxes)
}

/// The cells of one basin.
struct Ground<'a> {
    surface: &'a Grid<f32>,
    paths: Paths<'a>,
    labels: &'a [u16],
    member: &'a [bool],
    bounds: Extent,
}

impl Ground<'_> {
    fn holds(&self, cell: usize) -> bool {
        self.member[usize::from(self.labels[cell])]
    }

    fn each(&self, work: &Work, mut f: impl FnMut(usize)) -> Result<(), Stopped> {
        let mut steps = 0;
        for row in self.bounds.rows() {
            for col in self.bounds.cols() {
                pause(&mut steps, work)?;
                let cell = row * self.paths.width + col;
                if self.holds(cell) {
                    f(cell);
                }
            }
        }
        Ok(())
    }

    fn area(&self, work: &Work) -> Result<f64, Stopped> {
        let mut rows = vec![0usize; self.bounds.rows().len()];
        self.each(work, |cell| rows[cell / self.paths.width - self.bounds.from[1]] += 1)?;
        let area = |(i, n): (usize, &usize)| {
            *n as f64 * self.paths.area((self.bounds.from[1] + i) * self.paths.width)
        };
        Ok(total(rows.iter().enumerate().map(area)))
    }

    /// Whether a cell other than the outlet has a neighbour that is missing or beyond the edge.
    fn is_cut(&self, outlet: usize, work: &Work) -> Result<bool, Stopped> {
        let mut cut = false;
        self.each(work, |cell| cut = cut || (cell != outlet && self.paths.is_at_edge(cell)))?;
        Ok(cut)
    }

    fn elevations(&self, work: &Work) -> Result<Vec<f64>, Stopped> {
        let z = |cell: usize| f64::from(self.surface.values()[cell]);
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        self.each(work, |cell| (low, high) = (low.min(z(cell)), high.max(z(cell))))?;
        let relief = high - low;
        if !(relief > 0.0 && relief.is_finite()) {
            return Ok(vec![low; SHARES]);
        }
        // Area by elevation, the highest bin first; a bin's ground lies evenly over its height.
        let mut bins = vec![0.0f64; BINS];
        self.each(work, |cell| {
            let bin = ((high - z(cell)) / relief * BINS as f64) as usize;
            bins[bin.min(BINS - 1)] += self.paths.area(cell);
        })?;
        let all = total(bins.iter().copied());
        let mut elevations = vec![high];
        let (mut above, mut bin) = (0.0, 0);
        for k in 1..SHARES - 1 {
            let want = all * k as f64 / (SHARES - 1) as f64;
            while bin + 1 < BINS && above + bins[bin] < want {
                above += bins[bin];
                bin += 1;
            }
            let part = if bins[bin] > 0.0 { ((want - above) / bins[bin]).clamp(0.0, 1.0) } else { 0.0 };
            elevations.push(high - (bin as f64 + part) / BINS as f64 * relief);
        }
        elevations.push(low);
        Ok(elevations)
    }
}
