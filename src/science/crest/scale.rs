//! The scale of the derivatives, from the spacing of the crests or by a sweep that finds both together.

use crate::ground::{Stopped, Work};

use super::CrestSettings;
use super::lines::{self, Trace};
use super::model::CrestModel;
use super::tone::Ground;

/// Widest scale, pixels: wider patches are read at a coarser resolution.
pub(super) const MOST_PX: f64 = 64.0;

/// Scale the sweep begins with, pixels.
const FINEST: f64 = 1.2;

/// Spacing over scale that suits a model: a ridge fills half the spacing, w = λ/4 and σ = w/√3; a slip face
/// is narrow against it, and a finer scale places it better.
fn spacings(model: CrestModel) -> f64 {
    if model == CrestModel::SlipFace { 20.0 } else { 4.0 * 3f64.sqrt() }
}

/// Scale of the derivatives that suits a spacing, both in pixels, from 1 px to the widest.
pub fn suited_scale(model: CrestModel, spacing_px: f64) -> f64 {
    (spacing_px / spacings(model)).clamp(1.0, MOST_PX)
}

/// Strong responses stand so many noise floors high at a scale that can be relied on: lines are then followed
/// well above the noise.
const RELIABLE: f64 = 2.4;

/// Coarsest scale as a share of the spacing: neighbours run into each other beyond.
const COARSEST: f64 = 1.0 / 4.5;

/// The trace at the scale of the spacing or, without one, at the scale of a sweep in half octaves whose own
/// crests stand at a spacing (area over length) nearest to what suits it; at the finest scale where nothing
/// is traced. Under strong noise the next scales at which crests stand clear of it.
pub(super) fn choose(ground: &Ground<'_>, settings: &CrestSettings, work: &Work) -> Result<Trace, Stopped> {
    let (mut trace, spacing) = match settings.spacing_px.filter(|s| s.is_finite() && *s > 0.0) {
        Some(spacing) => {
            let (best, sense) = lines::best_model(ground, (spacing / 12.0).clamp(1.0, MOST_PX), work)?;
            let model = settings.model.unwrap_or(best);
            let settings = CrestSettings { model: Some(model), ..settings.clone() };
            let sigma = suited_scale(model, spacing);
            (lines::trace(ground, &settings, sigma, sense, work)?, spacing)
        }
        None => {
            let trace = sweep(ground, settings, work)?;
            let spacing = trace.cells as f64 / trace.length().max(1e-9);
            (trace, spacing)
        }
    };
    let settings = CrestSettings { model: Some(trace.model), ..settings.clone() };
    while trace.thresholds.strong > 0.0 && trace.thresholds.strong < RELIABLE * trace.thresholds.floor {
        let sigma = trace.sigma * 2f64.sqrt();
        if sigma > COARSEST * spacing || sigma > MOST_PX {
            break;
        }
        trace = lines::trace(ground, &settings, sigma, trace.sense, work)?;
    }
    Ok(trace)
}

fn sweep(ground: &Ground<'_>, settings: &CrestSettings, work: &Work) -> Result<Trace, Stopped> {
    let widest = MOST_PX.min(ground.tone.width().min(ground.tone.height()) as f64 / 16.0);
    let mut best: Option<(f64, Trace)> = None;
    let mut finest = None;
    for step in 0..12 {
        let sigma = FINEST * 2f64.powf(0.5 * f64::from(step));
        if sigma > widest && step > 0 {
            break;
        }
        let trace = lines::trace(ground, settings, sigma, None, work)?;
        let length = trace.length();
        if length < 4.0 * settings.least_length_scales * sigma {
            finest.get_or_insert(trace);
            continue;
        }
        let spacing = trace.cells as f64 / length;
        let apart = (spacing / sigma / spacings(trace.model)).ln();
        if best.as_ref().is_none_or(|(least, _)| apart.abs() < *least) {
            best = Some((apart.abs(), trace));
        }
        // Coarser scales find fewer crests, but not in proportion: the ratio only falls.
        if apart < 0.0 {
            break;
        }
    }
    match best.map(|(_, trace)| trace).or(finest) {
        Some(trace) => Ok(trace),
        None => lines::trace(ground, settings, FINEST, None, work),
    }
}
