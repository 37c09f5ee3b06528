//! Power of the two-dimensional Fourier transform of real windows, zero-padded, with reused buffers.

use std::sync::Arc;

use realfft::{RealFftPlanner, RealToComplex};
use rustfft::num_complex::Complex;
use rustfft::{Fft, FftPlanner};

/// Rows transformed before they are turned into columns.
const BAND: usize = 16;

/// A planned transform of `cols` × `rows` real samples; shared by threads.
#[derive(Clone)]
pub struct PowerPlan {
    cols: usize,
    rows: usize,
    along: Arc<dyn RealToComplex<f32>>,
    across: Arc<dyn Fft<f32>>,
}

/// Buffers of one thread.
pub struct PowerScratch {
    line: Vec<f32>,
    line_out: Vec<Complex<f32>>,
    along: Vec<Complex<f32>>,
    columns: Vec<Complex<f32>>,
    across: Vec<Complex<f32>>,
}

impl PowerPlan {
    /// Plans for a padded size; both sides must be even and at least 2.
    pub fn new(cols: usize, rows: usize) -> Self {
        Self {
            cols,
            rows,
            along: RealFftPlanner::new().plan_fft_forward(cols),
            across: FftPlanner::new().plan_fft_forward(rows),
        }
    }

    pub fn scratch(&self) -> PowerScratch {
        PowerScratch {
            line: self.along.make_input_vec(),
            line_out: vec![Complex::default(); BAND * (self.cols / 2 + 1)],
            along: self.along.make_scratch_vec(),
            columns: vec![Complex::default(); (self.cols / 2 + 1) * self.rows],
            across: vec![Complex::default(); self.across.get_inplace_scratch_len()],
        }
    }

    /// Number of values [`power`](Self::power) gives: (cols/2 + 1)·rows.
    pub fn len(&self) -> usize {
        (self.cols / 2 + 1) * self.rows
    }

    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// |F|² of `window` (rows of `width` samples, zero-padded on the right and below). The value at
    /// column frequency kc = 0 … cols/2 and row frequency kr (negative ones from the end)
    /// stands at `kc·rows + kr`.
    ///
    /// # Panics
    /// When the window or `out` does not fit the plan: a bug in the caller.
    pub fn power(&self, window: &[f32], width: usize, scratch: &mut PowerScratch, out: &mut [f32]) {
        assert!(
            width <= self.cols && window.len().div_ceil(width.max(1)) <= self.rows,
            "window fits the plan"
        );
        assert_eq!(out.len(), self.len(), "power length");
        let PowerScratch { line, line_out, along, columns, across } = scratch;
        columns.fill(Complex::default());
        let length = self.cols / 2 + 1;
        for (band, samples) in window.chunks(width * BAND).enumerate() {
            let rows = samples.len() / width;
            for (samples, out) in samples.chunks_exact(width).zip(line_out.chunks_exact_mut(length)) {
                line[..width].copy_from_slice(samples);
                line[width..].fill(0.0);
                // Lengths come from the plan itself, and the input is real: no error is possible.
                self.along.process_with_scratch(line, out, along).expect("planned lengths");
            }
            // Several rows at once, so that each column takes a run of neighbours.
            for (kc, column) in columns.chunks_exact_mut(self.rows).enumerate() {
                for (i, z) in column[band * BAND..][..rows].iter_mut().enumerate() {
                    *z = line_out[i * length + kc];
                }
            }
        }
        self.across.process_with_scratch(columns, across);
        for (p, z) in out.iter_mut().zip(columns.iter()) {
            *p = z.norm_sqr();
        }
    }
}

/// The largest even number ≤ `n` (at least 2) whose only prime factors are 2, 3 and 5: quick to
/// transform, and so is its double.
pub fn quick_size(n: usize) -> usize {
    let smooth = |mut m: usize| {
        for p in [2, 3, 5] {
            while m.is_multiple_of(p) {
                m /= p;
            }
        }
        m == 1
    };
    (2..=n).rev().find(|m| m.is_multiple_of(2) && smooth(*m)).unwrap_or(2)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn power_agrees_with_the_definition_for_padded_windows() {
        let (width, height, cols, rows) = (5usize, 3usize, 12usize, 10usize);
        let window: Vec<f32> = (0..width * height).map(|i| ((i * 7) % 11) as f32 - 5.0).collect();
        let plan = PowerPlan::new(cols, rows);
        let mut out = vec![0.0; plan.len()];
        let mut scratch = plan.scratch();
        // Twice, so that leftovers of the first run would show.
        for _ in 0..2 {
            plan.power(&window, width, &mut scratch, &mut out);
        }
        for kc in 0..=cols / 2 {
            for kr in 0..rows {
                let (mut re, mut im) = (0.0f64, 0.0f64);
                for r in 0..height {
                    for c in 0..width {
                        let phase = -2.0
                            * std::f64::consts::PI
                            * (kc as f64 * c as f64 / cols as f64 + kr as f64 * r as f64 / rows as f64);
                        re += f64::from(window[r * width + c]) * phase.cos();
                        im += f64::from(window[r * width + c]) * phase.sin();
                    }
                }
                crate::assert_close!(f64::from(out[kc * rows + kr]), re * re + im * im, 1e-2, "({kc}, {kr})");
            }
        }
    }

    #[test]
    fn quick_sizes() {
        assert_eq!([1, 7, 61, 127, 256].map(quick_size), [2, 6, 60, 120, 256]);
    }
}
