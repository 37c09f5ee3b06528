//! Trend from the structure tensor, node by node, in true azimuth.

use rayon::prelude::*;

use crate::ground::{
    Axis, Grid, LocalFrame, Method, Place, Point, Polygon, Read, Source, Stopped, Symbol, Work,
};
use crate::numeric::eigen::Symmetric2;

use super::gradient::{Blocks, Tone, blocks};
use super::{contrast, noise};

/// The record of the structure tensor.
pub static METHOD: Method = Method {
    id: "orientation.structure-tensor",
    name: "Structure tensor",
    question: "Which way does the texture run at each place?",
    formula: "J = G_ρ ∗ [g_E², g_E g_N; g_E g_N, g_N²];  ν = ½ atan2(2 J_EN, J_NN − J_EE);  trend = ν + 90°;  C = √((J_NN − J_EE)² + 4 J_EN²) / (J_NN + J_EE)",
    symbols: &[
        Symbol {
            symbol: "g_E, g_N",
            meaning: "gradient of tone toward east and north, by Gaussian derivatives of scale σ",
            unit: "tone/m",
        },
        Symbol { symbol: "ρ", meaning: "integration scale", unit: "m" },
        Symbol { symbol: "ν", meaning: "azimuth of the crest normal", unit: "deg" },
        Symbol { symbol: "C", meaning: "coherence, 0 for no direction, 1 for one direction only", unit: "1" },
    ],
    assumptions: &[
        "one dominant trend within the integration scale",
        "noise is isotropic on the ground after smoothing by σ",
    ],
    limits: &[
        "σ is at least one pixel in each pixel direction; waves shorter than three pixels are lost",
        "where pixels are sheared on the ground, smoothing follows the pixel axes: trends stay exact, but noise leans toward the longer diagonal",
        "a brightness ridge shows best across the illumination: see the look bias",
    ],
    sources: &[
        Source {
            key: "bigun1987",
            authors: "Bigün, J.; Granlund, G. H.",
            year: 1987,
            title: "Optimal orientation detection of linear symmetry",
            published: "Proc. 1st International Conference on Computer Vision, London, 433",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "forstner1987",
            authors: "Förstner, W.; Gülch, E.",
            year: 1987,
            title: "A fast operator for detection and precise location of distinct points, corners and centres of circular features",
            published: "Proc. ISPRS Intercommission Conference, Interlaken, 281",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Share of a node's integration weight that must fall on gradients that exist inside the patch. The
/// mean over what exists is unbiased at any share; a tenth missing keeps the node's stated
/// position true to a fifth of ρ.
const LEAST_SHARE: f64 = 0.9;

/// How the tensor is taken. Lengths in pixels of the finer ground direction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TensorSettings {
    /// σ; raised where the coarser pixel direction would get less than one pixel.
    pub gradient_scale_px: f64,
    /// ρ; at least 2σ is used.
    pub integration_scale_px: f64,
    pub node_step_px: f64,
    /// Probability with which noise alone may pass a node's coherence.
    pub significance: f64,
    /// Whether to take the logarithm first (speckled radar).
    pub logarithm: bool,
}

/// The trend at one place.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendNode {
    /// Pixel coordinates of the grid given.
    pub at: Point,
    pub axis: Axis,
    /// In [0, 1].
    pub coherence: f64,
    /// Mean squared ground gradient of tone.
    pub energy: f64,
    /// Passed the noise floor.
    pub significant: bool,
}

/// All nodes of a patch and what they rest on.
#[derive(Clone, Debug, PartialEq)]
pub struct NodeField {
    pub nodes: Vec<TrendNode>,
    /// Scales as used, pixels of the finer ground direction.
    pub gradient_scale_px: f64,
    pub integration_scale_px: f64,
    pub node_step_px: f64,
    /// ρ in ground units: noise at two nodes a distance h apart correlates as exp(−h²/4ρ²).
    pub integration_scale_ground: f64,
    /// Independent gradients a node rests on, and the coherence noise reaches with the stated probability.
    pub effective_count: f64,
    pub coherence_floor: f64,
    /// Blur of the pixel noise found along rows and columns, pixels.
    pub noise_blur_px: [f64; 2],
    /// RMS of the smoothed texture within a node's window over the mean tone (for a logarithm, RMS
    /// itself, which is the same thing); `None` without nodes.
    pub contrast: Option<f64>,
    /// By how much the pixel axes are off square on the ground, degrees.
    pub shear_deg: f64,
}

/// Evaluates the tensor on a grid of nodes inside the patch, away from missing pixels.
///
/// `patch` is in pixel coordinates of `image`, and `place` is the place of `image`. A patch off the
/// raster or without a local frame at its centre gives no nodes.
///
/// # Errors
/// [`Stopped`].
pub fn trend_nodes(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    settings: &TensorSettings,
    work: &Work,
) -> Result<NodeField, Stopped> {
    let scales = Scales::new(settings, middle_frame(image, patch, place));
    let tone = if settings.logarithm { Tone::logarithm(image) } else { Tone::Linear };
    work.phase("gradients", image.height() as u64);
    let blur = noise::blur(image, patch, tone, work)?;
    let blocks = blocks(image, patch, tone, scales.sigma, scales.block, work)?;
    let effective_count = scales.effective_count(blur);
    let coherence_floor = noise::coherence_floor(effective_count, settings.significance);
    let columns = Station::grid(image.width(), scales.step[0], scales.rho[0], scales.block[0], blocks.cols);
    let rows = Station::grid(image.height(), scales.step[1], scales.rho[1], scales.block[1], blocks.rows);
    work.phase("trends", rows.len() as u64);
    let nodes = integrate(&blocks, &columns, &rows, work, |at, j| {
        if !patch.contains(at) {
            return None;
        }
        let j = to_ground(j, place.local_frame(at)?);
        let energy = j.trace();
        let coherence = if energy > 0.0 { (j.gap() / energy).min(1.0) } else { 0.0 };
        // x is east, y north: ν = ½ atan2(2 J_EN, J_NN − J_EE), and the trend lies across it.
        let normal = Axis::from_doubled((2.0 * j.xy).atan2(j.yy - j.xx));
        let significant = energy > 0.0 && coherence > coherence_floor;
        Some(TrendNode { at, axis: normal.perpendicular(), coherence, energy, significant })
    })?;
    let contrast = contrast::contrast(image, tone, &nodes, scales.sigma, scales.rho, work)?;
    Ok(NodeField {
        nodes,
        gradient_scale_px: scales.sigma_fine,
        integration_scale_px: scales.rho_fine,
        node_step_px: scales.step_fine,
        integration_scale_ground: scales.rho_fine * scales.fine,
        effective_count,
        coherence_floor,
        noise_blur_px: blur,
        contrast,
        shear_deg: scales.shear_deg,
    })
}

/// The local frame at the middle of the patch, or of the raster where the patch's middle has none.
fn middle_frame(image: &Grid<f32>, patch: &Polygon, place: &Place) -> LocalFrame {
    let raster = Point::new(0.5 * image.width() as f64, 0.5 * image.height() as f64);
    patch
        .bounds()
        .and_then(|b| place.local_frame(b.centre()))
        .or_else(|| place.local_frame(raster))
        // Without any frame there will be no nodes either; square pixels keep the arithmetic sane.
        .unwrap_or(LocalFrame {
            east_per_col: 1.0,
            east_per_row: 0.0,
            north_per_col: 0.0,
            north_per_row: -1.0,
        })
}

/// All lengths in the units each step needs: [along a row, down a column] in pixels.
struct Scales {
    fine: f64,
    sigma_fine: f64,
    rho_fine: f64,
    step_fine: f64,
    sigma: [f64; 2],
    rho: [f64; 2],
    step: [f64; 2],
    block: [usize; 2],
    pixel: [f64; 2],
    shear_deg: f64,
}

impl Scales {
    fn new(settings: &TensorSettings, frame: LocalFrame) -> Self {
        let size = frame.pixel_size();
        let fine = size[0].min(size[1]);
        let pixel = size.map(|s| s / fine);
        let coarse = pixel[0].max(pixel[1]);
        let sigma_fine = settings.gradient_scale_px.max(coarse);
        let rho_fine = settings.integration_scale_px.max(2.0 * sigma_fine);
        let step_fine = settings.node_step_px.max(1.0);
        let rho = pixel.map(|p| rho_fine / p);
        let sine = (frame.pixel_area() / (size[0] * size[1])).clamp(-1.0, 1.0);
        Self {
            fine,
            sigma_fine,
            rho_fine,
            step_fine,
            sigma: pixel.map(|p| sigma_fine / p),
            rho,
            step: pixel.map(|p| (step_fine / p).max(1.0)),
            // Blocks two fifths of ρ wide leave a Gaussian that differs from the ideal by less than a percent.
            block: rho.map(|r| ((0.4 * r).floor() as usize).max(1)),
            pixel,
            shear_deg: 90.0 - sine.asin().to_degrees(),
        }
    }

    /// n of the noise floor; blurs of the two directions are joined by their geometric mean.
    fn effective_count(&self, blur: [f64; 2]) -> f64 {
        let total = |i: usize| self.sigma_fine.powi(2) + (blur[i] * self.pixel[i]).powi(2);
        noise::effective_count((total(0) * total(1)).powf(0.25), self.rho_fine)
    }
}

/// A node's position along one axis and its weights over the blocks there.
struct Station {
    at: f64,
    first: usize,
    weights: Vec<f64>,
}

impl Station {
    /// Positions every `step` pixels over `length` pixels, centred; weights of a Gaussian `rho` pixels wide,
    /// the blocks' own width taken off, cut at 4ρ and summing to 1 over an endless row of blocks.
    fn grid(length: usize, step: f64, rho: f64, block: usize, blocks: usize) -> Vec<Self> {
        let width = block as f64;
        let variance = rho * rho - (width * width - 1.0) / 12.0;
        let count = ((length as f64 / step).floor() as usize).max(1);
        let start = 0.5 * (length as f64 - (count - 1) as f64 * step);
        (0..count)
            .map(|i| {
                let at = start + i as f64 * step;
                let (low, high) =
                    (((at - 4.0 * rho) / width).floor() as i64, ((at + 4.0 * rho) / width).ceil() as i64);
                let weight = |b: i64| (-0.5 * ((b as f64 + 0.5) * width - at).powi(2) / variance).exp();
                let total: f64 = (low..high).map(weight).sum();
                let (from, to) = (low.clamp(0, blocks as i64), high.clamp(0, blocks as i64));
                Self { at, first: from as usize, weights: (from..to).map(|b| weight(b) / total).collect() }
            })
            .collect()
    }
}

/// Smooths the block sums at the stations and hands each node with enough support to `node`:
/// its place and the mean pixel tensor (x along a row, y down a column).
fn integrate<T: Send>(
    blocks: &Blocks,
    columns: &[Station],
    rows: &[Station],
    work: &Work,
    node: impl Fn(Point, Symmetric2) -> Option<T> + Sync,
) -> Result<Vec<T>, Stopped> {
    let add = |sum: &mut [f64; 4], weight: f64, term: [f64; 4]| {
        sum.iter_mut().zip(term).for_each(|(s, t)| *s += weight * t);
    };
    let mut across = vec![[0.0f64; 4]; blocks.rows * columns.len()];
    across.par_chunks_mut(columns.len()).enumerate().try_for_each(|(row, line)| {
        let blocks = &blocks.sums[row * blocks.cols..][..blocks.cols];
        for (sum, station) in line.iter_mut().zip(columns) {
            for (weight, block) in station.weights.iter().zip(&blocks[station.first..]) {
                add(sum, *weight, block.map(f64::from));
            }
        }
        work.advance(0)
    })?;
    let pixels = (blocks.size[0] * blocks.size[1]) as f64;
    let lines: Result<Vec<Vec<T>>, Stopped> = rows
        .par_iter()
        .map(|row| {
            let mut line = Vec::new();
            for (i, column) in columns.iter().enumerate() {
                let mut sum = [0.0f64; 4];
                for (k, weight) in row.weights.iter().enumerate() {
                    add(&mut sum, *weight, across[(row.first + k) * columns.len() + i]);
                }
                let [xx, xy, yy, count] = sum;
                if count < LEAST_SHARE * pixels {
                    continue;
                }
                let j = Symmetric2 { xx: xx / count, xy: xy / count, yy: yy / count };
                line.extend(node(Point::new(column.at, row.at), j));
                if i % 64 == 0 {
                    work.advance(0)?;
                }
            }
            work.advance(1)?;
            Ok(line)
        })
        .collect();
    Ok(lines?.into_iter().flatten().collect())
}

/// M⁻ᵀ J M⁻¹: the tensor of ground gradients (x east, y north) from that of pixel gradients.
fn to_ground(j: Symmetric2, frame: LocalFrame) -> Symmetric2 {
    let ((ec, nc), (er, nr)) = (frame.gradient(1.0, 0.0), frame.gradient(0.0, 1.0));
    j.congruent([[ec, er], [nc, nr]])
}
