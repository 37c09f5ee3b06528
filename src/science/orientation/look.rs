//! What the direction of light or radar look does to trends: ridges across it show, ridges along it hide.

use crate::ground::{Axis, Azimuth, Method, Read, Source, Symbol};

/// The record of the look bias.
pub static METHOD: Method = Method {
    id: "orientation.look-bias",
    name: "Look bias",
    question: "Could the illumination have made this preferred trend?",
    formula: "brightness contrast ∝ |sin(trend − look)|;  a uniform field then has R̄ = ⅓ (weight |sin|) or ½ (weight sin²), along look + 90°",
    symbols: &[
        Symbol { symbol: "look", meaning: "azimuth of the radar look or of the sun", unit: "deg" },
        Symbol { symbol: "R̄", meaning: "resultant length of the doubled angle", unit: "1" },
    ],
    assumptions: &["first order: contrast is proportional to slope along the look"],
    limits: &["trends within about 20° of the look are a hole in detection, not in nature"],
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
}
