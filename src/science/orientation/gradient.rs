//! Gradients by sampled Gaussian derivatives, and their products summed over small blocks of pixels.
//!
//! A gradient counts only where its whole support is valid and its own pixel lies in the patch, so
//! neither missing pixels nor the raster's border make false edges.

use multiversion::multiversion;
use rayon::prelude::*;

use crate::ground::{Grid, Polygon, Stopped, Work};
use crate::numeric::gauss::Kernel;
use crate::numeric::separable::{across_rows, along_row};

/// How pixel values become tone before any derivative.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Tone {
    Linear,
    /// ln max(value, floor): turns the speckle of radar into additive noise of one variance.
    Logarithm {
        floor: f64,
    },
}

/// Products of pixel gradients summed over blocks: per block [Σ g_c², Σ g_c g_r, Σ g_r², count].
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Blocks {
    pub cols: usize,
    pub rows: usize,
    /// Pixels of a block along a row and down a column.
    pub size: [usize; 2],
    pub sums: Vec<[f32; 4]>,
}

/// Share of the mean tone below which the logarithm is cut: one single-look intensity in a thousand.
const FLOOR_SHARE: f64 = 1e-3;

/// Image rows a task handles, about; whole blocks, so the same for any number of threads.
const STRIP: usize = 96;

impl Tone {
    /// The logarithm with its floor taken from the mean of the valid positive values.
    pub fn logarithm(image: &Grid<f32>) -> Self {
        let (mut sum, mut n) = (0.0f64, 0usize);
        for v in image.valid_values().filter(|v| *v > 0.0 && v.is_finite()) {
            sum += f64::from(v);
            n += 1;
        }
        let mean = if n == 0 { 1.0 } else { sum / n as f64 };
        Self::Logarithm { floor: (FLOOR_SHARE * mean).max(f64::from(f32::MIN_POSITIVE)) }
    }

    pub fn of(self, value: f32) -> f32 {
        match self {
            Self::Linear => value,
            Self::Logarithm { floor } => value.max(floor as f32).ln(),
        }
    }
}

/// Sums gradient products over blocks of `size` pixels. `sigma` is the gradient scale in pixels
/// along a row and down a column.
pub(super) fn blocks(
    image: &Grid<f32>,
    patch: &Polygon,
    tone: Tone,
    sigma: [f64; 2],
    size: [usize; 2],
    work: &Work,
) -> Result<Blocks, Stopped> {
    let (cols, rows) = (image.width().div_ceil(size[0]), image.height().div_ceil(size[1]));
    let kernels = Kernels::new(sigma);
    let block_rows = (STRIP / size[1]).max(1);
    let mut sums = vec![[0.0f32; 4]; cols * rows];
    sums.par_chunks_mut(block_rows * cols.max(1)).enumerate().try_for_each(|(strip, out)| {
        let first = strip * block_rows * size[1];
        Strip::new(image, patch, tone, &kernels, first, out.len() / cols * size[1]).fill(out, size, work)
    })?;
    Ok(Blocks { cols, rows, size, sums })
}

struct Kernels {
    smooth_c: Kernel,
    slope_c: Kernel,
    smooth_r: Kernel,
    slope_r: Kernel,
}

impl Kernels {
    fn new(sigma: [f64; 2]) -> Self {
        Self {
            smooth_c: Kernel::gaussian(sigma[0]),
            slope_c: Kernel::derivative(sigma[0]),
            smooth_r: Kernel::gaussian(sigma[1]),
            slope_r: Kernel::derivative(sigma[1]),
        }
    }
}

/// The rows of one task: those it sums, and where the gradients exist.
struct Strip<'a> {
    image: &'a Grid<f32>,
    patch: &'a Polygon,
    tone: Tone,
    kernels: &'a Kernels,
    first: usize,
    last: usize,
}

impl<'a> Strip<'a> {
    fn new(
        image: &'a Grid<f32>,
        patch: &'a Polygon,
        tone: Tone,
        kernels: &'a Kernels,
        first: usize,
        rows: usize,
    ) -> Self {
        let last = (first + rows).min(image.height());
        Self { image, patch, tone, kernels, first, last }
    }

    fn fill(&self, out: &mut [[f32; 4]], size: [usize; 2], work: &Work) -> Result<(), Stopped> {
        let (width, height) = (self.image.width(), self.image.height());
        let (reach_c, reach_r) = (self.kernels.smooth_c.radius(), self.kernels.smooth_r.radius());
        // Rows and columns whose whole support lies on the raster.
        let (from, to) = (self.first.max(reach_r), self.last.min(height.saturating_sub(reach_r)));
        if from >= to || width <= 2 * reach_c {
            return work.advance((self.last - self.first) as u64);
        }
        let spans: Vec<_> = (from..to).map(|row| self.patch.row_spans(row, width)).collect();
        if spans.iter().all(Vec::is_empty) {
            return work.advance((self.last - self.first) as u64);
        }
        let inner = width - 2 * reach_c;
        let source = from - reach_r..to + reach_r;
        let mut smooth = vec![0.0f32; source.len() * inner];
        let mut slope = vec![0.0f32; source.len() * inner];
        let mut line = vec![0.0f32; width];
        for (i, row) in source.clone().enumerate() {
            self.read(row, &mut line);
            along_row(&self.kernels.smooth_c, &line, &mut smooth[i * inner..][..inner]);
            along_row(&self.kernels.slope_c, &line, &mut slope[i * inner..][..inner]);
            work.advance(0)?;
        }
        let smooth: Vec<&[f32]> = smooth.chunks_exact(inner).collect();
        let slope: Vec<&[f32]> = slope.chunks_exact(inner).collect();
        let mut support = self.image.mask().map(|mask| Support::new(mask, width, reach_c, reach_r, &source));
        let mut sum = RowSums::new(inner);
        let (mut gc, mut gr, mut keep) = (vec![0.0f32; inner], vec![0.0f32; inner], vec![0.0f32; inner]);
        let cols = width.div_ceil(size[0]);
        for (i, row) in (from..to).enumerate() {
            across_rows(&self.kernels.smooth_r, &slope[i..=i + 2 * reach_r], &mut gc);
            across_rows(&self.kernels.slope_r, &smooth[i..=i + 2 * reach_r], &mut gr);
            keep.fill(0.0);
            for (a, b) in &spans[i] {
                let (a, b) = (a.saturating_sub(reach_c).min(inner), b.saturating_sub(reach_c).min(inner));
                keep[a..b].fill(1.0);
            }
            if let Some(support) = &mut support {
                support.next_row(&mut keep);
            }
            accumulate(&gc, &gr, &keep, &mut sum.cc, &mut sum.cr, &mut sum.rr, &mut sum.count);
            if (row + 1) % size[1] == 0 || row + 1 == to {
                let block_row = (row - self.first) / size[1];
                sum.pour(&mut out[block_row * cols..][..cols], reach_c, size[0]);
            }
            work.advance(1)?;
        }
        Ok(())
    }

    /// One row as tone; missing pixels become 0, which no counted gradient sees.
    fn read(&self, row: usize, line: &mut [f32]) {
        let width = line.len();
        line.copy_from_slice(&self.image.values()[row * width..][..width]);
        if let Tone::Logarithm { .. } = self.tone {
            line.iter_mut().for_each(|v| *v = self.tone.of(*v));
        }
        if let Some(mask) = self.image.mask() {
            for (v, valid) in line.iter_mut().zip(&mask[row * width..][..width]) {
                if !valid {
                    *v = 0.0;
                }
            }
        }
    }
}

/// Slides down the strip and knows for each column whether the kernel's support holds a missing pixel.
struct Support {
    /// Per source row and inner column: whether a missing pixel lies within reach along the row.
    broken: Vec<bool>,
    inner: usize,
    reach_r: usize,
    next: usize,
    /// Broken source rows within reach of the current row.
    count: Vec<u32>,
}

impl Support {
    fn new(
        mask: &[bool],
        width: usize,
        reach_c: usize,
        reach_r: usize,
        rows: &std::ops::Range<usize>,
    ) -> Self {
        let inner = width - 2 * reach_c;
        let mut broken = vec![false; rows.len() * inner];
        for (line, row) in broken.chunks_exact_mut(inner).zip(rows.clone()) {
            let mask = &mask[row * width..][..width];
            let mut missing = mask[..2 * reach_c].iter().filter(|v| !**v).count();
            for (x, broken) in line.iter_mut().enumerate() {
                missing += usize::from(!mask[x + 2 * reach_c]);
                *broken = missing > 0;
                missing -= usize::from(!mask[x]);
            }
        }
        let mut count = vec![0; inner];
        for line in broken.chunks_exact(inner).take(2 * reach_r) {
            count.iter_mut().zip(line).for_each(|(n, b)| *n += u32::from(*b));
        }
        Self { broken, inner, reach_r, next: 0, count }
    }

    /// Clears `keep` where the support of the next row is broken.
    fn next_row(&mut self, keep: &mut [f32]) {
        let line = |i: usize| &self.broken[i * self.inner..][..self.inner];
        for (n, b) in self.count.iter_mut().zip(line(self.next + 2 * self.reach_r)) {
            *n += u32::from(*b);
        }
        for (k, n) in keep.iter_mut().zip(&self.count) {
            if *n > 0 {
                *k = 0.0;
            }
        }
        for (n, b) in self.count.iter_mut().zip(line(self.next)) {
            *n -= u32::from(*b);
        }
        self.next += 1;
    }
}

/// Sums down the columns of one row of blocks.
struct RowSums {
    cc: Vec<f32>,
    cr: Vec<f32>,
    rr: Vec<f32>,
    count: Vec<f32>,
}

impl RowSums {
    fn new(inner: usize) -> Self {
        let zeros = vec![0.0; inner];
        Self { cc: zeros.clone(), cr: zeros.clone(), rr: zeros.clone(), count: zeros }
    }

    /// Adds the columns to their blocks and starts again; column x is pixel x + `offset`.
    fn pour(&mut self, out: &mut [[f32; 4]], offset: usize, size: usize) {
        for x in 0..self.cc.len() {
            let block = &mut out[(x + offset) / size];
            block[0] += self.cc[x];
            block[1] += self.cr[x];
            block[2] += self.rr[x];
            block[3] += self.count[x];
        }
        for column in [&mut self.cc, &mut self.cr, &mut self.rr, &mut self.count] {
            column.fill(0.0);
        }
    }
}

#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn accumulate(
    gc: &[f32],
    gr: &[f32],
    keep: &[f32],
    cc: &mut [f32],
    cr: &mut [f32],
    rr: &mut [f32],
    count: &mut [f32],
) {
    let n = gc.len();
    let (gr, keep) = (&gr[..n], &keep[..n]);
    let (cc, cr, rr, count) = (&mut cc[..n], &mut cr[..n], &mut rr[..n], &mut count[..n]);
    for x in 0..n {
        let (c, r) = (gc[x] * keep[x], gr[x] * keep[x]);
        cc[x] += c * c;
        cr[x] += c * r;
        rr[x] += r * r;
        count[x] += keep[x];
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn whole(image: &Grid<f32>) -> Polygon {
        Polygon::rectangle(image.width() as f64, image.height() as f64)
    }

    fn run(image: &Grid<f32>, patch: &Polygon, size: [usize; 2]) -> Blocks {
        blocks(image, patch, Tone::Linear, [1.0, 1.5], size, &Work::quiet()).unwrap()
    }

    #[test]
    fn a_ramp_has_the_same_gradient_everywhere() {
        let image = Grid::from_fn(70, 150, |c, r| 2.0 * c as f32 - 3.0 * r as f32);
        let blocks = run(&image, &whole(&image), [3, 4]);
        let counted: f32 = blocks.sums.iter().map(|b| b[3]).sum();
        assert_eq!(counted, ((70 - 8) * (150 - 12)) as f32);
        for [cc, cr, rr, n] in blocks.sums.iter().filter(|b| b[3] > 0.0) {
            assert!(
                (cc / n - 4.0).abs() < 2e-3 && (cr / n + 6.0).abs() < 2e-3 && (rr / n - 9.0).abs() < 2e-3
            );
        }
    }

    #[test]
    fn a_missing_pixel_takes_its_kernel_support_with_it_and_leaves_no_edge() {
        let mut image = Grid::filled(60, 260, 5.0f32);
        image.values_mut()[130 * 60 + 30] = f32::NAN;
        image.mask_where(|c, r| (c, r) != (30, 130));
        let blocks = run(&image, &whole(&image), [1, 1]);
        let counted: f32 = blocks.sums.iter().map(|b| b[3]).sum();
        assert_eq!(counted, ((60 - 8) * (260 - 12) - 9 * 13) as f32);
        assert!(blocks.sums.iter().all(|b| b[0] == 0.0 && b[2] == 0.0));
    }

    #[test]
    fn only_the_patch_is_counted() {
        let image = Grid::filled(60, 60, 1.0f32);
        let patch = Polygon::rectangle(30.0, 60.0).map(|p| crate::ground::Point::new(p.x + 20.0, p.y));
        let counted: f32 = run(&image, &patch, [4, 4]).sums.iter().map(|b| b[3]).sum();
        assert_eq!(counted, (30 * (60 - 12)) as f32);
    }
}
