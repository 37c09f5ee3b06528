//! A patch's trend held against the light: what light alone would show, and the trend refitted without it.

use crate::ground::Axis;
use crate::science::orientation::look::{
    Weighting, look_bias, near_look, refit, resultant_by_look, undo_contrast,
};

use super::{LightFinding, RasterEntry, RefitFinding, TrendFinding};

/// What the light may have done to a trend; `None` while nobody said where it comes from.
pub fn of_trend(trend: &TrendFinding, entry: &RasterEntry) -> Option<LightFinding> {
    let from = entry.light_from?;
    let axes: Vec<Axis> = trend.nodes.iter().filter(|n| n.significant).map(|n| n.axis).collect();
    let bias = trend.axis.map(|axis| look_bias(axis, trend.resultant_length, from, Weighting::Energy));
    Some(LightFinding {
        from,
        from_bias_deg: bias.map(|b| b.from_bias_deg),
        by_light: [Weighting::Contrast, Weighting::Energy].map(resultant_by_look),
        suspect: bias.is_some_and(|b| b.suspect),
        refit: trend.axis.and_then(|axis| refitted(axis, refit(&axes, |a| undo_contrast(a, from))?)),
        near_light: near_look(&axes, from),
    })
}

/// A refitted mean against the trend as measured; `None` where no axis is left to prefer.
fn refitted(measured: Axis, (axis, resultant_length): (Axis, f64)) -> Option<RefitFinding> {
    (resultant_length > 0.0).then(|| RefitFinding {
        axis,
        resultant_length,
        turn_deg: axis.turn_from(measured),
    })
}
