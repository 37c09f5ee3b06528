//! Four real wind records: how they are guessed, what is set aside, where their sand goes.

use ventifact::assert_close;
use ventifact::files::wind_table::{self, SpeedUnit, WindGuess, WindLayout, ZeroDirection};
use ventifact::ground::{Axis, Body, Seed, WindRecord, Work};
use ventifact::science::alignment::{
    FluxUp, Foresight, Refusal, TrendEvidence, VerdictSettings, foresee, judge,
};
use ventifact::science::wind::quality;
use ventifact::science::wind::regime::{flows, gathered};
use ventifact::science::wind::{Drift, Law, Site, Transport, WindAssessment, WindSettings, assess};

use crate::field_data;

fn record(test: &str, file: &str) -> Option<(WindGuess, WindRecord)> {
    let path = field_data(test)?.join("wind").join(file);
    let guess = wind_table::guess(&path).unwrap_or_else(|error| panic!("{file}: {error}"));
    println!("{file}:\n  {}", guess.reasons.join("\n  "));
    for caution in &guess.cautions {
        println!("  ! {}: {}", caution.code, caution.text);
    }
    let record = wind_table::read(&path, &guess.import).unwrap_or_else(|error| panic!("{file}: {error}"));
    Some((guess, record))
}

#[test]
fn typical_year_is_guessed() {
    let Some((guess, record)) = record("typical_year_is_guessed", "hourly_typical_year_west_texas_a.csv")
    else {
        return;
    };
    assert_eq!(guess.import.header_lines, 2);
    assert_eq!(guess.import.layout, WindLayout::Series { time: vec![0, 1], speed: 46, direction: 43 });
    assert_eq!(guess.import.speed_unit, SpeedUnit::MetrePerSecond);
    assert_eq!(guess.import.zero_direction, ZeroDirection::NoDirection);
    assert!(!guess.import.day_first);
    assert_eq!(record.samples.len(), 8760);
    assert!(record.samples.iter().all(|s| s.time.is_some() && s.speed.is_some()));
}

#[test]
fn airport_year_is_guessed() {
    let Some((guess, record)) = record("airport_year_is_guessed", "hourly_airport_year_with_bad_record.csv")
    else {
        return;
    };
    assert_eq!(guess.import.header_lines, 1);
    let WindLayout::Series { speed, direction, .. } = &guess.import.layout else { panic!("a series") };
    assert_eq!((*speed, *direction), (9, 8));
    assert_eq!(guess.import.speed_unit, SpeedUnit::MilePerHour);
    assert!(guess.reasons.iter().any(|r| r.contains("1.15078")), "{:?}", guess.reasons);
    assert!(guess.cautions.iter().any(|c| c.code == "speed-unit-guessed"));
    assert_eq!(record.samples.len(), 8703);
    assert!(record.samples.iter().all(|s| s.time.is_some()));
}

#[test]
fn half_hourly_year_is_guessed() {
    let Some((guess, record)) = record("half_hourly_year_is_guessed", "half_hourly_year_2017.csv") else {
        return;
    };
    assert_eq!(
        guess.import.layout,
        WindLayout::Series { time: vec![1, 2, 3, 4, 5], speed: 14, direction: 13 }
    );
    assert_eq!(guess.import.speed_unit, SpeedUnit::MetrePerSecond);
    assert_eq!(record.samples.len(), 17_520);
    assert!(record.samples.windows(2).all(|w| w[1].time.zip(w[0].time).is_some_and(|(b, a)| b - a == 1800)));
}

#[test]
fn nameless_minute_day_is_guessed_unsurely() {
    let Some((guess, record)) = record("nameless_minute_day_is_guessed_unsurely", "minute_calm_day.dat")
    else {
        return;
    };
    assert_eq!(guess.import.delimiter, ' ');
    assert_eq!(guess.import.header_lines, 2);
    assert_eq!(
        guess.import.layout,
        WindLayout::Series { time: vec![0, 2, 3, 4, 5], speed: 42, direction: 44 }
    );
    assert_eq!(guess.import.speed_unit, SpeedUnit::MetrePerSecond);
    assert!(guess.cautions.iter().any(|c| c.code == "columns-guessed"));
    assert_eq!(record.samples.len(), 1440);
}

fn site(height_m: f64) -> Site {
    let earth = Body::earth();
    Site { height_m, roughness_m: 1e-3, air: earth.air, gravity: earth.gravity, is_earth: true }
}

fn settings(transport: Transport) -> WindSettings {
    WindSettings { transport, block_days: 30.0, resamples: 200, ..WindSettings::default() }
}

fn assessed(record: &WindRecord, transport: Transport) -> WindAssessment {
    let found =
        assess(record, &site(10.0), &settings(transport), Seed(1), &Work::quiet()).expect("an assessment");
    println!(
        "  used {} of {}, calm {}, DP {:?}, flux {:?}",
        found.used, found.rows, found.calm, found.fryberger, found.flux
    );
    for aside in &found.set_aside {
        println!("  aside {} {}: {}", aside.code, aside.count, aside.text);
    }
    for caution in &found.cautions {
        println!("  ! {}: {}", caution.code, caution.text);
    }
    found
}

/// The drift by q = U²(U − 6), U in m/s: the form the expected figures below were made with.
fn by_plain_law(record: &WindRecord) -> Drift {
    let checked = quality::check(record, 75.0, &Work::quiet()).expect("not stopped");
    let law = |u: f64| if u > 6.0 { u * u * (u - 6.0) } else { 0.0 };
    Drift::of(&gathered(&flows(&checked.kept, law).0), "(m/s)³")
}

fn print_table(found: &WindAssessment) {
    println!("  {:<20} {:<22} {:>7} {:>8} {:>7}", "law", "threshold", "u*t", "toward", "ratio");
    for row in &found.sensitivity {
        println!(
            "  {:<20} {:<22} {:>7.3} {:>8.1} {:>7.3}",
            row.law,
            row.threshold,
            row.threshold_ustar,
            row.drift.toward.map_or(f64::NAN, |a| a.deg()),
            row.drift.ratio.unwrap_or(f64::NAN),
        );
    }
}

fn foreseen(found: &WindAssessment) -> Foresight {
    let flux_up = FluxUp { ratio: 1.6, doubt: 1.25 };
    foresee(&found.regime, &found.draws, flux_up, Seed(1), &Work::quiet()).expect("not stopped")
}

/// Expected figures: an independent sum in Python over the file.
#[test]
fn typical_year_drifts_to_the_east_north_east_and_mostly_cancels() {
    let Some((_, record)) = record("typical_year_drifts", "hourly_typical_year_west_texas_a.csv") else {
        return;
    };
    let plain = by_plain_law(&record);
    assert_close!(plain.toward.expect("a direction").deg(), 62.214, 0.001, "toward");
    assert_close!(plain.ratio.expect("a ratio"), 0.25016, 1e-5, "ratio");
    let found = assessed(&record, Transport::Physical(Law::Kok));
    print_table(&found);
    assert!(found.cautions.iter().any(|c| c.code == "typical-year"), "{:?}", found.cautions);
    assert!(found.cautions.iter().any(|c| c.code == "rounded-direction"));
    assert!(found.cautions.iter().any(|c| c.code == "law-dependent-drift"));
    assert!(found.set_aside.iter().map(|s| s.count).sum::<usize>() <= 5, "{:?}", found.set_aside);
    assert_eq!(found.draws.len(), 200);
    assert!(found.flux.toward_ci95_half_deg.is_some_and(|h| h > 5.0));
    let seasons: f64 = found.seasons.iter().map(|s| s.drift.total).sum();
    assert_close!(seasons, found.flux.total, 1e-9 * found.flux.total, "seasons add up");
    let evidence = TrendEvidence { axis: Axis::from_deg(150.0), kappa_mean: 200.0, half_ci: 4.0 };
    let verdict = judge(&evidence, &foreseen(&found), None, &VerdictSettings::default()).expect("a verdict");
    for theory in &verdict.theories {
        println!(
            "  {:<28} axis {:?} spread {:?} ln BF {:.2} posterior {:.3}",
            theory.name(),
            theory.axis().map(|a| a.deg()),
            theory.spread_deg,
            theory.ln_bayes_factor,
            theory.posterior
        );
    }
    println!(
        "  obliquity {:?} {:?} {:?}",
        verdict.obliquity_deg, verdict.obliquity_ci95_deg, verdict.probabilities
    );
    for caution in &verdict.cautions {
        println!("  ! {}: {}", caution.code, caution.text);
    }
    assert!(verdict.cautions.iter().any(|c| c.code == "low-ratio"));
}

#[test]
fn the_bad_gust_of_the_airport_is_set_aside_and_named() {
    let Some((_, record)) = record("the_bad_gust", "hourly_airport_year_with_bad_record.csv") else { return };
    let found = assessed(&record, Transport::Physical(Law::Kok));
    let bad = found.set_aside.iter().find(|s| s.code == "impossible-speed").expect("the gust is set aside");
    assert_eq!(bad.count, 1);
    assert!(bad.text.contains("line 1011") && bad.text.contains("468.66 m/s"), "{}", bad.text);
    // With the gust the ratio would be 0.999 toward 80°.
    let plain = by_plain_law(&record);
    assert_close!(plain.toward.expect("a direction").deg(), 113.37, 0.5, "toward");
    assert_close!(plain.ratio.expect("a ratio"), 0.6817, 0.005, "ratio");
}

#[test]
fn the_half_hourly_year_drifts_to_the_north_east() {
    let Some((_, record)) = record("the_half_hourly_year", "half_hourly_year_2017.csv") else { return };
    let plain = by_plain_law(&record);
    assert_close!(plain.toward.expect("a direction").deg(), 38.832, 0.001, "toward");
    assert_close!(plain.ratio.expect("a ratio"), 0.763_55, 1e-5, "ratio");
    let found = assessed(&record, Transport::Physical(Law::Kok));
    print_table(&found);
    assert_eq!(found.used, 17_520, "{:?}", found.set_aside);
}

#[test]
fn the_calm_day_has_no_drift_and_no_verdict() {
    let Some((_, record)) = record("the_calm_day", "minute_calm_day.dat") else { return };
    for transport in [Transport::DriftPotential, Transport::Physical(Law::Kok)] {
        let found = assessed(&record, transport);
        assert_eq!(found.flux.total, 0.0);
        assert_eq!(found.fryberger.as_ref().map(|d| d.total), Some(0.0));
        assert!(found.flux.toward.is_none() && found.flux.ratio.is_none() && found.draws.is_empty());
        assert!(found.cautions.iter().any(|c| c.code == "no-drift"));
        let evidence = TrendEvidence { axis: Axis::from_deg(15.0), kappa_mean: 200.0, half_ci: 4.0 };
        let refused = judge(&evidence, &foreseen(&found), None, &VerdictSettings::default());
        assert_eq!(refused, Err(Refusal::NoDrift));
    }
}

#[test]
fn the_same_seed_gives_the_same_bits() {
    let Some((_, record)) = record("the_same_seed", "hourly_typical_year_west_texas_a.csv") else { return };
    let once = || assess(&record, &site(10.0), &settings(Transport::DriftPotential), Seed(7), &Work::quiet());
    assert_eq!(once(), once());
}
