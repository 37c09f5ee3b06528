//! The one face of the family: a record in, checked winds and sand flow with intervals out.

use crate::ground::{Air, Caution, SandFlow, Seed, Stopped, WindRecord, WindSample, Work};

use super::bootstrap::{CELLS_PER_BLOCK, Cells, FEWEST_BLOCKS, intervals, starts};
use super::drift_potential;
use super::law::Law;
use super::log_law::{friction_ratio, speed_at};
use super::quality::{self, Checked, SetAside};
use super::regime::{Drift, Season, flows, gathered, rose, seasons};
use super::threshold::{Bed, Threshold};

/// Where the mast stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Site {
    /// Height of the anemometer above ground, m.
    pub height_m: f64,
    /// Aerodynamic roughness of the ground, m.
    pub roughness_m: f64,
    /// Near-surface air; needed by the physical laws.
    pub air: Option<Air>,
    /// m s⁻²; needed by the physical laws.
    pub gravity: Option<f64>,
    /// Whether the Earth practice of drift potential applies.
    pub is_earth: bool,
}

/// How winds are turned into sand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WindSettings {
    /// Grain diameter, m.
    pub grain_m: f64,
    /// kg m⁻³.
    pub grain_density: f64,
    pub threshold: Threshold,
    pub transport: Transport,
    /// Speeds above this are set aside as impossible, m s⁻¹.
    pub greatest_speed: f64,
    /// Length of a bootstrap block, days.
    pub block_days: f64,
    pub resamples: u32,
}

/// Drift potential or a physical law.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Transport {
    DriftPotential,
    Physical(Law),
}

/// What a record says about sand.
#[derive(Clone, Debug, PartialEq)]
pub struct WindAssessment {
    pub rows: usize,
    pub used: usize,
    pub calm: usize,
    pub set_aside: Vec<SetAside>,
    /// First and last time, seconds since 1970 in the record's clock.
    pub span: Option<[i64; 2]>,
    pub interval_s: Option<f64>,
    /// Drift potential in knot units; `None` off Earth.
    pub fryberger: Option<Drift>,
    /// By the chosen law and threshold.
    pub flux: Drift,
    pub law: String,
    pub threshold_ustar: f64,
    pub threshold_speed_at_height: f64,
    /// Flow by 5° sectors, for show.
    pub rose: Vec<SandFlow>,
    pub seasons: Vec<Season>,
    /// Flow by exact direction, for the theories.
    pub regime: Vec<SandFlow>,
    /// Bootstrap regimes, each under one law and threshold of `sensitivity` in turn; empty when the
    /// record cannot be resampled.
    pub draws: Vec<Vec<SandFlow>>,
    /// The drift under every law and threshold.
    pub sensitivity: Vec<Sensitivity>,
    pub cautions: Vec<Caution>,
}

/// The drift had another law or threshold been chosen.
#[derive(Clone, Debug, PartialEq)]
pub struct Sensitivity {
    pub law: &'static str,
    pub threshold: String,
    pub threshold_ustar: f64,
    pub drift: Drift,
    pub regime: Vec<SandFlow>,
}

/// Why there is no assessment.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum WindError {
    #[error(
        "the body has no air: no wind moves sand there; give its air's density and viscosity, or another body"
    )]
    NoAir,
    #[error("the body's gravity is not known; give it in m/s², or choose drift potential")]
    NoGravity,
    #[error(
        "the anemometer stands at {height_m} m over a roughness of {roughness_m} m; the height must be the greater"
    )]
    Height { height_m: f64, roughness_m: f64 },
    #[error("{what} is {value}; it must be above zero")]
    NotPositive { what: &'static str, value: f64 },
    #[error("no row of the record can be used: {reasons}")]
    NothingLeft { reasons: String },
    #[error(transparent)]
    Stopped(#[from] Stopped),
}

const YEAR_S: f64 = 365.25 * 86_400.0;
const FLUX_UNIT: &str = "kg/m/yr";
/// Impact threshold over fluid threshold (Bagnold's A 0.08 over 0.10): between them lies what keeps
/// sand moving, so both enter the spread of predictions.
const IMPACT_SHARE: f64 = 0.8;

/// Checks a record and finds the sand it moves.
///
/// The same record, settings and seed give the same bits.
///
/// # Errors
/// [`WindError`] when site or settings make no sense, nothing is left of the record, or on stop.
pub fn assess(
    record: &WindRecord,
    site: &Site,
    settings: &WindSettings,
    seed: Seed,
    work: &Work,
) -> Result<WindAssessment, WindError> {
    let mill = Mill::new(site, settings)?;
    let checked = quality::check(record, settings.greatest_speed, work)?;
    if checked.kept.is_empty() {
        let reasons = checked.set_aside.iter().map(|s| s.text.as_str()).collect::<Vec<_>>().join("; ");
        return Err(WindError::NothingLeft { reasons });
    }
    let Checked { kept, mut set_aside, mut cautions, interval_s, span } = checked;
    let (flows_of_rows, lost) = flows(&kept, |v| mill.flux(v));
    set_aside.extend(without_direction(&kept, &lost));
    let regime = gathered(&flows_of_rows);
    let mut flux = Drift::of(&regime, mill.unit());

    let per_cell = rows_per_cell(kept.len(), interval_s, settings.block_days);
    let cells = Cells::cut(&flows_of_rows, per_cell);
    let can_draw = !record.is_table && cells.count() >= FEWEST_BLOCKS * CELLS_PER_BLOCK && flux.total > 0.0;
    let fryberger = site.is_earth.then(|| {
        let (dp, _) = flows(&kept, |v| mill.drift_potential(v));
        (Drift::of(&gathered(&dp), drift_potential::UNIT), Cells::cut(&dp, per_cell))
    });
    let fryberger = match fryberger {
        Some((mut drift, dp_cells)) => {
            if can_draw && drift.total > 0.0 {
                intervals(&mut drift, &dp_cells, settings.resamples, seed, work)?;
            }
            Some(drift)
        }
        None => None,
    };
    let mut draws = Vec::new();
    let variants = mill.variants();
    let sensitivity = variants.iter().map(|v| v.sensitivity(&kept)).collect();
    if can_draw {
        intervals(&mut flux, &cells, settings.resamples, seed, work)?;
        let cut: Vec<Cells> =
            variants.iter().map(|v| Cells::cut(&flows(&kept, |u| v.mill.flux(u)).0, per_cell)).collect();
        work.phase("resampling winds under all laws", u64::from(settings.resamples));
        for index in 0..settings.resamples {
            work.advance(1)?;
            let which = &cut[index as usize % cut.len()];
            draws.push(which.draw(&starts(which.count(), seed, u64::from(index))));
        }
    }
    if settings.transport == Transport::DriftPotential && !site.is_earth {
        cautions.push(Caution::new(
            "drift-potential-off-earth",
            "Drift potential with its 12-knot threshold is Earth practice; here its size means nothing.",
        ));
    }
    cautions.extend(drift_cautions(record, &kept, &flux, &cells, can_draw, &mill, interval_s));

    Ok(WindAssessment {
        rows: record.samples.len(),
        used: kept.len() - lost.len(),
        calm: kept.iter().filter(|s| s.speed == Some(0.0)).count(),
        set_aside,
        span,
        interval_s,
        fryberger,
        law: mill.label(),
        threshold_ustar: mill.threshold,
        threshold_speed_at_height: mill.threshold / mill.friction,
        rose: rose(&regime),
        seasons: seasons(&kept, &flows_of_rows, mill.unit()),
        regime,
        draws,
        sensitivity,
        flux,
        cautions,
    })
}

/// Everything that turns a speed into sand.
#[derive(Clone, Copy, Debug)]
struct Mill {
    transport: Transport,
    /// `None` when the body has no air or gravity on record; then only drift potential works.
    bed: Option<Bed>,
    /// Threshold friction velocity, m s⁻¹.
    threshold: f64,
    model: Threshold,
    /// Friction velocity for each m s⁻¹ at the anemometer.
    friction: f64,
    /// Knots at 10 m for each m s⁻¹ at the anemometer.
    knots: f64,
}

struct Variant {
    mill: Mill,
    threshold: String,
}

impl Mill {
    fn new(site: &Site, settings: &WindSettings) -> Result<Self, WindError> {
        let Site { height_m, roughness_m, .. } = *site;
        for (what, value) in [
            ("roughness", roughness_m),
            ("grain size", settings.grain_m),
            ("grain density", settings.grain_density),
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

    fn drift_potential(&self, speed: f64) -> f64 {
        drift_potential::weight(speed * self.knots)
    }

    /// Vector units, or kg m⁻¹ yr⁻¹, for a wind of `speed` m s⁻¹ at the anemometer all the time.
    fn flux(&self, speed: f64) -> f64 {
        match (self.transport, &self.bed) {
            (Transport::Physical(law), Some(bed)) => {
                law.flux(speed * self.friction, self.threshold, bed) * YEAR_S
            }
            _ => self.drift_potential(speed),
        }
    }

    fn unit(&self) -> &'static str {
        match self.transport {
            Transport::DriftPotential => drift_potential::UNIT,
            Transport::Physical(_) => FLUX_UNIT,
        }
    }

    fn law_label(&self) -> &'static str {
        match self.transport {
            Transport::DriftPotential => "drift potential",
            Transport::Physical(law) => law.label(),
        }
    }

    fn label(&self) -> String {
        match self.transport {
            Transport::DriftPotential => "drift potential over 12 knots".to_owned(),
            Transport::Physical(law) => {
                format!("{} over the threshold of {}", law.label(), self.model.label())
            }
        }
    }

    /// All laws × thresholds; the chosen law alone when nothing physical is known.
    fn variants(&self) -> Vec<Variant> {
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

impl Variant {
    fn sensitivity(&self, kept: &[WindSample]) -> Sensitivity {
        let regime = gathered(&flows(kept, |v| self.mill.flux(v)).0);
        Sensitivity {
            law: self.mill.law_label(),
            threshold: self.threshold.clone(),
            threshold_ustar: self.mill.threshold,
            drift: Drift::of(&regime, self.mill.unit()),
            regime,
        }
    }
}

/// Rows in a bootstrap cell; without a clock, a 360th of the record.
fn rows_per_cell(rows: usize, interval_s: Option<f64>, block_days: f64) -> usize {
    match interval_s {
        Some(step) => (block_days * 86_400.0 / CELLS_PER_BLOCK as f64 / step).round().max(1.0) as usize,
        None => rows.div_ceil(360),
    }
}

/// Strong winds without a direction, set aside by name.
fn without_direction(kept: &[WindSample], lost: &[usize]) -> Option<SetAside> {
    if lost.is_empty() {
        return None;
    }
    let named: Vec<String> = lost
        .iter()
        .take(5)
        .map(|&at| format!("line {} ({:.2} m/s)", kept[at].line, kept[at].speed.unwrap_or(0.0)))
        .collect();
    let more = if lost.len() > 5 { format!(" and {} more", lost.len() - 5) } else { String::new() };
    Some(SetAside {
        code: "no-direction",
        count: lost.len(),
        text: format!("wind above threshold without a direction: {}{more}", named.join(", ")),
    })
}

fn drift_cautions(
    record: &WindRecord,
    kept: &[WindSample],
    flux: &Drift,
    cells: &Cells,
    can_draw: bool,
    mill: &Mill,
    interval_s: Option<f64>,
) -> Vec<Caution> {
    let mut cautions = Vec::new();
    if flux.total == 0.0 {
        let greatest = kept.iter().filter_map(|s| s.speed).fold(0.0, f64::max);
        cautions.push(Caution::new(
            "no-drift",
            format!(
                "No wind passes the threshold of {:.2} m/s at the anemometer (greatest {greatest:.2} m/s): no drift.",
                mill.threshold / mill.friction
            ),
        ));
        return cautions;
    }
    if record.is_table {
        cautions.push(Caution::new(
            "table",
            "The record is a frequency table: speeds are class middles, and without the order of the winds there is no \
             interval.",
        ));
    } else if !can_draw {
        cautions.push(Caution::new(
            "too-short-to-resample",
            format!("The record holds fewer than {FEWEST_BLOCKS} blocks: no interval can be given."),
        ));
    }
    if !record.is_table && interval_s.is_some() {
        let mut totals = cells.totals();
        totals.sort_by(|a, b| b.total_cmp(a));
        let half = 0.5 * totals.iter().sum::<f64>();
        let mut sum = 0.0;
        let days = totals
            .iter()
            .take_while(|t| {
                let below = sum < half;
                sum += **t;
                below
            })
            .count();
        if days <= 10 {
            cautions.push(Caution::new(
                "few-storms",
                format!(
                    "Half of the sand moves in {days} of {} spells: the drift hangs on a few storms.",
                    cells.count()
                ),
            ));
        }
    }
    cautions
}
