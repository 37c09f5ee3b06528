//! What turns a wind speed into sand: site, grains, threshold and law together.

use super::drift_potential;
use super::law::Law;
use super::log_law::{friction_ratio, speed_at};
use super::settings::{Site, Transport, WindError, WindSettings};
use super::threshold::{Bed, Threshold};

/// Seconds in a year.
pub(super) const YEAR_S: f64 = 365.25 * 86_400.0;
const FLUX_UNIT: &str = "kg/m/yr";
/// Impact threshold over fluid threshold (Bagnold's A 0.08 over 0.10): between them lies what keeps
/// sand moving, so both enter the spread of predictions.
const IMPACT_SHARE: f64 = 0.8;

/// Everything that turns a speed into sand.
#[derive(Clone, Copy, Debug)]
pub(super) struct Mill {
    transport: Transport,
    /// `None` when the body has no air or gravity on record; then only drift potential works.
    bed: Option<Bed>,
    /// Threshold friction velocity, m s⁻¹.
    pub threshold: f64,
    model: Threshold,
    /// Friction velocity for each m s⁻¹ at the anemometer.
    pub friction: f64,
    /// Knots at 10 m for each m s⁻¹ at the anemometer.
    knots: f64,
}

/// The same mill under another law and threshold.
pub(super) struct Variant {
    pub mill: Mill,
    /// Which threshold, in words.
    pub threshold: String,
}

impl Mill {
    pub fn new(site: &Site, settings: &WindSettings) -> Result<Self, WindError> {
        let Site { height_m, roughness_m, .. } = *site;
        for (what, value) in [
            ("roughness", roughness_m),
            ("grain size", settings.grain_m),
            ("grain density", settings.grain_density),
            ("cohesion", settings.cohesion),
            ("block length", settings.block_days),
            ("greatest speed", settings.greatest_speed),
        ] {
            if !(value > 0.0 && value.is_finite()) {
                return Err(WindError::NotPositive { what, value });
            }
        }
        if !(height_m > roughness_m && height_m.is_finite()) {
            return Err(WindError::Height { height_m, roughness_m });
        }
        if let Some(air) = site.air {
            for (what, value) in [("air density", air.density), ("air viscosity", air.viscosity)] {
                if !(value > 0.0 && value.is_finite()) {
                    return Err(WindError::NotPositive { what, value });
                }
            }
        }
        if let Some(value) = site.gravity.filter(|g| !(*g > 0.0 && g.is_finite())) {
            return Err(WindError::NotPositive { what: "gravity", value });
        }
        let bed = site.air.zip(site.gravity).map(|(air, gravity)| Bed {
            grain: settings.grain_m,
            grain_density: settings.grain_density,
            air,
            gravity,
            cohesion: settings.cohesion,
        });
        let friction = friction_ratio(height_m, roughness_m);
        let to_ten = speed_at(friction, drift_potential::HEIGHT, roughness_m);
        let knots = to_ten / drift_potential::KNOT;
        let threshold = match (settings.transport, bed) {
            (Transport::DriftPotential, _) => drift_potential::THRESHOLD_KNOTS / knots * friction,
            (Transport::Physical(_), Some(bed)) => settings.threshold.friction_velocity(&bed),
            (Transport::Physical(_), None) if site.air.is_none() => return Err(WindError::NoAir),
            (Transport::Physical(_), None) => return Err(WindError::NoGravity),
        };
        Ok(Self { transport: settings.transport, bed, threshold, model: settings.threshold, friction, knots })
    }

    pub fn drift_potential(&self, speed: f64) -> f64 {
        drift_potential::weight(speed * self.knots)
    }

    /// Vector units, or kg m⁻¹ yr⁻¹, for a wind of `speed` m s⁻¹ at the anemometer all the time.
    pub fn flux(&self, speed: f64) -> f64 {
        match (self.transport, &self.bed) {
            (Transport::Physical(law), Some(bed)) => {
                law.flux(speed * self.friction, self.threshold, bed) * YEAR_S
            }
            _ => self.drift_potential(speed),
        }
    }

    pub fn unit(&self) -> &'static str {
        match self.transport {
            Transport::DriftPotential => drift_potential::UNIT,
            Transport::Physical(_) => FLUX_UNIT,
        }
    }

    pub fn law_label(&self) -> &'static str {
        match self.transport {
            Transport::DriftPotential => "drift potential",
            Transport::Physical(law) => law.label(),
        }
    }

    /// Whether no other law gives the same shares of flux: White's is Kawamura's times a constant,
    /// Lettau's differ by theirs.
    pub fn is_of_its_own_form(&self) -> bool {
        !matches!(self.transport, Transport::Physical(Law::White | Law::LettauLow))
    }

    pub fn label(&self) -> String {
        match self.transport {
            Transport::DriftPotential => "drift potential over 12 knots".to_owned(),
            Transport::Physical(law) => {
                format!("{} over the threshold of {}", law.label(), self.model.label())
            }
        }
    }

    /// All laws × thresholds; the chosen law alone when nothing physical is known.
    pub fn variants(&self) -> Vec<Variant> {
        let Some(bed) = self.bed else {
            return vec![Variant { mill: *self, threshold: "12 knots".to_owned() }];
        };
        let mut variants = Vec::new();
        for law in Law::ALL {
            for model in Threshold::ALL {
                for (share, kind) in [(1.0, "fluid"), (IMPACT_SHARE, "impact")] {
                    let threshold = share * model.friction_velocity(&bed);
                    variants.push(Variant {
                        mill: Self { transport: Transport::Physical(law), threshold, model, ..*self },
                        threshold: format!("{}, {kind}", model.label()),
                    });
                }
            }
        }
        variants
    }
}
