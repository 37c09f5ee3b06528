//! What turns a wind speed into sand: site, grains, threshold and law together.

use rand::Rng as _;

use crate::ground::{Air, Seed};

use super::drift_potential;
use super::law::Law;
use super::log_law::{friction_ratio, speed_at};
use super::settings::{Assumption, Doubt, Site, Transport, WindError, WindSettings};
use super::threshold::{Bed, Threshold};

/// Seconds in a year.
pub(super) const YEAR_S: f64 = 365.25 * 86_400.0;
const FLUX_UNIT: &str = "kg/m/yr";
/// Impact threshold over fluid threshold (Bagnold's A 0.08 over 0.10): between them lies what keeps
/// sand moving, so both enter the spread of predictions.
const IMPACT_SHARE: f64 = 0.8;

/// Everything that turns a speed into sand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mill {
    assumption: Assumption,
    height_m: f64,
    /// `None` when the body has no air or gravity on record; then only drift potential works.
    ground: Option<(Air, f64)>,
    bed: Option<Bed>,
    /// Threshold friction velocity, m s⁻¹.
    threshold: f64,
    /// Friction velocity for each m s⁻¹ at the anemometer.
    friction: f64,
    /// Knots at 10 m for each m s⁻¹ at the anemometer.
    knots: f64,
}

impl Mill {
    /// The mill as the user states it.
    ///
    /// # Errors
    /// [`WindError`] when site or settings make no sense, or lack what the law needs.
    pub fn new(site: &Site, settings: &WindSettings) -> Result<Self, WindError> {
        check(site, settings)?;
        if matches!(settings.transport, Transport::Physical(_)) {
            site.air.ok_or(WindError::NoAir)?;
            site.gravity.ok_or(WindError::NoGravity)?;
        }
        let assumption = Assumption {
            transport: settings.transport,
            threshold: settings.threshold,
            threshold_ustar: settings.threshold_ustar,
            threshold_factor: 1.0,
            grain_m: settings.grain_m,
            grain_density: settings.grain_density,
            cohesion: settings.cohesion,
            roughness_m: site.roughness_m,
        };
        Ok(Self::build(assumption, site.height_m, site.air.zip(site.gravity)))
    }

    fn build(assumption: Assumption, height_m: f64, ground: Option<(Air, f64)>) -> Self {
        let bed = ground.map(|(air, gravity)| Bed {
            grain: assumption.grain_m,
            grain_density: assumption.grain_density,
            air,
            gravity,
            cohesion: assumption.cohesion,
        });
        let friction = friction_ratio(height_m, assumption.roughness_m);
        let to_ten = speed_at(friction, drift_potential::HEIGHT, assumption.roughness_m);
        let knots = to_ten / drift_potential::KNOT;
        let threshold = match (assumption.transport, &bed, assumption.threshold_ustar) {
            (Transport::Physical(_), _, Some(stated)) => stated,
            (Transport::Physical(_), Some(bed), None) => assumption.threshold.friction_velocity(bed),
            _ => drift_potential::THRESHOLD_KNOTS / knots * friction,
        };
        let threshold = threshold * assumption.threshold_factor;
        Self { assumption, height_m, ground, bed, threshold, friction, knots }
    }

    /// The same site under another assumption. The profile has no meaning where the roughness reaches the
    /// anemometer, so it is held to half that height, or to the stated roughness if that is greater.
    pub fn under(&self, assumption: Assumption) -> Self {
        let most = self.assumption.roughness_m.max(0.5 * self.height_m);
        let roughness_m = assumption.roughness_m.min(most);
        Self::build(Assumption { roughness_m, ..assumption }, self.height_m, self.ground)
    }

    pub fn assumption(&self) -> Assumption {
        self.assumption
    }

    /// Threshold friction velocity, m s⁻¹.
    pub fn threshold(&self) -> f64 {
        self.threshold
    }

    /// Threshold at the anemometer, m s⁻¹.
    pub fn threshold_speed(&self) -> f64 {
        self.threshold / self.friction
    }

    /// The threshold of drift potential at the anemometer, m s⁻¹.
    pub fn drift_potential_threshold(&self) -> f64 {
        drift_potential::THRESHOLD_KNOTS / self.knots
    }

    /// Drift potential, vector units, of a wind of `speed` m s⁻¹ all the time.
    pub fn drift_potential(&self, speed: f64) -> f64 {
        drift_potential::weight(speed * self.knots / self.assumption.threshold_factor)
    }

    /// Vector units, or kg m⁻¹ yr⁻¹, for a wind of `speed` m s⁻¹ at the anemometer all the time.
    pub fn flux(&self, speed: f64) -> f64 {
        match (self.assumption.transport, &self.bed) {
            (Transport::Physical(law), Some(bed)) => {
                law.flux(speed * self.friction, self.threshold, bed) * YEAR_S
            }
            _ => self.drift_potential(speed),
        }
    }

    pub fn unit(&self) -> &'static str {
        match self.assumption.transport {
            Transport::DriftPotential => drift_potential::UNIT,
            Transport::Physical(_) => FLUX_UNIT,
        }
    }

    pub fn law_label(&self) -> &'static str {
        self.assumption.transport.label()
    }

    pub fn label(&self) -> String {
        match self.assumption.transport {
            Transport::DriftPotential => "drift potential over 12 knots".to_owned(),
            Transport::Physical(law) => {
                let whose = match self.assumption.threshold_ustar {
                    Some(stated) => format!("a stated threshold of {stated} m/s"),
                    None => format!("the threshold of {}", self.assumption.threshold.label()),
                };
                format!("{} over {whose}", law.label())
            }
        }
    }

    /// All laws × thresholds, the user's own included, each with the threshold in words; the stated law
    /// alone when nothing physical is known.
    pub fn variants(&self) -> Vec<(Self, String)> {
        if self.ground.is_none() {
            return vec![(*self, "12 knots".to_owned())];
        }
        let mut variants = Vec::new();
        for law in Law::ALL {
            let own = Assumption { transport: Transport::Physical(law), ..self.assumption };
            if own.threshold_ustar.is_some() {
                variants.push((self.under(own), "stated".to_owned()));
            }
            for threshold in Threshold::ALL {
                for (threshold_factor, kind) in [(1.0, "fluid"), (IMPACT_SHARE, "impact")] {
                    let changed = Assumption { threshold, threshold_factor, threshold_ustar: None, ..own };
                    variants.push((self.under(changed), format!("{}, {kind}", threshold.label())));
                }
            }
        }
        variants
    }

    /// The mill of a draw: laws and thresholds in turn, so that each counts the same (White's law, which has
    /// Kawamura's form, is not drawn twice; a stated threshold stands, fluid or impact); grains, cohesion and roughness by chance within their doubt.
    pub fn drawn(&self, doubt: &Doubt, seed: Seed, index: u64) -> Self {
        let mut stream = seed.stream("wind.mill", index);
        let mut within = |value: f64, factor: f64| value * factor.powf(2.0 * stream.random::<f64>() - 1.0);
        let stated = self.assumption;
        let drawn = Assumption {
            grain_m: within(stated.grain_m, doubt.grain),
            grain_density: within(stated.grain_density, doubt.grain_density),
            cohesion: within(stated.cohesion, doubt.cohesion),
            roughness_m: within(stated.roughness_m, doubt.roughness),
            ..stated
        };
        if self.ground.is_none() {
            return self.under(drawn);
        }
        let laws = [Law::Bagnold, Law::Kawamura, Law::Lettau, Law::Kok];
        let at = index as usize;
        self.under(Assumption {
            transport: Transport::Physical(laws[at % 4]),
            threshold: Threshold::ALL[at / 4 % 3],
            threshold_factor: [1.0, IMPACT_SHARE][at / 12 % 2],
            ..drawn
        })
    }
}

impl Transport {
    pub fn label(self) -> &'static str {
        match self {
            Self::DriftPotential => "drift potential",
            Self::Physical(law) => law.label(),
        }
    }
}

fn check(site: &Site, settings: &WindSettings) -> Result<(), WindError> {
    let Site { height_m, roughness_m, .. } = *site;
    let mut positive = vec![
        ("roughness", roughness_m),
        ("grain size", settings.grain_m),
        ("grain density", settings.grain_density),
        ("cohesion", settings.cohesion),
        ("block length", settings.block_days),
        ("greatest speed", settings.greatest_speed),
        ("factor of doubt of the grain size", settings.doubt.grain),
        ("factor of doubt of the grain density", settings.doubt.grain_density),
        ("factor of doubt of the cohesion", settings.doubt.cohesion),
        ("factor of doubt of the roughness", settings.doubt.roughness),
    ];
    if let Some(air) = site.air {
        positive.extend([("air density", air.density), ("air viscosity", air.viscosity)]);
    }
    positive.extend(site.gravity.map(|g| ("gravity", g)));
    positive.extend(settings.threshold_ustar.map(|u| ("threshold friction velocity", u)));
    if let Some((what, value)) = positive.into_iter().find(|(_, v)| !(*v > 0.0 && v.is_finite())) {
        return Err(WindError::NotPositive { what, value });
    }
    if !(height_m > roughness_m && height_m.is_finite()) {
        return Err(WindError::Height { height_m, roughness_m });
    }
    Ok(())
}
