//! Whether an elevation raster is rough enough for channels on it to mean anything.

use rayon::prelude::*;

use crate::ground::{Caution, Grid, Method, Network, Point, Read, Source, Stopped, Symbol, Work};
use crate::numeric::sum::Sum;

use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "drainage.smoothness",
    name: "Roughness against distance",
    question: "Does the raster show the ground, or what an interpolation laid between heights?",
    formula: "D(h) = ⟨(z(x − h) − 2 z(x) + z(x + h))²⟩ − q²/2; e = log₂(D(2)/D(1))",
    symbols: &[
        Symbol { symbol: "z", meaning: "elevation as given, along rows and columns", unit: "m" },
        Symbol { symbol: "h", meaning: "distance", unit: "cells" },
        Symbol { symbol: "q", meaning: "step of the elevations; rounding adds q²/2 to D", unit: "m" },
        Symbol { symbol: "e", meaning: "growth of roughness with distance", unit: "1" },
    ],
    assumptions: &["Ground is rough at every size: D grows as h²ᴴ with H < 1, so that e < 2."],
    limits: &[
        "A smooth surface has e near 4, a faceted one near 3; ground averaged over its own cells comes to 2.8. Beyond 3.1 the cells are finer than what the heights resolve.",
        "Hills that creep made smooth look the same on cells of a few metres; there the caution says too much.",
        "Noise lowers e, and so does an enlargement that repeats cells: a small e is no proof of resolved ground.",
    ],
    sources: &[
        Source {
            key: "turcotte1997",
            authors: "Turcotte, D. L.",
            year: 1997,
            title: "Fractals and Chaos in Geology and Geophysics",
            published: "Cambridge University Press, 2nd edition",
            locator: "chapter 7",
            read: Read::Memory,
        },
        at(DERIVED, "limits from interpolated, averaged and self-affine surfaces"),
    ],
};

/// How rough an elevation raster is, and how much of a network hangs on what was filled.
#[derive(Clone, Debug, PartialEq)]
pub struct Smoothness {
    /// Growth of roughness from one cell to two; `None` where rounding hides it or there is none.
    pub exponent: Option<f64>,
    /// The least distance, in cells, from which on the ground is rough: 1 for a raster that resolves it; `None` when
    /// none was found.
    pub resolved_cells: Option<usize>,
    /// Roughness over one cell, rounding included, m: no noise of single cells is greater.
    pub roughness_m: f64,
    /// Step of which all elevations are multiples, m.
    pub step_m: Option<f64>,
    /// Share of cells level with all eight neighbours.
    pub level_share: f64,
    /// Share of cells that slope and lie exactly on a plane with their four neighbours.
    pub planar_share: f64,
    /// Share of the network's length on cells that were raised by more than the roughness.
    pub on_fill_share: f64,
}

/// Distances compared, cells.
const LAGS: [usize; 5] = [1, 2, 4, 8, 16];
/// Growth beyond which cells are finer than what the heights resolve.
const SMOOTH: f64 = 3.1;
/// Shares of cells or of length from which a caution is due.
const LARGE_SHARE: f64 = 0.1;
/// Steps looked for, m.
const STEPS_M: [f64; 11] = [100.0, 50.0, 10.0, 5.0, 1.0, 0.5, 0.25, 0.1, 0.05, 0.02, 0.01];

/// Looks at an elevation raster as it was given, at `surface` that was made of it, and at the network on it, in
/// pixels of the grid.
///
/// # Errors
/// [`Stopped`].
pub fn smoothness(
    elevation: &Grid<f32>,
    surface: &Grid<f32>,
    network: &Network,
    work: &Work,
) -> Result<(Smoothness, Vec<Caution>), Stopped> {
    work.phase("roughness", elevation.height() as u64);
    let step_m = step(elevation, work)?;
    let rounding = step_m.map_or(0.0, |q| q * q / 2.0);
    let counts = counted(elevation, work)?;
    let squares = counts.squares.map(|(sum, n)| if n > 0.0 { (sum / n).max(0.0) } else { 0.0 });
    // What rounding adds must not be most of it.
    let rough = squares.map(|d| Some(d - rounding).filter(|d| *d > 0.25 * rounding && *d > 0.0));
    let exponents: Vec<Option<f64>> = rough.windows(2).map(|w| Some((w[1]? / w[0]?).log2())).collect();
    let resolved_cells =
        exponents.iter().zip(LAGS).find(|(e, _)| e.is_some_and(|e| e <= SMOOTH)).map(|(_, lag)| lag);
    let share = |n: f64| if counts.inner > 0.0 { n / counts.inner } else { 0.0 };
    // A second difference of noise σ has variance (1 + 4 + 1) σ².
    let roughness_m = (squares[0] / 6.0).sqrt();
    let found = Smoothness {
        exponent: exponents[0],
        resolved_cells,
        roughness_m,
        step_m,
        level_share: share(counts.level),
        planar_share: share(counts.planar),
        on_fill_share: on_fill(elevation, surface, network, roughness_m),
    };
    let cautions = found.cautions();
    Ok((found, cautions))
}

impl Smoothness {
    fn cautions(&self) -> Vec<Caution> {
        let mut cautions = Vec::new();
        let percent = |share: f64| 100.0 * share;
        if let Some(e) = self.exponent.filter(|e| *e > SMOOTH) {
            let from = match self.resolved_cells {
                Some(cells) => format!("it is rough from {cells} cells on"),
                None => "it is rough at no distance up to 8 cells".into(),
            };
            cautions.push(Caution::new(
                "elevation-too-smooth",
                format!("The elevation is smoother from cell to cell than ground is (roughness grows with distance to the power {e:.1}, ground stays below {SMOOTH}); {from}. Channels finer than that are made by the interpolation."),
            ));
        }
        if self.level_share > LARGE_SHARE {
            let step = self.step_m.map_or(String::new(), |q| format!("; heights come in steps of {q} m"));
            cautions.push(Caution::new(
                "elevation-level",
                format!("{:.0} % of the cells are level with all their neighbours{step}. Flow across them is a rule, not a finding.", percent(self.level_share)),
            ));
        }
        if self.planar_share > LARGE_SHARE {
            cautions.push(Caution::new(
                "elevation-planar",
                format!("{:.0} % of the cells lie exactly on a plane with their neighbours: facets of an interpolation or of rounding, on which channels run parallel.", percent(self.planar_share)),
            ));
        }
        if self.on_fill_share > LARGE_SHARE {
            cautions.push(Caution::new(
                "network-on-fill",
                format!("{:.0} % of the network's length runs over ground that was raised by more than {:.2} m to make it drain: its course there is a rule, not a finding.", percent(self.on_fill_share), self.roughness_m),
            ));
        }
        cautions
    }
}

/// Sums over a raster.
#[derive(Clone, Copy, Default)]
struct Counts {
    /// Squared second differences and their number, by lag.
    squares: [(f64, f64); LAGS.len()],
    /// Cells with eight valid neighbours; of these the level ones and the planar ones.
    inner: f64,
    level: f64,
    planar: f64,
}

fn counted(z: &Grid<f32>, work: &Work) -> Result<Counts, Stopped> {
    // What single precision leaves of a plane.
    let most = z.valid_values().fold(0.0f32, |m, v| if v.is_finite() { m.max(v.abs()) } else { m });
    let exact = 4.0 * f64::from(f32::EPSILON) * f64::from(most);
    let rows: Vec<Counts> = (0..z.height())
        .into_par_iter()
        .map(|row| {
            work.advance(1)?;
            Ok(row_counts(z, row, exact))
        })
        .collect::<Result<_, Stopped>>()?;
    // Rows are joined in order: the same bits for any number of threads.
    let mut squares = [(Sum::default(), 0.0); LAGS.len()];
    let mut all = Counts::default();
    for row in &rows {
        for (sum, (value, n)) in squares.iter_mut().zip(row.squares) {
            sum.0.add(value);
            sum.1 += n;
        }
        all.inner += row.inner;
        all.level += row.level;
        all.planar += row.planar;
    }
    Ok(Counts { squares: squares.map(|(sum, n)| (sum.value(), n)), ..all })
}

fn row_counts(grid: &Grid<f32>, row: usize, exact: f64) -> Counts {
    let z = |col: usize, row: usize| grid.get(col, row).map(f64::from).filter(|z| z.is_finite());
    let mut counts = Counts::default();
    for col in 0..grid.width() {
        let Some(here) = z(col, row) else { continue };
        let second = |lag: usize, down: bool| {
            let (x, y) = if down { (0, lag) } else { (lag, 0) };
            let before = z(col.checked_sub(x)?, row.checked_sub(y)?)?;
            Some((before, z(col + x, row + y)?)).map(|(a, b)| (a - 2.0 * here + b, a - b))
        };
        for (lag, square) in LAGS.iter().zip(&mut counts.squares) {
            for (bend, _) in [second(*lag, false), second(*lag, true)].into_iter().flatten() {
                square.0 += bend * bend;
                square.1 += 1.0;
            }
        }
        let corners = [(0, 0), (2, 0), (0, 2), (2, 2)]
            .map(|(x, y)| z((col + x).checked_sub(1)?, (row + y).checked_sub(1)?));
        let (Some((bend_x, slope_x)), Some((bend_y, slope_y))) = (second(1, false), second(1, true)) else {
            continue;
        };
        if corners.iter().any(Option::is_none) {
            continue;
        }
        counts.inner += 1.0;
        let is_plane = bend_x.abs() <= exact && bend_y.abs() <= exact;
        let is_level = is_plane && slope_x == 0.0 && slope_y == 0.0;
        if is_level && bend_x == 0.0 && corners.iter().all(|z| *z == Some(here)) {
            counts.level += 1.0;
        } else if is_plane && !is_level {
            counts.planar += 1.0;
        }
    }
    counts
}

/// The greatest of the steps looked for of which all elevations are multiples.
fn step(z: &Grid<f32>, work: &Work) -> Result<Option<f64>, Stopped> {
    let mut found = None;
    for q in STEPS_M {
        work.advance(0)?;
        // Single precision must tell multiples apart.
        let is_multiple = |v: f32| {
            let n = f64::from(v) / q;
            let blur = n.abs() * f64::from(f32::EPSILON);
            blur < 0.05 && (n - n.round()).abs() <= blur + 1e-6
        };
        let mut any = false;
        if z.valid_values().filter(|v| v.is_finite()).all(|v| {
            any |= v != 0.0;
            is_multiple(v)
        }) && any
        {
            found = Some(q);
            break;
        }
    }
    Ok(found)
}

/// Share of the network's length on cells raised by more than `least`.
fn on_fill(elevation: &Grid<f32>, surface: &Grid<f32>, network: &Network, least: f64) -> f64 {
    let raised = |p: &Point| {
        let (col, row) = (p.x.max(0.0) as usize, p.y.max(0.0) as usize);
        let pair = surface.get(col, row).zip(elevation.get(col, row));
        pair.is_some_and(|(after, before)| f64::from(after) - f64::from(before) > least.max(1e-3))
    };
    let (mut on, mut all) = (0.0, 0.0);
    for pair in network.reaches.iter().flat_map(|r| r.line.0.windows(2)) {
        let length = pair[0].distance(pair[1]);
        all += length;
        on += 0.5 * length * pair.iter().filter(|p| raised(p)).count() as f64;
    }
    if all > 0.0 { on / all } else { 0.0 }
}
