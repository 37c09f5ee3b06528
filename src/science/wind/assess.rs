//! The one face of the family: a record in, checked winds and sand flow with intervals out.

use rayon::prelude::*;

use crate::ground::{Caution, Regime, SandFlow, Seed, Stopped, WindRecord, WindSample, Work};

use super::bootstrap::{CELLS_PER_BLOCK, FEWEST_BLOCKS, Plan, intervals};
use super::calendar::{Calendar, CalendarSettings, calendar};
use super::drift_potential;
use super::gusts::{Gusts, gusts};
use super::mill::{Mill, YEAR_S};
use super::movers::Movers;
use super::quality::{self, Checked, SetAside};
use super::regime::{Drift, SEASONS, Season, flows, rose, seasons};
use super::rounding::{Rounding, rounding};
use super::settings::{Assumption, Site, Transport, WindError, WindSettings};
use super::site_cautions;
use super::thinning::{Thinning, thinning};

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
    /// By the chosen law and threshold, for the theories.
    pub regime: Regime,
    /// Bootstrap regimes, each under a law, a threshold, grains and a roughness of its own; empty when the
    /// record cannot be resampled.
    pub draws: Vec<Regime>,
    /// The drift under every law and threshold.
    pub sensitivity: Vec<Sensitivity>,
    /// Winds at least as strong are storms, m s⁻¹ at the anemometer.
    pub storm_speed: Option<f64>,
    /// The months that move most sand.
    pub season: Option<&'static str>,
    /// The record under any other assumption.
    pub replay: Replay,
    pub cautions: Vec<Caution>,
    /// By years, months and seasons; `None` without a clock or without sand.
    pub calendar: Option<Calendar>,
    /// What a longer interval or coarser classes would have hidden.
    pub thinning: Option<Thinning>,
    pub rounding: Rounding,
    /// An upper bound by the gusts of the record.
    pub gusts: Option<Gusts>,
}

/// The drift had another law or threshold been chosen.
#[derive(Clone, Debug, PartialEq)]
pub struct Sensitivity {
    pub law: &'static str,
    /// In words: whose, and fluid or impact.
    pub threshold: String,
    /// m s⁻¹.
    pub threshold_ustar: f64,
    pub drift: Drift,
}

/// A record that can be run again under another assumption.
#[derive(Clone, Debug, PartialEq)]
pub struct Replay {
    mill: Mill,
    movers: Movers,
}

impl Replay {
    /// The mill as stated.
    pub fn mill(&self) -> &Mill {
        &self.mill
    }

    /// The regime by sectors had the assumption been this. Thresholds below a third of the stated one
    /// miss winds that were not kept.
    pub fn regime(&self, assumption: Assumption) -> Regime {
        let mill = self.mill.under(assumption);
        let in_order: Vec<usize> = (0..self.movers.count()).step_by(CELLS_PER_BLOCK).collect();
        self.movers.draw(&in_order, |speed| mill.flux(speed))
    }
}

/// Resultants of the laws that lie farther apart than this, degrees, call for a caution.
const WIDE_TURN_DEG: f64 = 20.0;
/// Winds below this share of the lowest stated threshold move no sand under any assumption tried.
const LEAST_SHARE: f64 = 0.3;

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
    // Each of these steps takes some ten milliseconds on decades of hourly rows.
    work.advance(0)?;

    let per_cell = rows_per_cell(kept.len(), interval_s, settings.block_days);
    let least = LEAST_SHARE * mill.threshold_speed().min(mill.drift_potential_threshold());
    let movers = Movers::new(&kept, per_cell, least, settings.storm_quantile, |v| mill.flux(v));
    work.advance(0)?;
    let regime = movers.regime(|v| mill.flux(v));
    work.advance(0)?;
    let mut flux = Drift::of(&regime.all, mill.unit());
    let plan = Plan::new(movers.count(), seasons_of_cells(&kept, per_cell).as_deref());
    work.advance(0)?;
    let can_draw = !record.is_table && movers.count() >= FEWEST_BLOCKS * CELLS_PER_BLOCK && flux.total > 0.0;
    let fryberger = if site.is_earth {
        let by_practice = |v: f64| mill.drift_potential(v);
        let mut drift = movers.drift(drift_potential::UNIT, by_practice);
        if can_draw && drift.total > 0.0 {
            intervals(&mut drift, &movers.cumulated(by_practice), &plan, settings.resamples, seed, work)?;
        }
        Some(drift)
    } else {
        None
    };
    let variants = mill.variants();
    work.phase("trying laws and thresholds", variants.len() as u64);
    let mut sensitivity = Vec::with_capacity(variants.len());
    for (variant, threshold) in variants {
        work.advance(1)?;
        sensitivity.push(Sensitivity {
            law: variant.law_label(),
            threshold,
            threshold_ustar: variant.threshold(),
            drift: movers.drift(variant.unit(), |v| variant.flux(v)),
        });
    }
    let draws = if can_draw {
        intervals(&mut flux, &movers.cumulated(|v| mill.flux(v)), &plan, settings.resamples, seed, work)?;
        redraw(&movers, &mill, &plan, settings, seed, work)?
    } else {
        Vec::new()
    };
    cautions.extend(law_caution(&flux, &sensitivity));
    if settings.transport == Transport::DriftPotential && !site.is_earth {
        cautions.push(Caution::new(
            "drift-potential-off-earth",
            "Drift potential with its 12-knot threshold is Earth practice; here its size means nothing.",
        ));
    }
    cautions.extend(drift_cautions(record, &kept, &flux, &movers, can_draw, &mill, interval_s));
    cautions.extend(site_cautions::of(site, interval_s));
    let by_calendar = CalendarSettings::of(&mill, interval_s.filter(|_| !record.is_table), settings);
    let calendar = calendar(&kept, |v| mill.flux(v), &by_calendar, seed, work)?;
    let thinning = thinning(&kept, interval_s.filter(|_| !record.is_table), |v| mill.flux(v), work)?;
    let rounding = rounding(&kept, |v| mill.flux(v));
    work.advance(0)?;
    let gusts = gusts(record, &kept, |v| mill.flux(v), mill.unit());
    let seasons = seasons(&kept, &flows_of_rows, mill.unit());
    work.advance(0)?;

    Ok(WindAssessment {
        rows: record.samples.len(),
        used: kept.len() - lost.len(),
        calm: kept.iter().filter(|s| s.speed == Some(0.0)).count(),
        set_aside,
        span,
        interval_s,
        fryberger,
        law: mill.label(),
        threshold_ustar: mill.threshold(),
        threshold_speed_at_height: mill.threshold_speed(),
        rose: rose(&regime.all),
        seasons,
        regime,
        draws,
        sensitivity,
        storm_speed: Some(movers.storm_speed()).filter(|v| v.is_finite()),
        season: movers.season().map(|s| SEASONS[usize::from(s)]),
        replay: Replay { mill, movers },
        flux,
        cautions,
        calendar,
        thinning,
        rounding,
        gusts,
    })
}

/// The record redrawn in blocks, each draw by a mill of its own.
fn redraw(
    movers: &Movers,
    mill: &Mill,
    plan: &Plan,
    settings: &WindSettings,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Regime>, Stopped> {
    work.phase("resampling winds under all laws", u64::from(settings.resamples));
    let draw = |index: u64| {
        work.advance(1)?;
        let drawn = mill.drawn(&settings.doubt, seed, index);
        Ok(movers.draw(&plan.starts(seed, index), |v| drawn.flux(v)))
    };
    (0..u64::from(settings.resamples)).into_par_iter().map(draw).collect()
}

/// Rows in a bootstrap cell; without a clock, a 360th of the record.
fn rows_per_cell(rows: usize, interval_s: Option<f64>, block_days: f64) -> usize {
    match interval_s {
        Some(step) => (block_days * 86_400.0 / CELLS_PER_BLOCK as f64 / step).round().max(1.0) as usize,
        None => rows.div_ceil(360),
    }
}

/// The time of year at which each cell begins, as a share of the year; `None` for a record without
/// a clock or of less than a year.
fn seasons_of_cells(kept: &[WindSample], per_cell: usize) -> Option<Vec<f64>> {
    let times: Vec<f64> = kept.iter().map(|s| s.time.map(|t| t as f64)).collect::<Option<_>>()?;
    let (first, last) = times.iter().fold((f64::MAX, f64::MIN), |(a, b), t| (a.min(*t), b.max(*t)));
    (last - first >= 0.95 * YEAR_S)
        .then(|| times.iter().step_by(per_cell).map(|t| (t / YEAR_S).rem_euclid(1.0)).collect())
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

/// Says so when another law or threshold would turn the resultant.
fn law_caution(flux: &Drift, sensitivity: &[Sensitivity]) -> Option<Caution> {
    let chosen = flux.toward?;
    let turns = sensitivity.iter().filter_map(|s| s.drift.toward).map(|toward| toward.turn_from(chosen));
    let (left, right) = turns.fold((0.0f64, 0.0f64), |(l, r), turn| (l.min(turn), r.max(turn)));
    (right - left > WIDE_TURN_DEG).then(|| {
        Caution::new(
            "law-dependent-drift",
            format!(
                "Under other laws and thresholds the resultant points anywhere from {:.0}° to {:.0}° (here {:.0}°).",
                chosen.rotated(left).deg(),
                chosen.rotated(right).deg(),
                chosen.deg()
            ),
        )
    })
}

fn drift_cautions(
    record: &WindRecord,
    kept: &[WindSample],
    flux: &Drift,
    movers: &Movers,
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
                mill.threshold_speed()
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
        let mut totals = movers.totals(|v| mill.flux(v));
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
                    movers.count()
                ),
            ));
        }
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Azimuth, Body};
    use rand::Rng as _;

    fn site() -> Site {
        let earth = Body::earth();
        Site { height_m: 10.0, roughness_m: 1e-3, air: earth.air, gravity: earth.gravity, is_earth: true }
    }

    fn settings() -> WindSettings {
        WindSettings { block_days: 30.0, resamples: 60, ..WindSettings::default() }
    }

    /// Three-hourly winds of a year: westerly in winter, southerly in summer, turned by `turn`.
    fn two_seasons(turn: f64) -> WindRecord {
        let mut stream = Seed(3).stream("two seasons", 0);
        let samples = (0..8 * 365)
            .map(|i| {
                let winter = !(90 * 8..270 * 8).contains(&i);
                let from = if winter { 270.0 } else { 180.0 } + 40.0 * (stream.random::<f64>() - 0.5);
                WindSample {
                    line: i + 1,
                    time: Some(i64::from(i) * 10_800),
                    speed: Some(12.0 * stream.random::<f64>()),
                    from: Some(Azimuth::from_deg(from + turn)),
                    weight: 1.0,
                }
            })
            .collect();
        WindRecord { samples, is_table: false, gusts: Vec::new() }
    }

    #[test]
    fn turning_the_record_by_whole_sectors_turns_everything() {
        let found =
            |turn| assess(&two_seasons(turn), &site(), &settings(), Seed(1), &Work::quiet()).expect("one");
        let (a, b) = (found(0.0), found(35.0));
        let turned = |p: Option<Azimuth>, q: Option<Azimuth>| {
            p.zip(q).map_or(f64::NAN, |(p, q)| q.rotated(-35.0).turn_from(p).abs())
        };
        assert!(turned(a.flux.toward, b.flux.toward) < 1e-9);
        crate::assert_close!(a.flux.total, b.flux.total, 1e-9 * a.flux.total, "total");
        let half = |w: &WindAssessment| w.flux.toward_ci95_half_deg.unwrap_or(f64::NAN);
        crate::assert_close!(half(&a), half(&b), 1e-6, "interval");
        for (p, q) in a.draws.iter().zip(&b.draws) {
            assert!(turned(Drift::of(&p.all, "").toward, Drift::of(&q.all, "").toward) < 1e-6);
        }
        let summer = &a.seasons[2].drift;
        assert!(summer.toward.is_some_and(|t| t.turn_from(Azimuth::from_deg(0.0)).abs() < 5.0), "{summer:?}");
        assert!(a.cautions.iter().any(|c| c.code == "coarse-sampling"));
    }

    #[test]
    fn what_is_missing_is_named() {
        let record = two_seasons(0.0);
        let run = |site: Site| assess(&record, &site, &settings(), Seed(1), &Work::quiet());
        assert_eq!(run(Site { air: None, ..site() }), Err(WindError::NoAir));
        assert_eq!(run(Site { gravity: None, ..site() }), Err(WindError::NoGravity));
        assert!(matches!(run(Site { height_m: 1e-4, ..site() }), Err(WindError::Height { .. })));
        let stopping = Work::quiet();
        stopping.stop();
        let stopped = assess(&record, &site(), &settings(), Seed(1), &stopping);
        assert_eq!(stopped, Err(WindError::Stopped(Stopped)));
    }

    #[test]
    fn drift_potential_needs_no_air() {
        let bare = Site { air: None, gravity: None, is_earth: false, ..site() };
        let by_practice = WindSettings { transport: Transport::DriftPotential, ..settings() };
        let found = assess(&two_seasons(0.0), &bare, &by_practice, Seed(1), &Work::quiet()).expect("one");
        assert!(found.fryberger.is_none() && found.flux.total > 0.0 && found.draws.len() == 60);
        assert!(found.cautions.iter().any(|c| c.code == "drift-potential-off-earth"));
        crate::assert_close!(
            found.threshold_speed_at_height,
            12.0 * 1852.0 / 3600.0,
            1e-9,
            "12 knots at 10 m"
        );
    }
}
