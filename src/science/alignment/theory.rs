//! The alignment theories that are weighed against each other, all with one face: a regime in, the ways
//! crests would lie out.

use crate::ground::{Axis, Azimuth, Regime, SandFlow};

use super::bed_instability::{self, bed_instability};
use super::fingering::{self, fingering};
use super::gross_normal::{self, gross_normal};
use super::{resultant, stated, subsets};

/// A rule that predicts a trend.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Theory {
    /// Across the resultant.
    Transverse,
    /// Along the resultant.
    Along,
    GrossNormal,
    BedInstability,
    Fingering,
    /// Bed instability under the storms alone.
    StormsAcross,
    /// Fingering under the storms alone.
    StormsAlong,
    /// Bed instability under the season that moves most sand.
    Season,
    /// The axis the user states.
    Stated,
}

/// How a theory would have crests lie.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Way {
    pub axis: Axis,
    /// The end that grows, where the theory tells one.
    pub toward: Option<Azimuth>,
    /// Its share among the ways of one prediction; they add up to 1.
    pub share: f64,
}

/// What a theory says of one regime.
#[derive(Clone, Debug, PartialEq)]
pub struct Prediction {
    /// At least one; the main one first, then those that tie with it or compete.
    pub ways: Vec<Way>,
    /// How much better the trend is than others, 0 to 1, in the theory's own measure.
    pub strength: f64,
}

impl Prediction {
    /// One axis without a sense.
    pub fn of_axis(axis: Axis, strength: f64) -> Self {
        Self { ways: vec![Way { axis, toward: None, share: 1.0 }], strength }
    }

    /// Axes that tie.
    fn of_ties(first: Axis, ties: &[Axis], strength: f64) -> Self {
        let share = 1.0 / (1 + ties.len()) as f64;
        let ways = std::iter::once(first).chain(ties.iter().copied());
        Self { ways: ways.map(|axis| Way { axis, toward: None, share }).collect(), strength }
    }

    /// The main way.
    pub fn main(&self) -> Way {
        self.ways[0]
    }
}

impl Theory {
    pub const ALL: [Self; 9] = [
        Self::Transverse,
        Self::Along,
        Self::GrossNormal,
        Self::BedInstability,
        Self::Fingering,
        Self::StormsAcross,
        Self::StormsAlong,
        Self::Season,
        Self::Stated,
    ];

    pub fn name(self) -> &'static str {
        match self {
            Self::Transverse => "transverse to the resultant",
            Self::Along => "along the resultant",
            Self::GrossNormal => "gross bedform-normal",
            Self::BedInstability => "bed instability",
            Self::Fingering => "fingering",
            Self::StormsAcross => "bed instability, storms only",
            Self::StormsAlong => "fingering, storms only",
            Self::Season => "bed instability, strongest season",
            Self::Stated => "stated axis",
        }
    }

    /// Id of the method record.
    pub fn method(self) -> &'static str {
        match self {
            Self::Transverse => resultant::TRANSVERSE.id,
            Self::Along => resultant::ALONG.id,
            Self::GrossNormal => gross_normal::METHOD.id,
            Self::BedInstability => bed_instability::METHOD.id,
            Self::Fingering => fingering::METHOD.id,
            Self::StormsAcross | Self::StormsAlong => subsets::STORMS.id,
            Self::Season => subsets::SEASON.id,
            Self::Stated => stated::METHOD.id,
        }
    }

    /// Whether crests grow by extending along themselves rather than by sand that crosses them.
    pub fn extends(self) -> bool {
        matches!(self, Self::Along | Self::Fingering | Self::StormsAlong)
    }

    /// The prediction for a regime and a flux-up ratio; `None` when the theory predicts nothing. The
    /// stated axis follows from no regime: it is always `None` here.
    pub fn predict(self, regime: &Regime, flux_up: f64) -> Option<Prediction> {
        match self {
            Self::Transverse => resultant::transverse(&regime.all),
            Self::Along => resultant::along(&regime.all),
            Self::GrossNormal => across(&regime.all),
            Self::BedInstability => growing(&regime.all, flux_up),
            Self::Fingering => extending(&regime.all, flux_up),
            Self::StormsAcross => growing(&regime.storms, flux_up),
            Self::StormsAlong => extending(&regime.storms, flux_up),
            Self::Season => growing(&regime.season, flux_up),
            Self::Stated => None,
        }
    }
}

fn across(flows: &[SandFlow]) -> Option<Prediction> {
    let found = gross_normal(flows)?;
    Some(Prediction::of_ties(found.axis, &found.ties, found.strength()))
}

fn growing(flows: &[SandFlow], flux_up: f64) -> Option<Prediction> {
    let found = bed_instability(flows, flux_up)?;
    let across = bed_instability::growth(flows, flux_up, found.axis.perpendicular());
    let strength = (found.growth - across) / (found.growth + across);
    Some(Prediction::of_ties(found.axis, &found.ties, strength))
}

fn extending(flows: &[SandFlow], flux_up: f64) -> Option<Prediction> {
    let fingers = fingering(flows, flux_up);
    let sum: f64 = fingers.iter().map(|f| f.along).sum();
    let total: f64 = flows.iter().map(|f| f.weight).sum();
    let strength = fingers.first()?.along / total;
    let way =
        |f: &fingering::Finger| Way { axis: f.toward.axis(), toward: Some(f.toward), share: f.along / sum };
    Some(Prediction { ways: fingers.iter().map(way).collect(), strength: strength.min(1.0) })
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn regime(winds: &[(f64, f64)]) -> Regime {
        let all: Vec<SandFlow> =
            winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect();
        Regime { storms: all[..1].to_vec(), season: all[..1].to_vec(), all }
    }

    #[test]
    fn one_wind_is_crossed_or_followed() {
        for theory in Theory::ALL.into_iter().filter(|t| *t != Theory::Stated) {
            let way = theory.predict(&regime(&[(30.0, 2.0)]), 1.6).expect("a prediction").main();
            let want = if theory.extends() { 30.0 } else { 120.0 };
            crate::assert_close!(way.axis.deg(), want, 1e-6, "{}", theory.name());
        }
    }

    #[test]
    fn without_flow_nothing_is_predicted() {
        for theory in Theory::ALL {
            assert_eq!(theory.predict(&Regime::default(), 1.6), None, "{}", theory.name());
        }
    }

    proptest! {
        #[test]
        fn shares_add_up_and_strengths_are_shares(winds in prop::collection::vec((0.0..360.0f64, 0.01..5.0f64), 1..12)) {
            for theory in Theory::ALL {
                let Some(found) = theory.predict(&regime(&winds), 1.6) else { continue };
                prop_assert!((found.ways.iter().map(|w| w.share).sum::<f64>() - 1.0).abs() < 1e-12);
                prop_assert!((0.0..=1.0 + 1e-12).contains(&found.strength), "{} {}", theory.name(), found.strength);
            }
        }
    }
}
