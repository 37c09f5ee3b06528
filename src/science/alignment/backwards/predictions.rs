//! What two winds would make: the trends, the drift, the sense, at every cell of the map.

use std::collections::BTreeMap;
use std::sync::{Arc, LazyLock, Mutex, PoisonError};

use crate::ground::{Axis, Azimuth, SandFlow};
use crate::science::alignment::bed_instability::bed_instability;
use crate::science::alignment::fingering::{crest_transport, fingering};
use crate::science::alignment::gross_normal::{gross_normal, two_wind_obliquity};
use crate::science::alignment::resultant::resultant;

/// Cells of the map along divergence and along log₁₀ N.
pub const DIVERGENCES: usize = 72;
pub const RATIOS: usize = 40;

/// Divergence at the middle of column `i`, degrees.
pub fn divergence_at(i: usize) -> f64 {
    180.0 * (i as f64 + 0.5) / DIVERGENCES as f64
}

/// log₁₀ N at the middle of row `j`.
pub fn log_ratio_at(j: usize) -> f64 {
    (j as f64 + 0.5) / RATIOS as f64
}

/// Two winds as flows: the dominant, `ratio` times the other, carries toward `dominant`; the other
/// turns away clockwise by `divergence` degrees (anticlockwise when negative).
pub fn two_winds(dominant: Azimuth, divergence: f64, ratio: f64) -> [SandFlow; 2] {
    let total = ratio + 1.0;
    [
        SandFlow { toward: dominant, weight: ratio / total },
        SandFlow { toward: dominant.rotated(divergence), weight: 1.0 / total },
    ]
}

/// What a regime of two winds would make.
#[derive(Clone, Debug, PartialEq)]
pub struct Implied {
    pub flows: [SandFlow; 2],
    /// Where the sand goes on balance, and the resultant over the total.
    pub resultant: Option<(Azimuth, f64)>,
    /// Trends of greatest gross transport; several when they tie.
    pub gross: Vec<Axis>,
    /// Trends of bed instability; several when they tie.
    pub bed: Vec<Axis>,
    /// Direction in which fingers extend.
    pub finger: Option<Azimuth>,
    /// Obliquity of the trend of gross transport, degrees.
    pub obliquity_deg: f64,
}

/// Everything two winds would make; `divergence` in degrees, negative when the other wind turns away
/// anticlockwise, `ratio` ≥ 1.
pub fn implied(dominant: Azimuth, divergence: f64, ratio: f64, flux_up: f64) -> Implied {
    let flows = two_winds(dominant, divergence, ratio);
    let gross =
        gross_normal(&flows).map_or_else(Vec::new, |g| std::iter::once(g.axis).chain(g.ties).collect());
    let bed = bed_instability(&flows, flux_up)
        .map_or_else(Vec::new, |b| std::iter::once(b.axis).chain(b.ties).collect());
    Implied {
        resultant: resultant(&flows),
        gross,
        bed,
        finger: fingering(&flows, flux_up).first().map(|f| f.toward),
        obliquity_deg: two_wind_obliquity(ratio, divergence.abs()),
        flows,
    }
}

/// Predictions of one cell for one flux-up ratio with the dominant wind toward 0° and the other
/// clockwise of it, whole degrees.
#[derive(Clone, Copy, Debug)]
pub struct Cell {
    /// Trend of bed instability.
    pub bed: i32,
    /// Sense of the sand over that bed's crests.
    pub over_bed: i32,
    /// Direction of the finger; `None` without one.
    pub finger: Option<i32>,
    pub resultant: i32,
    /// Resultant over total.
    pub ratio: f64,
}

/// The predictions of one regime.
pub fn cell(divergence: f64, log_ratio: f64, flux_up: f64) -> Cell {
    let flows = two_winds(Azimuth::from_deg(0.0), divergence, 10f64.powf(log_ratio));
    let whole = |a: Azimuth| a.deg().round() as i32 % 360;
    let bed = bed_instability(&flows, flux_up).map_or(Axis::from_deg(90.0), |b| b.axis);
    let (across, along) = crest_transport(&flows, flux_up, bed.azimuth());
    let (toward, ratio) = resultant(&flows).unwrap_or((Azimuth::from_deg(0.0), 0.0));
    Cell {
        bed: bed.deg().round() as i32,
        over_bed: whole(bed.azimuth().rotated(across.atan2(along).to_degrees())),
        finger: fingering(&flows, flux_up).first().map(|f| whole(f.toward)),
        resultant: whole(toward),
        ratio,
    }
}

/// All cells for one flux-up ratio, row by row of log₁₀ N.
pub fn cells(flux_up: f64) -> Arc<[Cell]> {
    // The same few ratios are asked for by every patch, and the search is the slow part.
    static KNOWN: LazyLock<Mutex<BTreeMap<u64, Arc<[Cell]>>>> = LazyLock::new(Mutex::default);
    const KEPT: usize = 12;
    let mut known = KNOWN.lock().unwrap_or_else(PoisonError::into_inner);
    if let Some(found) = known.get(&flux_up.to_bits()) {
        return Arc::clone(found);
    }
    let all = (0..RATIOS)
        .flat_map(|j| (0..DIVERGENCES).map(move |i| cell(divergence_at(i), log_ratio_at(j), flux_up)));
    let made: Arc<[Cell]> = all.collect();
    if known.len() >= KEPT {
        known.clear();
    }
    known.insert(flux_up.to_bits(), Arc::clone(&made));
    made
}
