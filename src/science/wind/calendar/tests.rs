//! Yearly, monthly and seasonal drift of records made by hand.

use super::*;
use crate::ground::Stopped;

const NEW_YEAR_2001: i64 = 978_307_200;
const HOUR: i64 = 3600;

fn settings() -> CalendarSettings {
    CalendarSettings { unit: "u", interval_s: Some(3600.0), block_days: 5.0, resamples: 300 }
}

/// Hourly winds from 2001 on; `wind(hour, stream)` gives speed and where the wind goes.
fn record(hours: i64, wind: impl Fn(i64, &mut rand_chacha::ChaCha8Rng) -> (f64, f64)) -> Vec<WindSample> {
    let mut stream = Seed(5).stream("calendar test", 0);
    let sample = |hour: i64| {
        let (speed, toward) = wind(hour, &mut stream);
        WindSample {
            line: hour as u32,
            time: Some(NEW_YEAR_2001 + hour * HOUR),
            speed: Some(speed),
            from: Some(Azimuth::from_deg(toward + 180.0)),
            weight: 1.0,
        }
    };
    (0..hours).map(sample).collect()
}

fn of(kept: &[WindSample]) -> Calendar {
    let found = calendar(kept, |v| v, &settings(), Seed(1), &Work::quiet()).expect("not stopped");
    found.expect("a calendar")
}

#[test]
fn months_and_seasons_make_the_year_and_point_where_their_winds_go() {
    // Month m blows toward 30 m°, steadily.
    let kept = record(365 * 24, |hour, _| {
        let month = year_and_month(NEW_YEAR_2001 + hour * HOUR).1;
        (2.0, 30.0 * month as f64)
    });
    let found = of(&kept);
    assert_eq!((found.months.len(), found.seasons.len(), found.years.len()), (12, 4, 1));
    for (month, period) in found.months.iter().enumerate() {
        let toward = period.drift.toward.expect("a direction");
        let off = toward.turn_from(Azimuth::from_deg(30.0 * month as f64)).abs();
        crate::assert_close!(off, 0.0, 1e-9, "{}", period.name);
        crate::assert_close!(period.drift.total, 2.0 * MONTH_DAYS[month] / 365.25, 1e-12, "{}", period.name);
        // A steady wind leaves nothing open.
        crate::assert_close!(
            period.drift.toward_ci95_half_deg.unwrap_or(f64::NAN),
            0.0,
            1e-6,
            "{}",
            period.name
        );
        assert!(period.is_complete());
    }
    for periods in [&found.months, &found.seasons] {
        crate::assert_close!(periods.iter().map(|p| p.drift.total).sum::<f64>(), 2.0, 1e-12, "the year");
    }
    crate::assert_close!(found.years[0].drift.total, 2.0, 1e-12, "the rate of 2001");
    let summer = found.seasons[2].drift.toward.expect("a direction");
    crate::assert_close!(summer.deg(), 180.0, 1.0, "June to August");
    assert!(found.seasons.iter().all(Period::is_complete), "{:?}", found.seasons);
    assert_eq!(found.spread, None, "one year has no spread");
}

#[test]
fn part_years_are_named_and_kept_out_of_the_spread() {
    // Three years and a half, twice as windy each year, turned by 20° each year.
    let kept = record((3 * 365 + 180) * 24, |hour, _| {
        let year = f64::from(year_and_month(NEW_YEAR_2001 + hour * HOUR).0 - 2001);
        (2f64.powf(year), 20.0 * year)
    });
    let found = of(&kept);
    let complete: Vec<bool> = found.years.iter().map(Period::is_complete).collect();
    assert_eq!(complete, [true, true, true, false]);
    let spread = found.spread.expect("three complete years");
    assert_eq!(spread.years, 3);
    crate::assert_close!(spread.total_mean, 7.0 / 3.0, 1e-9, "mean of 1, 2, 4");
    crate::assert_close!(spread.total_sd, (7.0f64 / 3.0).sqrt(), 1e-9, "standard deviation of 1, 2, 4");
    // R̄ of −20°, 0°, 20° is (1 + 2 cos 20°)/3.
    let mean_length = (1.0 + 2.0 * 20f64.to_radians().cos()) / 3.0;
    crate::assert_close!(spread.toward_sd_deg, (-2.0 * mean_length.ln()).sqrt().to_degrees(), 1e-9, "turn");
}

/// Blocks of days drawn within a month know the scatter of days: a month whose days blow east or
/// north by the toss of a coin.
#[test]
fn the_interval_of_a_month_is_that_of_its_days() {
    let kept = record(365 * 24, |hour, _| {
        let mut coin = Seed(hour as u64 / 24).stream("coin", 0);
        (1.0, if coin.random::<bool>() { 0.0 } else { 90.0 })
    });
    let plain = CalendarSettings { block_days: 1.0, resamples: 2000, ..settings() };
    let found = calendar(&kept, |v| v, &plain, Seed(1), &Work::quiet()).expect("not stopped").expect("one");
    let mut halves: Vec<f64> = found.months.iter().filter_map(|m| m.drift.toward_ci95_half_deg).collect();
    assert_eq!(halves.len(), 12);
    halves.sort_by(f64::total_cmp);
    // Share p of days toward 90°: toward = atan(p/(1 − p)), its sd 2 √(¼/30) rad near ½ = 10.5°.
    crate::assert_close!(
        halves[6],
        1.96 * 2.0 * (0.25f64 / 30.4).sqrt().to_degrees(),
        3.0,
        "95 % half width"
    );
}

#[test]
fn with_five_years_the_years_themselves_are_drawn() {
    // The months are steady inside but turn from year to year: blocks of days would see nothing.
    let turn = |hour: i64| 25.0 * f64::from(year_and_month(NEW_YEAR_2001 + hour * HOUR).0 % 2);
    let half = |years: i64| {
        let found = of(&record(years * 365 * 24, |hour, _| (1.0, turn(hour))));
        found.months[3].drift.toward_ci95_half_deg.expect("an interval")
    };
    crate::assert_close!(half(4), 0.0, 1e-6, "four years: the weather of each month alone");
    assert!(half(6) > 5.0, "six years: ± {}°", half(6));
}

#[test]
fn a_typical_year_has_months_but_no_years_and_without_a_clock_there_is_no_calendar() {
    let mut kept = record(365 * 24, |_, _| (1.0, 10.0));
    for sample in &mut kept {
        let time = sample.time.unwrap_or_default();
        let month = year_and_month(time).1;
        // Each month from another year, as typical years are put together: by steps of four years, of
        // 1461 days, which keep the calendar.
        sample.time = Some(time - (month as i64 * 7 % 5) * 1461 * DAY);
    }
    let found = of(&kept);
    assert_eq!((found.years.len(), found.months.len(), found.seasons.len()), (0, 12, 4));
    assert!(found.seasons.iter().all(|s| s.drift.toward_ci95_half_deg.is_some()));
    kept[7].time = None;
    let none = calendar(&kept, |v| v, &settings(), Seed(1), &Work::quiet()).expect("not stopped");
    assert_eq!(none, None);
    let still = record(100, |_, _| (0.0, 10.0));
    assert_eq!(calendar(&still, |v| v, &settings(), Seed(1), &Work::quiet()), Ok(None));
    let work = Work::quiet();
    work.stop();
    let kept = record(365 * 24, |_, _| (1.0, 10.0));
    assert_eq!(calendar(&kept, |v| v, &settings(), Seed(1), &work), Err(Stopped));
}

#[test]
fn a_month_moved_by_one_storm_does_not_know_its_direction() {
    // One windy day in August, the rest still: most draws without it say nothing.
    let kept = record(365 * 24, |hour, _| {
        let day = hour / 24;
        (if (31..60).contains(&day) || day == 220 { 5.0 } else { 0.0 }, 40.0)
    });
    let found = of(&kept);
    let half = |month: usize| found.months[month].drift.toward_ci95_half_deg;
    crate::assert_close!(half(1).unwrap_or(f64::NAN), 0.0, 1e-6, "February blows all the time");
    assert_eq!((found.months[7].name.as_str(), half(7)), ("August", Some(180.0)));
    assert_eq!(found.months[7].drift.ratio_ci95, None);
}

#[test]
fn the_last_midnight_is_no_year_of_its_own() {
    // Rows at the end of their hour: the last one is midnight of the new year.
    let mut kept = record(365 * 24, |_, _| (1.0, 10.0));
    kept.iter_mut().for_each(|s| s.time = s.time.map(|t| t + HOUR));
    let found = of(&kept);
    assert_eq!((found.years.len(), found.months[0].years), (1, 1));
    assert!(found.months.iter().all(Period::is_complete) && found.seasons.iter().all(Period::is_complete));
}
