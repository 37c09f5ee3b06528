//! The mean spectrum for show: north-up picture, and a profile along the peak.

use crate::ground::{Axis, Grid};

use super::measure::Mean;

/// A spectrum turned to true north: x = east frequency, y = −north frequency, centre = 0. Cells outside
/// the band are missing.
#[derive(Clone, Debug, PartialEq)]
pub struct NorthUp {
    /// log₁₀ of mean power over background.
    pub log_ratio: Grid<f32>,
    /// Frequency at the right and upper edge, cycles per ground unit.
    pub edge_frequency: f64,
}

/// Cells on a side; odd, so that 0 has one.
const SIDE: usize = 129;

/// Octave share of a profile's step.
const STEPS_PER_OCTAVE: f64 = 8.0;

/// Half width of the profile's wedge, degrees.
const WEDGE_DEG: f64 = 15.0;

/// Resamples the mean ratio; the edge is the highest frequency looked at.
pub(super) fn north_up(mean: &Mean, shortest: f64) -> Option<NorthUp> {
    let bins = &mean.bins;
    let edge_frequency = 1.0 / shortest;
    let [cols, rows] = bins.padded;
    let mut dense = vec![f32::NAN; (cols / 2 + 1) * rows];
    for (bin, ratio) in bins.all.iter().zip(&mean.ratio) {
        dense[bin.index] = (ratio.max(1e-6)).log10() as f32;
    }
    // A wave vector in cycles a pixel is Mᵀ times that on the ground.
    let (ec, nc) = mean.frame.ground(1.0, 0.0);
    let (er, nr) = mean.frame.ground(0.0, 1.0);
    let value = |east: f64, north: f64| -> f32 {
        let (mut fc, mut fr) = (ec * east + nc * north, er * east + nr * north);
        if fc < 0.0 || (fc == 0.0 && fr < 0.0) {
            (fc, fr) = (-fc, -fr);
        }
        let (kc, kr) = ((fc * cols as f64).round() as i64, (fr * rows as f64).round() as i64);
        // On the column kc = 0 only the positive half was kept.
        let kr = if kc == 0 { kr.abs() } else { kr };
        let half = rows as i64 / 2;
        if kc > cols as i64 / 2 || kr.abs() > half {
            return f32::NAN;
        }
        dense[kc as usize * rows + kr.rem_euclid(rows as i64) as usize]
    };
    let middle = (SIDE / 2) as f64;
    let values: Vec<f32> = (0..SIDE * SIDE)
        .map(|i| {
            let (x, y) = ((i % SIDE) as f64, (i / SIDE) as f64);
            value((x - middle) / middle * edge_frequency, (middle - y) / middle * edge_frequency)
        })
        .collect();
    let valid: Vec<bool> = values.iter().map(|v| v.is_finite()).collect();
    let values = values.iter().map(|v| if v.is_finite() { *v } else { 0.0 }).collect();
    valid
        .contains(&true)
        .then(|| NorthUp { log_ratio: Grid::from_parts(SIDE, SIDE, values, Some(valid)), edge_frequency })
}

/// Mean ratio by wavelength (falling frequency last) within a wedge about the crest normal of `axis`.
pub(super) fn profile(mean: &Mean, axis: Axis) -> Vec<[f64; 2]> {
    let bins = &mean.bins.all[mean.bins.band_from..];
    let Some(first) = bins.first() else { return Vec::new() };
    let normal = axis.perpendicular();
    let mut sums: Vec<(f64, f64, usize)> = Vec::new();
    for (bin, ratio) in bins.iter().zip(&mean.ratio[mean.bins.band_from..]) {
        let (e, n) = mean.frame.gradient(bin.pixel[0], bin.pixel[1]);
        if Axis::from_east_north(e, n).separation(normal) > WEDGE_DEG {
            continue;
        }
        let step = ((bin.ln_f - first.ln_f) / std::f64::consts::LN_2 * STEPS_PER_OCTAVE) as usize;
        if sums.len() <= step {
            sums.resize(step + 1, (0.0, 0.0, 0));
        }
        sums[step].0 += bin.ln_f;
        sums[step].1 += ratio;
        sums[step].2 += 1;
    }
    sums.iter()
        .filter(|(_, _, n)| *n > 0)
        .map(|(ln_f, ratio, n)| [(-ln_f / *n as f64).exp(), ratio / *n as f64])
        .collect()
}
