//! Which unit a speed column is in: from a name, else from the grid its values lie on, else from their size.

use super::import::SpeedUnit;

/// A unit written in a column name or a header.
pub(super) fn named(text: &str) -> Option<SpeedUnit> {
    let lower = text.to_lowercase();
    let squeezed: String = lower.chars().filter(|c| !c.is_whitespace()).collect();
    let words: Vec<&str> = lower.split(|c: char| !c.is_alphanumeric()).filter(|w| !w.is_empty()).collect();
    let has = |names: &[&str]| words.iter().any(|w| names.contains(w));
    if ["km/h", "kmh-1", "kmh⁻¹"].iter().any(|n| squeezed.contains(n)) || has(&["kmh", "kph", "kmph"]) {
        Some(SpeedUnit::KilometrePerHour)
    } else if ["m/s", "ms-1", "ms^-1", "ms⁻¹", "m.s-1", "metrespersecond", "meterspersecond"]
        .iter()
        .any(|n| squeezed.contains(n))
        || has(&["mps"])
    {
        Some(SpeedUnit::MetrePerSecond)
    } else if has(&["mph"]) || squeezed.contains("mi/h") || squeezed.contains("milesperhour") {
        Some(SpeedUnit::MilePerHour)
    } else if has(&["kt", "kts", "kn", "knot", "knots", "sknt"]) {
        Some(SpeedUnit::Knot)
    } else {
        None
    }
}

/// The unit the values themselves suggest, and why.
pub(super) fn from_values(speeds: &[f64]) -> (SpeedUnit, String) {
    let mut sorted: Vec<f64> = speeds.iter().copied().filter(|v| v.is_finite() && *v > 0.0).collect();
    sorted.sort_by(f64::total_cmp);
    if let Some((native, unit, quantum)) = converted_grid(&sorted) {
        let reason = format!(
            "speed unit {}: the values are whole multiples of {quantum}, which is one {} in {}",
            unit.label(),
            native.label(),
            unit.label()
        );
        return (unit, reason);
    }
    let median = sorted.get(sorted.len() / 2).copied().unwrap_or(0.0);
    let whole = sorted.iter().all(|v| v.fract() == 0.0);
    let unit = match (whole, median) {
        (_, m) if m >= 14.0 => SpeedUnit::KilometrePerHour,
        (true, m) if m >= 5.0 => SpeedUnit::Knot,
        (false, m) if m >= 9.0 => SpeedUnit::Knot,
        _ => SpeedUnit::MetrePerSecond,
    };
    let kind = if whole { "whole numbers" } else { "fractions" };
    let reason = format!(
        "speed unit {}: no name says it; the values are {kind} with a median of {median:.1} where wind blows",
        unit.label()
    );
    (unit, reason)
}

/// Whole steps of one unit written in another leave a grid that plain tenths do not:
/// (unit of the instrument, unit of the column, step).
fn converted_grid(sorted: &[f64]) -> Option<(SpeedUnit, SpeedUnit, f64)> {
    const UNITS: [SpeedUnit; 4] =
        [SpeedUnit::MetrePerSecond, SpeedUnit::KilometrePerHour, SpeedUnit::MilePerHour, SpeedUnit::Knot];
    let mut distinct = sorted.to_vec();
    distinct.dedup();
    let tenths = distinct.iter().all(|v| (10.0 * v - (10.0 * v).round()).abs() < 1e-9);
    if distinct.len() < 8 || tenths {
        return None;
    }
    let mut best: Option<(f64, SpeedUnit, SpeedUnit, f64)> = None;
    for native in UNITS {
        for unit in UNITS.into_iter().filter(|u| *u != native) {
            let step = native.metres_per_second() / unit.metres_per_second();
            let off = |v: &f64| (v - step * (v / step).round()).abs();
            // A printed value may be off by half its last digit, and the factor itself is often cut
            // at five or six figures.
            let mut misfits: Vec<f64> = distinct.iter().map(|v| (off(v) - 2e-5 * v).max(0.0)).collect();
            misfits.sort_by(f64::total_cmp);
            // A few bad records must not hide the grid.
            let misfit = misfits[(misfits.len() - 1) * 98 / 100];
            if misfit < 0.006 && misfit < 0.05 * step && best.is_none_or(|(m, ..)| misfit < m) {
                best = Some((misfit, native, unit, step));
            }
        }
    }
    best.map(|(_, native, unit, step)| (native, unit, (step * 1e5).round() / 1e5))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn units_are_read_from_names() {
        for (name, unit) in [
            ("Wspd (m/s)", SpeedUnit::MetrePerSecond),
            ("wind speed [m s-1]", SpeedUnit::MetrePerSecond),
            ("ws_kmh", SpeedUnit::KilometrePerHour),
            ("Speed km/h", SpeedUnit::KilometrePerHour),
            ("wind_mph", SpeedUnit::MilePerHour),
            ("sknt", SpeedUnit::Knot),
            ("speed (kt)", SpeedUnit::Knot),
        ] {
            assert_eq!(named(name), Some(unit), "{name}");
        }
        assert_eq!(named("wind_speed"), None);
    }

    #[test]
    fn knots_written_in_miles_per_hour_give_themselves_away() {
        let mut speeds: Vec<f64> = (3..30).map(|k| f64::from(k) * 1.15078).collect();
        speeds.push(50.3);
        let (unit, reason) = from_values(&speeds);
        assert_eq!(unit, SpeedUnit::MilePerHour);
        assert!(reason.contains("1.15078"), "{reason}");
    }

    #[test]
    fn knots_written_in_metres_per_second_to_two_places_give_themselves_away() {
        let speeds: Vec<f64> = (1..30).map(|k| (f64::from(k) * 51.4444).round() / 100.0).collect();
        let (unit, reason) = from_values(&speeds);
        assert_eq!(unit, SpeedUnit::MetrePerSecond);
        assert!(reason.contains("one knot"), "{reason}");
    }

    #[test]
    fn plain_tenths_of_moderate_size_are_taken_for_metres_per_second() {
        let speeds: Vec<f64> = (1..90).map(|k| f64::from(k) / 10.0).collect();
        assert_eq!(from_values(&speeds).0, SpeedUnit::MetrePerSecond);
    }
}
