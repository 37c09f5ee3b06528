//! At which scale does a texture have a direction? Coherence against the gradient scale.

use crate::ground::{Axis, Grid, Method, Place, Point, Polygon, Read, Source, Stopped, Symbol, Work};

use super::tensor::{NodeField, TensorSettings, trend_nodes};

/// The record of the scale sweep.
pub static METHOD: Method = Method {
    id: "orientation.scale-sweep",
    name: "Scale sweep",
    question: "At which scale does the texture have a direction, and is there more than one such scale?",
    formula: "σ = 1, √2, 2, … px;  ρ = 3σ;  E(σ) = ⟨C²⟩ − 2/(n + 1);  σ* = the least σ with E ≥ 0.85 max E",
    symbols: &[
        Symbol {
            symbol: "σ, ρ",
            meaning: "gradient and integration scale of the structure tensor",
            unit: "px",
        },
        Symbol { symbol: "C", meaning: "coherence of a node", unit: "1" },
        Symbol {
            symbol: "n",
            meaning: "independent gradients of a node: noise alone has ⟨C²⟩ = 2/(n + 1)",
            unit: "1",
        },
        Symbol { symbol: "E", meaning: "coherence beyond noise", unit: "1" },
    ],
    assumptions: &["ρ/σ is kept, so that noise is as coherent at every scale"],
    limits: &[
        "scales so wide that fewer than forty nodes fit the patch are not tried",
        "the middle 2048 pixels of a larger patch are looked at",
    ],
    sources: &[Source {
        key: "lindeberg1998",
        authors: "Lindeberg, T.",
        year: 1998,
        title: "Feature detection with automatic scale selection",
        published: "International Journal of Computer Vision 30, 79",
        locator: "",
        read: Read::Memory,
    }],
};

/// Integration over gradient scale; also what the executor uses at the scale chosen.
pub const INTEGRATION_RATIO: f64 = 3.0;

/// Fewest nodes that say something about a scale.
pub(super) const FEWEST_NODES: usize = 40;
/// Side of the part of a patch that is looked at, pixels.
pub(super) const MOST_SIDE: usize = 2048;
/// Share of the nodes that must be above the noise before a scale counts as the ground's own.
const LEAST_SHARE: f64 = 1.0 / 3.0;
/// How much more coherent another scale must be before the preferred one is given up.
const CLEARLY: f64 = 1.25;

/// One scale of the sweep.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ScaleStep {
    /// σ, pixels of the finer ground direction.
    pub gradient_scale_px: f64,
    /// E = ⟨C²⟩ − 2/(n + 1).
    pub beyond_noise: f64,
    /// Share of nodes above the noise floor.
    pub share: f64,
    /// Mean axis of those nodes.
    pub axis: Option<Axis>,
    /// Their doubled resultant length; 0 without any.
    pub resultant_length: f64,
}

impl ScaleStep {
    /// What a field of nodes says of its scale.
    pub fn of(field: &NodeField) -> Self {
        let n = field.nodes.len() as f64;
        let noise = 2.0 / (field.effective_count + 1.0);
        let (mut cos, mut sin, mut passed) = (0.0, 0.0, 0.0f64);
        for node in field.nodes.iter().filter(|node| node.significant) {
            cos += node.axis.doubled().cos();
            sin += node.axis.doubled().sin();
            passed += 1.0;
        }
        Self {
            gradient_scale_px: field.gradient_scale_px,
            beyond_noise: field.nodes.iter().map(|node| node.coherence.powi(2)).sum::<f64>() / n.max(1.0)
                - noise,
            share: passed / n.max(1.0),
            axis: (passed > 0.0).then(|| Axis::from_doubled(f64::atan2(sin, cos))),
            resultant_length: f64::hypot(cos, sin) / passed.max(1.0),
        }
    }
}

/// Coherence at every scale that fits the patch (pixel coordinates of `image`).
///
/// # Errors
/// [`Stopped`].
pub fn scale_sweep(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    logarithm: bool,
    significance: f64,
    work: &Work,
) -> Result<Vec<ScaleStep>, Stopped> {
    let (image, patch, place) = middle(image, patch, place);
    let mut steps = Vec::new();
    for half_octave in 0..14 {
        let sigma = 2f64.powf(0.5 * f64::from(half_octave));
        let rho = INTEGRATION_RATIO * sigma;
        let settings = TensorSettings {
            gradient_scale_px: sigma,
            integration_scale_px: rho,
            node_step_px: rho,
            significance,
            logarithm,
        };
        let field = trend_nodes(&image, &patch, &place, &settings, work)?;
        if field.nodes.len() < FEWEST_NODES {
            break;
        }
        steps.push(ScaleStep::of(&field));
    }
    Ok(steps)
}

/// The scale to measure at: `preferred` (from a spacing, say) unless another scale is clearly more
/// coherent over a third of the ground. `None` without a preference when no scale is.
pub fn coherent_scale(steps: &[ScaleStep], preferred: Option<f64>) -> Option<f64> {
    let wide = steps.iter().filter(|s| s.share >= LEAST_SHARE);
    let Some(best) = wide.clone().max_by(|a, b| a.beyond_noise.total_cmp(&b.beyond_noise)) else {
        return preferred;
    };
    let distance = |s: &ScaleStep, sigma: f64| (s.gradient_scale_px / sigma).ln().abs();
    if let Some(sigma) = preferred {
        let near = steps.iter().min_by(|a, b| distance(a, sigma).total_cmp(&distance(b, sigma)))?;
        if CLEARLY * near.beyond_noise >= best.beyond_noise {
            return Some(sigma);
        }
    }
    wide.clone().find(|s| s.beyond_noise >= 0.85 * best.beyond_noise).map(|s| s.gradient_scale_px)
}

/// The middle of a wide patch.
pub(super) fn middle(image: &Grid<f32>, patch: &Polygon, place: &Place) -> (Grid<f32>, Polygon, Place) {
    let (width, height) = (image.width().min(MOST_SIDE), image.height().min(MOST_SIDE));
    if (width, height) == (image.width(), image.height()) {
        return (image.clone(), patch.clone(), place.clone());
    }
    let (left, upper) = ((image.width() - width) / 2, (image.height() - height) / 2);
    let mut part = Grid::from_fn(width, height, |col, row| image.at(left + col, upper + row));
    part.mask_where(|col, row| image.is_valid(left + col, upper + row));
    let (dx, dy) = (left as f64, upper as f64);
    (part, patch.map(|p| Point::new(p.x - dx, p.y - dy)), place.window(dx, dy, [1.0, 1.0]))
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::TAU;

    fn sweep(value: impl Fn(f64, f64) -> f64) -> Vec<ScaleStep> {
        let image = Grid::from_fn(240, 240, |col, row| value(col as f64, row as f64) as f32);
        let patch = Polygon::rectangle(240.0, 240.0);
        scale_sweep(&image, &patch, &Place::pixels(0.0), false, 0.01, &Work::quiet()).unwrap()
    }

    /// Noise without a generator: a hash of the position in [−1, 1].
    fn grain(x: f64, y: f64) -> f64 {
        let hash =
            (x as u64).wrapping_mul(0x9E37_79B9_7F4A_7C15) ^ (y as u64).wrapping_mul(0xC2B2_AE3D_27D4_EB4F);
        let hash = (hash ^ (hash >> 29)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        (hash >> 11) as f64 / (1u64 << 52) as f64 - 1.0
    }

    #[test]
    fn broad_dunes_under_grain_are_seen_at_their_own_scale() {
        let steps = sweep(|x, y| (TAU * (0.6 * x + 0.8 * y) / 40.0).sin() + 2.0 * grain(x, y));
        let sigma = coherent_scale(&steps, None).unwrap();
        assert!((3.0..16.0).contains(&sigma), "{sigma}: {steps:?}");
        // A spacing of grain size is given up, a fitting one is kept.
        assert_eq!(coherent_scale(&steps, Some(1.0)), Some(sigma));
        assert_eq!(coherent_scale(&steps, Some(6.5)), Some(6.5));
    }

    #[test]
    fn grain_alone_has_no_scale() {
        assert_eq!(coherent_scale(&sweep(grain), None), None);
    }
}
