//! The picture made ready: tone, what is missing, spikes cut, and its pixel noise.

use rayon::prelude::*;

use crate::ground::{Grid, Point, Polygon, Stopped, Work};
use crate::numeric::quantile;
use crate::numeric::separable::smooth_valid;

use super::CrestSettings;

/// Share of pixels cut at either end of the tone against its surroundings: markers, wires, dead pixels. On
/// slip faces, where the tone against its surroundings is nearly Gaussian, what lies beyond 3.5 robust
/// standard deviations is cut, but never a greater share than the second figure.
const SPIKES: [f64; 2] = [0.0025, 0.02];
const OUTLYING: f64 = 3.5;

/// The surroundings are the tone smoothed by so many scales.
const SURROUNDINGS: f64 = 7.0;

/// Widest median window on either side, pixels; wider ones cost more than they bring.
const WIDEST_MEDIAN: usize = 4;

/// Numbers looked at for a quantile or a noise level; more add nothing.
const SAMPLES: usize = 1 << 18;

/// Rows a task handles; fixed, so that results do not depend on the number of threads.
const STRIP: usize = 64;

/// A picture with its outline.
pub(super) struct Ground<'a> {
    /// Tone about its mean; missing cells filled from around.
    pub tone: Grid<f32>,
    /// Cells with data that no mask excludes.
    pub valid: Vec<bool>,
    pub outline: &'a Polygon,
    /// Standard deviation of independent pixel noise.
    pub noise: f64,
}

impl<'a> Ground<'a> {
    pub fn new(
        image: &Grid<f32>,
        outline: &'a Polygon,
        settings: &CrestSettings,
        work: &Work,
    ) -> Result<Self, Stopped> {
        let (width, height) = (image.width(), image.height());
        let limits = settings.tone_limits.unwrap_or([f64::NEG_INFINITY, f64::INFINITY]);
        let mut valid = vec![false; image.len()];
        let (mut sum, mut count) = (0.0f64, 0usize);
        for row in 0..height {
            for col in 0..width {
                let Some(v) = image.get(col, row).filter(|v| v.is_finite()) else { continue };
                if f64::from(v) >= limits[0] && f64::from(v) <= limits[1] {
                    valid[row * width + col] = true;
                    sum += f64::from(v);
                    count += 1;
                }
            }
            work.advance(0)?;
        }
        for polygon in &settings.excluded {
            for row in 0..height {
                for (from, to) in polygon.row_spans(row, width) {
                    valid[row * width + from..row * width + to].fill(false);
                }
            }
            work.advance(0)?;
        }
        let mean = if count > 0 { sum / count as f64 } else { 0.0 };
        let least = (1e-3 * mean).max(f64::from(f32::MIN_POSITIVE));
        let of = |v: f32| match settings.logarithm {
            true => f64::from(v).max(least).ln() as f32,
            false => (f64::from(v) - mean) as f32,
        };
        let tones: Vec<f32> =
            image.values().iter().zip(&valid).map(|(v, ok)| if *ok { of(*v) } else { 0.0 }).collect();
        let tone = Grid::from_parts(width, height, tones, Some(valid.clone()));
        let noise = noise(&tone, outline, work)?;
        Ok(Self { tone, valid, outline, noise })
    }

    /// The tone to differentiate at a scale: gaps filled, spikes cut at what nearly all pixels keep within of
    /// their surroundings, and, where `smooth` (slip faces), a median over about one scale, which takes out
    /// wires and markers and leaves steps where they are.
    pub fn prepared(&self, sigma: f64, smooth: bool, work: &Work) -> Result<Grid<f32>, Stopped> {
        let (width, height) = (self.tone.width(), self.tone.height());
        let around = surroundings(&self.tone, SURROUNDINGS * sigma, work)?;
        let filled =
            Grid::from_fn(width, height, |c, r| self.tone.get(c, r).or(around.get(c, r)).unwrap_or_default());
        let radius = (sigma.round() as usize).min(WIDEST_MEDIAN);
        let calm = if smooth { median(&filled, radius, work)? } else { filled };
        let every = (calm.len() / SAMPLES).max(1);
        let mut apart: Vec<f64> = (0..calm.len())
            .step_by(every)
            .filter(|i| self.valid[*i])
            .map(|i| f64::from(calm.values()[i] - around.values()[i]))
            .collect();
        if apart.is_empty() {
            return Ok(calm);
        }
        let (low, high) = if smooth {
            let [low, middle, high] = quantile::of(&mut apart, [SPIKES[1], 0.5, 1.0 - SPIKES[1]]);
            let mut off: Vec<f64> = apart.iter().map(|v| (v - middle).abs()).collect();
            let beyond = OUTLYING * quantile::median(&mut off) / 0.6745;
            (low.min(middle - beyond) as f32, high.max(middle + beyond) as f32)
        } else {
            let [low, high] = quantile::of(&mut apart, [SPIKES[0], 1.0 - SPIKES[0]]);
            (low as f32, high as f32)
        };
        let cut = calm.values().iter().zip(around.values()).map(|(v, a)| a + (v - a).clamp(low, high));
        Ok(Grid::from_parts(width, height, cut.collect(), None))
    }

    /// Cells of the outline at least `margin` pixels from missing ground and from the raster's border.
    pub fn open(&self, margin: usize) -> Vec<bool> {
        let (width, height) = (self.tone.width(), self.tone.height());
        let narrow = |cells: &[bool], outer: usize, inner: usize, step: [usize; 2]| {
            let mut out = vec![false; cells.len()];
            for o in 0..outer {
                let mut run = 0usize;
                for i in 0..inner {
                    run = if cells[o * step[0] + i * step[1]] { run + 1 } else { 0 };
                    if run > 2 * margin {
                        out[o * step[0] + (i - margin) * step[1]] = true;
                    }
                }
            }
            out
        };
        let along = narrow(&self.valid, height, width, [width, 1]);
        let mut open = narrow(&along, width, height, [1, width]);
        for row in 0..height {
            let mut inside = vec![false; width];
            for (from, to) in self.outline.row_spans(row, width) {
                inside[from..to].fill(true);
            }
            open[row * width..][..width].iter_mut().zip(inside).for_each(|(o, i)| *o &= i);
        }
        open
    }

    /// Whether missing or excluded ground lies within `reach` pixels.
    pub fn near_gap(&self, p: Point, reach: f64) -> bool {
        let (width, height) = (self.tone.width() as isize, self.tone.height() as isize);
        let r = reach.ceil() as isize;
        let (col, row) = (p.x.floor() as isize, p.y.floor() as isize);
        (row - r..=row + r).filter(|y| (0..height).contains(y)).any(|y| {
            (col - r..=col + r).any(|x| (0..width).contains(&x) && !self.valid[(y * width + x) as usize])
        })
    }

    /// Whether the raster's border lies within `reach` pixels, or the outline within `edge`.
    pub fn near_border(&self, p: Point, reach: f64, edge: f64) -> bool {
        let (width, height) = (self.tone.width() as f64, self.tone.height() as f64);
        p.x.min(p.y).min(width - p.x).min(height - p.y) <= reach || self.outline.distance_to_edge(p) <= edge
    }
}

/// Standard deviation of pixel noise: second differences have variance 6 s², measured by their median
/// size. Crests add to them across but hardly along, so the calmest of four directions counts; noise of a
/// resampled picture is alike from pixel to pixel, so the larger of lags 1 and 2.
fn noise(tone: &Grid<f32>, outline: &Polygon, work: &Work) -> Result<f64, Stopped> {
    let (width, height) = (tone.width(), tone.height());
    let every = (width * height / SAMPLES).max(1);
    let mut level = 0.0f64;
    for lag in [1usize, 2] {
        let mut calmest = f64::INFINITY;
        for (dx, dy) in [(1isize, 0isize), (0, 1), (1, 1), (1, -1)] {
            let step = (dx * lag as isize, dy * lag as isize);
            let mut sizes = Vec::new();
            for row in (0..height).step_by(every) {
                for (from, to) in outline.row_spans(row, width) {
                    for col in from..to {
                        let at = |k: isize| {
                            let (x, y) = (col as isize + k * step.0, row as isize + k * step.1);
                            tone.get(usize::try_from(x).ok()?, usize::try_from(y).ok()?)
                        };
                        if let (Some(a), Some(b), Some(c)) = (at(-1), at(0), at(1)) {
                            sizes.push((f64::from(a) - 2.0 * f64::from(b) + f64::from(c)).abs());
                        }
                    }
                }
                work.advance(0)?;
            }
            if !sizes.is_empty() {
                calmest = calmest.min(quantile::median(&mut sizes) / 0.6745 / 6f64.sqrt());
            }
        }
        level = level.max(if calmest.is_finite() { calmest } else { 0.0 });
    }
    Ok(level)
}

/// The tone smoothed by a wide Gaussian: block means, smoothed, and linear between them. Blocks are a quarter of
/// the Gaussian, so nothing is lost that it would keep.
fn surroundings(tone: &Grid<f32>, sigma: f64, work: &Work) -> Result<Grid<f32>, Stopped> {
    let side = (0.25 * sigma) as usize;
    if side < 2 {
        return smooth_valid(tone, [sigma; 2], work);
    }
    let (width, height) = (tone.width(), tone.height());
    let (cols, rows) = (width.div_ceil(side), height.div_ceil(side));
    let mut sums = vec![(0.0f64, 0u32); cols * rows];
    for row in 0..height {
        for col in 0..width {
            if let Some(v) = tone.get(col, row) {
                let sum = &mut sums[row / side * cols + col / side];
                *sum = (sum.0 + f64::from(v), sum.1 + 1);
            }
        }
        work.advance(0)?;
    }
    let means = sums.iter().map(|(sum, n)| (sum / f64::from((*n).max(1))) as f32).collect();
    let blocks = Grid::from_parts(cols, rows, means, Some(sums.iter().map(|s| s.1 > 0).collect()));
    let blocks = smooth_valid(&blocks, [sigma / side as f64; 2], work)?;
    let split = |i: usize, n: usize| {
        let at = ((i as f32 + 0.5) / side as f32 - 0.5).clamp(0.0, (n - 1) as f32);
        let first = (at as usize).min(n.saturating_sub(2));
        (first, (first + 1).min(n - 1), at - first as f32)
    };
    let mut out = vec![0.0f32; width * height];
    out.par_chunks_mut(width.max(1)).enumerate().try_for_each(|(row, line)| {
        let (above, below, v) = split(row, rows);
        for (col, out) in line.iter_mut().enumerate() {
            let (left, right, u) = split(col, cols);
            let mix = |r: usize| blocks.at(left, r) * (1.0 - u) + blocks.at(right, r) * u;
            *out = mix(above) * (1.0 - v) + mix(below) * v;
        }
        work.advance(0)
    })?;
    Ok(Grid::from_parts(width, height, out, None))
}

/// The median over (2·radius + 1)² pixels, cut at the raster's border.
fn median(grid: &Grid<f32>, radius: usize, work: &Work) -> Result<Grid<f32>, Stopped> {
    let (width, height) = (grid.width(), grid.height());
    let mut out = vec![0.0f32; width * height];
    out.par_chunks_mut(STRIP * width.max(1)).enumerate().try_for_each(|(strip, out)| {
        let mut around = Vec::with_capacity((2 * radius + 1).pow(2));
        for (i, line) in out.chunks_exact_mut(width).enumerate() {
            let row = strip * STRIP + i;
            let rows = row.saturating_sub(radius)..(row + radius + 1).min(height);
            for (col, v) in line.iter_mut().enumerate() {
                let cols = col.saturating_sub(radius)..(col + radius + 1).min(width);
                around.clear();
                for r in rows.clone() {
                    around.extend_from_slice(&grid.values()[r * width..][cols.clone()]);
                }
                let middle = around.len() / 2;
                *v = *around.select_nth_unstable_by(middle, f32::total_cmp).1;
            }
            work.advance(0)?;
        }
        Ok(())
    })?;
    Ok(Grid::from_parts(width, height, out, None))
}
