//! The texture of one band of scales: what is broader is taken out before the tensor, what is finer is averaged
//! away.

use crate::ground::{Grid, Method, Place, Point, Polygon, Read, Source, Stopped, Symbol, Work};
use crate::numeric::separable::smooth_supported;

use super::gradient::Tone;
use super::noise;
use super::scale::{FEWEST_NODES, INTEGRATION_RATIO, MOST_SIDE, ScaleStep, middle};
use super::tensor::{NodeField, TensorSettings, trend_nodes};

/// The record of the band of scales.
pub static METHOD: Method = Method {
    id: "orientation.band",
    name: "Band of scales",
    question: "Which way does the texture of one scale run where broader bedforms carry it?",
    formula: "I₊ = (1 − G_b)² I,  b = 2σ;  then the structure tensor at σ;  |H(k)| = k (1 − e^{−k²b²/2})² e^{−k²σ²/2};  E = σ² ⟨C (g_E² + g_N²)⟩",
    symbols: &[
        Symbol { symbol: "I, I₊", meaning: "tone, and tone without what is broader", unit: "tone" },
        Symbol { symbol: "G_b", meaning: "smoothing by a Gaussian of scale b", unit: "1" },
        Symbol { symbol: "σ", meaning: "gradient scale; a wave of 6σ answers most", unit: "px" },
        Symbol {
            symbol: "H",
            meaning: "response of the gradient to a wave of k radians a pixel",
            unit: "1/px",
        },
        Symbol {
            symbol: "E",
            meaning: "texture of the band, with γ = 1 so that scales compare",
            unit: "tone²",
        },
    ],
    assumptions: &["bedforms of another scale are at least about twice as far apart, or twice as close"],
    limits: &[
        "of waves three times as long 0.03 of the amplitude stays, of waves a third as long 0.07",
        "a crest of uneven sides has overtones along its own normal: in the band they fall in they look like bedforms of the same trend",
        "the reach is four times that of plain gradients: narrow patches lose places at their edge",
        "bands finer than their 2048 pixels in a larger patch are looked for in its middle",
    ],
    sources: &[
        Source {
            key: "lindeberg1998",
            authors: "Lindeberg, T.",
            year: 1998,
            title: "Feature detection with automatic scale selection",
            published: "International Journal of Computer Vision 30, 79",
            locator: "γ-normalised derivatives; the band is ours",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-band",
            authors: "this program",
            year: 2026,
            title: "Gradients without broader bedforms, and their noise",
            published: "closed form, checked numerically",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// b/σ.
const BROAD_RATIO: f64 = 2.0;
/// Share of the broad kernel that must fall on valid ground.
const LEAST_SUPPORT: f32 = 0.95;
/// Half octaves tried.
const HALF_OCTAVES: u32 = 14;

/// Which band.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// σ, pixels of the finer ground direction.
    pub scale_px: f64,
    /// Whether what is broader is taken out.
    pub without_broader: bool,
}

/// Trend nodes of one band, ρ apart. Pixel coordinates are those of `image`.
///
/// # Errors
/// [`Stopped`].
pub fn band_nodes(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    band: Band,
    significance: f64,
    logarithm: bool,
    work: &Work,
) -> Result<NodeField, Stopped> {
    let tone = if logarithm { Tone::logarithm(image) } else { Tone::Linear };
    let pixel = pixel_ratios(image, patch, place);
    let coarse = pixel[0].max(pixel[1]);
    // Averaged pixels of half a scale cost little and change a derivative of Gaussian by less than it drops.
    let factor = ((band.scale_px / (2.0 * coarse)).floor() as usize).max(1);
    let f = factor as f64;
    let mut picture = averaged(image, tone, factor, work)?;
    if band.without_broader {
        let broad = pixel.map(|p| BROAD_RATIO * band.scale_px / p / f);
        picture = without_broader(picture, broad, work)?;
    }
    let settings = TensorSettings {
        gradient_scale_px: band.scale_px / f,
        integration_scale_px: INTEGRATION_RATIO * band.scale_px / f,
        node_step_px: INTEGRATION_RATIO * band.scale_px / f,
        significance,
        logarithm: false,
    };
    let reduced = patch.map(|p| Point::new(p.x / f, p.y / f));
    let mut field = trend_nodes(&picture, &reduced, &place.window(0.0, 0.0, [f, f]), &settings, work)?;
    if band.without_broader {
        field.effective_count /= fewer(BROAD_RATIO);
        field.coherence_floor = noise::coherence_floor(field.effective_count, significance);
    }
    for node in &mut field.nodes {
        node.at = Point::new(node.at.x * f, node.at.y * f);
        node.significant = node.energy > 0.0 && node.coherence > field.coherence_floor;
    }
    field.gradient_scale_px *= f;
    field.integration_scale_px *= f;
    field.node_step_px *= f;
    Ok(field)
}

/// All bands of half an octave that fit the patch, the finest first; fine ones of a large patch in its middle.
///
/// # Errors
/// [`Stopped`].
pub fn band_sweep(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    significance: f64,
    logarithm: bool,
    work: &Work,
) -> Result<Vec<(ScaleStep, NodeField)>, Stopped> {
    let side = image.width().max(image.height());
    let part = (side > MOST_SIDE).then(|| middle(image, patch, place));
    let mut steps = Vec::new();
    for half_octave in 0..HALF_OCTAVES {
        let scale_px = 2f64.powf(0.5 * f64::from(half_octave));
        let band = Band { scale_px, without_broader: true };
        let (image, patch, place) = match &part {
            Some((image, patch, place)) if side as f64 > 0.5 * scale_px * MOST_SIDE as f64 => {
                (image, patch, place)
            }
            _ => (image, patch, place),
        };
        let field = band_nodes(image, patch, place, band, significance, logarithm, work)?;
        if field.nodes.len() < FEWEST_NODES {
            break;
        }
        steps.push((ScaleStep::of(&field), field));
    }
    Ok(steps)
}

/// Column and row step on the ground in units of the finer one.
fn pixel_ratios(image: &Grid<f32>, patch: &Polygon, place: &Place) -> [f64; 2] {
    let raster = Point::new(0.5 * image.width() as f64, 0.5 * image.height() as f64);
    let frame =
        patch.bounds().and_then(|b| place.local_frame(b.centre())).or_else(|| place.local_frame(raster));
    frame.map_or([1.0; 2], |f| {
        let size = f.pixel_size();
        let fine = size[0].min(size[1]);
        size.map(|s| s / fine)
    })
}

/// Tone averaged over `factor` × `factor` pixels, less its mean so that sums keep their digits; a cell is valid
/// where half of its pixels are.
fn averaged(image: &Grid<f32>, tone: Tone, factor: usize, work: &Work) -> Result<Grid<f32>, Stopped> {
    let (mut sum, mut count) = (0.0f64, 0usize);
    for v in image.valid_values() {
        sum += f64::from(tone.of(v));
        count += 1;
    }
    let mean = if count > 0 { sum / count as f64 } else { 0.0 };
    let (width, height) = (image.width() / factor, image.height() / factor);
    let (mut values, mut valid) = (Vec::with_capacity(width * height), Vec::with_capacity(width * height));
    for row in 0..height {
        work.advance(0)?;
        for col in 0..width {
            let (mut sum, mut count) = (0.0f64, 0usize);
            for r in row * factor..(row + 1) * factor {
                for c in col * factor..(col + 1) * factor {
                    if let Some(v) = image.get(c, r) {
                        sum += f64::from(tone.of(v)) - mean;
                        count += 1;
                    }
                }
            }
            let enough = 2 * count >= factor * factor && sum.is_finite();
            values.push(if enough { (sum / count as f64) as f32 } else { 0.0 });
            valid.push(enough);
        }
    }
    let mask = valid.contains(&false).then_some(valid);
    Ok(Grid::from_parts(width, height, values, mask))
}

/// (1 − G_b)² I, b in pixels along a row and down a column; missing where the kernel lacks support.
fn without_broader(picture: Grid<f32>, broad: [f64; 2], work: &Work) -> Result<Grid<f32>, Stopped> {
    let mut rest = picture;
    for _ in 0..2 {
        let (smooth, support) = smooth_supported(&rest, broad, work)?;
        let (width, height) = (rest.width(), rest.height());
        let valid: Vec<bool> = (0..rest.len())
            .map(|i| rest.mask().is_none_or(|mask| mask[i]) && support.values()[i] >= LEAST_SUPPORT)
            .collect();
        let values = rest.values().iter().zip(smooth.values()).zip(&valid);
        let values = values.map(|((v, s), valid)| if *valid { v - s } else { 0.0 }).collect();
        rest = Grid::from_parts(width, height, values, Some(valid));
    }
    Ok(rest)
}

/// How many times fewer independent gradients white noise holds in the band than under plain gradients of the same
/// σ: ∫k⁵|h|⁴dk / (∫k³|h|²dk)², h = H/k, over σ²/2, its value for a Gaussian.
fn fewer(broad_ratio: f64) -> f64 {
    // In units of 1/σ; beyond 8 nothing is left.
    const STEPS: u32 = 4000;
    let dk = 8.0 / f64::from(STEPS);
    let (mut fourth, mut second) = (0.0, 0.0);
    for i in 0..STEPS {
        let k = (f64::from(i) + 0.5) * dk;
        let pass = 1.0 - (-0.5 * (k * broad_ratio).powi(2)).exp();
        let h = pass * pass * (-0.5 * k * k).exp();
        fourth += k.powi(5) * h.powi(4) * dk;
        second += k.powi(3) * h * h * dk;
    }
    2.0 * fourth / (second * second)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn without_a_broad_part_the_number_is_that_of_plain_gradients() {
        crate::assert_close!(fewer(1e6), 1.0, 1e-4, "ratio");
        assert!(fewer(BROAD_RATIO) > 1.0 && fewer(BROAD_RATIO) < 1.5, "{}", fewer(BROAD_RATIO));
    }
}
