//! Curves of equal obliquity on the map of two-wind regimes, and the areas they bound.

use crate::science::alignment::gross_normal::two_wind_ratio;
use crate::science::alignment::obliquity::BORDERS;

/// The curve on which gross transport gives the obliquity `phi` in (0, 90) degrees: (divergence in
/// degrees, log₁₀ N) from 90° on, as far as N ≤ 10.
pub fn obliquity_curve(phi: f64) -> Vec<[f64; 2]> {
    let at = |k: i32| {
        let divergence = 90.0 + 0.5 * f64::from(k);
        [divergence, two_wind_ratio(phi, divergence).log10()]
    };
    (0..=180).map(at).filter(|p| p[1] <= 1.0).collect()
}

/// Shares of the map (divergence 0–180°, log₁₀ N 0–1, both even) that are longitudinal, oblique and
/// transverse under gross transport.
pub fn class_areas() -> [f64; 3] {
    // Below 90° all is transverse; above, a class is all that lies below its curve.
    let steps = 3600;
    let below = |phi: f64| {
        let height = |k: i32| {
            let divergence = 90.0 + 90.0 * (f64::from(k) + 0.5) / f64::from(steps);
            two_wind_ratio(phi, divergence).log10().min(1.0)
        };
        0.5 * (0..steps).map(height).sum::<f64>() / f64::from(steps)
    };
    let (low, high) = (below(BORDERS[0]), below(BORDERS[1]));
    [low, high - low, 1.0 - high]
}

/// Shares of a cell of the map, from `low` to `high` in log₁₀ N at one divergence, that are
/// longitudinal, oblique and transverse.
pub(super) fn class_shares(divergence: f64, low: f64, high: f64) -> [f64; 3] {
    if divergence < 90.0 {
        return [0.0, 0.0, 1.0];
    }
    let below = |phi: f64| ((two_wind_ratio(phi, divergence).log10() - low) / (high - low)).clamp(0.0, 1.0);
    let (a, b) = (below(BORDERS[0]), below(BORDERS[1]));
    [a, b - a, 1.0 - b]
}
