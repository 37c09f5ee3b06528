//! Real records by the calendar, thinned, and with their rounding.

use ventifact::assert_close;
use ventifact::files::wind_table;
use ventifact::ground::{Body, Seed, Work};
use ventifact::science::wind::{Site, WindAssessment, WindSettings, assess};

use crate::field_data;

/// The record of a file under Kok's law, with what was found printed.
fn assessed(test: &str, file: &str, height_m: f64) -> Option<WindAssessment> {
    let path = field_data(test)?.join("wind").join(file);
    let guess = wind_table::guess(&path).unwrap_or_else(|error| panic!("{file}: {error}"));
    let record = wind_table::read(&path, &guess.import).unwrap_or_else(|error| panic!("{file}: {error}"));
    let earth = Body::earth();
    let site = Site { height_m, roughness_m: 1e-3, air: earth.air, gravity: earth.gravity, is_earth: true };
    let settings = WindSettings { resamples: 400, ..WindSettings::default() };
    let found = assess(&record, &site, &settings, Seed(1), &Work::quiet()).expect("an assessment");
    println!("{file}");
    print_thinning(&found);
    print_calendar(&found);
    println!("  {:?}, gusts {:?}", found.rounding, found.gusts);
    Some(found)
}

fn print_thinning(found: &WindAssessment) {
    let Some(thinning) = &found.thinning else { return };
    println!("  ratio {:?}", thinning.ratio);
    for t in &thinning.thinned {
        let ratio = t.ratio.map_or([f64::NAN; 3], |r| [r.low, r.mean, r.high]);
        let turn = t.turn_deg.map_or([f64::NAN; 2], |r| [r.low, r.high]);
        println!(
            "  {:>4} h, {:>2} phases: total {:.3}–{:.3}, ratio {:.3}/{:.3}/{:.3}, turned {:+.1}° to {:+.1}°; means: total \
             {:.3}, ratio {:.3}",
            t.hours,
            t.phases,
            t.total.low,
            t.total.high,
            ratio[0],
            ratio[1],
            ratio[2],
            turn[0],
            turn[1],
            t.averaged.total,
            t.averaged.ratio.unwrap_or(f64::NAN),
        );
    }
    for c in &thinning.classed {
        println!(
            "  {}: total {:.3}, ratio {:.3}",
            c.name,
            c.change.total,
            c.change.ratio.unwrap_or(f64::NAN)
        );
    }
    println!("  {}", thinning.six_hourly().unwrap_or_default());
}

fn print_calendar(found: &WindAssessment) {
    let Some(calendar) = &found.calendar else { return };
    for p in calendar.years.iter().chain(&calendar.months).chain(&calendar.seasons) {
        println!(
            "  {:<10} total {:>7.2} {:.2?} toward {:>5.0}° ± {:>4.0}° ratio {:.2} covered {:.3}",
            p.name,
            p.drift.total,
            p.total_ci95.unwrap_or([f64::NAN; 2]),
            p.drift.toward.map_or(f64::NAN, |a| a.deg()),
            p.drift.toward_ci95_half_deg.unwrap_or(f64::NAN),
            p.drift.ratio.unwrap_or(f64::NAN),
            p.covered,
        );
    }
}

/// Thinning keeps the mean of an even record; averaging and coarse classes do not.
fn check_thinning(found: &WindAssessment) {
    let thinning = found.thinning.as_ref().expect("sand moves");
    for t in &thinning.thinned {
        assert_close!(t.total.mean, 1.0, 0.02, "{} h: mean over the phases", t.hours);
        assert!(t.total.low <= 1.0 && t.total.high >= 1.0, "{} h", t.hours);
        assert!(t.averaged.total < 1.0, "{} h: means move less sand", t.hours);
    }
    let spread = |hours: f64| thinning.every(hours).map_or(f64::NAN, |t| t.total.high - t.total.low);
    assert!(spread(24.0) > spread(2.0), "a longer interval leaves more open");
}

#[test]
fn the_typical_year_by_months_and_thinned() {
    let name = "the_typical_year_by_months_and_thinned";
    let Some(found) = assessed(name, "hourly_typical_year_west_texas_a.csv", 10.0) else { return };
    check_thinning(&found);
    let calendar = found.calendar.as_ref().expect("a calendar");
    // Put together from several years: months, but no year of its own.
    assert_eq!((calendar.years.len(), calendar.months.len(), calendar.seasons.len()), (0, 12, 4));
    let months: f64 = calendar.months.iter().map(|m| m.drift.total).sum();
    assert_close!(months, found.flux.total, 0.01 * found.flux.total, "the months make the year");
    assert!(
        calendar
            .months
            .iter()
            .filter(|m| m.drift.total > 0.0)
            .all(|m| m.drift.toward_ci95_half_deg.is_some())
    );
    assert_eq!(found.rounding.direction_deg, Some(10.0));
}

#[test]
fn half_hours_thinned_and_by_the_calendar() {
    let Some(found) = assessed("half_hours_thinned", "half_hourly_year_2017.csv", 2.0) else { return };
    check_thinning(&found);
    let thinning = found.thinning.as_ref().expect("sand moves");
    assert_eq!(thinning.every(6.0).map(|t| t.phases), Some(12));
    let calendar = found.calendar.as_ref().expect("a calendar");
    assert_eq!(calendar.years.iter().map(|y| y.name.as_str()).collect::<Vec<_>>(), ["2017"]);
    assert_close!(calendar.years[0].drift.total, found.flux.total, 1e-9 * found.flux.total, "the one year");
    assert_eq!(found.rounding.direction_deg, Some(1.0));
}

#[test]
fn the_airport_reports_tens_of_degrees_and_whole_knots() {
    let name = "the_airport_reports_tens_of_degrees";
    let Some(found) = assessed(name, "hourly_airport_year_with_bad_record.csv", 10.0) else { return };
    check_thinning(&found);
    assert_eq!((found.rounding.direction_deg, found.rounding.speed_unit), (Some(10.0), "knots"));
    // sin(5°)/(5° in radians) = 0.998731.
    assert_close!(found.rounding.grouping_factor(), 1.0 / 0.998_731, 1e-6, "grouping factor");
    let gusts = found.gusts.as_ref().expect("the airport reports gusts");
    assert!(
        gusts.drift.total > found.flux.total && gusts.factor.is_some_and(|f| (1.0..2.5).contains(&f)),
        "{gusts:?}"
    );
    assert!(found.rounding.speed_gain.is_some_and(|gain| gain > 0.0 && gain < 0.2));
}
