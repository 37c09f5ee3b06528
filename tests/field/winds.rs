//! Four real wind records: how they are guessed, what is set aside, where their sand goes.

use ventifact::files::wind_table::{self, SpeedUnit, WindGuess, WindLayout, ZeroDirection};
use ventifact::ground::WindRecord;

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
