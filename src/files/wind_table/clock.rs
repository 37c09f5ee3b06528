//! Dates and times of day as tables write them, to seconds since 1970 in the record's own clock.

use chrono::{Days, NaiveDate};

/// How the time columns of one record are to be understood.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Clock {
    /// Dates with the year last put the day first.
    pub day_first: bool,
    /// A lone hour column counts hours and minutes together, 1330 for half past one.
    pub hours_with_minutes: bool,
}

impl Clock {
    /// The time of a row from its time cells; `None` when they make no valid time. Time zones
    /// are read over: a record keeps its own clock.
    pub fn stamp(self, cells: &[&str]) -> Option<i64> {
        match cells {
            [whole] => self.date_and_time(whole),
            [date, time] => seconds(self.date(date)?, time_of_day(time)?),
            [year, month, day, rest @ ..] if rest.len() <= 3 => {
                let date =
                    NaiveDate::from_ymd_opt(full_year(integer(year)?)?, integer(month)?, integer(day)?)?;
                seconds(date, self.split_time(rest)?)
            }
            _ => None,
        }
    }

    fn split_time(self, cells: &[&str]) -> Option<i64> {
        let hour: i64 = cells.first().map_or(Some(0), |c| integer(c))?;
        if cells.len() == 1 && self.hours_with_minutes {
            return clock_seconds(hour / 100, hour % 100, 0);
        }
        let minute = cells.get(1).map_or(Some(0), |c| integer(c))?;
        let second = cells.get(2).map_or(Some(0), |c| integer(c))?;
        clock_seconds(hour, minute, second)
    }

    fn date_and_time(self, text: &str) -> Option<i64> {
        let text = text.trim();
        if text.bytes().all(|b| b.is_ascii_digit()) && matches!(text.len(), 10 | 12 | 14) {
            return seconds(self.date(&text[..8])?, time_of_day(&text[8..])?);
        }
        match text.find(['T', ' ']) {
            // "1 Jan 2013 04:00" has blanks inside the date; the time starts at the last blank
            // before the first colon.
            Some(first) => {
                let cut = text.find(':').and_then(|colon| text[..colon].rfind(['T', ' '])).unwrap_or(first);
                match (self.date(&text[..cut]), time_of_day(&text[cut + 1..])) {
                    (Some(date), Some(time)) => seconds(date, time),
                    _ => seconds(self.date(text)?, 0),
                }
            }
            None => seconds(self.date(text)?, 0),
        }
    }

    /// `2013-01-31`, `31/1/2013` or `1/31/2013`, `20130131`, `31 Jan 2013`.
    fn date(self, text: &str) -> Option<NaiveDate> {
        let text = text.trim();
        if text.len() == 8 && text.bytes().all(|b| b.is_ascii_digit()) {
            return NaiveDate::from_ymd_opt(
                integer(&text[..4])?,
                integer(&text[4..6])?,
                integer(&text[6..])?,
            );
        }
        let parts: Vec<&str> = text.split(['-', '/', '.', ' ']).filter(|p| !p.is_empty()).collect();
        let [a, b, c] = parts[..] else { return None };
        if let Some(month) = month_named(b) {
            let (day, year) = if a.len() == 4 { (c, a) } else { (a, c) };
            return NaiveDate::from_ymd_opt(full_year(integer(year)?)?, month, integer(day)?);
        }
        if a.len() == 4 {
            return NaiveDate::from_ymd_opt(integer(a)?, integer(b)?, integer(c)?);
        }
        let (day, month) = if self.day_first { (a, b) } else { (b, a) };
        NaiveDate::from_ymd_opt(full_year(integer(c)?)?, integer(month)?, integer(day)?)
    }
}

/// Whether a written date settles which of day and month comes first: `Some(true)` for day first.
pub(super) fn day_first_shown(text: &str) -> Option<bool> {
    let date = text.trim().split([' ', 'T']).next()?;
    let parts: Vec<&str> = date.split(['-', '/', '.']).collect();
    let [a, b, _] = parts[..] else { return None };
    if a.len() > 2 {
        return None;
    }
    match (integer::<u32>(a)?, integer::<u32>(b)?) {
        (first, second) if first > 12 && second <= 12 => Some(true),
        (first, second) if second > 12 && first <= 12 => Some(false),
        _ => None,
    }
}

/// Whether the cell carries an offset from universal time, so that clock changes cannot fold it.
pub(super) fn has_zone(text: &str) -> bool {
    let Some((_, time)) = text.trim().split_once(['T', ' ']) else { return false };
    time.ends_with('Z') || time.contains('+') || time.rfind('-').is_some_and(|at| at >= 4)
}

fn seconds(date: NaiveDate, in_day: i64) -> Option<i64> {
    // 24:00 belongs to the next day.
    let date = if in_day >= 86_400 { date.checked_add_days(Days::new(1))? } else { date };
    let days = date.signed_duration_since(NaiveDate::from_ymd_opt(1970, 1, 1)?).num_days();
    Some(days * 86_400 + in_day % 86_400)
}

/// `"01:00"`, `"24:00"`, `"13:05:30.5Z"`, `"1:30 pm"`, `"0130"`; seconds of the day up to 86 400.
fn time_of_day(text: &str) -> Option<i64> {
    let lower = text.trim().to_lowercase();
    let half = if lower.ends_with("pm") { Some(12) } else { lower.ends_with("am").then_some(0) };
    let bare = lower.trim_end_matches("am").trim_end_matches("pm").trim_end_matches('z').trim();
    let bare = bare.split(['+', ' ']).next()?;
    let bare = bare.rfind('-').map_or(bare, |at| &bare[..at]);
    let (hour, minute, second) = if bare.contains(':') {
        let mut parts = bare.split(':');
        let hour: i64 = integer(parts.next()?)?;
        let minute = integer(parts.next()?)?;
        let second = parts.next().map_or(Some(0), |s| integer(s.split('.').next()?))?;
        (hour, minute, second)
    } else {
        let whole: i64 = integer(bare)?;
        match bare.len() {
            1 | 2 => (whole, 0, 0),
            3 | 4 => (whole / 100, whole % 100, 0),
            6 => (whole / 10_000, whole / 100 % 100, whole % 100),
            _ => return None,
        }
    };
    let hour = match half {
        Some(add) if (1..=12).contains(&hour) => hour % 12 + add,
        Some(_) => return None,
        None => hour,
    };
    clock_seconds(hour, minute, second)
}

fn clock_seconds(hour: i64, minute: i64, second: i64) -> Option<i64> {
    if !((0..=24).contains(&hour) && (0..60).contains(&minute) && (0..=60).contains(&second)) {
        return None;
    }
    Some(hour * 3600 + minute * 60 + second).filter(|total| *total <= 86_400)
}

/// A whole number, also when written `"7.0"`.
fn integer<T: TryFrom<i64>>(text: &str) -> Option<T> {
    let text = text.trim();
    let whole = match text.parse::<i64>() {
        Ok(whole) => whole,
        Err(_) => {
            let value = text.parse::<f64>().ok()?;
            if value.fract() != 0.0 || value.abs() > 1e9 {
                return None;
            }
            value as i64
        }
    };
    T::try_from(whole).ok()
}

/// Two-digit years are 1950 to 2049.
fn full_year(year: i32) -> Option<i32> {
    match year {
        0..=49 => Some(2000 + year),
        50..=99 => Some(1900 + year),
        1700..=2300 => Some(year),
        _ => None,
    }
}

fn month_named(text: &str) -> Option<u32> {
    const NAMES: [&str; 12] =
        ["jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"];
    let lower = text.to_lowercase();
    let short = lower.get(..3)?;
    NAMES.iter().position(|n| *n == short).map(|at| at as u32 + 1)
}

#[cfg(test)]
mod tests {
    use super::*;

    const NEW_YEAR_2013: i64 = 1_356_998_400;

    #[test]
    fn written_dates_mean_the_same_instant() {
        let clock = Clock::default();
        for cells in [
            &["2013-01-01T06:00:00Z"][..],
            &["2013-01-01 06:00"],
            &["2013/1/1", "6:00 am"],
            &["01/01/2013", "06:00"],
            &["1 Jan 2013 06:00"],
            &["201301010600"],
            &["20130101", "0600"],
            &["2013", "1", "1", "6"],
            &["2013", "1", "1", "6.0", "0"],
            &["12/31/2012", "30:00"],
        ] {
            let want = (cells[0] != "12/31/2012").then_some(NEW_YEAR_2013 + 6 * 3600);
            assert_eq!(clock.stamp(cells), want, "{cells:?}");
        }
    }

    #[test]
    fn midnight_as_24_belongs_to_the_next_day() {
        assert_eq!(Clock::default().stamp(&["12/31/2012", "24:00"]), Some(NEW_YEAR_2013));
        assert_eq!(Clock::default().stamp(&["2012", "12", "31", "24"]), Some(NEW_YEAR_2013));
    }

    #[test]
    fn the_order_of_day_and_month_is_the_callers() {
        let day_first = Clock { day_first: true, ..Clock::default() };
        assert_eq!(day_first.stamp(&["1/2/2013"]), Some(NEW_YEAR_2013 + 31 * 86_400));
        assert_eq!(Clock::default().stamp(&["1/2/2013"]), Some(NEW_YEAR_2013 + 86_400));
        assert_eq!(day_first_shown("31/01/2013"), Some(true));
        assert_eq!(day_first_shown("1/31/2013 04:00"), Some(false));
        assert_eq!(day_first_shown("1/2/2013"), None);
        assert_eq!(day_first_shown("2013-01-31"), None);
    }

    #[test]
    fn hours_may_carry_their_minutes() {
        let clock = Clock { hours_with_minutes: true, ..Clock::default() };
        assert_eq!(clock.stamp(&["2013", "1", "1", "1330"]), Some(NEW_YEAR_2013 + 13 * 3600 + 1800));
    }

    #[test]
    fn zones_are_seen_and_read_over() {
        assert!(has_zone("2013-01-01T06:00:00Z") && has_zone("2013-01-01 06:00-05:00"));
        assert!(!has_zone("2013-01-01 06:00") && !has_zone("2013-01-01"));
        assert_eq!(Clock::default().stamp(&["2013-01-01T06:00:00-05:00"]), Some(NEW_YEAR_2013 + 6 * 3600));
    }

    #[test]
    fn impossible_times_are_none() {
        for cells in [
            &["2013-02-30"][..],
            &["hello"],
            &["2013", "13", "1"],
            &["1/1/2013", "25:00"],
            &["2013", "1", "1", "9223372036854775807"],
            &[""],
            &["é é é"],
        ] {
            assert_eq!(Clock::default().stamp(cells), None, "{cells:?}");
        }
    }
}
