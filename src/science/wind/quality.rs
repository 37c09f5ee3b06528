//! Quality control of a wind record: what is set aside, named by line and value, and what is merely doubtful.

use crate::ground::{Caution, Method, Read, Source, Stopped, Symbol, WindRecord, WindSample, Work};

use super::coverage::{is_spliced, rounding, time_cautions, time_of_year};

/// The rules of quality control.
pub const METHOD: Method = Method {
    id: "wind.quality-control",
    name: "Quality control of a wind record",
    question: "Which rows of the record can be believed?",
    formula: "set aside: no speed; v < 0; v > v_max; v > 2 q₉₉.₉ and v > 3 max(neighbours); repeated time; run of ≥ 24 equal \
              windy rows over ≥ 12 h, beyond the first",
    symbols: &[
        Symbol { symbol: "v", meaning: "wind speed", unit: "m s⁻¹" },
        Symbol { symbol: "v_max", meaning: "greatest speed believed", unit: "m s⁻¹" },
        Symbol {
            symbol: "q₉₉.₉", meaning: "99.9 % quantile of the speeds below v_max", unit: "m s⁻¹"
        },
    ],
    assumptions: &["Bad records are rare and stand alone"],
    limits: &[
        "Slow drift of an instrument is not seen",
        "A true gust alone in a calm is set aside, and named",
    ],
    sources: &[Source {
        key: "ventifact-quality",
        authors: "Ventifact",
        year: 2026,
        title: "Rules for wind records",
        published: "set for this program",
        locator: "",
        read: Read::Derived,
    }],
};

/// Rows set aside for one reason.
#[derive(Clone, Debug, PartialEq)]
pub struct SetAside {
    pub code: &'static str,
    pub count: usize,
    /// What, why, and the first lines with their values.
    pub text: String,
}

/// A record after quality control.
#[derive(Clone, Debug, PartialEq)]
pub struct Checked {
    /// In order of time where the record has a clock, a year put together from years by the calendar. All have a speed; some have no direction.
    pub kept: Vec<WindSample>,
    pub set_aside: Vec<SetAside>,
    pub cautions: Vec<Caution>,
    /// Commonest step between records, s.
    pub interval_s: Option<f64>,
    /// First and last time kept.
    pub span: Option<[i64; 2]>,
}

/// Rows with the same speed and direction this often in a row, and for this long, are a stuck
/// instrument.
const STUCK_RUN: usize = 24;
/// Half a day, s.
const STUCK_S: f64 = 43_200.0;
/// Rows named in full.
const NAMED: usize = 5;
/// Fewest rows from which a spike can be told.
const FEWEST_FOR_SPIKES: usize = 100;

/// Checks a record. Speeds above `greatest_speed` m s⁻¹ are impossible.
///
/// # Errors
/// [`Stopped`] when asked to.
pub fn check(record: &WindRecord, greatest_speed: f64, work: &Work) -> Result<Checked, Stopped> {
    work.phase("checking winds", record.samples.len() as u64);
    let mut rejected = Rejected::default();
    let mut cautions = Vec::new();
    let has_clock = record.samples.iter().any(|s| s.time.is_some());
    let mut kept = Vec::with_capacity(record.samples.len());
    for (at, sample) in record.samples.iter().enumerate() {
        if at % 4096 == 0 {
            work.advance(4096)?;
        }
        match sample.speed {
            None => rejected.add(Fault::NoSpeed, sample),
            Some(v) if !v.is_finite() => rejected.add(Fault::NoSpeed, sample),
            Some(v) if v < 0.0 => rejected.add(Fault::Negative, sample),
            Some(v) if v > greatest_speed => rejected.add(Fault::Impossible, sample),
            Some(_) if has_clock && sample.time.is_none() => rejected.add(Fault::NoTime, sample),
            Some(_) => kept.push(*sample),
        }
    }
    if has_clock {
        let backward = kept.windows(2).filter(|w| w[1].time < w[0].time).count();
        if is_spliced(&kept) {
            // Such a year runs backward by design; its order is that of the calendar.
            kept.sort_by_key(|s| (s.time.map(time_of_year), s.line));
        } else {
            if backward > 0 {
                cautions.push(Caution::new(
                    "time-disorder",
                    format!(
                        "Time runs backward at {backward} places of the file; the rows were put in order."
                    ),
                ));
            }
            kept.sort_by_key(|s| (s.time, s.line));
        }
        let mut last = None;
        kept.retain(|s| {
            let repeated = s.time == last;
            last = s.time;
            if repeated {
                rejected.add(Fault::Repeated, s);
            }
            !repeated
        });
    }
    work.advance(0)?;
    let interval_s = interval(&kept);
    if !record.is_table {
        set_spikes_aside(&mut kept, interval_s, &mut rejected);
        set_stuck_aside(&mut kept, interval_s, &mut rejected);
    }
    let times = || kept.iter().filter_map(|s| s.time);
    let span = times().min().zip(times().max()).map(|(a, b)| [a, b]);
    if !record.is_table {
        time_cautions(&kept, interval_s, span, &mut cautions);
    }
    cautions.extend(rounding(&kept));
    Ok(Checked { kept, set_aside: rejected.into_list(greatest_speed), cautions, interval_s, span })
}

#[derive(Clone, Copy, PartialEq)]
enum Fault {
    NoSpeed,
    Negative,
    Impossible,
    NoTime,
    Repeated,
    Spike,
    Stuck,
}

#[derive(Default)]
struct Rejected(Vec<(Fault, WindSample)>);

impl Rejected {
    fn add(&mut self, fault: Fault, sample: &WindSample) {
        self.0.push((fault, *sample));
    }

    fn into_list(mut self, greatest_speed: f64) -> Vec<SetAside> {
        self.0.sort_by_key(|(_, s)| s.line);
        let about = |fault| match fault {
            Fault::NoSpeed => ("no-speed", "no speed (blank or coded missing)".to_owned()),
            Fault::Negative => ("negative-speed", "speed below zero".to_owned()),
            Fault::Impossible => ("impossible-speed", format!("speed above {greatest_speed} m/s")),
            Fault::NoTime => ("no-time", "no time, though the record has a clock".to_owned()),
            Fault::Repeated => ("repeated-time", "the same time as an earlier row".to_owned()),
            Fault::Spike => {
                ("spike", "more than twice the 99.9 % speed and three times its neighbours".to_owned())
            }
            Fault::Stuck => (
                "stuck",
                format!("the same speed and direction {STUCK_RUN} times or more in a row, over half a day"),
            ),
        };
        let faults = [
            Fault::NoSpeed,
            Fault::Negative,
            Fault::Impossible,
            Fault::NoTime,
            Fault::Repeated,
            Fault::Spike,
            Fault::Stuck,
        ];
        let mut list = Vec::new();
        for fault in faults {
            let rows: Vec<&WindSample> = self.0.iter().filter(|(f, _)| *f == fault).map(|(_, s)| s).collect();
            if rows.is_empty() {
                continue;
            }
            let (code, why) = about(fault);
            let named: Vec<String> = rows
                .iter()
                .take(NAMED)
                .map(|s| match s.speed {
                    Some(v) => format!("line {} ({v:.2} m/s)", s.line),
                    None => format!("line {}", s.line),
                })
                .collect();
            let more =
                if rows.len() > NAMED { format!(" and {} more", rows.len() - NAMED) } else { String::new() };
            list.push(SetAside {
                code,
                count: rows.len(),
                text: format!("{why}: {}{more}", named.join(", ")),
            });
        }
        list
    }
}

/// Median step of a record with a clock.
fn interval(kept: &[WindSample]) -> Option<f64> {
    let mut steps: Vec<i64> =
        kept.windows(2).filter_map(|w| Some(w[1].time? - w[0].time?)).filter(|s| *s > 0).collect();
    if steps.is_empty() {
        return None;
    }
    let middle = steps.len() / 2;
    Some(*steps.select_nth_unstable(middle).1 as f64)
}

fn set_spikes_aside(kept: &mut Vec<WindSample>, interval_s: Option<f64>, rejected: &mut Rejected) {
    if kept.len() < FEWEST_FOR_SPIKES {
        return;
    }
    let speed = |s: &WindSample| s.speed.unwrap_or(0.0);
    let mut speeds: Vec<f64> = kept.iter().map(speed).collect();
    let at = (speeds.len() - 1) * 999 / 1000;
    let bar = 2.0 * *speeds.select_nth_unstable_by(at, f64::total_cmp).1;
    // A neighbour across a gap says nothing.
    let near = |a: &WindSample, b: &WindSample| match (a.time, b.time, interval_s) {
        (Some(a), Some(b), Some(step)) => (b - a).abs() as f64 <= 2.0 * step,
        _ => true,
    };
    let spiky: Vec<bool> = (0..kept.len())
        .map(|i| {
            let around = [i.checked_sub(1), (i + 1 < kept.len()).then_some(i + 1)];
            let neighbours: Vec<f64> = around
                .into_iter()
                .flatten()
                .filter(|&j| near(&kept[i], &kept[j]))
                .map(|j| speed(&kept[j]))
                .collect();
            let v = speed(&kept[i]);
            v > bar && !neighbours.is_empty() && neighbours.iter().all(|n| v > 3.0 * n)
        })
        .collect();
    drop_marked(kept, &spiky, Fault::Spike, rejected);
}

fn set_stuck_aside(kept: &mut Vec<WindSample>, interval_s: Option<f64>, rejected: &mut Rejected) {
    let run = interval_s.map_or(STUCK_RUN, |step| STUCK_RUN.max((STUCK_S / step).ceil() as usize));
    let same = |a: &WindSample, b: &WindSample| {
        a.speed == b.speed && a.from == b.from && a.speed > Some(0.0) && a.from.is_some()
    };
    let mut stuck = vec![false; kept.len()];
    let mut start = 0;
    for i in 1..=kept.len() {
        if i < kept.len() && same(&kept[i], &kept[start]) {
            continue;
        }
        if i - start >= run {
            stuck[start + 1..i].fill(true);
        }
        start = i;
    }
    drop_marked(kept, &stuck, Fault::Stuck, rejected);
}

fn drop_marked(kept: &mut Vec<WindSample>, marked: &[bool], fault: Fault, rejected: &mut Rejected) {
    let mut marks = marked.iter();
    kept.retain(|s| {
        let bad = marks.next().copied().unwrap_or(false);
        if bad {
            rejected.add(fault, s);
        }
        !bad
    });
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Azimuth;

    fn hourly(speeds: &[f64]) -> WindRecord {
        let samples = speeds
            .iter()
            .enumerate()
            .map(|(i, v)| WindSample {
                line: i as u32 + 2,
                time: Some(3600 * i as i64),
                speed: Some(*v),
                from: Some(Azimuth::from_deg(7.3 * i as f64)),
                weight: 1.0,
            })
            .collect();
        WindRecord { samples, is_table: false, gusts: Vec::new() }
    }

    fn breeze(n: usize) -> Vec<f64> {
        (0..n).map(|i| 4.0 + 3.0 * (0.7 * i as f64).sin()).collect()
    }

    #[test]
    fn an_impossible_speed_and_a_lone_spike_are_named_and_a_storm_is_kept() {
        let mut speeds = breeze(3000);
        speeds[500] = 400.0;
        speeds[700] = 60.0;
        for (i, v) in [14.0, 25.0, 22.0, 12.0].into_iter().enumerate() {
            speeds[900 + i] = v;
        }
        let checked = check(&hourly(&speeds), 75.0, &Work::quiet()).expect("not stopped");
        let texts: Vec<(&str, &str)> = checked.set_aside.iter().map(|s| (s.code, s.text.as_str())).collect();
        assert_eq!(texts.len(), 2, "{texts:?}");
        assert!(
            texts[0].0 == "impossible-speed" && texts[0].1.contains("line 502 (400.00 m/s)"),
            "{texts:?}"
        );
        assert!(texts[1].0 == "spike" && texts[1].1.contains("line 702 (60.00 m/s)"), "{texts:?}");
        assert_eq!(checked.kept.len(), 2998);
    }

    #[test]
    fn repeated_times_disorder_blanks_and_stuck_runs_are_found() {
        let mut record = hourly(&breeze(400));
        record.samples[10].speed = None;
        record.samples[20].time = record.samples[19].time;
        record.samples.swap(30, 31);
        for i in 100..140 {
            record.samples[i].speed = Some(3.3);
            record.samples[i].from = Some(Azimuth::from_deg(10.5));
        }
        let checked = check(&record, 75.0, &Work::quiet()).expect("not stopped");
        let counts: Vec<(&str, usize)> = checked.set_aside.iter().map(|s| (s.code, s.count)).collect();
        assert_eq!(counts, vec![("no-speed", 1), ("repeated-time", 1), ("stuck", 39)]);
        let codes: Vec<&str> = checked.cautions.iter().map(|c| c.code).collect();
        assert!(codes.contains(&"time-disorder") && codes.contains(&"short-record"), "{codes:?}");
        assert_eq!(checked.interval_s, Some(3600.0));
    }

    #[test]
    fn coarse_compasses_are_seen() {
        let mut record = hourly(&breeze(400));
        for (i, sample) in record.samples.iter_mut().enumerate() {
            sample.from = Some(Azimuth::from_deg(22.5 * (i * 7 % 16) as f64));
        }
        let checked = check(&record, 75.0, &Work::quiet()).expect("not stopped");
        let caution = checked.cautions.iter().find(|c| c.code == "rounded-direction").expect("a caution");
        assert!(caution.text.contains("22.5"), "{}", caution.text);
    }

    #[test]
    fn stop_is_heard() {
        let work = Work::quiet();
        work.stop();
        assert_eq!(check(&hourly(&breeze(10)), 75.0, &work), Err(Stopped));
    }
}
