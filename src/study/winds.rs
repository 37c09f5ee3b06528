//! Wind records of the sheet turned into findings, with the regimes the verdicts draw on.

use crate::ground::{Body, Caution, SandFlow, Stopped, WindRecord, Work};
use crate::science::wind::law::Law;
use crate::science::wind::threshold::Threshold;
use crate::science::wind::{self, Site, Transport, WindError};

use super::{Sheet, ThresholdLaw, TransportLaw, WindEntry, WindFinding};

/// A record's finding and what the theories need of it.
#[derive(Clone, Debug, PartialEq)]
pub struct WindStudy {
    pub finding: WindFinding,
    /// Sand flow by exact direction.
    pub regime: Vec<SandFlow>,
    /// Bootstrap regimes.
    pub draws: Vec<Vec<SandFlow>>,
}

/// Assesses one record of the sheet.
///
/// # Errors
/// [`WindError`]; the caller names the record.
pub fn study(
    sheet: &Sheet,
    entry: &WindEntry,
    record: &WindRecord,
    work: &Work,
) -> Result<WindStudy, WindError> {
    let body = entry.body.clone().unwrap_or_else(Body::earth);
    let is_earth = body.name == Body::earth().name;
    let s = &sheet.settings.wind;
    let site = Site {
        height_m: entry.height_m,
        roughness_m: entry.roughness_m,
        air: body.air,
        gravity: body.gravity,
        is_earth,
    };
    let settings = wind::WindSettings {
        grain_m: s.grain_m,
        grain_density: s.grain_density,
        threshold: match s.threshold_law {
            ThresholdLaw::Bagnold => Threshold::Bagnold,
            ThresholdLaw::IversenWhite => Threshold::IversenWhite,
            ThresholdLaw::ShaoLu => Threshold::ShaoLu,
        },
        transport: match s.transport_law {
            TransportLaw::DriftPotential => Transport::DriftPotential,
            TransportLaw::Bagnold => Transport::Physical(Law::Bagnold),
            TransportLaw::Kawamura => Transport::Physical(Law::Kawamura),
            TransportLaw::White => Transport::Physical(Law::White),
            TransportLaw::Lettau => Transport::Physical(Law::Lettau),
            TransportLaw::Kok => Transport::Physical(Law::Kok),
        },
        greatest_speed: s.greatest_speed,
        block_days: s.block_days,
        resamples: s.resamples,
    };
    let seed = sheet.seed.child(&format!("wind {}", entry.id.0));
    let a = wind::assess(record, &site, &settings, seed, work)?;
    let finding = WindFinding {
        id: entry.id,
        name: entry.name.clone(),
        rows: a.rows,
        used: a.used,
        calm: a.calm,
        set_aside: a.set_aside,
        span: a.span,
        interval_s: a.interval_s,
        fryberger: a.fryberger,
        flux: a.flux,
        law: a.law,
        threshold_ustar: a.threshold_ustar,
        threshold_speed_at_height: a.threshold_speed_at_height,
        rose: a.rose,
        seasons: a.seasons,
        cautions: a.cautions,
        calendar: a.calendar,
        thinning: a.thinning,
        rounding: a.rounding,
        gusts: a.gusts,
    };
    Ok(WindStudy { finding, regime: a.regime, draws: a.draws })
}

/// Splits a failure into a stop, which ends the run, and words, which name the record.
///
/// # Errors
/// [`Stopped`].
pub fn in_words(error: WindError) -> Result<String, Stopped> {
    match error {
        WindError::Stopped(stopped) => Err(stopped),
        other => Ok(other.to_string()),
    }
}

/// A caution that a record lies on another body than the raster.
pub fn other_body(entry: &WindEntry, raster_body: &Body) -> Option<Caution> {
    let body = entry.body.as_ref().map_or("Earth", |b| b.name.as_str());
    (body != raster_body.name).then(|| {
        Caution::new(
            "other-body",
            format!(
                "The record “{}” is taken on {body}, the raster lies on {}.",
                entry.name, raster_body.name
            ),
        )
    })
}
