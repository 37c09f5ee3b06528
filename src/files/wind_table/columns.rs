//! Which columns hold time, speed and direction: by their names, else by how their values behave.

use super::clock::Clock;

/// One column of the body.
pub(super) struct Column {
    pub name: String,
    /// Numbers in row order; `None` where the cell holds none.
    pub numbers: Vec<Option<f64>>,
}

/// Speed and direction, and how they were told.
pub(super) struct WindColumns {
    pub speed: usize,
    pub direction: usize,
    pub named: bool,
    pub reason: String,
}

/// Values people use for "no value"; they must not spoil the look at a column.
pub(super) const CODES: [f64; 17] = [
    -9999.9, -9999.0, -999.9, -999.0, -99.9, -99.0, -9.0, 99.0, 99.9, 99.99, 999.0, 999.9, 990.0, 9999.0,
    9999.9, 99999.0, 32767.0,
];

pub(super) fn is_code(value: f64) -> bool {
    CODES.iter().any(|code| (code - value).abs() < 1e-6 * code.abs())
}

impl Column {
    /// Numbers that are no code.
    fn values(&self) -> impl Iterator<Item = f64> {
        self.numbers.iter().flatten().copied().filter(|v| !is_code(*v))
    }

    fn share_of_numbers(&self) -> f64 {
        self.values().count() as f64 / self.numbers.len().max(1) as f64
    }

    /// Mean step from row to row over the range: small for smooth series and counters.
    fn roughness(&self) -> f64 {
        let values: Vec<f64> = self.values().collect();
        let (low, high) =
            values.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(*v), h.max(*v)));
        let steps: f64 = values.windows(2).map(|w| (w[1] - w[0]).abs()).sum();
        steps / (values.len().max(2) - 1) as f64 / (high - low).max(1e-12)
    }
}

/// Finds speed and direction; `None` when nothing looks like them.
pub(super) fn wind(columns: &[Column], taken: &[usize]) -> Option<WindColumns> {
    let best_named = |score: fn(&str) -> u32| {
        let mut best: Option<(u32, usize)> = None;
        for (at, column) in columns.iter().enumerate().filter(|(at, _)| !taken.contains(at)) {
            let score = score(&column.name);
            if score > 0 && best.is_none_or(|(s, _)| score > s) {
                best = Some((score, at));
            }
        }
        best.map(|(_, at)| at)
    };
    match (best_named(speed_score), best_named(direction_score)) {
        (Some(speed), Some(direction)) if speed != direction => Some(WindColumns {
            speed,
            direction,
            named: true,
            reason: format!(
                "speed in column {} ({:?}), direction in column {} ({:?}): by their names",
                speed + 1,
                columns[speed].name,
                direction + 1,
                columns[direction].name
            ),
        }),
        (speed, direction) => by_values(columns, taken, speed, direction),
    }
}

/// Columns named as components toward east and north.
pub(super) fn components(columns: &[Column], taken: &[usize]) -> Option<(usize, usize)> {
    let find = |names: &[&str], word: &str| {
        columns.iter().enumerate().position(|(at, column)| {
            let words = words(&column.name);
            let first = words.first().map(String::as_str).unwrap_or("");
            !taken.contains(&at)
                && !spoilt(&words)
                && (names.contains(&first) || words.iter().any(|w| w == word))
        })
    };
    let east = find(&["u", "u10", "u10m", "10u", "uas", "uwnd", "ugrd"], "eastward")?;
    let north = find(&["v", "v10", "v10m", "10v", "vas", "vwnd", "vgrd"], "northward")?;
    Some((east, north))
}

/// A column named for gusts, with numbers in it.
pub(super) fn gust(columns: &[Column]) -> Option<usize> {
    columns.iter().position(|column| {
        let words = words(&column.name);
        let has = |list: &[&str]| words.iter().any(|w| list.contains(&w.as_str()));
        let beside = has(&["dir", "direction", "source", "src", "uncert", "flag", "qc", "code", "time"]);
        has(&["gust", "gusts", "windgust", "wgust"]) && !beside && column.values().next().is_some()
    })
}

/// Columns that say where a row belongs: longitude and latitude, or a station.
pub(super) struct Places {
    pub lonlat: Option<[usize; 2]>,
    pub station: Option<usize>,
}

pub(super) fn places(columns: &[String]) -> Places {
    let find = |names: &[&str]| {
        columns
            .iter()
            .position(|name| words(name).first().is_some_and(|first| names.contains(&first.as_str())))
    };
    let lon = find(&["lon", "longitude", "long", "lng"]);
    let lat = find(&["lat", "latitude"]);
    let station = find(&["station", "site", "mast", "cell", "stn", "stationid", "point"]);
    Places { lonlat: lon.zip(lat).map(|(lon, lat)| [lon, lat]), station }
}

/// The pair of columns that behaves like speed and direction: all speeds 0–60 with many values,
/// all directions 0–360 reaching past 180, as near to each other as can be, and restless.
fn by_values(
    columns: &[Column],
    taken: &[usize],
    speed: Option<usize>,
    direction: Option<usize>,
) -> Option<WindColumns> {
    let range = |at: &usize| {
        let column: &Column = &columns[*at];
        column.values().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)))
    };
    let free = |at: &usize| !taken.contains(at) && columns[*at].share_of_numbers() > 0.3;
    // Blanks and codes between them do not part two columns: count only columns that vary.
    let varies: Vec<usize> = (0..columns.len()).filter(|at| free(at) && range(at).1 > range(at).0).collect();
    let place = |at: usize| varies.iter().position(|v| *v == at);
    let speeds: Vec<usize> = match speed {
        Some(at) => vec![at],
        None => varies
            .iter()
            .copied()
            .filter(|at| {
                let (low, high) = range(at);
                (0.0..10.0).contains(&low) && (0.5..60.0).contains(&high)
            })
            .collect(),
    };
    let directions: Vec<usize> = match direction {
        Some(at) => vec![at],
        None => varies
            .iter()
            .copied()
            .filter(|at| {
                let (low, high) = range(at);
                low >= 0.0 && high <= 360.0 && high > 180.0
            })
            .collect(),
    };
    let mut best: Option<(f64, usize, usize)> = None;
    for &s in &speeds {
        for &d in directions.iter().filter(|d| **d != s) {
            let (Some(a), Some(b)) = (place(s), place(d)) else { continue };
            let score = columns[s].roughness() + columns[d].roughness() - 0.2 * a.abs_diff(b) as f64;
            if best.is_none_or(|(so_far, ..)| score > so_far) {
                best = Some((score, s, d));
            }
        }
    }
    let (_, speed, direction) = best?;
    let (slow, fast) = range(&speed);
    let (least, most) = range(&direction);
    Some(WindColumns {
        speed,
        direction,
        named: false,
        reason: format!(
            "speed in column {} (values {slow} to {fast}), direction in column {} (values {least} to {most}): no \
             names; the neighbouring pair that behaves most like wind",
            speed + 1,
            direction + 1
        ),
    })
}

/// Columns that together make the time, and how they were told.
pub(super) fn time(columns: &[Column], first_rows: &[Vec<String>]) -> (Vec<usize>, String) {
    let words: Vec<Vec<String>> = columns.iter().map(|c| words(&c.name)).collect();
    let find = |names: &[&str]| {
        words.iter().position(|w| w.first().is_some_and(|first| names.contains(&first.as_str())))
    };
    let reads = |chosen: &[usize]| {
        let good = |row: &&Vec<String>| {
            let cells: Vec<&str> = chosen.iter().filter_map(|c| row.get(*c)).map(String::as_str).collect();
            [false, true].iter().any(|&day_first| {
                Clock { day_first, hours_with_minutes: chosen.len() == 4 }.stamp(&cells).is_some()
                    || Clock { day_first, hours_with_minutes: false }.stamp(&cells).is_some()
            })
        };
        !first_rows.is_empty() && first_rows.iter().filter(good).count() * 10 >= first_rows.len() * 9
    };
    // A stamp with its zone cannot be folded by summer time, so it goes before everything.
    let zoned = (0..columns.len()).find(|&c| {
        first_rows.iter().all(|r| r.get(c).is_some_and(|cell| super::clock::has_zone(cell))) && reads(&[c])
    });
    if let Some(c) = zoned {
        return (vec![c], format!("time in column {}: a date and time with its zone", c + 1));
    }
    if let (Some(y), Some(m), Some(d)) = (
        find(&["year", "yr", "yyyy"]),
        find(&["month", "mo", "mon", "mm"]),
        find(&["day", "dy", "dd", "dom"]),
    ) {
        let mut chosen = vec![y, m, d];
        if let Some(hour) = find(&["hour", "hr", "hh", "hrmn", "hhmm"]) {
            chosen.push(hour);
            chosen.extend(find(&["minute", "min", "mn", "mi"]));
        }
        if reads(&chosen) {
            return (chosen, "time in columns named year, month, day and on".to_owned());
        }
    }
    if let Some(date) = (0..columns.len()).find(|&c| written_date(first_rows, c) && reads(&[c])) {
        let of_day =
            (0..columns.len()).find(|&c| c != date && time_of_day_column(first_rows, c) && reads(&[date, c]));
        return match of_day {
            Some(c) => {
                (vec![date, c], format!("date in column {}, time of day in column {}", date + 1, c + 1))
            }
            None => (vec![date], format!("date in column {}", date + 1)),
        };
    }
    match counted_clock(columns) {
        Some(chosen) => {
            let listed: Vec<String> = chosen.iter().map(|c| (c + 1).to_string()).collect();
            (chosen, format!("time in columns {}: they count up evenly as a clock does", listed.join(", ")))
        }
        None => (Vec::new(), "no time columns found".to_owned()),
    }
}

fn written_date(rows: &[Vec<String>], column: usize) -> bool {
    let dated =
        |cell: &String| cell.len() >= 8 && cell.contains(['-', '/', '.', ':', ' ']) && !cell.starts_with('-');
    let compact = |cell: &String| {
        matches!(cell.len(), 8 | 12 | 14)
            && cell.starts_with(['1', '2'])
            && cell.bytes().all(|b| b.is_ascii_digit())
    };
    let short = |cell: &String| cell.matches('/').count() == 2;
    rows.iter().all(|r| r.get(column).is_some_and(|c| dated(c) || compact(c) || short(c)))
}

fn time_of_day_column(rows: &[Vec<String>], column: usize) -> bool {
    rows.iter().all(|r| r.get(column).is_some_and(|c| c.contains(':') && c.len() <= 11))
}

/// Nameless columns year, month, day, hour, minute in this order: those whose times step evenly.
fn counted_clock(columns: &[Column]) -> Option<Vec<usize>> {
    let rows = columns.first()?.numbers.len().min(2000);
    let in_range = |at: usize, low: f64, high: f64| {
        columns.get(at).is_some_and(|c| {
            c.numbers[..rows].iter().all(|v| v.is_some_and(|v| v >= low && v <= high && v.fract() == 0.0))
        })
    };
    let year = (0..columns.len()).find(|&c| in_range(c, 1900.0, 2100.0))?;
    for first in year + 1..(year + 4).min(columns.len()) {
        for count in [4, 3] {
            let rest: Vec<usize> = (first..first + count).collect();
            let limits = [(1.0, 12.0), (1.0, 31.0), (0.0, 24.0), (0.0, 59.0)];
            if !rest.iter().zip(limits).all(|(&c, (low, high))| in_range(c, low, high)) {
                continue;
            }
            let chosen: Vec<usize> = std::iter::once(year).chain(rest).collect();
            let times: Vec<i64> = (0..rows)
                .filter_map(|row| {
                    let cells: Vec<String> = chosen
                        .iter()
                        .filter_map(|&c| columns[c].numbers[row])
                        .map(|v| v.to_string())
                        .collect();
                    Clock::default().stamp(&cells.iter().map(String::as_str).collect::<Vec<_>>())
                })
                .collect();
            let even = times.windows(2).filter(|w| w[1] > w[0]).count();
            if times.len() == rows && rows > 2 && even * 100 >= (rows - 1) * 95 {
                return Some(chosen);
            }
        }
    }
    None
}

/// How much a name sounds like mean wind speed.
fn speed_score(name: &str) -> u32 {
    let words = words(name);
    let has = |list: &[&str]| words.iter().any(|w| list.contains(&w.as_str()));
    if spoilt(&words) || has(&["dir", "direction"]) {
        return 0;
    }
    if has(&["wspd", "windspeed", "wspeed", "windspd", "windspeedavg", "sknt", "wndspd"])
        || has(&["wind", "wnd"]) && has(&["speed", "spd", "velocity", "vel"])
    {
        4
    } else if has(&["ws", "ff", "ws10m", "wspd10"]) {
        3
    } else if has(&["speed", "spd", "velocity"]) {
        2
    } else {
        0
    }
}

/// How much a name sounds like wind direction.
fn direction_score(name: &str) -> u32 {
    let words = words(name);
    let has = |list: &[&str]| words.iter().any(|w| list.contains(&w.as_str()));
    if spoilt(&words) {
        return 0;
    }
    if has(&["wdir", "winddir", "winddirection", "wnddir", "drct", "wdr"])
        || has(&["wind", "wnd"]) && has(&["dir", "direction", "from", "toward", "bearing"])
    {
        4
    } else if has(&["wd", "dd", "wd10m"]) {
        3
    } else if has(&["dir", "direction", "drift", "bearing"]) {
        2
    } else {
        0
    }
}

/// Names of flags, gusts and scatter beside the value itself.
fn spoilt(words: &[String]) -> bool {
    const SPOILERS: [&str; 23] = [
        "gust",
        "gusts",
        "max",
        "peak",
        "min",
        "source",
        "src",
        "uncert",
        "flag",
        "qc",
        "quality",
        "std",
        "sd",
        "sigma",
        "stdev",
        "var",
        "code",
        "fastest",
        "type",
        "attributes",
        "sonic",
        "vertical",
        "count",
    ];
    words.iter().any(|w| SPOILERS.contains(&w.as_str()))
}

/// A name cut into lower-case words, also at `camelCase` joints.
fn words(name: &str) -> Vec<String> {
    let mut spaced = String::with_capacity(name.len() + 8);
    let mut last_lower = false;
    for c in name.chars() {
        if c.is_uppercase() && last_lower {
            spaced.push(' ');
        }
        last_lower = c.is_lowercase();
        spaced.push(c);
    }
    spaced
        .to_lowercase()
        .split(|c: char| !c.is_alphanumeric())
        .filter(|w| !w.is_empty())
        .map(str::to_owned)
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_of_means_win_over_gusts_and_flags() {
        assert!(speed_score("Wspd (m/s)") > 0 && speed_score("Wspd source") == 0);
        assert!(speed_score("wind_speed") > speed_score("speed"));
        assert_eq!(speed_score("wind_gust"), 0);
        assert!(direction_score("Wdir (degrees)") > 0 && direction_score("Wdir uncert (code)") == 0);
        assert!(direction_score("WindDir") > 0 && speed_score("WindDir") == 0);
    }
}
