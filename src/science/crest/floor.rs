//! The responses that count: what pixel noise reaches anywhere in the patch, and what the ground itself
//! shows of the wrong sense.

use crate::ground::{Method, Read, Source, Symbol};
use crate::numeric::quantile;

use super::fields::Kernels;

/// The record of the thresholds.
pub static METHOD: Method = Method {
    id: "crest.thresholds",
    name: "Noise floor and hysteresis of crest lines",
    question: "Which responses are more than noise and texture?",
    formula: "floor = √(f_σ (σ₂/σ)^γ f_{σ₂}),  f = s g √(2 ln(N/p)),  N = A/(2πσ²);  high = max(floor, min(q₉₇ of the wrong sense, 0.85 q₉₀ of the right sense));  low = max(0.6 floor, 0.4 high)",
    symbols: &[
        Symbol {
            symbol: "s",
            meaning: "pixel noise, from second differences along the calmest direction",
            unit: "tone",
        },
        Symbol { symbol: "g", meaning: "response to unit noise, from the kernels", unit: "1/px or 1/px²" },
        Symbol { symbol: "A", meaning: "area searched", unit: "px²" },
        Symbol { symbol: "p", meaning: "chance that noise starts one line", unit: "1" },
        Symbol {
            symbol: "q",
            meaning: "quantile of the strengths of crest points",
            unit: "tone/px or tone/px²",
        },
    ],
    assumptions: &[
        "pixel noise is nearly Gaussian after smoothing, so the size of a gradient is Rayleigh distributed",
        "points of the wrong sense (slopes that face away, ridges of the other sign) show what texture does without crests",
    ],
    limits: &[
        "where the wrong sense is as strong as the right one (a symmetric pattern) it says nothing, and the strength of the crests themselves sets the threshold",
        "streaks and stains of the right sense pass",
    ],
    sources: &[Source {
        key: "ventifact-crest-floor",
        authors: "this program",
        year: 2026,
        title: "Wrong-sense responses as the floor of a one-sided detector",
        published: "derived here; two-threshold linking after Canny 1986 and Steger 1998, from memory",
        locator: "",
        read: Read::Derived,
    }],
};

/// Quantile of wrong-sense strengths that a line must start above.
const WRONG: f64 = 0.97;

/// Share of the right sense's strong responses (their 90 % quantile) that always starts a line.
const STRONG: f64 = 0.85;

/// Lines are followed down to this share of the starting threshold.
const FOLLOW: f64 = 0.4;

/// … but not below this share of the noise floor.
const FOLLOW_FLOOR: f64 = 0.6;

/// What counts at one scale.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Thresholds {
    pub floor: f64,
    pub high: f64,
    pub low: f64,
    /// The 90 % quantile of the right sense.
    pub strong: f64,
}

/// The greatest response to pixel noise `noise` expected in `cells` pixels with chance `p`:
/// floor = s g √(2 ln(N/p)).
pub(super) fn floor(noise: f64, cells: usize, slip_face: bool, sigma: f64, p: f64) -> f64 {
    let (slope, curve) = Kernels::new(sigma).noise_gain();
    let independent = (cells as f64 / (std::f64::consts::TAU * sigma * sigma)).max(1.0);
    let gain = if slip_face { slope } else { curve };
    noise * gain * (2.0 * (independent / p.clamp(1e-9, 1.0)).ln()).max(0.0).sqrt()
}

/// Thresholds from the strengths of crest points of the right and of the wrong sense.
pub(super) fn thresholds(floor: f64, right: &mut [f64], wrong: &mut [f64]) -> Thresholds {
    if right.is_empty() {
        return Thresholds { floor, high: f64::INFINITY, low: f64::INFINITY, strong: 0.0 };
    }
    let [strong] = quantile::of(right, [0.9]);
    let texture = if wrong.is_empty() { f64::INFINITY } else { quantile::of(wrong, [WRONG])[0] };
    let high = floor.max(texture.min(STRONG * strong));
    Thresholds { floor, high, low: (FOLLOW_FLOOR * floor).max(FOLLOW * high), strong }
}
