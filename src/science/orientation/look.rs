//! What the direction of light or radar look does to trends: ridges across it show, ridges along it hide.

use crate::ground::{Axis, Azimuth, Method, Read, Source, Symbol};
use crate::numeric::sum;

/// The record of the look bias.
pub static METHOD: Method = Method {
    id: "orientation.look-bias",
    name: "Look bias",
    question: "Could the illumination have made this preferred trend?",
    formula: "brightness contrast ∝ |sin(trend − look)|;  a uniform field then has R̄ = ⅓ (weight |sin|) or ½ (weight sin²), along look + 90°;  refit: w = 1/max(|sin(trend − look)|, 0.3)",
    symbols: &[
        Symbol { symbol: "look", meaning: "azimuth of the radar look or of the sun", unit: "deg" },
        Symbol { symbol: "R̄", meaning: "resultant length of the doubled angle", unit: "1" },
        Symbol { symbol: "w", meaning: "weight of a node in the refit", unit: "1" },
    ],
    assumptions: &["first order: contrast is proportional to slope along the look"],
    limits: &[
        "trends within about 20° of the look are a hole in detection, not in nature",
        "the refit raises faint trends by 1/0.3 at the most and takes the nodes to be weighted by contrast: what was never seen it cannot bring back",
    ],
    sources: &[Source {
        key: "ventifact-look-bias",
        authors: "this program",
        year: 2026,
        title: "Resultant length of a uniform trend field seen under one look",
        published: "integral, checked numerically",
        locator: "",
        read: Read::Derived,
    }],
};

/// How strongly a node counts for the tone it shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Weighting {
    /// By contrast, |sin|.
    Contrast,
    /// By gradient energy, sin².
    Energy,
}

/// Whether a mean trend may be the look's work.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LookBias {
    /// Angle between the mean trend and look + 90°, where the bias points; degrees in [0, 90].
    pub from_bias_deg: f64,
    /// Resultant length a field without any preference would show.
    pub resultant_by_look: f64,
    /// The trend lies within 15° of the bias and is no stronger than a field without preference seen by energy.
    pub suspect: bool,
}

/// Degrees within which a trend is held against the look.
pub const NEAR_DEG: f64 = 15.0;

/// Degrees from the look within which trends hardly show.
pub const HOLE_DEG: f64 = 20.0;
/// The least |sin(trend − look)| the refit divides by.
const LEAST_SHOWN: f64 = 0.3;

/// Doubled resultant length of a uniform trend field: −∫ w cos 2t / ∫ w over trends t from the look.
pub fn resultant_by_look(weighting: Weighting) -> f64 {
    match weighting {
        Weighting::Contrast => 1.0 / 3.0,
        Weighting::Energy => 0.5,
    }
}

/// Holds a mean trend of the given doubled resultant length against the look.
pub fn look_bias(mean: Axis, resultant_length: f64, look: Azimuth, weighting: Weighting) -> LookBias {
    let from_bias_deg = mean.separation(look.axis().perpendicular());
    let by_look = resultant_by_look(weighting);
    LookBias {
        from_bias_deg,
        resultant_by_look: by_look,
        suspect: from_bias_deg <= NEAR_DEG && resultant_length < resultant_by_look(Weighting::Energy),
    }
}

/// |sin(trend − look)|: the share of its contrast a ridge shows under this look.
pub fn shown(trend: Axis, look: Azimuth) -> f64 {
    trend.separation(look.axis()).to_radians().sin()
}

/// Mean axis and doubled resultant length of `axes`, each weighted by `weight` ≥ 0; `None` without weight.
pub fn refit(axes: &[Axis], weight: impl Fn(Axis) -> f64 + Sync) -> Option<(Axis, f64)> {
    let [cos, sin, total] = sum::totals(axes.len(), |i| {
        let (w, (sin, cos)) = (weight(axes[i]), axes[i].doubled().sin_cos());
        [w * cos, w * sin, w]
    });
    (total > 0.0).then(|| (Axis::from_doubled(sin.atan2(cos)), (cos.hypot(sin) / total).min(1.0)))
}

/// 1/max(|sin(trend − look)|, 0.3): what undoes the weight of contrast.
pub fn undo_contrast(trend: Axis, look: Azimuth) -> f64 {
    1.0 / shown(trend, look).max(LEAST_SHOWN)
}

/// Share of `axes` within [`HOLE_DEG`] of the look, and that of a field without preference.
pub fn near_look(axes: &[Axis], look: Azimuth) -> [f64; 2] {
    let near = axes.iter().filter(|axis| axis.separation(look.axis()) <= HOLE_DEG).count();
    [near as f64 / axes.len().max(1) as f64, HOLE_DEG / 90.0]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_weak_trend_across_the_look_is_suspect_and_others_are_not() {
        let look = Azimuth::from_deg(280.0);
        let bias = |deg: f64, r: f64| look_bias(Axis::from_deg(deg), r, look, Weighting::Energy);
        assert!(bias(15.0, 0.4).suspect);
        assert!(!bias(15.0, 0.8).suspect);
        assert!(!bias(60.0, 0.4).suspect);
        crate::assert_close!(bias(60.0, 0.4).from_bias_deg, 50.0, 1e-9, "angle");
    }
    #[test]
    fn the_refit_undoes_what_contrast_did_to_a_leaning_field() {
        let look = Azimuth::from_deg(0.0);
        // Axes uniform over 50° ± 30°, each as often as it shows.
        let axes: Vec<Axis> = (20..=80)
            .flat_map(|deg| {
                let axis = Axis::from_deg(f64::from(deg));
                vec![axis; (1000.0 * shown(axis, look)).round() as usize]
            })
            .collect();
        let (seen, _) = refit(&axes, |_| 1.0).expect("axes");
        let (undone, _) = refit(&axes, |axis| undo_contrast(axis, look)).expect("axes");
        assert!(seen.separation(Axis::from_deg(50.0)) > 4.0, "{seen:?}");
        assert!(undone.separation(Axis::from_deg(50.0)) < 0.05, "{undone:?}");
        assert_eq!(refit(&[], |_| 1.0), None);
    }

    #[test]
    fn an_even_field_has_its_share_near_the_look() {
        let axes: Vec<Axis> = (0..360).map(|i| Axis::from_deg(0.5 * f64::from(i) + 0.25)).collect();
        let [near, expected] = near_look(&axes, Azimuth::from_deg(213.0));
        crate::assert_close!(near, expected, 1e-12, "share");
        assert_eq!(near_look(&[], Azimuth::from_deg(0.0)), [0.0, 20.0 / 90.0]);
    }
}
