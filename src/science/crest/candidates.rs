//! Places where the tone has a ridge or a step across some direction, to a fraction of a pixel.

use rayon::prelude::*;

use crate::ground::{Grid, Method, Point, Read, Source, Stopped, Symbol, Work};
use crate::numeric::eigen::Symmetric2;

use super::fields::{Fields, HALO, Kernels};
use super::model::Moments;

/// The record of sub-pixel crest points.
pub static METHOD: Method = Method {
    id: "crest.curvilinear",
    name: "Sub-pixel crest points",
    question: "Where exactly does a crest run?",
    formula: "ridge: n = eigenvector of the largest |λ| of the Hessian r_ij = (G_σ ∗ tone)_ij;  t = −(r_x n_x + r_y n_y)/(r_xx n_x² + 2 r_xy n_x n_y + r_yy n_y²);  |t n_x|, |t n_y| ≤ ½.  Bar of half-width w: σ ≥ w/√3, at σ = w/√3 |r″| = (6√3/√(2π)) e^(−3/2) h/w².  Slip face: n = ∇r/|∇r|, the maximum of |∇r| along n by a parabola through three values.  Strength s = √(s_σ (σ₂/σ)^γ s_{σ₂}), σ₂ = 1.5σ, γ = 2 for a ridge and 1 for a step, so that a crest shows at both scales",
    symbols: &[
        Symbol { symbol: "r", meaning: "tone smoothed by a Gaussian of scale σ", unit: "tone" },
        Symbol { symbol: "n", meaning: "unit vector across the crest", unit: "1" },
        Symbol { symbol: "t", meaning: "offset of the crest from the pixel's centre along n", unit: "px" },
        Symbol { symbol: "h", meaning: "height of a bar of tone", unit: "tone" },
        Symbol { symbol: "w", meaning: "half its width", unit: "px" },
    ],
    assumptions: &["one crest within about two scales", "a crest is a ridge of tone, or a step of it"],
    limits: &[
        "a bar whose two sides differ in tone is displaced toward the weaker side",
        "corners sharper than the scale are rounded or interrupted",
        "no crest is sought within two scales of missing ground or of the raster's border",
    ],
    sources: &[Source {
        key: "steger1998",
        authors: "Steger, C.",
        year: 1998,
        title: "An unbiased detector of curvilinear structures",
        published: "IEEE Transactions on Pattern Analysis and Machine Intelligence 20, 113",
        locator: "bar profile; sub-pixel offset",
        read: Read::Memory,
    }],
};

/// How far a pixel's own crest point may lie from its centre in either direction; a little over ½, so
/// that rounding leaves no hole between two pixels.
const WITHIN: f64 = 0.55;

/// Rows a task handles; fixed, so that results do not depend on the number of threads.
const STRIP: usize = 64;

/// A crest point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crossing {
    /// The pixel it belongs to.
    pub col: u32,
    pub row: u32,
    /// Pixels.
    pub at: Point,
    /// Unit vector across: toward the bright side of a step.
    pub normal: [f64; 2],
    /// Size of the response, > 0.
    pub strength: f64,
    /// A bright ridge or a step: true; a dark ridge: false.
    pub bright: bool,
}

/// All crest points of a picture at one scale where `open` is true, row by row, with the moments that tell
/// which model fits.
///
/// # Errors
/// [`Stopped`].
pub fn crossings(
    image: &Grid<f32>,
    open: &[bool],
    slip_face: bool,
    sigma: f64,
    work: &Work,
) -> Result<(Vec<Crossing>, Moments), Stopped> {
    let (width, height) = (image.width(), image.height());
    if width == 0 || height == 0 {
        return Ok((Vec::new(), Moments::default()));
    }
    let kernels = Kernels::new(sigma);
    let strips: Vec<_> = (0..height.div_ceil(STRIP))
        .into_par_iter()
        .map(|strip| {
            let first = strip * STRIP;
            let rows = STRIP.min(height - first);
            let open = &open[first * width..][..rows * width];
            let (mut found, mut moments) = (Vec::new(), Moments::default());
            if !open.contains(&true) {
                return Ok((found, moments));
            }
            let fields = Fields::of(image, &kernels, first, rows, work)?;
            for (row, open) in open.chunks_exact(width).enumerate() {
                for col in (0..width).filter(|col| open[*col]) {
                    let i = (row + HALO) * width + col;
                    moments.add(&fields, i);
                    let point = if slip_face { step(&fields, col, i) } else { ridge(&fields, i) };
                    let Some((offset, normal, strength, bright)) = point else { continue };
                    let (x, y) = (col as f64 + 0.5, (first + row) as f64 + 0.5);
                    found.push(Crossing {
                        col: col as u32,
                        row: (first + row) as u32,
                        at: Point::new(x + offset * normal[0], y + offset * normal[1]),
                        normal,
                        strength,
                        bright,
                    });
                }
                work.advance(0)?;
            }
            Ok((found, moments))
        })
        .collect::<Result<Vec<_>, Stopped>>()?;
    let mut all = Vec::new();
    let mut moments = Moments::default();
    for (found, part) in strips {
        all.extend(found);
        moments.merge(&part);
    }
    Ok((all, moments))
}

/// (σ₂/σ)^γ: what normalises the response of a scale `ratio` times coarser.
pub(super) fn confirming_gain(slip_face: bool, ratio: f64) -> f64 {
    ratio.powi(if slip_face { 1 } else { 2 })
}

/// Strengths lowered to the geometric mean of themselves and of what a coarser scale shows across the same crest,
/// both normalised so that an ideal step (or bar) answers alike at every scale: √(s · (σ₂/σ)^γ s₂), γ = 1 for a step
/// and 2 for a ridge, 0 where the coarser scale shows the other sense.
///
/// # Errors
/// [`Stopped`].
pub(super) fn confirm(
    points: &mut [Crossing],
    image: &Grid<f32>,
    slip_face: bool,
    scales: [f64; 2],
    work: &Work,
) -> Result<(), Stopped> {
    let (width, height) = (image.width(), image.height());
    let kernels = Kernels::new(scales[1]);
    let gain = confirming_gain(slip_face, scales[1] / scales[0]);
    let mut strips: Vec<&mut [Crossing]> = Vec::new();
    let mut left = points;
    for strip in 0..height.div_ceil(STRIP) {
        let count = left.partition_point(|p| (p.row as usize) < (strip + 1) * STRIP);
        let (part, more) = left.split_at_mut(count);
        strips.push(part);
        left = more;
    }
    strips.into_par_iter().enumerate().try_for_each(|(strip, part)| {
        if part.is_empty() {
            return Ok(());
        }
        let first = strip * STRIP;
        let fields = Fields::of(image, &kernels, first, STRIP.min(height - first), work)?;
        for p in part {
            let i = (p.row as usize - first + HALO) * width + p.col as usize;
            let [nx, ny] = p.normal;
            let seen = if slip_face {
                f64::from(fields.x[i]) * nx + f64::from(fields.y[i]) * ny
            } else {
                let h = hessian(&fields, i);
                let curve = h.xx * nx * nx + 2.0 * h.xy * nx * ny + h.yy * ny * ny;
                if p.bright { -curve } else { curve }
            };
            p.strength = (p.strength * (gain * seen).max(0.0)).sqrt();
        }
        Ok(())
    })
}

/// The Hessian at an index of the fields.
pub(super) fn hessian(fields: &Fields, i: usize) -> Symmetric2 {
    Symmetric2 { xx: f64::from(fields.xx[i]), xy: f64::from(fields.xy[i]), yy: f64::from(fields.yy[i]) }
}

/// Its eigenvalue of the larger size, negative on a bright ridge.
pub(super) fn main_curvature(hessian: Symmetric2) -> f64 {
    let (large, small) = hessian.eigenvalues();
    if large.abs() > small.abs() { large } else { small }
}

/// Offset, normal, strength and kind of a ridge of this pixel:
/// t = −(r_x n_x + r_y n_y) / (r_xx n_x² + 2 r_xy n_x n_y + r_yy n_y²).
fn ridge(fields: &Fields, i: usize) -> Option<(f64, [f64; 2], f64, bool)> {
    let hessian = hessian(fields, i);
    let curvature = main_curvature(hessian);
    let (x, y) = hessian.major();
    // The major vector belongs to the larger eigenvalue; the smaller one's is square to it.
    let n = if curvature == hessian.eigenvalues().0 { [x, y] } else { [-y, x] };
    if curvature == 0.0 {
        return None;
    }
    let slope = f64::from(fields.x[i]) * n[0] + f64::from(fields.y[i]) * n[1];
    let offset = -slope / curvature;
    (offset.abs() * n[0].abs().max(n[1].abs()) <= WITHIN).then_some((
        offset,
        n,
        curvature.abs(),
        curvature < 0.0,
    ))
}

/// The same for a step: the largest slope along the gradient.
fn step(fields: &Fields, col: usize, i: usize) -> Option<(f64, [f64; 2], f64, bool)> {
    let size = |j: usize| f64::from(fields.x[j]).hypot(f64::from(fields.y[j]));
    let here = size(i);
    if here == 0.0 || col < 2 || col + 2 >= fields.width {
        return None;
    }
    let n = [f64::from(fields.x[i]) / here, f64::from(fields.y[i]) / here];
    let beside = |side: f64| {
        let (dx, dy) = (side * n[0], side * n[1]);
        let (cx, cy) = (dx.floor(), dy.floor());
        let (u, v) = (dx - cx, dy - cy);
        let j = (i as isize + cy as isize * fields.width as isize + cx as isize) as usize;
        let component = |j: usize| f64::from(fields.x[j]) * n[0] + f64::from(fields.y[j]) * n[1];
        (1.0 - v) * ((1.0 - u) * component(j) + u * component(j + 1))
            + v * ((1.0 - u) * component(j + fields.width) + u * component(j + fields.width + 1))
    };
    let (ahead, behind) = (beside(1.0), beside(-1.0));
    if ahead > here || behind > here {
        return None;
    }
    let bend = ahead - 2.0 * here + behind;
    let offset = if bend < 0.0 { (0.5 * (behind - ahead) / bend).clamp(-0.5, 0.5) } else { 0.0 };
    Some((offset, n, here, true))
}
