//! How strong a texture is against the mean tone.

use crate::ground::{Grid, Stopped, Work};
use crate::numeric::gauss::Kernel;
use crate::numeric::separable::{across_rows, along_row};

use super::gradient::Tone;
use super::tensor::TrendNode;

/// Nodes looked at; an RMS over more would not change.
const NODES: usize = 256;

/// RMS over some nodes of the texture smoothed by `sigma`, within a window of scale `rho` (pixels,
/// [along a row, down a column]), over the mean tone there. `None` without nodes or tone.
pub(super) fn contrast(
    image: &Grid<f32>,
    tone: Tone,
    nodes: &[TrendNode],
    sigma: [f64; 2],
    rho: [f64; 2],
    work: &Work,
) -> Result<Option<f64>, Stopped> {
    let kernels = sigma.map(Kernel::gaussian);
    let (mut variance, mut level, mut seen) = (0.0, 0.0, 0usize);
    for node in nodes.iter().step_by(nodes.len().div_ceil(NODES).max(1)) {
        work.advance(0)?;
        if let Some((mean, var)) = window(image, tone, [node.at.x, node.at.y], &kernels, rho) {
            variance += var;
            level += mean;
            seen += 1;
        }
    }
    if seen == 0 {
        return Ok(None);
    }
    let rms = (variance / seen as f64).sqrt();
    let level = match tone {
        Tone::Linear => (level / seen as f64).abs(),
        Tone::Logarithm { .. } => 1.0,
    };
    Ok((level > 0.0).then(|| rms / level))
}

/// Gaussian-weighted mean and variance of the smoothed tone around `at`, over what is valid.
fn window(
    image: &Grid<f32>,
    tone: Tone,
    at: [f64; 2],
    kernels: &[Kernel; 2],
    rho: [f64; 2],
) -> Option<(f64, f64)> {
    let limit = [image.width(), image.height()];
    let range = |i: usize| {
        let (reach, r) = (2.0 * rho[i], kernels[i].radius());
        let from = (at[i] - reach).floor().max(r as f64) as usize;
        let to = ((at[i] + reach).ceil().max(0.0) as usize).min(limit[i].saturating_sub(r));
        (from < to).then_some(from..to)
    };
    let (cols, rows) = (range(0)?, range(1)?);
    let (reach_c, reach_r) = (kernels[0].radius(), kernels[1].radius());
    let mut lines = Vec::new();
    let mut row_of = vec![0.0f32; cols.len() + 2 * reach_c];
    for row in rows.start - reach_r..rows.end + reach_r {
        for (v, col) in row_of.iter_mut().zip(cols.start - reach_c..) {
            *v = image.get(col, row).map_or(f32::NAN, |v| tone.of(v));
        }
        let mut line = vec![0.0f32; cols.len()];
        along_row(&kernels[0], &row_of, &mut line);
        lines.push(line);
    }
    let lines: Vec<&[f32]> = lines.iter().map(Vec::as_slice).collect();
    let (mut w, mut wv, mut wvv) = (0.0, 0.0, 0.0);
    let mut line = vec![0.0f32; cols.len()];
    // Sums about the first value, so that a high mean tone costs no digits.
    let mut origin = None;
    for (i, row) in rows.enumerate() {
        across_rows(&kernels[1], &lines[i..=i + 2 * reach_r], &mut line);
        let dy = (row as f64 + 0.5 - at[1]) / rho[1];
        for (v, col) in line.iter().zip(cols.clone()).filter(|(v, _)| v.is_finite()) {
            let dx = (col as f64 + 0.5 - at[0]) / rho[0];
            let weight = (-0.5 * (dx * dx + dy * dy)).exp();
            let v = f64::from(*v) - *origin.get_or_insert(f64::from(*v));
            w += weight;
            wv += weight * v;
            wvv += weight * v * v;
        }
    }
    let mean = wv / w;
    (w > 0.0).then(|| (origin.unwrap_or(0.0) + mean, (wvv / w - mean * mean).max(0.0)))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Axis, Point};

    #[test]
    fn a_faint_wave_has_its_own_contrast() {
        let wave = |c: usize| (2.0 * std::f64::consts::PI * c as f64 / 12.0).cos();
        let image = Grid::from_fn(120, 120, |c, _| (1000.0 + 20.0 * wave(c)) as f32);
        let node = TrendNode {
            at: Point::new(60.0, 60.0),
            axis: Axis::from_deg(0.0),
            coherence: 1.0,
            energy: 1.0,
            significant: true,
        };
        let got = contrast(&image, Tone::Linear, &[node], [1.0, 1.0], [12.0, 12.0], &Work::quiet()).unwrap();
        // Amplitude 20 damped by the smoothing, RMS 1/√2 of it, over a tone of 1000.
        let want = 0.02 / 2f64.sqrt() * (-0.5 * (2.0 * std::f64::consts::PI / 12.0).powi(2)).exp();
        crate::assert_close!(got.unwrap(), want, 2e-4, "contrast");
    }
}
