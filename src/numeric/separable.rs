//! Row and column passes of separable filters. Plain loops over short blocks, compiled for several
//! instruction sets; products and sums are never fused, so every machine gives the same bits.

use multiversion::multiversion;
use rayon::prelude::*;

use super::gauss::{Kernel, Parity};
use crate::ground::{Grid, Stopped, Work};

/// Values handled together; small enough for registers, long enough for wide ones.
const BLOCK: usize = 16;

/// Rows a task handles; fixed, so that results do not depend on the number of threads.
const STRIP: usize = 64;

/// Correlates one row. `out[i]` belongs to `row[i + radius]`, so `out` is 2·radius shorter.
///
/// # Panics
/// When the lengths do not fit: a bug in the caller.
pub fn along_row(kernel: &Kernel, row: &[f32], out: &mut [f32]) {
    assert_eq!(out.len() + 2 * kernel.radius(), row.len(), "row and output");
    match kernel.parity {
        Parity::Even => even_row(&kernel.half, row, out),
        Parity::Odd => odd_row(&kernel.half, row, out),
    }
}

/// Correlates down the columns: `rows` are the 2·radius + 1 rows around the output row.
///
/// # Panics
/// When the number or length of rows does not fit: a bug in the caller.
pub fn across_rows(kernel: &Kernel, rows: &[&[f32]], out: &mut [f32]) {
    assert_eq!(rows.len(), 2 * kernel.radius() + 1, "rows");
    assert!(rows.iter().all(|row| row.len() == out.len()), "row lengths");
    match kernel.parity {
        Parity::Even => even_rows(&kernel.half, rows, out),
        Parity::Odd => odd_rows(&kernel.half, rows, out),
    }
}

/// Gaussian smoothing of the valid cells: Σ G v / Σ G over the valid cells under the kernel. A cell
/// with no valid cell in reach stays missing; all others become valid.
///
/// # Errors
/// [`Stopped`].
pub fn smooth_valid(grid: &Grid<f32>, sigma: [f64; 2], work: &Work) -> Result<Grid<f32>, Stopped> {
    Ok(smooth_supported(grid, sigma, work)?.0)
}

/// The same with Σ G over the valid cells at each cell: 1 where the whole kernel falls on valid ground.
///
/// # Errors
/// [`Stopped`].
pub fn smooth_supported(
    grid: &Grid<f32>,
    sigma: [f64; 2],
    work: &Work,
) -> Result<(Grid<f32>, Grid<f32>), Stopped> {
    let (width, height) = (grid.width(), grid.height());
    let weight = Grid::from_fn(width, height, |c, r| if grid.is_valid(c, r) { 1.0 } else { 0.0f32 });
    let filled = Grid::from_fn(width, height, |c, r| grid.get(c, r).unwrap_or(0.0));
    let kernels = sigma.map(Kernel::gaussian);
    let sum = zero_padded(&filled, &kernels, work)?;
    let share = zero_padded(&weight, &kernels, work)?;
    let valid: Vec<bool> = share.values().iter().map(|w| *w > 1e-6).collect();
    let values = sum.values().iter().zip(share.values()).map(|(s, w)| if *w > 1e-6 { s / w } else { 0.0 });
    Ok((Grid::from_parts(width, height, values.collect(), Some(valid)), share))
}

/// Both passes with zeros outside the grid.
fn zero_padded(grid: &Grid<f32>, kernels: &[Kernel; 2], work: &Work) -> Result<Grid<f32>, Stopped> {
    let (width, height) = (grid.width(), grid.height());
    let [col, row] = kernels;
    let (reach_c, reach_r) = (col.radius(), row.radius());
    let mut values = vec![0.0f32; width * height];
    values.par_chunks_mut(STRIP * width.max(1)).enumerate().try_for_each(|(strip, out)| {
        let first = strip * STRIP;
        let rows = out.len() / width;
        let mut padded = vec![0.0f32; width + 2 * reach_c];
        let mut lines = vec![0.0f32; (rows + 2 * reach_r) * width];
        for (i, line) in lines.chunks_exact_mut(width).enumerate() {
            let Some(source) = (first + i).checked_sub(reach_r).filter(|r| *r < height) else { continue };
            padded[reach_c..reach_c + width].copy_from_slice(&grid.values()[source * width..][..width]);
            along_row(col, &padded, line);
        }
        let lines: Vec<&[f32]> = lines.chunks_exact(width).collect();
        for (i, out) in out.chunks_exact_mut(width).enumerate() {
            across_rows(row, &lines[i..=i + 2 * reach_r], out);
        }
        work.advance(0)
    })?;
    Ok(Grid::from_parts(width, height, values, None))
}

#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn even_row(half: &[f32], row: &[f32], out: &mut [f32]) {
    symmetric_row(half, row, out, |right, left| right + left);
}

#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn odd_row(half: &[f32], row: &[f32], out: &mut [f32]) {
    symmetric_row(half, row, out, |right, left| right - left);
}

#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn even_rows(half: &[f32], rows: &[&[f32]], out: &mut [f32]) {
    symmetric_rows(half, rows, out, |below, above| below + above);
}

#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn odd_rows(half: &[f32], rows: &[&[f32]], out: &mut [f32]) {
    symmetric_rows(half, rows, out, |below, above| below - above);
}

#[inline(always)]
fn symmetric_row(half: &[f32], row: &[f32], out: &mut [f32], pair: impl Fn(f32, f32) -> f32 + Copy) {
    let radius = half.len() - 1;
    let whole = out.len() / BLOCK * BLOCK;
    for x in (0..whole).step_by(BLOCK) {
        let mut sum = [0.0f32; BLOCK];
        let centre: &[f32; BLOCK] = row[x + radius..].first_chunk().expect("row is longer than the output");
        for i in 0..BLOCK {
            sum[i] = half[0] * centre[i];
        }
        for k in 1..half.len() {
            let right: &[f32; BLOCK] =
                row[x + radius + k..].first_chunk().expect("row is longer than the output");
            let left: &[f32; BLOCK] =
                row[x + radius - k..].first_chunk().expect("row is longer than the output");
            for i in 0..BLOCK {
                sum[i] += half[k] * pair(right[i], left[i]);
            }
        }
        out[x..x + BLOCK].copy_from_slice(&sum);
    }
    for x in whole..out.len() {
        let mut sum = half[0] * row[x + radius];
        for k in 1..half.len() {
            sum += half[k] * pair(row[x + radius + k], row[x + radius - k]);
        }
        out[x] = sum;
    }
}

#[inline(always)]
fn symmetric_rows(half: &[f32], rows: &[&[f32]], out: &mut [f32], pair: impl Fn(f32, f32) -> f32 + Copy) {
    let radius = half.len() - 1;
    let whole = out.len() / BLOCK * BLOCK;
    for x in (0..whole).step_by(BLOCK) {
        let mut sum = [0.0f32; BLOCK];
        let centre: &[f32; BLOCK] = rows[radius][x..].first_chunk().expect("rows are as long as the output");
        for i in 0..BLOCK {
            sum[i] = half[0] * centre[i];
        }
        for k in 1..half.len() {
            let below: &[f32; BLOCK] =
                rows[radius + k][x..].first_chunk().expect("rows are as long as the output");
            let above: &[f32; BLOCK] =
                rows[radius - k][x..].first_chunk().expect("rows are as long as the output");
            for i in 0..BLOCK {
                sum[i] += half[k] * pair(below[i], above[i]);
            }
        }
        out[x..x + BLOCK].copy_from_slice(&sum);
    }
    for x in whole..out.len() {
        let mut sum = half[0] * rows[radius][x];
        for k in 1..half.len() {
            sum += half[k] * pair(rows[radius + k][x], rows[radius - k][x]);
        }
        out[x] = sum;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn noise(width: usize, height: usize) -> Grid<f32> {
        let mut state = 12345u32;
        Grid::from_fn(width, height, |_, _| {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            (state >> 8) as f32 / 16_777_216.0
        })
    }

    /// Σ G v / Σ G by the definition.
    fn naive(grid: &Grid<f32>, sigma: [f64; 2], col: usize, row: usize) -> f64 {
        let kernels = sigma.map(Kernel::gaussian);
        let (mut sum, mut weight) = (0.0, 0.0);
        let tap = |k: &Kernel, d: isize| k.half.get(d.unsigned_abs()).map_or(0.0, |t| f64::from(*t));
        for r in 0..grid.height() {
            for c in 0..grid.width() {
                if let Some(v) = grid.get(c, r) {
                    let w = tap(&kernels[0], c as isize - col as isize)
                        * tap(&kernels[1], r as isize - row as isize);
                    sum += w * f64::from(v);
                    weight += w;
                }
            }
        }
        sum / weight
    }

    #[test]
    fn fused_passes_agree_with_the_definition_on_valid_cells() {
        let mut grid = noise(53, 90);
        grid.mask_where(|c, r| (c + 3 * r) % 7 != 0);
        let smooth = smooth_valid(&grid, [1.7, 2.6], &Work::quiet()).unwrap();
        for (c, r) in [(0, 0), (52, 89), (20, 63), (21, 64), (30, 7)] {
            crate::assert_close!(
                f64::from(smooth.at(c, r)),
                naive(&grid, [1.7, 2.6], c, r),
                1e-5,
                "({c}, {r})"
            );
        }
    }

    #[test]
    fn derivative_of_a_ramp_is_its_slope() {
        let row: Vec<f32> = (0..60).map(|x| 3.0 * x as f32).collect();
        let kernel = Kernel::derivative(1.5);
        let mut out = vec![0.0; 60 - 2 * kernel.radius()];
        along_row(&kernel, &row, &mut out);
        assert!(out.iter().all(|v| (v - 3.0).abs() < 1e-4), "{out:?}");
    }

    #[test]
    fn a_stopped_work_stops() {
        let work = Work::quiet();
        work.stop();
        assert_eq!(smooth_valid(&noise(40, 40), [2.0, 2.0], &work), Err(Stopped));
    }
}
