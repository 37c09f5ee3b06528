//! Wind records of the sheet turned into findings, with the regimes the verdicts draw on.

use crate::ground::{Body, Caution, Stopped, WindRecord, Work};
use crate::science::alignment::{FluxUp, Foresight, foresee};
use crate::science::wind::law::Law;
use crate::science::wind::threshold::Threshold;
use crate::science::wind::{self, Doubt, Site, Transport, WindError};

use super::what_if::{self, WhatIf};
use super::{LettauConstant, Sheet, ThresholdLaw, TransportLaw, WindEntry, WindFinding, grains};

/// A record's finding and what the theories need of it.
#[derive(Clone, Debug, PartialEq)]
pub struct WindStudy {
    pub finding: WindFinding,
    /// What every theory predicts from the record and its draws.
    pub foresight: Foresight,
    /// The record under other assumptions.
    pub what_if: Vec<WhatIf>,
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
    let is_earth = body.is_earth();
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
        cohesion: s.cohesion_kg_s2,
        threshold: match s.threshold_law {
            ThresholdLaw::Bagnold => Threshold::Bagnold,
            ThresholdLaw::IversenWhite => Threshold::IversenWhite,
            ThresholdLaw::ShaoLu => Threshold::ShaoLu,
        },
        threshold_ustar: s.threshold_ustar,
        transport: match s.transport_law {
            TransportLaw::DriftPotential => Transport::DriftPotential,
            TransportLaw::Bagnold => Transport::Physical(Law::Bagnold),
            TransportLaw::Kawamura => Transport::Physical(Law::Kawamura),
            TransportLaw::White => Transport::Physical(Law::White),
            TransportLaw::Lettau => Transport::Physical(match s.lettau_constant {
                LettauConstant::High => Law::Lettau,
                LettauConstant::Low => Law::LettauLow,
            }),
            TransportLaw::Kok => Transport::Physical(Law::Kok),
        },
        greatest_speed: s.greatest_speed,
        block_days: s.block_days,
        resamples: s.resamples,
        doubt: Doubt {
            grain: s.grain_doubt,
            grain_density: s.grain_density_doubt,
            cohesion: s.cohesion_doubt,
            roughness: s.roughness_doubt,
        },
        storm_quantile: s.storm_quantile,
    };
    let seed = sheet.seed.child(&format!("wind {}", entry.id.0));
    let a = wind::assess(record, &site, &settings, seed, work)?;
    let v = &sheet.settings.verdict;
    let flux_up = FluxUp { ratio: v.flux_up, doubt: v.flux_up_doubt };
    let foresight = foresee(&a.regime, &a.draws, flux_up, seed, work)?;
    let what_if = what_if::cases(&a, flux_up, s.roughness_doubt, seed, work)?;
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
        storm_speed: a.storm_speed,
        season: a.season,
        sensitivity: a.sensitivity,
        cautions: a.cautions,
        sand: grains::sand(entry, s),
        calendar: a.calendar,
        thinning: a.thinning,
        rounding: a.rounding,
        gusts: a.gusts,
    };
    Ok(WindStudy { finding, foresight, what_if })
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
