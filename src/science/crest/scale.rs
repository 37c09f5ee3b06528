//! The scale of the derivatives, from the spacing of the crests or by a sweep that finds both together.

use crate::ground::{Stopped, Work};

use super::model::CrestModel;
use super::tone::Ground;
use super::{CrestSettings, lines};

/// Widest scale, pixels: wider patches are read at a coarser resolution.
pub(super) const MOST_PX: f64 = 64.0;

/// Spacing over scale that suits a model: a ridge fills half the spacing, w = λ/4 and σ = w/√3; a slip face
/// is narrow against it, and a finer scale places it better.
fn spacings(model: CrestModel) -> f64 {
    if model == CrestModel::SlipFace { 20.0 } else { 4.0 * 3f64.sqrt() }
}

/// The scale to trace at: the spacing's, or the one of a sweep in half octaves whose own crests stand at a
/// spacing (area over length) nearest to what suits it. The finest scale where nothing is traced.
pub(super) fn choose(ground: &Ground, settings: &CrestSettings, work: &Work) -> Result<f64, Stopped> {
    if let Some(spacing) = settings.spacing_px.filter(|s| s.is_finite() && *s > 0.0) {
        let model = match settings.model {
            Some(model) => model,
            None => lines::best_model(ground, (spacing / 12.0).clamp(1.0, MOST_PX), work)?,
        };
        return Ok((spacing / spacings(model)).clamp(1.0, MOST_PX));
    }
    let widest = MOST_PX.min(ground.tone.width().min(ground.tone.height()) as f64 / 16.0);
    let mut best: Option<(f64, f64)> = None;
    for step in 0..12 {
        let sigma = 1.2 * 2f64.powf(0.5 * f64::from(step));
        if sigma > widest && step > 0 {
            break;
        }
        let trace = lines::trace(ground, settings, sigma, work)?;
        let length = trace.length();
        if length < 4.0 * settings.least_length_scales * sigma {
            continue;
        }
        let spacing = trace.cells as f64 / length;
        let apart = (spacing / sigma / spacings(trace.model)).ln();
        if best.is_none_or(|(least, _)| apart.abs() < least) {
            best = Some((apart.abs(), sigma));
        }
        // Coarser scales find fewer crests, but not in proportion: the ratio only falls.
        if apart < 0.0 {
            break;
        }
    }
    Ok(best.map_or(1.2, |(_, sigma)| sigma))
}
