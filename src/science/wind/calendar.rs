//! The drift of years, months and seasons, each with what its own weather leaves open.

use rand::Rng as _;

use crate::ground::{Azimuth, Method, Seed, Stopped, Symbol, WindSample, Work};
use crate::numeric::quantile::of_sorted;

use super::coverage::{MONTHS, is_spliced, year_and_month};
use super::mill::Mill;
use super::regime::Drift;
use super::settings::WindSettings;

/// Drift by the calendar.
pub const METHOD: Method = Method {
    id: "wind.calendar",
    name: "Yearly, monthly and seasonal drift",
    question: "When does the sand move which way, and how much do years differ?",
    formula: "rate of a period = Σ qᵢ tᵢ / Σ tᵢ over its rows, as total and as vector; a month or season counts with its share \
              of the year, so that twelve months make a year; interval = 95 % of draws: with five years or more whole \
              months (seasons) of years drawn with replacement, else moving blocks of b days inside each month, \
              season or year, those of a year within 30 days of their place; year to year = mean and standard \
              deviation over the complete years",
    symbols: &[
        Symbol { symbol: "qᵢ", meaning: "flux of row i", unit: "vector units or kg m⁻¹ yr⁻¹" },
        Symbol { symbol: "tᵢ", meaning: "share of time of row i", unit: "1" },
        Symbol { symbol: "b", meaning: "block length, at most a third of the period", unit: "d" },
    ],
    assumptions: &["Days of a month are alike in season", "Blocks are longer than weather remembers"],
    limits: &[
        "The interval of a month seen in fewer than five years is that of its own weather; other years may differ more",
        "A period with rows for fewer than nine tenths of its time is called incomplete and kept out of the spread between years",
    ],
    sources: &[super::bootstrap::KUNSCH],
};

/// The drift of one year, month or season.
#[derive(Clone, Debug, PartialEq)]
pub struct Period {
    /// `"2013"`, `"January"`, `"Dec–Feb"`.
    pub name: String,
    /// A year's own rate; of a month or season what it gives to a year. Intervals as in [`Drift`].
    pub drift: Drift,
    pub total_ci95: Option<[f64; 2]>,
    /// Years that have rows in it.
    pub years: usize,
    /// Rows over the rows its time should hold.
    pub covered: f64,
}

impl Period {
    /// Whether it has rows for nine tenths of its time.
    pub fn is_complete(&self) -> bool {
        self.covered >= COMPLETE
    }
}

/// How much the complete years of a record differ.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct YearSpread {
    pub years: usize,
    pub total_mean: f64,
    pub total_sd: f64,
    /// Least and greatest resultant over total.
    pub ratio: [f64; 2],
    /// Circular standard deviation of the resultant's direction, degrees; every year counts once.
    pub toward_sd_deg: f64,
}

/// A record by the calendar.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Calendar {
    /// In order; none for a year put together from months of several years.
    pub years: Vec<Period>,
    /// January to December, those with rows.
    pub months: Vec<Period>,
    pub seasons: Vec<Period>,
    /// `None` with fewer than two complete years.
    pub spread: Option<YearSpread>,
}

/// How a calendar is worked out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CalendarSettings {
    pub unit: &'static str,
    /// Commonest step between rows, s; without it there is no calendar.
    pub interval_s: Option<f64>,
    pub block_days: f64,
    pub resamples: u32,
}

impl CalendarSettings {
    pub(super) fn of(mill: &Mill, interval_s: Option<f64>, settings: &WindSettings) -> Self {
        let WindSettings { block_days, resamples, .. } = *settings;
        Self { unit: mill.unit(), interval_s, block_days, resamples }
    }

    fn rows_a_day(&self) -> f64 {
        DAY as f64 / self.interval_s.unwrap_or(f64::NAN)
    }
}

const DAY: i64 = 86_400;
const YEAR_DAYS: f64 = 365.25;
const MONTH_DAYS: [f64; 12] = [31.0, 28.25, 31.0, 30.0, 31.0, 30.0, 31.0, 31.0, 30.0, 31.0, 30.0, 31.0];
const SEASONS: [&str; 4] = ["Dec–Feb", "Mar–May", "Jun–Aug", "Sep–Nov"];
/// Share of its time a period must have rows for.
const COMPLETE: f64 = 0.9;
/// With so many years, years are drawn rather than days.
const ENOUGH_YEARS: usize = 5;
/// Blocks a period must hold for an interval.
const FEWEST_BLOCKS: usize = 3;
/// Share of draws that must move sand for an interval of the ratio.
const SAID: f64 = 0.95;
/// How far from its place in the year a block may come, days.
const SEASON_REACH: usize = 30;

/// Sand and time of one day, or of several.
#[derive(Clone, Copy, Debug, Default)]
struct Sum {
    total: f64,
    east: f64,
    north: f64,
    time: f64,
    rows: usize,
}

impl Sum {
    fn add(&mut self, other: &Self) {
        self.total += other.total;
        self.east += other.east;
        self.north += other.north;
        self.time += other.time;
        self.rows += other.rows;
    }

    fn of<'a>(parts: impl Iterator<Item = &'a Self>) -> Self {
        let mut sum = Self::default();
        parts.for_each(|part| sum.add(part));
        sum
    }

    /// The rate, times `share`.
    fn drift(&self, unit: &'static str, share: f64) -> Drift {
        let scale = if self.time > 0.0 { share / self.time } else { 0.0 };
        let (total, resultant) = (scale * self.total, scale * self.east.hypot(self.north));
        let moves = total > 0.0;
        Drift {
            unit,
            total,
            resultant: if moves { resultant } else { 0.0 },
            ratio: moves.then(|| resultant / total),
            toward: (moves && resultant > 1e-9 * total)
                .then(|| Azimuth::from_east_north(self.east, self.north)),
            ..Drift::default()
        }
    }
}

/// The days of one year that belong to a period, in order.
struct Stretch {
    year: i32,
    days: Vec<Sum>,
}

/// The calendar of a checked record under `flux`; `None` without a clock or without sand.
///
/// # Errors
/// [`Stopped`] when asked to.
pub fn calendar(
    kept: &[WindSample],
    flux: impl Fn(f64) -> f64,
    settings: &CalendarSettings,
    seed: Seed,
    work: &Work,
) -> Result<Option<Calendar>, Stopped> {
    let (Some(_), Some(days)) = (settings.interval_s, by_day(kept, flux)) else { return Ok(None) };
    if days.iter().all(|(_, day)| day.total == 0.0) {
        return Ok(None);
    }
    work.phase("drift by the calendar", 0);
    let spliced = is_spliced(kept);
    let own_year = |day: i64| year_and_month(day * DAY).0;
    // December opens the winter of the year that follows.
    let winter_year = |day: i64| {
        let (year, month) = year_and_month(day * DAY);
        year + i32::from(month == 11)
    };
    // The months of a year put together from several are one year.
    let part = |year_of: fn(i64) -> i32, holds: &dyn Fn(usize) -> bool| {
        let days = days.iter().filter(|(day, _)| holds(year_and_month(day * DAY).1));
        let mut parts = stretches(days, if spliced { |_| 0 } else { year_of });
        // A lone row, as midnight written 24:00, is no month of its own.
        if parts.iter().any(|p| p.days.len() > 1) {
            parts.retain(|p| p.days.len() > 1);
        }
        parts
    };
    let mut found = Calendar::default();
    for (month, name) in MONTHS.into_iter().enumerate() {
        let parts = part(own_year, &|m| m == month);
        let expected = MONTH_DAYS[month] * parts.len() as f64;
        found.months.extend(period(
            name.into(),
            &parts,
            [MONTH_DAYS[month], expected],
            settings,
            seed,
            work,
        )?);
    }
    for (season, name) in SEASONS.into_iter().enumerate() {
        let in_season = |m: usize| (m + 1) % 12 / 3 == season;
        let parts = part(winter_year, &in_season);
        let length: f64 = (0..12).filter(|m| in_season(*m)).map(|m| MONTH_DAYS[m]).sum();
        // A record from January to December has two halves of a winter, which make one.
        let most = found.months.iter().filter(|m| in_season(month_named(&m.name))).map(|m| m.years).max();
        let expected = length * most.unwrap_or(1) as f64;
        found.seasons.extend(period(name.into(), &parts, [length, expected], settings, seed, work)?);
    }
    if !spliced {
        for stretch in stretches(days.iter(), own_year) {
            found.years.extend(year(&stretch, settings, seed, work)?);
        }
        found.spread = spread(&found.years);
    }
    Ok(Some(found))
}

fn month_named(name: &str) -> usize {
    MONTHS.iter().position(|m| *m == name).unwrap_or(0)
}

/// Rows gathered by day; `None` when a row has no time. Rows with sand but no direction count in
/// neither sum, as in the drift of the whole.
fn by_day(kept: &[WindSample], flux: impl Fn(f64) -> f64) -> Option<Vec<(i64, Sum)>> {
    let mut days: Vec<(i64, Sum)> = Vec::new();
    for sample in kept {
        let day = sample.time?.div_euclid(DAY);
        let weight = flux(sample.speed.unwrap_or(0.0)) * sample.weight;
        let (east, north) = match sample.from {
            Some(from) => from.reversed().east_north(),
            None if weight > 0.0 => continue,
            None => (0.0, 0.0),
        };
        let row =
            Sum { total: weight, east: weight * east, north: weight * north, time: sample.weight, rows: 1 };
        match days.last_mut() {
            Some((last, sum)) if *last == day => sum.add(&row),
            _ => days.push((day, row)),
        }
    }
    (!days.is_empty()).then_some(days)
}

fn stretches<'a>(days: impl Iterator<Item = &'a (i64, Sum)>, year_of: fn(i64) -> i32) -> Vec<Stretch> {
    let mut found: Vec<Stretch> = Vec::new();
    for (day, sum) in days {
        let year = year_of(*day);
        match found.iter_mut().rev().find(|s| s.year == year) {
            Some(stretch) => stretch.days.push(*sum),
            None => found.push(Stretch { year, days: vec![*sum] }),
        }
    }
    found
}

/// A month or season of `length` days in a year and `expected` in all its years.
fn period(
    name: String,
    parts: &[Stretch],
    [length, expected]: [f64; 2],
    settings: &CalendarSettings,
    seed: Seed,
    work: &Work,
) -> Result<Option<Period>, Stopped> {
    let sum = Sum::of(parts.iter().flat_map(|p| &p.days));
    if sum.rows == 0 {
        return Ok(None);
    }
    let share = length / YEAR_DAYS;
    let expected = expected * settings.rows_a_day();
    let whole: Vec<Sum> = parts.iter().map(|p| Sum::of(p.days.iter())).collect();
    let mut found = Period {
        drift: sum.drift(settings.unit, share),
        total_ci95: None,
        years: parts.len(),
        covered: sum.rows as f64 / expected,
        name,
    };
    let blocks: Vec<Option<usize>> = parts.iter().map(|p| block(p.days.len(), settings)).collect();
    let seed = seed.child(&format!("calendar {}", found.name));
    if parts.len() >= ENOUGH_YEARS {
        intervals(&mut found, settings, seed, share, work, |stream| {
            Sum::of((0..whole.len()).map(|_| &whole[stream.random_range(0..whole.len())]))
        })?;
    } else if blocks.iter().all(Option::is_some) {
        intervals(&mut found, settings, seed, share, work, |stream| {
            let mut sum = Sum::default();
            for (part, block) in parts.iter().zip(&blocks) {
                let (days, block) = (&part.days, block.unwrap_or(1));
                let starts = days.len() - block + 1;
                for taken in (0..days.len()).step_by(block) {
                    let start = stream.random_range(0..starts);
                    sum.add(&Sum::of(days[start..].iter().take(block.min(days.len() - taken))));
                }
            }
            sum
        })?;
    }
    Ok(Some(found))
}

fn year(
    stretch: &Stretch,
    settings: &CalendarSettings,
    seed: Seed,
    work: &Work,
) -> Result<Option<Period>, Stopped> {
    let days = &stretch.days;
    let sum = Sum::of(days.iter());
    let mut found = Period {
        name: stretch.year.to_string(),
        drift: sum.drift(settings.unit, 1.0),
        total_ci95: None,
        years: 1,
        covered: sum.rows as f64 / (YEAR_DAYS * settings.rows_a_day()),
    };
    // One row that falls into the next year, as midnight written 24:00, is no year.
    if days.len() < 2 {
        return Ok(None);
    }
    if let Some(block) = block(days.len(), settings) {
        let seed = seed.child(&format!("calendar {}", found.name));
        intervals(&mut found, settings, seed, 1.0, work, |stream| {
            let mut sum = Sum::default();
            for place in (0..days.len()).step_by(block) {
                let last = days.len() - block;
                let (low, high) =
                    (place.saturating_sub(SEASON_REACH).min(last), (place + SEASON_REACH).min(last));
                let start = stream.random_range(low..=high);
                sum.add(&Sum::of(days[start..].iter().take(block.min(days.len() - place))));
            }
            sum
        })?;
    }
    Ok(Some(found))
}

/// Days in a block of a period of `days`; `None` when it holds too few of them.
fn block(days: usize, settings: &CalendarSettings) -> Option<usize> {
    let wanted = settings.block_days.round().max(1.0) as usize;
    let block = wanted.min(days / FEWEST_BLOCKS);
    (block > 0 && days >= 2 * FEWEST_BLOCKS).then_some(block)
}

/// Fills in the intervals of `found` from draws of its sand and time.
fn intervals(
    found: &mut Period,
    settings: &CalendarSettings,
    seed: Seed,
    share: f64,
    work: &Work,
    draw: impl Fn(&mut rand_chacha::ChaCha8Rng) -> Sum,
) -> Result<(), Stopped> {
    let (mut turns, mut ratios, mut totals) = (Vec::new(), Vec::new(), Vec::new());
    let mut stream = seed.stream("wind.calendar", 0);
    for _ in 0..settings.resamples {
        work.advance(1)?;
        let drawn = draw(&mut stream).drift(settings.unit, share);
        totals.push(drawn.total);
        ratios.extend(drawn.ratio);
        // A draw without sand leaves the direction open.
        turns.extend(found.drift.toward.map(|a| drawn.toward.map_or(180.0, |b| b.turn_from(a).abs())));
    }
    let range = |values: &mut Vec<f64>| {
        values.sort_by(f64::total_cmp);
        (!values.is_empty()).then(|| [of_sorted(values, 0.025), of_sorted(values, 0.975)])
    };
    found.total_ci95 = range(&mut totals);
    let said = ratios.len() as f64 >= SAID * f64::from(settings.resamples);
    found.drift.ratio_ci95 = range(&mut ratios).filter(|_| said);
    turns.sort_by(f64::total_cmp);
    found.drift.toward_ci95_half_deg = (!turns.is_empty()).then(|| of_sorted(&turns, 0.95));
    Ok(())
}

fn spread(years: &[Period]) -> Option<YearSpread> {
    let complete: Vec<&Drift> = years.iter().filter(|y| y.is_complete()).map(|y| &y.drift).collect();
    let n = complete.len() as f64;
    if complete.len() < 2 {
        return None;
    }
    let total_mean = complete.iter().map(|d| d.total).sum::<f64>() / n;
    let total_sd = (complete.iter().map(|d| (d.total - total_mean).powi(2)).sum::<f64>() / (n - 1.0)).sqrt();
    let ratios = complete.iter().filter_map(|d| d.ratio);
    let ratio = ratios.fold([f64::INFINITY, f64::NEG_INFINITY], |[l, h], r| [l.min(r), h.max(r)]);
    let towards: Vec<(f64, f64)> = complete.iter().filter_map(|d| d.toward).map(|t| t.east_north()).collect();
    let (east, north) = towards.iter().fold((0.0, 0.0), |(e, n), t| (e + t.0, n + t.1));
    // s = √(−2 ln R̄) (Mardia's circular standard deviation).
    let mean_length = (f64::hypot(east, north) / towards.len().max(1) as f64).min(1.0);
    (ratio[0].is_finite() && !towards.is_empty()).then(|| YearSpread {
        years: complete.len(),
        total_mean,
        total_sd,
        ratio,
        toward_sd_deg: (-2.0 * mean_length.ln()).max(0.0).sqrt().to_degrees(),
    })
}

#[cfg(test)]
mod tests;
