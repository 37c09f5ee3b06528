//! Is there a periodic texture at all? Mean power over background, and the chance of its highest peak.

use crate::ground::{Axis, LocalFrame, Stopped, Work};
use crate::numeric::fft::PowerPlan;
use crate::numeric::tail::chi2_above;

use super::background::Rings;
use super::bins::Bins;
use super::windows::Scene;

/// The mean ratio spectrum of one window size and its highest peak.
pub(super) struct Survey {
    pub bins: Bins,
    /// Highest bin of the band (index into `Bins::all`).
    pub peak: usize,
    /// ln of the probability that noise of this background has a peak as high anywhere in the band.
    pub ln_p: f64,
}

/// Windows looked at per size; more would not change the answer.
const MOST_WINDOWS: usize = 256;

/// Power below this share of a window's greatest power is rounding of the transform, not background.
const ROUNDING: f64 = 1e-9;

/// Surveys one window size; `None` when no window fits or the band is empty.
pub(super) fn survey(
    scene: &Scene,
    window: [usize; 2],
    frame: LocalFrame,
    band: [f64; 2],
    trend: Option<(Axis, f64)>,
    work: &Work,
) -> Result<Option<Survey>, Stopped> {
    let windows = scene.windows(window, MOST_WINDOWS, work)?;
    let bins = Bins::new(window, window, frame, band).along(frame, trend);
    if windows.origins.is_empty() || !bins.band().iter().any(|b| b.sought) {
        return Ok(None);
    }
    let rings = Rings::new(&bins, frame, None);
    let plan = PowerPlan::new(window[0], window[1]);
    let mut sum = vec![0.0f64; bins.all.len()];
    let mut taken = 0usize;
    work.phase("spectrum: looking for a texture", windows.origins.len() as u64);
    scene.powers(
        &windows,
        &plan,
        work,
        |_, _, power| {
            let background = rings.background(&bins, power, floor(&bins, power), &mut Vec::new());
            ratios(&bins, power, &background)
        },
        |ratio| {
            sum.iter_mut().zip(&ratio).for_each(|(s, r)| *s += f64::from(*r));
            taken += 1;
        },
    )?;
    if taken == 0 {
        return Ok(None);
    }
    let independent_windows = windows.independent();
    let sought = (bins.band_from..bins.band_to).filter(|i| bins.all[*i].sought);
    let Some(peak) = sought.max_by(|a, b| sum[*a].total_cmp(&sum[*b])) else {
        return Ok(None);
    };
    let ln_p = ln_global_p(sum[peak] / taken as f64, independent_windows, bins.independent());
    Ok(Some(Survey { bins, peak, ln_p }))
}

/// Power over background at every bin.
pub(super) fn ratios(bins: &Bins, power: &[f32], background: &[f64]) -> Vec<f32> {
    bins.all.iter().zip(background).map(|(bin, b)| (f64::from(power[bin.index]) / b) as f32).collect()
}

/// The least background believed.
pub(super) fn floor(bins: &Bins, power: &[f32]) -> f64 {
    let greatest = bins.all.iter().map(|b| power[b.index]).fold(0.0f32, f32::max);
    (ROUNDING * f64::from(greatest)).max(f64::from(f32::MIN_POSITIVE))
}

/// ln of the global p of a mean ratio `x` over `windows` independent windows and `bins` independent bins.
///
/// One window: x ~ Exp(1), so p = 1 − (1 − e^{−x})^M; the mean of K windows is Gamma with shape K.
pub fn ln_global_p(x: f64, windows: f64, bins: f64) -> f64 {
    let z = windows * x;
    let single = chi2_above(2.0 * z, 2.0 * windows);
    if single > 1e-14 {
        // 1 − (1 − p)^M without losing small p.
        return (-(bins * (-single).ln_1p()).exp_m1()).ln();
    }
    // Far out: Q(K, z) → z^{K−1} e^{−z} / Γ(K), and M p for the whole band.
    bins.ln() + (windows - 1.0) * z.ln() - z - statrs::function::gamma::ln_gamma(windows)
}

/// The ratio a single window's highest of `bins` bins exceeds with probability `p` by chance:
/// −ln(1 − (1 − p)^{1/M}).
pub fn ratio_floor(bins: f64, p: f64) -> f64 {
    -(-((-p).ln_1p() / bins).exp_m1()).ln()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_floor_of_one_window_has_its_p() {
        for bins in [100.0, 1682.0] {
            crate::assert_close!(ln_global_p(ratio_floor(bins, 0.05), 1.0, bins).exp(), 0.05, 1e-9, "p");
        }
    }

    #[test]
    fn far_tails_join_the_near_ones() {
        let near = ln_global_p(31.0, 1.0, 10.0);
        let far = ln_global_p(33.0, 1.0, 10.0);
        crate::assert_close!(near - far, 2.0, 1e-6, "e-fold per unit of x");
    }
}
