//! The trend behind the trend: bedforms that, laid in, look like the patch does.
//!
//! Light bends a mean trend in two ways: crests along it pass the noise less often, and where crests of several
//! directions share a node the better lit ones speak louder. Weighting nodes undoes the first only, so the patch is
//! matched instead: t and s are sought for which fields show the patch's own mean axis and R̄.

use rayon::prelude::*;

use crate::ground::{Axis, Azimuth, Stopped, Work};
use crate::science::axial::spread::Spread;
use crate::science::orientation::look::shown;

use super::tries::{Seen, Trial};

/// Steps of the search, and fields laid in at each: the same ones, so that steps differ by t and s alone.
const STEPS: usize = 5;
const FIELDS: u64 = 8;
/// Bounds of the spread of crests, degrees.
const SPREADS_DEG: [f64; 2] = [3.0, 30.0];
/// Least |sin(trend − light)| through which the strength of the patch's own pattern is read.
const LEAST_SHOWN: f64 = 0.3;

/// The patch as measured.
pub(super) struct Own {
    pub axis: Axis,
    pub spread_deg: f64,
    /// RMS tone of its pattern; `None` where a tone per slope is stated.
    pub tone: Option<f64>,
}

/// Sets spread and tone of `trial` so that its fields look like the patch, and gives the trend at which they do;
/// `None` where fields of that trend show no nodes.
pub(super) fn matched(trial: &mut Trial, own: &Own, work: &Work) -> Result<Option<Axis>, Stopped> {
    let mut trend = own.axis;
    trial.bedforms.spread_deg = own.spread_deg.clamp(SPREADS_DEG[0], SPREADS_DEG[1]);
    work.phase("bedforms like the patch's own", STEPS as u64 * FIELDS);
    for _ in 0..STEPS {
        if let Some(tone) = own.tone {
            let across = trial.light.map_or(trend, |light| light.axis().perpendicular());
            let least = LEAST_SHOWN * trial.slope_at(across, work)?;
            trial.tone_per_slope = tone / trial.slope_at(trend, work)?.max(least).max(f64::MIN_POSITIVE);
        }
        let seen: Vec<Seen> = (0..FIELDS)
            .into_par_iter()
            .map(|field| {
                let seen = trial.lay_in(trend, "recovery.matched", [0, field], &work.part())?;
                work.advance(1)?;
                Ok(seen)
            })
            .collect::<Result<_, Stopped>>()?;
        let turns: Vec<f64> = seen.iter().filter_map(|s| Some(s.mean?.turn_from(trend))).collect();
        if turns.is_empty() {
            return Ok(None);
        }
        let length = seen.iter().map(|s| s.resultant_length).sum::<f64>() / seen.len() as f64;
        if let Some(spread) = Spread::Standard.axial_deg(length).filter(|spread| *spread > 0.0) {
            let wanted = trial.bedforms.spread_deg * own.spread_deg / spread;
            trial.bedforms.spread_deg = wanted.clamp(SPREADS_DEG[0], SPREADS_DEG[1]);
        }
        trend = own.axis.rotated(-turns.iter().sum::<f64>() / turns.len() as f64);
    }
    Ok(Some(trend))
}

/// Whether the strength of a pattern at `trend` was read through so little light that it is bounded.
pub(super) fn bounded(trend: Axis, light: Option<Azimuth>) -> bool {
    light.is_some_and(|light| shown(trend, light) < LEAST_SHOWN)
}
