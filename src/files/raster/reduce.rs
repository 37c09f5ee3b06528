//! Coarser views: windows averaged to fewer pixels, and the levels built in memory for files that
//! store none.

use std::ops::Range;
use std::sync::{Arc, Mutex};

use rayon::iter::{IndexedParallelIterator, IntoParallelRefIterator, ParallelIterator};

use super::Inner;
use super::bands::Bands;
use super::window::Window;
use crate::files::error::FileError;
use crate::ground::{Grid, Work};

/// Input pixels held at once while averaging.
const STRIP_PIXELS: usize = 1 << 22;
/// Levels need not be coarser than this many pixels a side: any view of them is quick.
const SCREENFUL: usize = 1500;
/// Sets of built levels kept, one for each choice of bands.
const KEPT: usize = 2;

/// Levels built in memory.
#[derive(Debug, Default)]
pub(super) struct Coarse(Mutex<Vec<(Bands, Arc<Vec<Built>>)>>);

/// One built level: each of its pixels averages `scale` × `scale` full-resolution pixels (fewer at
/// the right and lower edge).
#[derive(Debug)]
struct Built {
    scale: [f64; 2],
    grid: Grid<f32>,
}

/// The pixels of a level under one output column or row, and how much of the first and the last
/// of them is covered; those between are covered wholly.
#[derive(Clone, Debug)]
struct Span {
    at: Range<usize>,
    first: f64,
    last: f64,
}

impl Span {
    /// `from .. to` in level pixels, within `size` of them.
    fn new(from: f64, to: f64, size: usize) -> Self {
        let (from, to) = (from.max(0.0), to.min(size as f64));
        // Rounding must not touch a pixel by a hair.
        let begin = (from + 1e-6).floor() as usize;
        let end = ((to - 1e-6).ceil().max(0.0) as usize).clamp(begin.min(size), size);
        if begin >= end {
            return Self { at: 0..0, first: 0.0, last: 0.0 };
        }
        let cover = |pixel: usize| to.min((pixel + 1) as f64) - from.max(pixel as f64);
        Self { at: begin..end, first: cover(begin), last: cover(end - 1) }
    }

    fn weight(&self, pixel: usize) -> f64 {
        if pixel == self.at.start {
            self.first
        } else if pixel + 1 == self.at.end {
            self.last
        } else {
            1.0
        }
    }
}

/// Output columns or rows: `count` blocks of `factor` full-resolution pixels from `start`, the last
/// one cut at `stop`, on a level of `size` pixels that are `scale` full-resolution pixels each.
fn spans(start: usize, stop: usize, factor: usize, count: usize, scale: f64, size: usize) -> Vec<Span> {
    let at = |i: usize| start.saturating_add(i.saturating_mul(factor)).min(stop) as f64 / scale;
    (0..count).map(|i| Span::new(at(i), at(i + 1), size)).collect()
}

impl Inner {
    pub(super) fn read_reduced(
        &self,
        window: Window,
        factor: usize,
        bands: &Bands,
        work: &Work,
    ) -> Result<Grid<f32>, FileError> {
        let factor = factor.max(1);
        if factor == 1 {
            return self.read(0, window, bands, work);
        }
        self.check_bands(bands)?;
        let (width, height) = (window.width.div_ceil(factor), window.height.div_ceil(factor));
        let asked = (width as u64).saturating_mul(height as u64);
        if asked > self.limits.pixels_per_read as u64 {
            let limit = self.limits.pixels_per_read as u64;
            return Err(FileError::too_large(&self.info.path, "the number of pixels to read", asked, limit));
        }
        let built = self.coarse.of(bands);
        let fits = |scale: [f64; 2]| scale[0].max(scale[1]) <= factor as f64 * 1.001;
        let coarsest =
            built.iter().filter(|b| fits(b.scale)).max_by(|a, b| a.scale[0].total_cmp(&b.scale[0]));
        let stored = (0..self.levels.len()).rev().find(|l| fits(self.scale(*l))).unwrap_or(0);
        let stored_scale = self.scale(stored);
        let use_built = coarsest.filter(|b| b.scale[0] > stored_scale[0]);
        let (scale, size) = match use_built {
            Some(b) => (b.scale, [b.grid.width(), b.grid.height()]),
            None => (stored_scale, self.size(stored)),
        };
        let stop = [
            window.col.saturating_add(window.width).min(self.info.width),
            window.row.saturating_add(window.height).min(self.info.height),
        ];
        let cols = spans(window.col, stop[0], factor, width, scale[0], size[0]);
        let rows = spans(window.row, stop[1], factor, height, scale[1], size[1]);
        match use_built {
            Some(b) => {
                work.advance(0)?;
                let mut out = Averages::new(width);
                out.push(&b.grid, [0, 0], &cols, &rows);
                Ok(out.grid())
            }
            None => self.average_level(stored, &cols, &rows, bands, work, |_| Ok(())),
        }
    }

    /// Averages a stored level, strip by strip of output rows.
    fn average_level(
        &self,
        level: usize,
        cols: &[Span],
        rows: &[Span],
        bands: &Bands,
        work: &Work,
        mut done: impl FnMut(usize) -> Result<(), FileError>,
    ) -> Result<Grid<f32>, FileError> {
        let mut out = Averages::new(cols.len());
        let col = cols.iter().filter(|s| !s.at.is_empty()).map(|s| s.at.start).min().unwrap_or(0);
        let width = cols.iter().map(|s| s.at.end).max().unwrap_or(0).saturating_sub(col);
        let mut next = 0;
        while next < rows.len() {
            let row = rows[next].at.start;
            let mut take = 1;
            while next + take < rows.len()
                && (rows[next + take].at.end.saturating_sub(row)) * width <= STRIP_PIXELS
            {
                take += 1;
            }
            let strip = &rows[next..next + take];
            let height = strip.iter().map(|s| s.at.end).max().unwrap_or(0).saturating_sub(row);
            let grid = self.read(level, Window { col, row, width, height }, bands, work)?;
            out.push(&grid, [col, row], cols, strip);
            next += take;
            done(take)?;
        }
        Ok(out.grid())
    }

    pub(super) fn build_coarse(&self, bands: &Bands, work: &Work) -> Result<(), FileError> {
        self.check_bands(bands)?;
        let base = self.levels.len() - 1;
        let size = self.size(base);
        if size[0].max(size[1]) <= SCREENFUL || !self.coarse.of(bands).is_empty() {
            return Ok(());
        }
        // All built levels together take 4/3 of the first, at 5 bytes a pixel.
        let bytes = |step: usize| {
            let pixels = size[0].div_ceil(step).saturating_mul(size[1].div_ceil(step));
            pixels.saturating_mul(5).saturating_mul(4) / 3
        };
        let mut step = 2;
        while bytes(step) > self.limits.coarse_bytes {
            step *= 2;
        }
        let scale = self.scale(base);
        let (width, height) = (size[0].div_ceil(step), size[1].div_ceil(step));
        let cols = spans(0, size[0], step, width, 1.0, size[0]);
        let rows = spans(0, size[1], step, height, 1.0, size[1]);
        work.phase("coarse levels", height as u64);
        let first =
            self.average_level(base, &cols, &rows, bands, work, |rows| Ok(work.advance(rows as u64)?))?;
        let mut built = vec![Built { scale: scale.map(|s| s * step as f64), grid: first }];
        while let Some(last) = built.last()
            && last.grid.width().max(last.grid.height()) > SCREENFUL
        {
            work.advance(0)?;
            let size = [last.grid.width(), last.grid.height()];
            let cols = spans(0, size[0], 2, size[0].div_ceil(2), 1.0, size[0]);
            let rows = spans(0, size[1], 2, size[1].div_ceil(2), 1.0, size[1]);
            let mut next = Averages::new(cols.len());
            next.push(&last.grid, [0, 0], &cols, &rows);
            let scale = last.scale.map(|s| s * 2.0);
            built.push(Built { scale, grid: next.grid() });
        }
        self.coarse.keep(bands, built);
        Ok(())
    }

    fn size(&self, level: usize) -> [usize; 2] {
        let layout = &self.levels[level].image.layout;
        [layout.width, layout.height]
    }

    /// Full-resolution pixels per pixel of a stored level, along columns and rows.
    fn scale(&self, level: usize) -> [f64; 2] {
        let size = self.size(level);
        [self.info.width as f64 / size[0] as f64, self.info.height as f64 / size[1] as f64]
    }
}

impl Coarse {
    fn of(&self, bands: &Bands) -> Arc<Vec<Built>> {
        let kept = self.0.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        kept.iter().find(|(b, _)| b == bands).map(|(_, levels)| levels.clone()).unwrap_or_default()
    }

    fn keep(&self, bands: &Bands, levels: Vec<Built>) {
        let mut kept = self.0.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        kept.retain(|(b, _)| b != bands);
        kept.insert(0, (bands.clone(), Arc::new(levels)));
        kept.truncate(KEPT);
    }
}

/// Output rows as they are finished.
struct Averages {
    width: usize,
    values: Vec<f32>,
    valid: Vec<bool>,
}

impl Averages {
    fn new(width: usize) -> Self {
        Self { width, values: Vec::new(), valid: Vec::new() }
    }

    /// Appends the rows that `rows` describe, from a grid whose first cell is level pixel `origin`.
    fn push(&mut self, grid: &Grid<f32>, origin: [usize; 2], cols: &[Span], rows: &[Span]) {
        let made: Vec<(Vec<f32>, Vec<bool>)> =
            rows.par_iter().with_min_len(4).map(|span| average_row(grid, origin, cols, span)).collect();
        for (values, valid) in made {
            self.values.extend(values);
            self.valid.extend(valid);
        }
    }

    fn grid(self) -> Grid<f32> {
        let height = self.values.len() / self.width.max(1);
        Grid::from_parts(self.width, height, self.values, Some(self.valid))
    }
}

/// One output row: Σ w·v / Σ w over the valid pixels under each output pixel.
fn average_row(grid: &Grid<f32>, origin: [usize; 2], cols: &[Span], rows: &Span) -> (Vec<f32>, Vec<bool>) {
    let width = grid.width();
    let mut sums = vec![0f64; width];
    let mut weights = vec![0f64; width];
    for row in rows.at.clone() {
        let w = rows.weight(row);
        let start = (row - origin[1]) * width;
        let values = &grid.values()[start..start + width];
        match grid.mask() {
            None => {
                for ((sum, weight), v) in sums.iter_mut().zip(&mut weights).zip(values) {
                    *sum += w * f64::from(*v);
                    *weight += w;
                }
            }
            Some(mask) => {
                let mask = &mask[start..start + width];
                for (((sum, weight), v), valid) in sums.iter_mut().zip(&mut weights).zip(values).zip(mask) {
                    if *valid {
                        *sum += w * f64::from(*v);
                        *weight += w;
                    }
                }
            }
        }
    }
    let mut out = (Vec::with_capacity(cols.len()), Vec::with_capacity(cols.len()));
    for span in cols {
        let (mut sum, mut weight) = (0.0, 0.0);
        for col in span.at.clone() {
            let w = span.weight(col);
            sum += w * sums[col - origin[0]];
            weight += w * weights[col - origin[0]];
        }
        out.0.push(if weight > 0.0 { (sum / weight) as f32 } else { 0.0 });
        out.1.push(weight > 0.0);
    }
    out
}
