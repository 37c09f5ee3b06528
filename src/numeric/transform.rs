//! The two-dimensional Fourier transform of a small field and back, for filters that are stated by frequency.

use rustfft::FftPlanner;
use rustfft::num_complex::Complex64;

use crate::ground::{Stopped, Work};

/// Values transformed between two looks at whether to stop.
const PIECE: usize = 1 << 17;

/// A field and, after [`forward`](Self::forward), its transform: rows of `cols` values.
#[derive(Clone, Debug)]
pub struct Transform {
    cols: usize,
    rows: usize,
    values: Vec<Complex64>,
}

impl Transform {
    /// The transform of `field` (rows of `width` values), zero-padded on the right and below to `cols` × `rows`.
    ///
    /// # Errors
    /// [`Stopped`].
    ///
    /// # Panics
    /// When the field does not fit: a bug in the caller.
    pub fn forward(
        field: &[f64],
        width: usize,
        cols: usize,
        rows: usize,
        work: &Work,
    ) -> Result<Self, Stopped> {
        assert!(width <= cols && field.len() <= width * rows, "field fits the transform");
        let mut values = vec![Complex64::default(); cols * rows];
        for (line, out) in field.chunks_exact(width.max(1)).zip(values.chunks_exact_mut(cols.max(1))) {
            out.iter_mut().zip(line).for_each(|(z, v)| z.re = *v);
        }
        let mut transform = Self { cols, rows, values };
        transform.run(true, work)?;
        Ok(transform)
    }

    /// Columns and rows of the transform.
    pub fn size(&self) -> [usize; 2] {
        [self.cols, self.rows]
    }

    /// Frequency of the value at `index`, cycles per pixel along a row and down a column, in (−½, ½].
    pub fn frequency(&self, index: usize) -> [f64; 2] {
        let signed = |k: usize, n: usize| {
            let k = if 2 * k > n { k as f64 - n as f64 } else { k as f64 };
            k / n as f64
        };
        [signed(index % self.cols, self.cols), signed(index / self.cols, self.rows)]
    }

    /// |F|² by index: row frequency · cols + column frequency, negative ones from the end.
    pub fn powers(&self) -> Vec<f64> {
        self.values.iter().map(|z| z.norm_sqr()).collect()
    }

    /// Multiplies the amplitude at every index. The gains of k and −k must be equal for the field to stay real.
    pub fn scale(&mut self, gains: &[f64]) {
        self.values.iter_mut().zip(gains).for_each(|(z, gain)| *z *= *gain);
    }

    /// The field of the transform as it stands, rows of `cols` values.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn back(mut self, work: &Work) -> Result<Vec<f64>, Stopped> {
        self.run(false, work)?;
        let scale = 1.0 / (self.cols * self.rows).max(1) as f64;
        Ok(self.values.iter().map(|z| scale * z.re).collect())
    }

    fn run(&mut self, forward: bool, work: &Work) -> Result<(), Stopped> {
        let mut planner = FftPlanner::new();
        let mut lines = |values: &mut [Complex64], n: usize| {
            let plan = if forward { planner.plan_fft_forward(n) } else { planner.plan_fft_inverse(n) };
            for piece in values.chunks_mut((PIECE / n).max(1) * n) {
                plan.process(piece);
                work.advance(0)?;
            }
            Ok::<(), Stopped>(())
        };
        if self.values.is_empty() {
            return Ok(());
        }
        // All rows, then all columns turned into rows.
        lines(&mut self.values, self.cols)?;
        let mut turned = turn(&self.values, self.cols, self.rows);
        lines(&mut turned, self.rows)?;
        self.values = turn(&turned, self.rows, self.cols);
        Ok(())
    }
}

/// Rows of `cols` values as columns.
fn turn(values: &[Complex64], cols: usize, rows: usize) -> Vec<Complex64> {
    let mut turned = Vec::with_capacity(values.len());
    for col in 0..cols {
        turned.extend((0..rows).map(|row| values[row * cols + col]));
    }
    turned
}

/// The smallest even number ≥ `n` whose only prime factors are 2, 3 and 5.
pub fn quick_size_above(n: usize) -> usize {
    (n.max(2)..).find(|m| super::fft::quick_size(*m) == *m).unwrap_or(n)
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::TAU;

    #[test]
    fn forth_and_back_is_the_field_and_a_wave_is_one_pair_of_bins() {
        let (cols, rows) = (12usize, 10usize);
        let wave = |i: usize| {
            let (c, r) = ((i % cols) as f64, (i / cols) as f64);
            (TAU * (2.0 * c / cols as f64 - 3.0 * r / rows as f64)).cos()
        };
        let field: Vec<f64> = (0..cols * rows).map(wave).collect();
        let transform = Transform::forward(&field, cols, cols, rows, &Work::quiet()).unwrap();
        let powers = transform.powers();
        let high: Vec<usize> = (0..cols * rows).filter(|i| powers[*i] > 1e-9).collect();
        let found: Vec<_> = high.iter().map(|i| transform.frequency(*i)).collect();
        assert_eq!(found.len(), 2, "{found:?}");
        assert!(found.contains(&[2.0 / 12.0, -0.3]) && found.contains(&[-2.0 / 12.0, 0.3]), "{found:?}");
        for (got, want) in transform.back(&Work::quiet()).unwrap().iter().zip(&field) {
            crate::assert_close!(*got, *want, 1e-12, "value");
        }
    }

    #[test]
    fn padding_is_zero_and_sizes_are_quick() {
        let work = Work::quiet();
        let padded = Transform::forward(&[1.0, 2.0, 3.0, 4.0], 2, 6, 4, &work).unwrap().back(&work).unwrap();
        crate::assert_close!(padded.iter().sum::<f64>(), 10.0, 1e-12, "sum");
        crate::assert_close!(padded[6], 3.0, 1e-12, "second row");
        assert_eq!([1, 7, 61, 257].map(quick_size_above), [2, 8, 64, 270]);
    }
}
