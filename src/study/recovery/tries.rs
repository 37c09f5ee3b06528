//! One field of bedforms laid in and sought, and what all of them say together.

use rayon::prelude::*;

use crate::ground::{Axis, Azimuth, Grid, Seed, Stopped, Work};
use crate::science::orientation::{TensorSettings, trend_nodes};
use crate::science::scene::inject::Bedforms;
use crate::science::scene::recover::{Response, wilson};
use crate::study::patch::claim;
use crate::study::window::PatchPixels;
use crate::study::{RecoveredTrend, Sheet};

use super::ground::Ground;

/// What is laid in, and how it is sought.
pub(super) struct Trial<'a> {
    pub sheet: &'a Sheet,
    pub ground: &'a Ground,
    pub light: Option<Azimuth>,
    /// Trend and sense of the steep side are those of each try.
    pub bedforms: Bedforms,
    pub tone_per_slope: f64,
    pub tensor: TensorSettings,
    pub seed: Seed,
}

/// What one try showed.
pub(super) struct Seen {
    /// Mean axis of the nodes above the noise, and the trend claimed.
    pub mean: Option<Axis>,
    pub claimed: Option<Axis>,
    /// Share of nodes above the noise, and their doubled resultant length.
    pub share: f64,
    pub resultant_length: f64,
    pub response: Response,
}

impl Trial<'_> {
    /// The trends laid in: evenly over 180° from the light on, so that one lies along it.
    pub fn trends(&self) -> Vec<Axis> {
        let count = self.sheet.settings.recovery.trends;
        let first = self.light.map_or(Axis::from_deg(0.0), Azimuth::axis);
        (0..count).map(|i| first.rotated(180.0 * f64::from(i) / f64::from(count))).collect()
    }

    /// All tries: those of each trend in turn. The same for any number of threads.
    pub fn run(&self, work: &Work) -> Result<Vec<Vec<Seen>>, Stopped> {
        let trends = self.trends();
        let repeats = self.sheet.settings.recovery.repeats.max(1) as usize;
        work.phase("injection", (trends.len() * repeats) as u64);
        let seen: Vec<Seen> = (0..trends.len() * repeats)
            .into_par_iter()
            .map(|i| {
                let [index, repeat] = [i / repeats, i % repeats].map(|i| i as u64);
                let seen =
                    self.lay_in(trends[i / repeats], "recovery.bedforms", [index, repeat], &work.part())?;
                work.advance(1)?;
                Ok(seen)
            })
            .collect::<Result<_, Stopped>>()?;
        let mut seen = seen.into_iter();
        Ok(trends.iter().map(|_| seen.by_ref().take(repeats).collect()).collect())
    }

    /// RMS slope toward the light of bedforms at `trend`.
    pub fn slope_at(&self, trend: Axis, work: &Work) -> Result<f64, Stopped> {
        let image = &self.ground.pixels.image;
        let mut rng = self.seed.stream("recovery.slope", 0);
        let size = [image.width(), image.height()];
        let bedforms = Bedforms { trend, ..self.bedforms };
        let slope = bedforms.lay(size, self.ground.frame, self.light, &mut rng, work)?.slope;
        let square = slope.values().iter().map(|v| f64::from(*v).powi(2)).sum::<f64>();
        Ok((square / slope.len().max(1) as f64).sqrt())
    }

    /// The trend the texture claims by itself, where it claims one.
    pub fn texture_claims(&self, work: &Work) -> Result<Option<Axis>, Stopped> {
        let PatchPixels { image, outline, place, .. } = &self.ground.pixels;
        let field = trend_nodes(image, outline, place, &self.tensor, &work.part())?;
        let found = claim(self.sheet, &self.ground.pixels, &field, 0, self.seed, &work.part())?;
        Ok(found.shown.mean.filter(|_| found.defined))
    }

    /// One field at `trend`, its chance from `purpose` and the numbers of trend and field.
    pub fn lay_in(
        &self,
        trend: Axis,
        purpose: &str,
        [index, field]: [u64; 2],
        work: &Work,
    ) -> Result<Seen, Stopped> {
        let mut rng = self.seed.child(&format!("trend {index}")).stream(purpose, field);
        let texture = &self.ground.pixels.image;
        let bedforms = Bedforms { trend, lee_clockwise: field.is_multiple_of(2), ..self.bedforms };
        let size = [texture.width(), texture.height()];
        let laid = bedforms.lay(size, self.ground.frame, self.light, &mut rng, work)?;
        let tone = self.tone_per_slope as f32;
        let values = texture.values().iter().zip(laid.slope.values()).map(|(t, s)| t + tone * s).collect();
        let image = Grid::from_parts(size[0], size[1], values, texture.mask().map(<[bool]>::to_vec));
        let PatchPixels { outline, place, .. } = &self.ground.pixels;
        let field = trend_nodes(&image, outline, place, &self.tensor, work)?;
        let found = claim(self.sheet, &self.ground.pixels, &field, 0, self.seed, work)?;
        Ok(Seen {
            mean: found.shown.mean,
            claimed: found.shown.mean.filter(|_| found.defined),
            share: found.axes.len() as f64 / field.nodes.len().max(1) as f64,
            resultant_length: found.shown.resultant_length,
            response: Response::of(field.nodes.iter().map(|n| (n.axis, n.energy, n.significant))),
        })
    }
}

/// One trend from its tries.
pub(super) fn recovered(trend: Axis, tries: &[Seen], tolerance_deg: f64) -> RecoveredTrend {
    let off: Vec<f64> = tries.iter().filter_map(|seen| Some(seen.claimed?.turn_from(trend))).collect();
    let found = off.iter().filter(|deg| deg.abs() <= tolerance_deg).count();
    let n = off.len() as f64;
    let mean = off.iter().sum::<f64>() / n;
    let square = off.iter().map(|deg| (deg - mean).powi(2)).sum::<f64>();
    let over = |value: fn(&Seen) -> f64| tries.iter().map(value).sum::<f64>() / tries.len().max(1) as f64;
    RecoveredTrend {
        trend,
        tries: tries.len() as u32,
        found: found as u32,
        probability_ci95: wilson(found, tries.len()),
        bias_deg: (n > 0.0).then_some(mean),
        spread_deg: (n > 1.0).then(|| (square / (n - 1.0)).sqrt()),
        share: over(|seen| seen.share),
        resultant_length: over(|seen| seen.resultant_length),
    }
}
