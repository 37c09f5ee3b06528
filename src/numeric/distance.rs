//! Exact Euclidean distance transform of a mask (Felzenszwalb and Huttenlocher 2012: lower envelopes of parabolas).

use rayon::prelude::*;

use crate::ground::{Stopped, Work};

/// Distance of no cell at all.
const FAR: f32 = 1e18;

/// Rows or columns a task handles.
const STRIP: usize = 32;

/// From the centre of each cell to the centre of the nearest empty cell, 0 on empty cells, in cells. Infinite where
/// no cell is empty; what lies outside is not empty.
///
/// # Errors
/// [`Stopped`].
pub fn to_empty(set: &[bool], width: usize, work: &Work) -> Result<Vec<f32>, Stopped> {
    if width == 0 {
        return Ok(Vec::new());
    }
    let height = set.len() / width;
    // Down the columns, stored column by column.
    let mut columns = vec![0.0f32; set.len()];
    columns.par_chunks_mut(STRIP * height.max(1)).enumerate().try_for_each(|(strip, part)| {
        for (i, column) in part.chunks_exact_mut(height).enumerate() {
            let col = strip * STRIP + i;
            let mut from = f32::INFINITY;
            for row in 0..height {
                from = if set[row * width + col] { from + 1.0 } else { 0.0 };
                column[row] = from;
            }
            let mut from = f32::INFINITY;
            for row in (0..height).rev() {
                from = if set[row * width + col] { from + 1.0 } else { 0.0 };
                column[row] = column[row].min(from);
            }
        }
        work.advance(0)
    })?;
    let mut out = vec![0.0f32; set.len()];
    out.par_chunks_mut(STRIP * width).enumerate().try_for_each(|(strip, part)| {
        let mut squares = vec![0.0f64; width];
        let mut envelope = Envelope::default();
        for (i, line) in part.chunks_exact_mut(width).enumerate() {
            let row = strip * STRIP + i;
            for (col, square) in squares.iter_mut().enumerate() {
                *square = f64::from(columns[col * height + row].min(FAR)).powi(2);
            }
            envelope.lower(&squares, line);
        }
        work.advance(0)
    })?;
    Ok(out)
}

/// The parabolas that are lowest somewhere, left to right, and where each begins.
#[derive(Default)]
struct Envelope {
    at: Vec<usize>,
    from: Vec<f64>,
}

impl Envelope {
    /// out(x) = √ min over q of (x − q)² + f(q).
    fn lower(&mut self, f: &[f64], out: &mut [f32]) {
        self.at.clear();
        self.from.clear();
        for q in 0..f.len() {
            if f[q] >= f64::from(FAR) {
                continue;
            }
            let mut begins = f64::NEG_INFINITY;
            while let Some(&p) = self.at.last() {
                // Where the parabola over q sinks below that over p.
                begins = ((f[q] + (q * q) as f64) - (f[p] + (p * p) as f64)) / (2.0 * (q - p) as f64);
                if begins > self.from[self.from.len() - 1] {
                    break;
                }
                self.at.pop();
                self.from.pop();
                begins = f64::NEG_INFINITY;
            }
            self.at.push(q);
            self.from.push(begins);
        }
        let mut k = 0;
        for (x, value) in out.iter_mut().enumerate() {
            while k + 1 < self.at.len() && self.from[k + 1] < x as f64 {
                k += 1;
            }
            *value = match self.at.get(k) {
                Some(&q) => ((x.abs_diff(q) as f64).powi(2) + f[q]).sqrt() as f32,
                None => f32::INFINITY,
            };
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn the_transform_is_the_nearest_empty_cell(set in prop::collection::vec(prop::bool::weighted(0.9), 15 * 9)) {
            let got = to_empty(&set, 15, &Work::quiet()).unwrap();
            for (cell, got) in got.iter().enumerate() {
                let apart = |other: usize| {
                    let (dx, dy) = ((cell % 15).abs_diff(other % 15) as f64, (cell / 15).abs_diff(other / 15) as f64);
                    dx.hypot(dy)
                };
                let want = (0..set.len()).filter(|o| !set[*o]).map(apart).fold(f64::INFINITY, f64::min);
                prop_assert!(f64::from(*got) == want || (f64::from(*got) - want).abs() < 1e-5);
            }
        }
    }
}
