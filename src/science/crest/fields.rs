//! Gaussian derivatives of a picture, strip by strip, so that a large patch never holds them all.

use crate::ground::{Grid, Stopped, Work};
use crate::numeric::gauss::Kernel;
use crate::numeric::separable::{across_rows, along_row};

/// Rows beyond a strip on either side that a test of neighbours may look at.
pub(super) const HALO: usize = 2;

/// The three kernels of a scale.
pub(super) struct Kernels {
    smooth: Kernel,
    slope: Kernel,
    curve: Kernel,
}

impl Kernels {
    pub fn new(sigma: f64) -> Self {
        Self {
            smooth: Kernel::gaussian(sigma),
            slope: Kernel::derivative(sigma),
            curve: Kernel::second_derivative(sigma),
        }
    }

    /// Standard deviation of (one component of the gradient, one second derivative) for unit pixel noise.
    pub fn noise_gain(&self) -> (f64, f64) {
        let norm = |k: &Kernel| {
            let tap = |t: f32| f64::from(t).powi(2);
            (tap(k.half[0]) + 2.0 * k.half[1..].iter().map(|t| tap(*t)).sum::<f64>()).sqrt()
        };
        (norm(&self.smooth) * norm(&self.slope), norm(&self.smooth) * norm(&self.curve))
    }
}

/// First and second derivatives on rows `first − HALO …`, per pixel and pixel².
pub(super) struct Fields {
    pub width: usize,
    pub x: Vec<f32>,
    pub y: Vec<f32>,
    pub xx: Vec<f32>,
    pub xy: Vec<f32>,
    pub yy: Vec<f32>,
}

impl Fields {
    /// Those of `rows` rows from `first`; beyond its border the picture goes on as it ends.
    pub fn of(
        image: &Grid<f32>,
        kernels: &Kernels,
        first: usize,
        rows: usize,
        work: &Work,
    ) -> Result<Self, Stopped> {
        let (width, height) = (image.width(), image.height());
        let radius = kernels.smooth.radius();
        let lines = rows + 2 * HALO + 2 * radius;
        let mut along = [0; 3].map(|_| vec![0.0f32; lines * width]);
        let mut padded = vec![0.0f32; width + 2 * radius];
        for i in 0..lines {
            let row = (first + i).saturating_sub(HALO + radius).min(height - 1);
            let source = &image.values()[row * width..][..width];
            padded[..radius].fill(source[0]);
            padded[radius..radius + width].copy_from_slice(source);
            padded[radius + width..].fill(source[width - 1]);
            for (kernel, out) in [&kernels.smooth, &kernels.slope, &kernels.curve].into_iter().zip(&mut along)
            {
                along_row(kernel, &padded, &mut out[i * width..][..width]);
            }
            work.advance(0)?;
        }
        let across = |source: &[f32], kernel: &Kernel| {
            let lines: Vec<&[f32]> = source.chunks_exact(width).collect();
            let mut out = vec![0.0f32; (rows + 2 * HALO) * width];
            for (i, out) in out.chunks_exact_mut(width).enumerate() {
                across_rows(kernel, &lines[i..=i + 2 * radius], out);
            }
            out
        };
        let [smooth, slope, curve] = &along;
        let x = across(slope, &kernels.smooth);
        let y = across(smooth, &kernels.slope);
        work.advance(0)?;
        let xx = across(curve, &kernels.smooth);
        let xy = across(slope, &kernels.slope);
        let yy = across(smooth, &kernels.curve);
        Ok(Self { width, x, y, xx, xy, yy })
    }
}
