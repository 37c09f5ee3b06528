//! What a record leaves out: its length, seasons, gaps, sampling, and how coarse its compass is.

use crate::ground::{Caution, WindSample};

use super::rounding::direction_step;

const DAY: i64 = 86_400;
/// Steps of direction from here on are named, degrees: as wide as a sector of the rose.
const COARSE_DEG: f64 = 5.0;

/// Cautions on length, season, gaps and sampling.
pub(super) fn time_cautions(
    kept: &[WindSample],
    interval_s: Option<f64>,
    span: Option<[i64; 2]>,
    cautions: &mut Vec<Caution>,
) {
    let (Some([first, last]), Some(step)) = (span, interval_s) else {
        cautions.push(Caution::new(
            "no-clock",
            "The record has no clock: length, gaps and seasons cannot be checked, and rows that belong together may be \
             drawn apart.",
        ));
        return;
    };
    let months: Vec<(i32, usize)> = kept.iter().filter_map(|s| s.time).map(year_and_month).collect();
    let spliced = is_spliced(kept);
    let days = if spliced { 365.0 } else { (last - first) as f64 / DAY as f64 + step / DAY as f64 };
    if spliced {
        let (from, to) = months.iter().fold((i32::MAX, i32::MIN), |(a, b), (y, _)| (a.min(*y), b.max(*y)));
        cautions.push(Caution::new(
            "typical-year",
            format!(
                "The record is put together from months of {from} to {to}: it shows a usual year, with the extremes \
                 and the differences between years taken out."
            ),
        ));
    } else if days < 350.0 {
        cautions.push(Caution::new(
            "short-record",
            format!("The record spans {days:.0} days, less than a year: seasons are missing and the drift may turn."),
        ));
    } else if days < 5.0 * 365.0 {
        cautions.push(Caution::new(
            "few-years",
            format!(
                "The record spans {:.1} years: differences between years are not in the interval.",
                days / 365.25
            ),
        ));
    }
    let expected = days * DAY as f64 / step;
    let share = kept.len() as f64 / expected.max(1.0);
    if share < 0.9 {
        cautions.push(Caution::new(
            "gaps",
            format!("{:.0} % of the expected rows are missing.", 100.0 * (1.0 - share)),
        ));
    }
    if days >= 350.0 {
        let mut counts = [0usize; 12];
        for (_, month) in &months {
            counts[*month] += 1;
        }
        let mean = months.len() as f64 / 12.0;
        let thin: Vec<&str> =
            (0..12).filter(|m| (counts[*m] as f64) < 0.5 * mean).map(|m| MONTHS[m]).collect();
        if !thin.is_empty() {
            cautions.push(Caution::new(
                "uneven-seasons",
                format!("{} have less than half their share of rows.", thin.join(", ")),
            ));
        }
        let years = days / 365.25;
        if years < 5.0 && (years - years.round()).abs() > 0.1 {
            cautions.push(Caution::new(
                "part-year",
                format!("The record spans {years:.1} years: some seasons count once more than others."),
            ));
        }
    }
    if step > 3600.0 {
        cautions.push(Caution::new(
            "coarse-sampling",
            format!(
                "A row every {:.1} hours: strong winds of shorter life are lost, and with them most sand.",
                step / 3600.0
            ),
        ));
    }
}

pub(super) const MONTHS: [&str; 12] = [
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
];

/// Whether the record is a year put together from months of several years.
pub(super) fn is_spliced(kept: &[WindSample]) -> bool {
    spliced_years(&kept.iter().filter_map(|s| s.time).map(year_and_month).collect::<Vec<_>>())
}

/// Whether each calendar month comes from one year only, and the years differ without running on.
fn spliced_years(months: &[(i32, usize)]) -> bool {
    let mut year_of = [None; 12];
    for (year, month) in months {
        // The last hour of a month, written 24:00, falls into the next.
        match year_of[*month] {
            None => year_of[*month] = Some((*year, 1usize)),
            Some((y, ref mut n)) if y == *year => *n += 1,
            Some((_, n)) if n <= 1 => year_of[*month] = Some((*year, 1)),
            Some(_) => {}
        }
    }
    let years: Vec<i32> = year_of.iter().flatten().map(|(y, _)| *y).collect();
    let in_own_year = months.iter().filter(|(y, m)| year_of[*m].is_some_and(|(year, _)| year == *y)).count();
    let turns = years.windows(2).filter(|w| w[0] != w[1]).count();
    years.len() == 12 && turns >= 2 && in_own_year * 1000 >= months.len() * 995
}

/// Seconds since the year of a time began.
pub(super) fn time_of_year(time: i64) -> i64 {
    let (year, _) = year_and_month(time);
    let before = i64::from(year) - 1;
    // Days from 1970 to the first of January.
    let days = 365 * (before - 1969) + (before / 4 - before / 100 + before / 400) - 477;
    time - DAY * days
}

/// Year and month (0 = January) of a time.
pub(super) fn year_and_month(time: i64) -> (i32, usize) {
    // Days since 0000-03-01 in 400-year cycles of the Gregorian calendar.
    let days = time.div_euclid(DAY) + 719_468;
    let cycle = days.div_euclid(146_097);
    let of_cycle = days.rem_euclid(146_097);
    let year = (of_cycle - of_cycle / 1460 + of_cycle / 36_524 - of_cycle / 146_096) / 365;
    let of_year = of_cycle - (365 * year + year / 4 - year / 100);
    let month = (5 * of_year + 2) / 153;
    let (month, carry) = if month < 10 { (month + 2, 0) } else { (month - 10, 1) };
    ((year + 400 * cycle + carry) as i32, month as usize)
}

/// December–February, March–May, June–August, September–November: 0 to 3.
pub(super) fn season_of(time: i64) -> u8 {
    ((year_and_month(time).1 + 1) % 12 / 3) as u8
}

/// Directions that all lie on a coarse compass.
pub(super) fn rounding(kept: &[WindSample]) -> Option<Caution> {
    let step = direction_step(kept).filter(|step| *step >= COARSE_DEG)?;
    Some(Caution::new(
        "rounded-direction",
        format!(
            "Directions are multiples of {step}°: each may be off by {}°, and finer sectors mean nothing.",
            0.5 * step
        ),
    ))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn months_follow_the_calendar() {
        assert_eq!(year_and_month(0), (1970, 0));
        assert_eq!(year_and_month(951_782_400), (2000, 1)); // 29 February 2000
        assert_eq!(year_and_month(951_868_800), (2000, 2));
        assert_eq!(year_and_month(-1), (1969, 11));
        assert_eq!(time_of_year(0), 0);
        assert_eq!(time_of_year(951_868_800), 60 * DAY); // 1 March 2000, after 31 + 29 days
        assert_eq!(time_of_year(1_356_998_399), 366 * DAY - 1); // the last second of 2012
    }

    #[test]
    fn a_year_put_together_from_years_is_known() {
        let year = |of: [i32; 12]| -> Vec<(i32, usize)> {
            of.into_iter()
                .enumerate()
                .flat_map(|(month, year)| std::iter::repeat_n((year, month), 700))
                .collect()
        };
        assert!(spliced_years(&year([
            1998, 1985, 1985, 2001, 1993, 1990, 2000, 1998, 1987, 1991, 2003, 1999
        ])));
        assert!(!spliced_years(&year([2013; 12])));
        // October to September of a plain record.
        let plain = [2014, 2014, 2014, 2014, 2014, 2014, 2014, 2014, 2014, 2013, 2013, 2013];
        assert!(!spliced_years(&year(plain)));
    }
}
