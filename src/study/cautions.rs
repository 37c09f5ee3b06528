//! The weaknesses of a patch's result that only show when its parts are held together.

use crate::ground::{Axis, Caution};
use crate::science::orientation::NodeField;
use crate::science::orientation::look::{NEAR_DEG, Weighting, look_bias};

use super::window::PatchPixels;
use super::{RasterEntry, SpectrumFinding, TrendFinding};

/// Texture fainter than this share of the tone may be swell, sensor or processing rather than relief.
const FAINT_CONTRAST: f64 = 0.03;
/// R̄ over all nodes below which a field counts as weakly aligned: light from one side alone makes a
/// field without preference seem as aligned as ½ (B7).
pub const WEAK_ALIGNMENT: f64 = 0.5;

/// Cautions of trend, spectrum and pixels together.
pub fn of_patch(
    trend: &TrendFinding,
    spectrum: &SpectrumFinding,
    field: &NodeField,
    pixels: &PatchPixels,
    entry: &RasterEntry,
) -> Vec<Caution> {
    let mut found = Vec::new();
    let mut say = |code, text: String| found.push(Caution::new(code, text));
    if pixels.factor > 1 {
        say(
            "reduced",
            format!("Measured on pixels averaged {0} × {0}, because the patch is large.", pixels.factor),
        );
    }
    if pixels.valid_fraction < 0.9 {
        say(
            "gaps",
            format!(
                "Only {:.0} % of the pixels inside the outline are valid.",
                100.0 * pixels.valid_fraction
            ),
        );
    }
    // Said too where the axes are uneven but no interval can be given.
    if trend.rayleigh_p.is_some_and(|p| p <= 0.05) && trend.resultant_length_all < WEAK_ALIGNMENT {
        say(
            "weak-alignment",
            format!(
                "Weak alignment (resultant length {:.2} over all nodes): light from one side can make ground without preference seem as aligned as 0.5.",
                trend.resultant_length_all
            ),
        );
    }
    if let Some(axis) = trend.axis {
        if trend.modes.len() > 1 && apart(trend) > 25.0 {
            say(
                "several-trends",
                format!(
                    "{} trends share the patch: the mean trend may follow none of them.",
                    trend.modes.len()
                ),
            );
        }
        if let Some(text) = disagreement(axis, trend, spectrum) {
            say("tensor-spectrum", text);
        }
        if let Some(light) = entry.light_from {
            let off = look_bias(axis, trend.resultant_length, light, Weighting::Energy).from_bias_deg;
            if off <= NEAR_DEG {
                say(
                    "look",
                    format!(
                        "The trend lies {off:.0}° from the axis across the look or light ({:.0}°): even a field without preference would seem to trend that way.",
                        light.axis().perpendicular().deg()
                    ),
                );
            }
        }
    }
    let share = trend.n as f64 / trend.n_all.max(1) as f64;
    if trend.n_all > 0 && share < 0.25 {
        say(
            "few-nodes",
            format!(
                "{} of {} nodes pass the noise floor: most of the patch has no texture to read.",
                trend.n, trend.n_all
            ),
        );
    }
    if let Some(contrast) =
        field.contrast.filter(|c| *c < FAINT_CONTRAST && (trend.defined || spectrum.defined))
    {
        say(
            "faint-texture",
            format!(
                "The texture is faint, {:.1} % of the tone: swell, sensor or processing can look like this, so the orientation may be no bedform's.",
                100.0 * contrast
            ),
        );
    }
    if field.shear_deg > 1.0 {
        say(
            "sheared",
            format!(
                "The pixel grid is {:.1}° off square: smoothing is not isotropic on the ground.",
                field.shear_deg
            ),
        );
    }
    found
}

/// Greatest separation between two modes that each hold a tenth of the weight.
fn apart(trend: &TrendFinding) -> f64 {
    let heavy: Vec<_> = trend.modes.iter().filter(|m| m.weight >= 0.1).collect();
    heavy.iter().flat_map(|a| heavy.iter().map(|b| a.axis.separation(b.axis))).fold(0.0, f64::max)
}

/// Tensor and spectrum look at the same ground in two ways; beyond both intervals one of them errs.
fn disagreement(axis: Axis, trend: &TrendFinding, spectrum: &SpectrumFinding) -> Option<String> {
    let other = spectrum.axis.filter(|_| spectrum.defined)?;
    let off = axis.separation(other);
    let allowed = trend.ci95_half_deg?.hypot(spectrum.axis_ci95_half_deg.unwrap_or(0.0)).max(2.0);
    (off > allowed).then(|| {
        format!(
            "Tensor ({:.0}°) and spectrum ({:.0}°) differ by {off:.0}°, more than their intervals allow ({allowed:.0}°): the patch may hold several kinds of texture.",
            axis.deg(),
            other.deg()
        )
    })
}
