//! The one face of the family: a record in, checked winds and sand flow with intervals out.

use crate::ground::{Caution, SandFlow, Seed, WindRecord, WindSample, Work};

use super::bootstrap::{CELLS_PER_BLOCK, Cells, FEWEST_BLOCKS, Plan, intervals};
use super::drift_potential;
use super::mill::{Mill, Variant, YEAR_S};
use super::quality::{self, Checked, SetAside};
use super::regime::{Drift, Season, flows, gathered, rose, seasons};
use super::settings::{Site, Transport, WindError, WindSettings};

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
    let plan = Plan::new(cells.count(), interval_s.map(|step| YEAR_S / step / per_cell as f64));
    let can_draw = !record.is_table && cells.count() >= FEWEST_BLOCKS * CELLS_PER_BLOCK && flux.total > 0.0;
    let fryberger = site.is_earth.then(|| {
        let (dp, _) = flows(&kept, |v| mill.drift_potential(v));
        (Drift::of(&gathered(&dp), drift_potential::UNIT), Cells::cut(&dp, per_cell))
    });
    let fryberger = match fryberger {
        Some((mut drift, dp_cells)) => {
            if can_draw && drift.total > 0.0 {
                intervals(&mut drift, &dp_cells, &plan, settings.resamples, seed, work)?;
            }
            Some(drift)
        }
        None => None,
    };
    let mut draws = Vec::new();
    let variants = mill.variants();
    let sensitivity = variants.iter().map(|v| sensitivity(v, &kept)).collect();
    if can_draw {
        intervals(&mut flux, &cells, &plan, settings.resamples, seed, work)?;
        let cut: Vec<Cells> =
            variants.iter().map(|v| Cells::cut(&flows(&kept, |u| v.mill.flux(u)).0, per_cell)).collect();
        work.phase("resampling winds under all laws", u64::from(settings.resamples));
        for index in 0..settings.resamples {
            work.advance(1)?;
            let which = &cut[index as usize % cut.len()];
            draws.push(which.draw(&plan.starts(seed, u64::from(index))));
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

/// The drift of the checked winds under a variant.
fn sensitivity(variant: &Variant, kept: &[WindSample]) -> Sensitivity {
    let regime = gathered(&flows(kept, |v| variant.mill.flux(v)).0);
    Sensitivity {
        law: variant.mill.law_label(),
        threshold: variant.threshold.clone(),
        threshold_ustar: variant.mill.threshold,
        drift: Drift::of(&regime, variant.mill.unit()),
        regime,
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
