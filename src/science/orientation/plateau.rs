//! Scales over which the trend stands still.

use crate::ground::{Axis, Method, Read, Source, Symbol};

use super::scale::ScaleStep;

/// The record of plateaus.
pub static METHOD: Method = Method {
    id: "orientation.plateau",
    name: "Plateaus of the scale sweep",
    question: "Over which scales does the trend stand still, and is there more than one such stretch?",
    formula: "scales i … j with share ≥ ⅓, E > 0 and |Tₖ − T| ≤ 10° for each k, T = ½ arg Σ Eₖ R̄ₖ e^{2iTₖ}, j − i ≥ 1;  scale of the plateau = that of max E R̄",
    symbols: &[
        Symbol {
            symbol: "Tₖ, R̄ₖ",
            meaning: "mean trend at scale k and its doubled resultant length",
            unit: "deg, 1",
        },
        Symbol { symbol: "E", meaning: "coherence beyond noise", unit: "1" },
        Symbol { symbol: "T", meaning: "trend of the plateau", unit: "deg" },
    ],
    assumptions: &["a bedform keeps its trend over the scales that show it"],
    limits: &[
        "one population of widely spread trends may drift by more than 10° over its scales and fall into two plateaus: populations are judged by themselves",
    ],
    sources: &[Source {
        key: "lindeberg1998",
        authors: "Lindeberg, T.",
        year: 1998,
        title: "Feature detection with automatic scale selection",
        published: "International Journal of Computer Vision 30, 79",
        locator: "sweep over scales; the rule of the plateau is ours",
        read: Read::Memory,
    }],
};

/// Share of nodes above the noise that a scale of a plateau needs.
const LEAST_SHARE: f64 = 1.0 / 3.0;
/// Degrees within which trends of neighbouring scales are one.
const STILL_DEG: f64 = 10.0;
/// Neighbouring scales that make a plateau: half octaves, so that two cover the width of one band.
const LEAST_SCALES: usize = 2;

/// A stretch of scales of one trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Plateau {
    /// First and last scale.
    pub scales: [usize; 2],
    pub axis: Axis,
    /// Mean of the scales' doubled resultant lengths, weighted by coherence.
    pub resultant_length: f64,
    /// The scale of most coherence times resultant length.
    pub best: usize,
}

/// The plateaus of a sweep, the finest first. Scales are taken in order; one joins while every trend of the stretch
/// stays within 10° of the stretch's own.
pub fn plateaus(steps: &[ScaleStep]) -> Vec<Plateau> {
    let mut found = Vec::new();
    let mut from = 0;
    while from < steps.len() {
        let mut to = from;
        while to < steps.len() && still(&steps[from..=to]).is_some() {
            to += 1;
        }
        if to - from >= LEAST_SCALES
            && let Some((axis, resultant_length)) = still(&steps[from..to])
        {
            let strength = |i: &usize| steps[*i].beyond_noise * steps[*i].resultant_length;
            let best = (from..to).max_by(|a, b| strength(a).total_cmp(&strength(b))).unwrap_or(from);
            found.push(Plateau { scales: [from, to - 1], axis, resultant_length, best });
        }
        from = to.max(from + 1);
    }
    found
}

/// The trend of a stretch and its resultant length, if all its scales have one and agree.
fn still(stretch: &[ScaleStep]) -> Option<(Axis, f64)> {
    let (mut cos, mut sin, mut weight, mut length) = (0.0, 0.0, 0.0, 0.0);
    for step in stretch {
        let axis = step.axis.filter(|_| step.share >= LEAST_SHARE && step.beyond_noise > 0.0)?;
        let w = step.beyond_noise * step.resultant_length;
        cos += w * axis.doubled().cos();
        sin += w * axis.doubled().sin();
        weight += step.beyond_noise;
        length += step.beyond_noise * step.resultant_length;
    }
    let mean = Axis::from_doubled(f64::atan2(sin, cos));
    let near = stretch.iter().all(|s| s.axis.is_some_and(|axis| axis.separation(mean) <= STILL_DEG));
    near.then_some((mean, length / weight))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn steps(trends: &[Option<f64>]) -> Vec<ScaleStep> {
        let step = |(i, deg): (usize, &Option<f64>)| ScaleStep {
            gradient_scale_px: 2f64.powf(0.5 * i as f64),
            beyond_noise: if deg.is_some() { 0.5 } else { 0.0 },
            share: if deg.is_some() { 0.9 } else { 0.1 },
            axis: deg.map(Axis::from_deg),
            resultant_length: 0.8,
        };
        trends.iter().enumerate().map(step).collect()
    }

    #[test]
    fn two_trends_at_two_scales_are_two_plateaus() {
        let found =
            plateaus(&steps(&[None, Some(178.0), Some(2.0), Some(20.0), Some(41.0), Some(39.0), None]));
        assert_eq!(found.iter().map(|p| p.scales).collect::<Vec<_>>(), [[1, 2], [4, 5]]);
        assert!(found[0].axis.separation(Axis::from_deg(0.0)) < 1e-6, "{found:?}");
        assert!(plateaus(&[]).is_empty());
    }
}
