//! What the sampling interval and coarse speed classes hide, shown on the record itself: it is
//! thinned, averaged and binned, and the drift worked out anew.

use std::collections::BTreeMap;

use crate::ground::{Azimuth, Method, Stopped, Symbol, WindSample, Work};

use super::regime::{Drift, flows, gathered};

/// The record thinned, averaged, and cut into speed classes.
pub const METHOD: Method = Method {
    id: "wind.thinning",
    name: "The record thinned",
    question: "What would the drift have been had the wind been read more seldom, or in coarse classes?",
    formula: "thinned to T: rows of phase p, ⌊t/Δ⌋ ≡ p (mod T/Δ), for every phase; averaged over T: speed = mean of v, \
              direction of Σ v e^{iθ}; classes: v → middle of its class; each by the same law, against the whole record",
    symbols: &[
        Symbol { symbol: "T", meaning: "sampling interval tried", unit: "h" },
        Symbol { symbol: "Δ", meaning: "interval of the record", unit: "h" },
        Symbol { symbol: "t", meaning: "time", unit: "h" },
        Symbol { symbol: "v, θ", meaning: "speed and direction of a row", unit: "m s⁻¹, deg" },
    ],
    assumptions: &["What happens between the record's own rows is not known: it can only be thinned further"],
    limits: &[
        "Thinning leaves the mean over phases as it is and widens the range; averaging lowers the flux, which grows with a power of the speed",
        "Phases are kept apart by the clock, so a daily wind shows in the range at 12 and 24 hours",
    ],
    sources: &[super::regime::FRYBERGER],
};

/// Mean and range over the phases.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range {
    pub mean: f64,
    pub low: f64,
    pub high: f64,
}

/// The record read every `hours` only.
#[derive(Clone, Debug, PartialEq)]
pub struct Thinned {
    pub hours: f64,
    /// Ways to begin.
    pub phases: usize,
    /// Total drift over that of the whole record.
    pub total: Range,
    /// Resultant over total; `None` when a phase has no drift.
    pub ratio: Option<Range>,
    /// Turn of the resultant from that of the whole record, degrees clockwise.
    pub turn_deg: Option<Range>,
    /// The winds averaged over the same time.
    pub averaged: Changed,
}

/// The record with its speeds in classes.
#[derive(Clone, Debug, PartialEq)]
pub struct Classed {
    pub name: &'static str,
    pub change: Changed,
}

/// A drift held against that of the whole record.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Changed {
    /// Total drift over that of the whole record.
    pub total: f64,
    pub ratio: Option<f64>,
    /// Turn of the resultant, degrees clockwise.
    pub turn_deg: Option<f64>,
}

/// What thinning and classes do to one record.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Thinning {
    /// Of the whole record.
    pub ratio: Option<f64>,
    pub thinned: Vec<Thinned>,
    pub classed: Vec<Classed>,
}

/// Intervals tried, hours.
const HOURS: [i64; 5] = [2, 3, 6, 12, 24];
const HOUR_S: i64 = 3600;
const KNOT: f64 = 1852.0 / 3600.0;
/// Lower bounds of the speed classes of printed wind tables, knots (D8); the last is open.
const TABLE_CLASSES: [f64; 10] = [0.0, 0.5, 3.5, 6.5, 10.5, 16.5, 21.5, 27.5, 33.5, 40.5];

/// Thins, averages and bins a checked record under `flux`; `None` without sand. Without a clock only the
/// classes are tried.
///
/// # Errors
/// [`Stopped`] when asked to.
pub fn thinning(
    kept: &[WindSample],
    interval_s: Option<f64>,
    flux: impl Fn(f64) -> f64,
    work: &Work,
) -> Result<Option<Thinning>, Stopped> {
    let of = |samples: &[WindSample]| Drift::of(&gathered(&flows(samples, &flux).0), "");
    let whole = of(kept);
    if whole.total <= 0.0 {
        return Ok(None);
    }
    let mut found = Thinning { ratio: whole.ratio, ..Thinning::default() };
    work.phase("thinning winds", HOURS.len() as u64);
    if let Some(step) = interval_s.map(|s| s.round() as i64).filter(|s| *s > 0) {
        for hours in HOURS {
            work.advance(1)?;
            let every = hours * HOUR_S / step;
            if every >= 2 && every * step == hours * HOUR_S {
                found.thinned.extend(thinned(kept, step, every, &of, &whole, work)?);
            }
        }
    }
    let classes: [(&str, &dyn Fn(f64) -> f64); 3] = [
        ("classes of wind tables, 11–16, 17–21, 22–27 … knots", &table_class),
        ("classes of 1 m/s", &|v| v.floor() + 0.5),
        ("classes of 5 m/s", &|v| 5.0 * (v / 5.0).floor() + 2.5),
    ];
    for (name, class) in classes {
        work.advance(1)?;
        let binned = kept.iter().map(|s| WindSample { speed: s.speed.map(class), ..*s });
        let change = changed(&of(&binned.collect::<Vec<_>>()), &whole);
        found.classed.push(Classed { name, change });
    }
    Ok(Some(found))
}

/// Every phase of the record read at each `every`-th of its steps; `None` when phases have no rows.
fn thinned(
    kept: &[WindSample],
    step: i64,
    every: i64,
    of: &impl Fn(&[WindSample]) -> Drift,
    whole: &Drift,
    work: &Work,
) -> Result<Option<Thinned>, Stopped> {
    let mut phases: BTreeMap<i64, Vec<WindSample>> = BTreeMap::new();
    let mut spans: BTreeMap<i64, Vec<WindSample>> = BTreeMap::new();
    for sample in kept {
        // A whole record has a clock when it has an interval.
        let Some(tick) = sample.time.map(|t| t.div_euclid(step)) else { return Ok(None) };
        phases.entry(tick.rem_euclid(every)).or_default().push(*sample);
        spans.entry(tick.div_euclid(every)).or_default().push(*sample);
    }
    let mut drifts = Vec::with_capacity(phases.len());
    for rows in phases.values() {
        work.advance(0)?;
        drifts.push(of(rows));
    }
    let averages: Vec<WindSample> = spans.values().filter_map(|rows| average(rows)).collect();
    let all = |value: &dyn Fn(&Drift) -> Option<f64>| {
        let values: Option<Vec<f64>> = drifts.iter().map(value).collect();
        values.as_deref().and_then(range)
    };
    let Some(total) = all(&|d| Some(d.total / whole.total)) else { return Ok(None) };
    Ok(Some(Thinned {
        hours: (every * step) as f64 / HOUR_S as f64,
        phases: drifts.len(),
        total,
        ratio: all(&|d| d.ratio),
        turn_deg: all(&|d| Some(d.toward?.turn_from(whole.toward?))),
        averaged: changed(&of(&averages), whole),
    }))
}

/// Mean speed, and the direction of the mean wind; calms count in the speed.
fn average(rows: &[WindSample]) -> Option<WindSample> {
    let first = rows.first()?;
    let (mut speed, mut east, mut north) = (0.0, 0.0, 0.0);
    for row in rows {
        let v = row.speed.unwrap_or(0.0);
        speed += v;
        if let Some(from) = row.from {
            let (e, n) = from.east_north();
            east += v * e;
            north += v * n;
        }
    }
    let from = (f64::hypot(east, north) > 1e-9 * speed).then(|| Azimuth::from_east_north(east, north));
    Some(WindSample { speed: Some(speed / rows.len() as f64), from, weight: rows.len() as f64, ..*first })
}

fn range(values: &[f64]) -> Option<Range> {
    let low = values.iter().copied().reduce(f64::min)?;
    let high = values.iter().copied().reduce(f64::max)?;
    Some(Range { mean: values.iter().sum::<f64>() / values.len() as f64, low, high })
}

fn changed(drift: &Drift, whole: &Drift) -> Changed {
    Changed {
        total: drift.total / whole.total,
        ratio: drift.ratio,
        turn_deg: drift.toward.zip(whole.toward).map(|(a, b)| a.turn_from(b)),
    }
}

/// The middle of the class of a printed table in which a speed, m s⁻¹, falls: 11–16 knots is 13.5.
fn table_class(speed: f64) -> f64 {
    let knots = speed / KNOT;
    let class = TABLE_CLASSES.iter().rposition(|low| knots >= *low).unwrap_or(0);
    match (class, TABLE_CLASSES.get(class + 1)) {
        (0, _) => 0.0,
        (_, Some(high)) => 0.5 * (TABLE_CLASSES[class] + high) * KNOT,
        // The open class keeps its speeds: tables print them on.
        (_, None) => speed,
    }
}

impl Thinning {
    /// The record read every `hours`; for a sentence.
    pub fn every(&self, hours: f64) -> Option<&Thinned> {
        self.thinned.iter().find(|t| t.hours == hours)
    }

    /// What six-hourly readings would do to resultant over total, in one sentence.
    pub fn six_hourly(&self) -> Option<String> {
        let thinned = self.every(6.0)?;
        let (ratio, at) = (self.ratio?, thinned.ratio?);
        let averaged =
            thinned.averaged.ratio.map(|r| format!(", and {r:.3} of six-hour means")).unwrap_or_default();
        let percent = |share: f64| format!("{:+.0}", 100.0 * (share - 1.0)).replace('-', "−");
        Some(format!(
            "Read every six hours, resultant over total would be {:.3} to {:.3} by the hour it starts instead of \
             {ratio:.3} (at most {:.3} off){averaged}; total drift {} to {} %, with six-hour means {} %.",
            at.low,
            at.high,
            (at.low - ratio).abs().max((at.high - ratio).abs()),
            percent(thinned.total.low),
            percent(thinned.total.high),
            percent(thinned.averaged.total),
        ))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Seed;
    use rand::Rng as _;

    fn cube(speed: f64) -> f64 {
        (speed - 5.0).max(0.0).powi(3)
    }

    fn hourly(hours: i64, wind: impl Fn(i64) -> (f64, f64)) -> Vec<WindSample> {
        let sample = |hour: i64| {
            let (speed, from) = wind(hour);
            WindSample {
                line: hour as u32,
                time: Some(hour * HOUR_S),
                speed: Some(speed),
                from: Some(Azimuth::from_deg(from)),
                weight: 1.0,
            }
        };
        (0..hours).map(sample).collect()
    }

    fn of(kept: &[WindSample]) -> Thinning {
        thinning(kept, Some(3600.0), cube, &Work::quiet()).expect("not stopped").expect("sand moves")
    }

    #[test]
    fn a_steady_wind_loses_nothing_by_thinning() {
        let found = of(&hourly(480, |_| (9.0, 40.0)));
        assert_eq!(found.thinned.iter().map(|t| t.hours as i64).collect::<Vec<_>>(), HOURS);
        for t in &found.thinned {
            assert_eq!(t.phases as f64, t.hours);
            for value in [t.total.low, t.total.high, t.averaged.total] {
                crate::assert_close!(value, 1.0, 1e-12, "{} h", t.hours);
            }
        }
    }

    /// One hour a day above the threshold: five of six phases see nothing, the sixth six times too much.
    #[test]
    fn a_wind_of_one_hour_a_day_is_seen_by_one_phase_only() {
        let found = of(&hourly(24 * 20, |hour| (if hour % 24 == 14 { 11.0 } else { 1.0 }, 90.0)));
        let six = found.every(6.0).expect("six-hourly");
        crate::assert_close!(six.total.mean, 1.0, 1e-12, "thinning keeps the mean");
        assert_eq!((six.total.low, six.ratio), (0.0, None));
        crate::assert_close!(six.total.high, 6.0, 1e-12, "the lucky phase");
        // Five hours of 1 and one of 11 m/s average to 2.7, below the threshold.
        assert_eq!(six.averaged.total, 0.0);
    }

    #[test]
    fn the_mean_over_phases_is_the_record() {
        let mut stream = Seed(2).stream("thinning", 0);
        let winds: Vec<(f64, f64)> =
            (0..24 * 60).map(|_| (14.0 * stream.random::<f64>(), 360.0 * stream.random::<f64>())).collect();
        let found = of(&hourly(24 * 60, |hour| winds[hour as usize]));
        for t in &found.thinned {
            crate::assert_close!(t.total.mean, 1.0, 1e-12, "{} h", t.hours);
            assert!(t.total.low < 1.0 && t.total.high > 1.0 && t.averaged.total < 1.0);
        }
    }

    #[test]
    fn table_classes_have_the_middles_of_the_tables() {
        for (knots, middle) in
            [(13.0, 13.5), (16.4, 13.5), (17.0, 19.0), (27.0, 24.5), (30.0, 30.5), (36.0, 37.0)]
        {
            crate::assert_close!(table_class(knots * KNOT), middle * KNOT, 1e-9, "{knots} knots");
        }
        assert_eq!(table_class(0.1), 0.0);
        crate::assert_close!(table_class(50.0 * KNOT), 50.0 * KNOT, 1e-9, "the open class");
    }

    #[test]
    fn without_a_clock_the_classes_alone_are_tried() {
        let winds = hourly(100, |h| (0.1 * h as f64, 10.0));
        let found = thinning(&winds, None, cube, &Work::quiet()).expect("not stopped").expect("sand moves");
        assert!(found.thinned.is_empty());
        let sum =
            |v: &dyn Fn(f64) -> f64| winds.iter().filter_map(|s| s.speed).map(|s| cube(v(s))).sum::<f64>();
        let want = sum(&|v| 5.0 * (v / 5.0).floor() + 2.5) / sum(&|v| v);
        crate::assert_close!(found.classed[2].change.total, want, 1e-12, "classes of 5 m/s");
        assert_eq!(thinning(&hourly(9, |_| (0.0, 0.0)), None, cube, &Work::quiet()), Ok(None));
    }
}
