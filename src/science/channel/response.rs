//! The response of an image to strips of many widths: two banks of opposite sense, as far apart as the strip is wide.

use std::f64::consts::{PI, TAU};

use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::quantile;
use crate::numeric::root::brent;
use crate::numeric::separable::smooth_valid;
use crate::numeric::tail::normal_above;

use super::detect::ChannelTone;
use super::filter::{Filter, Tile};

/// The record of the strip response.
pub static METHOD: Method = Method {
    id: "channel.strip-response",
    name: "Strip response in many widths",
    question: "Where does the image show a strip that is darker or brighter than both of its sides?",
    formula: "R_w(x, θ) = min over ± of {E(x + ½w n ± ¾w e), −E(x − ½w n ± ¾w e)},  E = √(2π) σ ∂_n (G_{σ,s} ∗ I),  σ = w/3, s = 0.6 w;  R_w = 0 where |I − mean beside| < R_w/4;  z = R_w/sd(E);  M P(all four z > t; ρ) = α",
    symbols: &[
        Symbol { symbol: "w", meaning: "width of the strip", unit: "px" },
        Symbol {
            symbol: "θ, e, n",
            meaning: "direction of the strip, unit vectors along and across",
            unit: "1",
        },
        Symbol {
            symbol: "E",
            meaning: "height of the edge at a bank: 1 for a step of 1",
            unit: "unit of the image",
        },
        Symbol { symbol: "G", meaning: "Gaussian, σ across and s along the strip", unit: "px⁻²" },
        Symbol {
            symbol: "sd(E)",
            meaning: "scale of E around the place (128 cells), robust, per width",
            unit: "unit of the image",
        },
        Symbol { symbol: "ρ", meaning: "mean correlation of the noise in the four samples", unit: "1" },
        Symbol { symbol: "M", meaning: "directions tried", unit: "1" },
        Symbol {
            symbol: "t, α",
            meaning: "noise floor, and the chance that a place of pure noise passes it",
            unit: "1",
        },
    ],
    assumptions: &[
        "channels cover the lesser part of the image, so that the middle of |E| tells the noise",
        "noise is nearly normal after averaging along the strip; radar is taken as its logarithm",
    ],
    limits: &[
        "bends sharper than about the width weaken the response",
        "a texture of dark and bright bands (dunes, furrows) is a set of strips too",
        "with a single look the logarithm has a long dark tail: narrow dark strips then appear by chance more often than stated",
    ],
    sources: &[
        Source {
            key: "koller1995",
            authors: "Koller, T. M.; Gerig, G.; Székely, G.; Dettwiler, D.",
            year: 1995,
            title: "Multiscale detection of curvilinear structures in 2-D and 3-D image data",
            published: "Proc. IEEE International Conference on Computer Vision 1995, 864",
            locator: "the lesser of two edge responses; taken before and behind as well here",
            read: Read::Memory,
        },
        Source {
            key: "lindeberg1998",
            authors: "Lindeberg, T.",
            year: 1998,
            title: "Edge detection and ridge detection with automatic scale selection",
            published: "International Journal of Computer Vision 30, 117",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// σ over width, and scale along the strip over width.
const ACROSS: f64 = 1.0 / 3.0;
const ALONG: f64 = 0.6;
/// Least σ and least scale along, full-resolution pixels.
const LEAST_SIGMA: f64 = 0.8;
const LEAST_ALONG: f64 = 1.8;
/// How far before and behind a place its banks are sampled, over the scale along.
pub(super) const APART: f64 = 1.25;
/// Ratio of neighbouring widths.
const RATIO: f64 = 1.5;
/// Directions tried over half a circle; set so that a quarter turn of the image maps them onto each other.
pub(super) const DIRECTIONS: usize = 12;
/// Cells on a side of a tile.
pub(super) const TILE: usize = 128;
/// The low threshold of the hysteresis, as a share of the floor.
const LOW: f64 = 0.7;
/// Least noise as a share of the range of the image: below it, the response would be to rounding.
const LEAST_NOISE: f64 = 1e-3;

/// Least noise of a tile as a share of that of the whole.
const LEAST_SHARE: f64 = 1.0;

/// One width looked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Strip {
    /// Full-resolution pixels.
    pub width: f64,
    /// Floor and low threshold of z.
    pub floor: f64,
    pub low: f64,
    /// Pixels per cell of the grid it is sought on, and the rest in cells of that grid.
    reduced: usize,
    pub(super) sigma: f64,
    pub(super) along: f64,
}

/// What each cell shows best.
pub(super) struct Response {
    /// Response over its noise; 0 where there is none.
    pub z: Grid<f32>,
    /// Response beyond the low threshold, in the unit of the image: widths are chosen and crests followed by it.
    pub excess: Vec<f32>,
    /// Index of the strip, and of its direction.
    pub strip: Vec<u8>,
    pub turn: Vec<u8>,
    pub strips: Vec<Strip>,
}

/// Direction (column, row) of strips number `turn`, a unit vector.
pub(super) fn direction(turn: u8) -> (f64, f64) {
    let (sin, cos) = (PI * (f64::from(turn) + 0.5) / DIRECTIONS as f64).sin_cos();
    (cos, sin)
}

/// z that pure noise passes with chance `significance` a place, when the four samples of the banks have mean
/// correlation `rho`.
pub(super) fn floor_for(significance: f64, rho: f64) -> f64 {
    let wanted = (significance / DIRECTIONS as f64).clamp(1e-12, 0.05);
    brent(|t| all_above(t, rho).ln() - wanted.ln(), -1.0, 9.0, 1e-6).unwrap_or(0.0)
}

/// P(all four > t) for normal numbers of equal correlation `rho` in [0, 1): ∫ φ(u) Q((t − √ρ u)/√(1 − ρ))⁴ du.
pub(super) fn all_above(t: f64, rho: f64) -> f64 {
    // Simpson's rule over ±8.
    const STEPS: usize = 160;
    let h = 16.0 / STEPS as f64;
    let at = |i: usize| {
        let u = h * i as f64 - 8.0;
        (-0.5 * u * u).exp() / TAU.sqrt() * normal_above((t - rho.sqrt() * u) / (1.0 - rho).sqrt()).powi(4)
    };
    let inner: f64 = (1..STEPS).map(|i| at(i) * if i % 2 == 1 { 4.0 } else { 2.0 }).sum();
    h / 3.0 * (at(0) + inner + at(STEPS))
}

impl Strip {
    fn of(width: f64) -> Self {
        let sigma = (ACROSS * width).max(LEAST_SIGMA);
        let mut reduced = 1;
        while sigma / (2 * reduced) as f64 >= 1.0 {
            reduced *= 2;
        }
        let along = (ALONG * width).max(LEAST_ALONG);
        let cells = reduced as f64;
        Self { width, floor: 0.0, low: 0.0, reduced, sigma: sigma / cells, along: along / cells }
    }

    /// Half the width, cells.
    pub(super) fn half(&self) -> f64 {
        0.5 * self.width / self.reduced as f64
    }

    /// Mean correlation of the noise in the four samples: c = −(1 − d²/2σ²) exp(−d²/4σ²) for the banks at their
    /// distance d, and a = exp(−(2·1.25 s)²/4s²) along.
    pub fn correlation(&self) -> f64 {
        let d2 = (2.0 * self.half() / self.sigma).powi(2);
        let across = (0.5 * d2 - 1.0) * (-0.25 * d2).exp();
        let along = (-APART * APART).exp();
        ((across + along + across * along) / 3.0).clamp(0.0, 0.9)
    }

    /// Length along the strip over which the noise is one number, full-resolution pixels: about twice 2√π s.
    pub fn independent_length(&self) -> f64 {
        4.0 * PI.sqrt() * self.along * self.reduced as f64
    }
}

/// The widths from narrowest to widest, full-resolution pixels.
fn widths(narrowest: f64, widest: f64) -> Vec<f64> {
    let narrowest = if narrowest.is_finite() { narrowest.max(1.0) } else { 1.0 };
    let widest = if widest.is_finite() { widest.max(narrowest) } else { narrowest };
    let steps = ((widest / narrowest).ln() / RATIO.ln()).ceil().clamp(0.0, 40.0) as usize;
    let ratio = if steps > 0 { (widest / narrowest).powf(1.0 / steps as f64) } else { 1.0 };
    (0..=steps).map(|i| narrowest * ratio.powi(i as i32)).collect()
}

/// The best response of every cell over all widths and directions. `None` when the image is of one tone.
pub(super) fn response(
    image: &Grid<f32>,
    tone: ChannelTone,
    widths_from_to: [f64; 2],
    significance: f64,
    work: &Work,
) -> Result<Option<Response>, Stopped> {
    let (width, height) = (image.width(), image.height());
    let range = image.valid_values().filter(|v| v.is_finite()).fold(None, |range: Option<(f32, f32)>, v| {
        Some(range.map_or((v, v), |(low, high)| (low.min(v), high.max(v))))
    });
    let Some((low, high)) = range.filter(|(low, high)| high > low) else { return Ok(None) };
    let strips: Vec<Strip> = widths(widths_from_to[0], widths_from_to[1])
        .into_iter()
        .filter(|w| 2.0 * w < width.max(height) as f64)
        .map(Strip::of)
        .collect();
    work.phase(
        "Looking for channels",
        strips.iter().map(|s| tiles(width, height, s.reduced).len() as u64).sum(),
    );
    let mut best = Response {
        z: Grid::filled(width, height, 0.0),
        excess: vec![0.0; width * height],
        strip: vec![0; width * height],
        turn: vec![0; width * height],
        strips: Vec::new(),
    };
    let mut grid = Reduced::full(image);
    for mut strip in strips {
        while grid.factor < strip.reduced {
            grid = grid.halved(work)?;
        }
        let filled = grid.filled(2.0 * strip.width / grid.factor as f64, work)?;
        let least = LEAST_NOISE * f64::from(high - low);
        let found = sought(&filled, &grid.valid, &strip, tone, least, work)?;
        strip.floor = floor_for(significance, strip.correlation());
        strip.low = LOW * strip.floor;
        best.strips.push(strip);
        best.take(&found, grid.factor, work)?;
    }
    if let Some(mask) = image.mask() {
        let values = best.z.values_mut().iter_mut().zip(&mut best.excess);
        values.zip(mask).filter(|(_, valid)| !**valid).for_each(|((z, e), _)| (*z, *e) = (0.0, 0.0));
    }
    Ok(Some(best))
}

impl Response {
    pub fn strip_at(&self, cell: usize) -> &Strip {
        &self.strips[usize::from(self.strip[cell])]
    }

    /// Height of the step at the banks of the best strip, in the unit of the image; 0 where nothing stands out.
    pub fn step_at(&self, cell: usize) -> f64 {
        let (z, low) = (f64::from(self.z.values()[cell]), self.strip_at(cell).low);
        if z > low { f64::from(self.excess[cell]) * z / (z - low) } else { 0.0 }
    }

    /// Takes the last strip's response where it stands out more than what is held.
    fn take(&mut self, found: &Found, factor: usize, work: &Work) -> Result<(), Stopped> {
        let number = self.strips.len() - 1;
        let width = self.z.width();
        let low = self.strips[number].low as f32;
        let rows = self.z.values_mut().par_chunks_mut(width).zip(self.excess.par_chunks_mut(width));
        let rows = rows.zip(self.strip.par_chunks_mut(width)).zip(self.turn.par_chunks_mut(width));
        rows.enumerate().try_for_each(|(row, (((zs, excesses), numbers), turns))| {
            for col in 0..width {
                let (amplitude, turn) = found.at(col, row, factor);
                if amplitude <= 0.0 {
                    continue;
                }
                let noise = found.noise_at(col / factor, row / factor);
                let z = amplitude / noise;
                let excess = ((z - low) * noise).max(0.0);
                if excess > excesses[col] || (excesses[col] == 0.0 && z > zs[col]) {
                    (zs[col], excesses[col], numbers[col], turns[col]) = (z, excess, number as u8, turn);
                }
            }
            work.advance(0)
        })
    }
}

/// The image in cells of `factor` pixels.
struct Reduced {
    values: Grid<f32>,
    valid: Option<Vec<bool>>,
    factor: usize,
}

impl Reduced {
    fn full(image: &Grid<f32>) -> Self {
        let finite = image.values().iter().all(|v| v.is_finite());
        let valid = (!finite || image.mask().is_some()).then(|| {
            let of = |i: usize| image.mask().is_none_or(|m| m[i]) && image.values()[i].is_finite();
            (0..image.len()).map(of).collect::<Vec<bool>>()
        });
        let values = Grid::from_parts(image.width(), image.height(), image.values().to_vec(), valid.clone());
        Self { values, valid, factor: 1 }
    }

    /// Means of two by two cells, over the valid ones.
    fn halved(&self, work: &Work) -> Result<Self, Stopped> {
        let (width, height) = (self.values.width().div_ceil(2), self.values.height().div_ceil(2));
        let mut cells = vec![(0.0f32, false); width * height];
        cells.par_chunks_mut(width).enumerate().try_for_each(|(row, line)| {
            for (col, cell) in line.iter_mut().enumerate() {
                let corners = [(0, 0), (1, 0), (0, 1), (1, 1)];
                let of = corners.map(|(c, r)| self.values.get(2 * col + c, 2 * row + r));
                let count = of.iter().flatten().count();
                *cell = (of.iter().flatten().sum::<f32>() / count.max(1) as f32, count > 0);
            }
            work.advance(0)
        })?;
        let valid = cells.iter().any(|c| !c.1).then(|| cells.iter().map(|c| c.1).collect::<Vec<bool>>());
        let values = Grid::from_parts(width, height, cells.iter().map(|c| c.0).collect(), valid.clone());
        Ok(Self { values, valid, factor: 2 * self.factor })
    }

    /// Missing cells filled by what is near, so that they show no edge of their own.
    fn filled(&self, sigma: f64, work: &Work) -> Result<Grid<f32>, Stopped> {
        let Some(mask) = &self.valid else { return Ok(self.values.clone()) };
        let count = self.values.valid_count().max(1) as f64;
        let mean = (self.values.valid_values().map(f64::from).sum::<f64>() / count) as f32;
        let near = smooth_valid(&self.values, [sigma.max(1.0); 2], work)?;
        let of = |i: usize| match (mask[i], near.mask().is_none_or(|m| m[i])) {
            (true, _) => self.values.values()[i],
            (false, true) => near.values()[i],
            (false, false) => mean,
        };
        let values = (0..self.values.len()).map(of).collect();
        Ok(Grid::from_parts(self.values.width(), self.values.height(), values, None))
    }
}

/// The response to one width on its grid.
struct Found {
    width: usize,
    height: usize,
    amplitude: Vec<f32>,
    turn: Vec<u8>,
    /// Scale of the noise of one sample, tile by tile, and tiles a row.
    noise: Vec<f32>,
    tiles: usize,
}

impl Found {
    /// At a full-resolution cell: amplitude linear between cells, direction of the nearest.
    fn at(&self, col: usize, row: usize, factor: usize) -> (f32, u8) {
        if factor == 1 {
            let i = row * self.width + col;
            return (self.amplitude[i], self.turn[i]);
        }
        let split = |x: usize, n: usize| {
            let x = ((x as f32 + 0.5) / factor as f32 - 0.5).clamp(0.0, (n - 1) as f32);
            let low = x as usize;
            (low, (low + 1).min(n - 1), x - low as f32)
        };
        let ((c0, c1, u), (r0, r1, v)) = (split(col, self.width), split(row, self.height));
        let at = |c: usize, r: usize| self.amplitude[r * self.width + c];
        let upper = at(c0, r0) * (1.0 - u) + at(c1, r0) * u;
        let lower = at(c0, r1) * (1.0 - u) + at(c1, r1) * u;
        (upper * (1.0 - v) + lower * v, self.turn[(row / factor) * self.width + col / factor])
    }
}

impl Found {
    /// Noise at a cell, linear between the middles of tiles.
    fn noise_at(&self, col: usize, row: usize) -> f32 {
        let split = |x: usize, n: usize| {
            let x = ((x as f32 + 0.5) / TILE as f32 - 0.5).clamp(0.0, (n - 1) as f32);
            (x as usize, (x as usize + 1).min(n - 1), x.fract())
        };
        let (cols, rows) = (self.tiles, self.noise.len() / self.tiles);
        let ((c0, c1, u), (r0, r1, v)) = (split(col, cols), split(row, rows));
        let at = |c: usize, r: usize| self.noise[r * cols + c];
        (at(c0, r0) * (1.0 - u) + at(c1, r0) * u) * (1.0 - v) + (at(c0, r1) * (1.0 - u) + at(c1, r1) * u) * v
    }
}

/// Noise of each tile from the samples in it; a share of that of the whole at least, and that of the whole where
/// samples are few.
fn noise_of_tiles(parts: &[Tile], least: f64) -> Vec<f32> {
    const FEW: usize = 200;
    let sizes = |tile: &Tile| tile.edges.iter().map(|e| f64::from(e.abs())).collect::<Vec<f64>>();
    // Every so many samples are enough for the whole.
    let all: usize = parts.iter().map(|t| t.edges.len()).sum();
    let every = all.div_ceil(200_000).max(1);
    let mut whole: Vec<f64> =
        parts.iter().flat_map(|t| &t.edges).step_by(every).map(|e| f64::from(e.abs())).collect();
    let whole = scale_without_strong(&mut whole).max(least);
    let of = |tile: &Tile| {
        if tile.edges.len() < FEW {
            return whole as f32;
        }
        scale_without_strong(&mut sizes(tile)).max(LEAST_SHARE * whole) as f32
    };
    parts.par_iter().map(of).collect()
}

/// Upper left corners of the tiles of a reduced grid, cells.
fn tiles(width: usize, height: usize, factor: usize) -> Vec<(usize, usize)> {
    let (width, height) = (width.div_ceil(factor), height.div_ceil(factor));
    (0..height).step_by(TILE).flat_map(|row| (0..width).step_by(TILE).map(move |col| (col, row))).collect()
}

/// One width over a grid without missing cells; banks on cells that are not `valid` count for nothing.
fn sought(
    grid: &Grid<f32>,
    valid: &Option<Vec<bool>>,
    strip: &Strip,
    tone: ChannelTone,
    least_noise: f64,
    work: &Work,
) -> Result<Found, Stopped> {
    let (width, height) = (grid.width(), grid.height());
    let filter = Filter::new(strip, tone);
    let corners = tiles(width, height, 1);
    let parts = corners
        .par_iter()
        .map(|corner| {
            work.advance(1)?;
            Ok(filter.tile(grid, *corner))
        })
        .collect::<Result<Vec<_>, Stopped>>()?;
    let mut found = Found {
        width,
        height,
        amplitude: vec![0.0; width * height],
        turn: vec![0; width * height],
        noise: noise_of_tiles(&parts, least_noise),
        tiles: width.div_ceil(TILE),
    };
    for ((col, row), tile) in corners.iter().zip(&parts) {
        for r in 0..tile.height {
            let (from, at) = (r * tile.width, (row + r) * width + col);
            found.amplitude[at..at + tile.width].copy_from_slice(&tile.amplitude[from..from + tile.width]);
            found.turn[at..at + tile.width].copy_from_slice(&tile.turn[from..from + tile.width]);
        }
    }
    if let Some(valid) = valid {
        let seen = |x: f64, y: f64| {
            let (c, r) = (x.round(), y.round());
            c >= 0.0
                && r >= 0.0
                && c < width as f64
                && r < height as f64
                && valid[r as usize * width + c as usize]
        };
        for cell in 0..found.amplitude.len() {
            let (x, y) = ((cell % width) as f64, (cell / width) as f64);
            let (along_x, along_y) = direction(found.turn[cell]);
            let (dx, dy) = (-along_y * strip.half(), along_x * strip.half());
            if !(seen(x, y) && seen(x + dx, y + dy) && seen(x - dx, y - dy)) {
                found.amplitude[cell] = 0.0;
            }
        }
    }
    Ok(found)
}

/// Standard deviation of the noise from absolute values: by their middle, strong ones left out (and the truncation
/// of a normal distribution made good).
fn scale_without_strong(sizes: &mut [f64]) -> f64 {
    // Median of |N|; and the median of |N| among those below 2.5: Φ⁻¹(½ + ½·0.98758/2).
    const MIDDLE: f64 = 0.674_490;
    const MIDDLE_BELOW: f64 = 0.664_735;
    if sizes.is_empty() {
        return 0.0;
    }
    sizes.sort_unstable_by(f64::total_cmp);
    let mut scale = quantile::of_sorted(sizes, 0.5) / MIDDLE;
    for _ in 0..4 {
        let kept = sizes.partition_point(|s| *s <= 2.5 * scale);
        scale = quantile::of_sorted(&sizes[..kept.max(1)], 0.5) / MIDDLE_BELOW;
    }
    scale
}
