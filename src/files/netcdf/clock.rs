//! Times as NetCDF files write them, "hours since 1900-01-01 00:00:00", to seconds since 1970.

use chrono::NaiveDate;

/// Seconds in a unit, and where its zero lies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Clock {
    unit_s: f64,
    /// Seconds from 1970 to the zero.
    zero: f64,
}

/// The first day of the Gregorian calendar.
const GREGORIAN: (i64, i64, i64) = (1582, 10, 15);
const DAY: f64 = 86_400.0;

impl Clock {
    /// From the attributes `units` and `calendar`.
    ///
    /// # Errors
    /// What cannot be understood, in words.
    pub fn of(units: &str, calendar: Option<&str>) -> Result<Self, String> {
        let calendar = calendar.unwrap_or("standard").to_lowercase();
        let mixed = match calendar.as_str() {
            "standard" | "gregorian" | "" => true,
            "proleptic_gregorian" => false,
            other => {
                return Err(format!(
                    "the calendar “{other}” has other years than ours; standard, gregorian and proleptic_gregorian are \
                     read"
                ));
            }
        };
        let unknown =
            || format!("the time unit “{units}” is not understood; hours since 1900-01-01 00:00 would be");
        let lower = units.trim().to_lowercase();
        let (unit, since) = lower.split_once(" since ").ok_or_else(unknown)?;
        let unit_s = match unit.trim() {
            "seconds" | "second" | "secs" | "sec" | "s" => 1.0,
            "minutes" | "minute" | "mins" | "min" => 60.0,
            "hours" | "hour" | "hrs" | "hr" | "h" => 3600.0,
            "days" | "day" | "d" => DAY,
            _ => return Err(unknown()),
        };
        // A T may divide date and time; the one of UTC follows no digit.
        let divided = since.find('t').filter(|at| since[..*at].ends_with(|c: char| c.is_ascii_digit()));
        let since = divided.map_or(since.to_owned(), |at| format!("{} {}", &since[..at], &since[at + 1..]));
        let mut parts = since.split_whitespace();
        let days = parts.next().and_then(|date| days_of(date, mixed)).ok_or_else(unknown)?;
        let in_day = parts.next().map_or(Some(0.0), time_of_day).ok_or_else(unknown)?;
        // A zone that is none; others would shift the record's clock.
        let zone = parts.next().unwrap_or("utc");
        if !matches!(zone, "utc" | "z" | "gmt" | "0" | "+0" | "0:00" | "+0:00" | "00:00" | "+00:00") {
            return Err(format!("the times count from the zone “{zone}”; universal time is read"));
        }
        Ok(Self { unit_s, zero: days as f64 * DAY + in_day })
    }

    /// Seconds since 1970, to the nearest; `None` for times no record has.
    pub fn seconds(self, value: f64) -> Option<i64> {
        let seconds = (self.zero + value * self.unit_s).round();
        // A hundred thousand years either way.
        (seconds.abs() < 3.2e12).then_some(seconds as i64)
    }
}

/// Days from 1970 to a date `year-month-day`; in the mixed calendar dates before October 1582 are Julian.
fn days_of(date: &str, mixed: bool) -> Option<i64> {
    let parts: Vec<&str> = date.split('-').collect();
    let [year, month, day] = parts[..] else { return None };
    let (year, month, day): (i64, i64, i64) = (year.parse().ok()?, month.parse().ok()?, day.parse().ok()?);
    if !((0..10_000).contains(&year) && (1..=12).contains(&month) && (1..=31).contains(&day)) {
        return None;
    }
    if mixed && (year, month, day) < GREGORIAN {
        // Day count of the Julian calendar from 1 March of year 0, of 1461 days in four years.
        let (y, m) = if month > 2 { (year, month - 3) } else { (year - 1, month + 9) };
        let of_era = (1461 * y).div_euclid(4) + (153 * m + 2) / 5 + day - 1;
        // 1 March of year 0 there is two days before that of the Gregorian calendar, which is 719 468 before 1970.
        return Some(of_era - 719_470);
    }
    let gregorian = NaiveDate::from_ymd_opt(year as i32, month as u32, day as u32)?;
    Some(gregorian.signed_duration_since(NaiveDate::from_ymd_opt(1970, 1, 1)?).num_days())
}

fn time_of_day(text: &str) -> Option<f64> {
    let bare = text.trim_end_matches('z').trim_end_matches("+00:00");
    let mut parts = bare.split(':');
    let hour: f64 = parts.next()?.parse().ok()?;
    let minute: f64 = parts.next().map_or(Some(0.0), |p| p.parse().ok())?;
    let second: f64 = parts.next().map_or(Some(0.0), |p| p.parse().ok())?;
    let fits =
        (0.0..=24.0).contains(&hour) && (0.0..60.0).contains(&minute) && (0.0..=60.0).contains(&second);
    (fits && parts.next().is_none()).then_some(hour * 3600.0 + minute * 60.0 + second)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn usual_units_give_the_seconds_of_the_calendar() {
        for (units, value, want) in [
            // 2013-01-01T06:00 is 1 357 020 000.
            ("hours since 1900-01-01 00:00:0.0", 990_558.0, 1_357_020_000),
            ("seconds since 1970-01-01", 1_357_020_000.0, 1_357_020_000),
            ("days since 2013-1-1T06:00:00Z", 0.0, 1_357_020_000),
            ("minutes since 2013-01-01 05:30 UTC", 30.0, 1_357_020_000),
            // Day 735 236 (+ 6 h) from 1 January of year 1 of the mixed calendar: two days more than of ours.
            ("days since 0001-01-01 00:00:00", 734_870.25, 1_357_020_000),
        ] {
            let clock = Clock::of(units, None).expect(units);
            assert_eq!(clock.seconds(value), Some(want), "{units}");
        }
        let proleptic = Clock::of("days since 0001-01-01", Some("proleptic_gregorian")).expect("a clock");
        assert_eq!(proleptic.seconds(734_868.25), Some(1_357_020_000));
    }

    #[test]
    fn what_is_not_understood_is_said() {
        for (units, calendar, word) in [
            ("hours since 1900-01-01", Some("noleap"), "noleap"),
            ("hours since 1900-01-01", Some("360_day"), "360_day"),
            ("months since 1900-01-01", None, "months"),
            ("hours", None, "hours"),
            ("hours since 1900-13-01", None, "not understood"),
            ("hours since 1900-01-01 00:00 +05:30", None, "+05:30"),
        ] {
            let why = Clock::of(units, calendar).expect_err(units);
            assert!(why.contains(word), "{units}: {why}");
        }
        assert_eq!(Clock::of("days since 1970-01-01", None).expect("a clock").seconds(1e30), None);
        assert_eq!(Clock::of("days since 1970-01-01", None).expect("a clock").seconds(f64::NAN), None);
    }
}
