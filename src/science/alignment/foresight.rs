//! What every theory says of a record and of its redrawn versions: a cloud for each, not a needle. It
//! depends on the winds alone, so it is made once and weighed against every patch.

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Axis, Azimuth, Regime, Seed, Stopped, Work};

use super::discriminator::growth_discriminator;
use super::gross_normal::gross_normal;
use super::migration::{Migration, migration};
use super::resultant::resultant;
use super::theory::{Prediction, Theory};

/// How much faster sand moves over crests, and within what factor that is known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FluxUp {
    pub ratio: f64,
    /// ≥ 1; the draws take it evenly in the logarithm between ratio/doubt and ratio·doubt.
    pub doubt: f64,
}

impl FluxUp {
    fn drawn(self, seed: Seed, index: usize) -> f64 {
        let mut stream = seed.stream("alignment.flux-up", index as u64);
        self.ratio * self.doubt.powf(2.0 * stream.random::<f64>() - 1.0)
    }
}

/// The predictions of all theories.
#[derive(Clone, Debug, PartialEq)]
pub struct Foresight {
    /// Where the sand goes on balance by the whole record, and resultant over total.
    pub drift: Option<(Azimuth, f64)>,
    /// Alignment strength of the whole record (Rubin & Hunter's measure); `None` without flow.
    pub strength: Option<f64>,
    /// By the whole record, in the order of [`Theory::ALL`].
    pub whole: Vec<Option<Prediction>>,
    /// Per theory, by each draw; one cloud of the whole record alone when there are no draws.
    pub clouds: Vec<Vec<Option<Prediction>>>,
    /// Axes of the resultants of the draws.
    pub drifts: Vec<Axis>,
    /// Whether the clouds come from draws.
    pub drawn: bool,
    /// Growth of the fingering trend over that of the bed-instability trend.
    pub growth_ratio: Option<f64>,
    /// Which way crests built by bed instability move, at their trend and those that tie with it.
    pub migration: Vec<Migration>,
}

impl Foresight {
    /// The same, taken as certain: the whole record is the only draw.
    pub fn without_draws(&self) -> Self {
        Self {
            clouds: self.whole.iter().map(|p| vec![p.clone()]).collect(),
            drifts: self.drift.map(|(toward, _)| toward.axis()).into_iter().collect(),
            drawn: false,
            growth_ratio: self.growth_ratio,
            migration: self.migration.clone(),
            drift: self.drift,
            strength: self.strength,
            whole: self.whole.clone(),
        }
    }
}

/// Lets every theory predict from a regime and its draws. The same bits for any number of threads.
///
/// # Errors
/// [`Stopped`].
pub fn foresee(
    regime: &Regime,
    draws: &[Regime],
    flux_up: FluxUp,
    seed: Seed,
    work: &Work,
) -> Result<Foresight, Stopped> {
    work.phase("predicting trends", draws.len() as u64);
    // A regime by exact direction may hold a hundred thousand flows.
    let mut whole = Vec::with_capacity(Theory::ALL.len());
    for theory in Theory::ALL {
        work.advance(0)?;
        whole.push(theory.predict(regime, flux_up.ratio));
    }
    let drawn = !draws.is_empty();
    let by_draw: Vec<(Vec<Option<Prediction>>, Option<Axis>)> = if drawn {
        let one = |(index, draw): (usize, &Regime)| {
            work.advance(1)?;
            let drift = resultant(&draw.all).map(|(toward, _)| toward.axis());
            Ok((predict(draw, flux_up.drawn(seed, index)), drift))
        };
        draws.par_iter().enumerate().map(one).collect::<Result<_, Stopped>>()?
    } else {
        vec![(whole.clone(), resultant(&regime.all).map(|(toward, _)| toward.axis()))]
    };
    let drifts = by_draw.iter().filter_map(|(_, drift)| *drift).collect();
    let mut clouds: Vec<Vec<Option<Prediction>>> =
        (0..Theory::ALL.len()).map(|_| Vec::with_capacity(by_draw.len())).collect();
    for (predictions, _) in by_draw {
        for (cloud, prediction) in clouds.iter_mut().zip(predictions) {
            cloud.push(prediction);
        }
    }
    Ok(Foresight {
        drift: resultant(&regime.all),
        strength: gross_normal(&regime.all).map(|g| g.strength()),
        whole,
        clouds,
        drifts,
        drawn,
        growth_ratio: growth_discriminator(&regime.all, flux_up.ratio),
        migration: migration(&regime.all, flux_up.ratio),
    })
}

fn predict(regime: &Regime, flux_up: f64) -> Vec<Option<Prediction>> {
    Theory::ALL.iter().map(|theory| theory.predict(regime, flux_up)).collect()
}
