//! Guessing how a wind table is to be read, with the reasons, for the user to check and change.

use std::path::Path;

use crate::ground::Caution;

use super::WindFileError;
use super::clock::day_first_shown;
use super::columns::{self, Column, WindColumns, is_code};
use super::frequency;
use super::import::{DirectionSense, SpeedUnit, WindImport, WindLayout, ZeroDirection};
use super::layout::{self, Shape};
use super::many::{self, Stand};
use super::number::{Cell, cell, sector};
use super::text::{for_each_row, load};
use super::units;

/// Rows shown to the user.
const PREVIEW_ROWS: usize = 30;
/// Rows looked at for values; two years of half hours.
const ROWS: usize = 40_000;

/// A guess, and what it rests on.
#[derive(Clone, Debug, PartialEq)]
pub struct WindGuess {
    pub import: WindImport,
    /// The first rows of the file as cells, header lines included.
    pub preview: Vec<Vec<String>>,
    /// One per column; empty where the file names none.
    pub column_names: Vec<String>,
    /// One sentence for each thing guessed.
    pub reasons: Vec<String>,
    /// What the user should look at before trusting the guess.
    pub cautions: Vec<Caution>,
    /// The stations or cells, each with its own import; empty when the file holds one record.
    pub stands: Vec<Stand>,
}

/// Guesses how the file at `path` is to be read.
///
/// # Errors
/// [`WindFileError`] when it cannot be opened, or holds no table, or no columns like wind.
pub fn guess(path: &Path) -> Result<WindGuess, WindFileError> {
    match many::grid(path)? {
        Some(guess) => Ok(guess),
        None => guess_text(&load(path)?),
    }
}

/// The first rows of the file at `path`, header lines included, cut by another delimiter.
///
/// # Errors
/// [`WindFileError`] when it cannot be opened.
pub fn preview(path: &Path, delimiter: char) -> Result<Vec<Vec<String>>, WindFileError> {
    Ok(first_rows(&load(path)?, delimiter))
}

fn first_rows(text: &str, delimiter: char) -> Vec<Vec<String>> {
    layout::rows(text, delimiter).into_iter().take(PREVIEW_ROWS).map(|(_, cells)| cells).collect()
}

/// [`guess`] for text at hand.
///
/// # Errors
/// As [`guess`].
pub fn guess_text(text: &str) -> Result<WindGuess, WindFileError> {
    let shape = layout::shape(text)?;
    let mut notes = Notes::default();
    notes.reasons.push(format!(
        "{} columns divided by {}, {} header lines",
        shape.columns,
        delimiter_name(shape.delimiter),
        shape.header_lines
    ));
    let import = match frequency_import(text, &shape, &mut notes) {
        Some(import) => import,
        None => series_import(text, &shape, &mut notes)?,
    };
    let stands = many::stands(text, &shape, &import);
    if !stands.is_empty() {
        let placed = stands.iter().filter(|s| s.at.is_some()).count();
        notes.reasons.push(format!(
            "{} stations or cells in one table, {placed} of them with longitude and latitude",
            stands.len()
        ));
    }
    Ok(WindGuess {
        import: stands.first().map_or(import, |stand| stand.import.clone()),
        preview: first_rows(text, shape.delimiter),
        column_names: shape.names,
        reasons: notes.reasons,
        cautions: notes.cautions,
        stands,
    })
}

#[derive(Default)]
struct Notes {
    reasons: Vec<String>,
    cautions: Vec<Caution>,
}

fn delimiter_name(delimiter: char) -> &'static str {
    match delimiter {
        '\t' => "tabs",
        ' ' => "white space",
        ';' => "semicolons",
        '|' => "bars",
        _ => "commas",
    }
}

/// A sector × class table: few rows that begin with sectors, under names that hold speed ranges.
fn frequency_import(text: &str, shape: &Shape, notes: &mut Notes) -> Option<WindImport> {
    let classes = frequency::classes(&shape.names);
    if classes.len() < 2 {
        return None;
    }
    let mut sectors = Vec::new();
    for_each_row(text, shape.delimiter, shape.header_lines, |_, cells| {
        sectors.extend(sector(cells[0], shape.delimiter != ','));
        sectors.len() <= 72
    });
    if !(4..=72).contains(&sectors.len()) {
        return None;
    }
    notes.reasons.push(format!(
        "a frequency table: {} sectors by {} speed classes",
        sectors.len(),
        classes.len()
    ));
    let header = format!("{} {}", shape.header, shape.names.join(" "));
    let speed_unit = match units::named(&header) {
        Some(unit) => {
            notes.reasons.push(format!("speed unit {}: the header says so", unit.label()));
            unit
        }
        None => {
            let middles: Vec<f64> = classes.iter().map(|c| 0.5 * (c.low + c.high)).collect();
            let (unit, reason) = units::from_values(&middles);
            notes.cautions.push(Caution::new("speed-unit-guessed", format!("{reason}; please check.")));
            notes.reasons.push(reason);
            unit
        }
    };
    Some(WindImport {
        delimiter: shape.delimiter,
        header_lines: shape.header_lines,
        layout: WindLayout::Frequencies { sector: 0, classes },
        speed_unit,
        direction: sense(&header, notes),
        missing: Vec::new(),
        zero_direction: ZeroDirection::North,
        day_first: false,
        only: None,
        gust: None,
    })
}

fn series_import(text: &str, shape: &Shape, notes: &mut Notes) -> Result<WindImport, WindFileError> {
    let (columns, first_rows) = body(text, shape);
    let (time, reason) = columns::time(&columns, &first_rows);
    if time.is_empty() {
        notes.cautions.push(Caution::new(
            "no-time",
            "No time columns were found: no seasons, and no gaps can be seen.",
        ));
    }
    notes.reasons.push(reason);
    if let Some((east, north)) = columns::components(&columns, &time) {
        return Ok(components_import(text, shape, &columns, time, [east, north], notes));
    }
    let WindColumns { speed, direction, named, reason } =
        columns::wind(&columns, &time).ok_or(WindFileError::NoWindColumns { columns: shape.columns })?;
    if !named {
        notes.cautions.push(Caution::new(
            "columns-guessed",
            format!("The file does not name its columns: {reason}. Please check."),
        ));
    }
    notes.reasons.push(reason);

    let missing = missing_codes(&columns[speed], &columns[direction]);
    if !missing.is_empty() {
        let listed: Vec<String> = missing.iter().map(f64::to_string).collect();
        notes.reasons.push(format!("{} stand for no value", listed.join(", ")));
    }
    let speed_unit = speed_unit(&columns[speed], &missing, shape, notes);
    let day_first = day_order(text, shape, &time, notes);
    let gust = columns::gust(&columns);
    if let Some(at) = gust {
        notes.reasons.push(format!("gusts in column {} ({:?}): by its name", at + 1, columns[at].name));
    }
    Ok(WindImport {
        delimiter: shape.delimiter,
        header_lines: shape.header_lines,
        speed_unit,
        direction: sense(&columns[direction].name, notes),
        zero_direction: zero_direction(&columns[speed], &columns[direction], notes),
        layout: WindLayout::Series { time, speed, direction },
        missing,
        day_first,
        only: None,
        gust,
    })
}

/// Components toward east and north: no direction to guess, and the unit by name or in m/s.
fn components_import(
    text: &str,
    shape: &Shape,
    columns: &[Column],
    time: Vec<usize>,
    [east, north]: [usize; 2],
    notes: &mut Notes,
) -> WindImport {
    notes.reasons.push(format!(
        "wind toward east in column {} ({:?}), toward north in column {} ({:?}): by their names",
        east + 1,
        columns[east].name,
        north + 1,
        columns[north].name
    ));
    let named = units::named(&columns[east].name);
    if named.is_none() {
        notes.cautions.push(Caution::new(
            "speed-unit-guessed",
            "No name says the unit of the components: metres per second were taken, as models write them. Please check.",
        ));
    }
    // Components are of either sign, so only codes beyond any wind are told from values.
    let codes =
        [&columns[east], &columns[north]].into_iter().flat_map(|c| c.numbers.iter().flatten().copied());
    let mut missing: Vec<f64> = codes.filter(|v| is_code(*v) && v.abs() > 98.0).collect();
    missing.sort_by(f64::total_cmp);
    missing.dedup();
    WindImport {
        delimiter: shape.delimiter,
        header_lines: shape.header_lines,
        speed_unit: named.unwrap_or(SpeedUnit::MetrePerSecond),
        direction: DirectionSense::Toward,
        zero_direction: ZeroDirection::North,
        day_first: day_order(text, shape, &time, notes),
        layout: WindLayout::Components { time, east, north },
        missing,
        only: None,
        gust: columns::gust(columns),
    }
}

/// The body as number columns, and its first rows as they stand.
fn body(text: &str, shape: &Shape) -> (Vec<Column>, Vec<Vec<String>>) {
    let mut columns: Vec<Column> =
        shape.names.iter().map(|name| Column { name: name.clone(), numbers: Vec::new() }).collect();
    let mut first_rows: Vec<Vec<String>> = Vec::new();
    let mut seen = 0;
    for_each_row(text, shape.delimiter, shape.header_lines, |_, cells| {
        if cells.len() != shape.columns {
            return true;
        }
        for (column, text) in columns.iter_mut().zip(cells) {
            column.numbers.push(match cell(text, shape.delimiter != ',') {
                Cell::Number(value) => Some(value),
                Cell::Absent | Cell::Text => None,
            });
        }
        if first_rows.len() < 100 {
            first_rows.push(cells.iter().map(|c| (*c).to_owned()).collect());
        }
        seen += 1;
        seen < ROWS
    });
    (columns, first_rows)
}

fn speed_unit(speed: &Column, missing: &[f64], shape: &Shape, notes: &mut Notes) -> SpeedUnit {
    if let Some(unit) = units::named(&speed.name) {
        notes.reasons.push(format!("speed unit {}: the column's name says so", unit.label()));
        return unit;
    }
    // A word in a title may speak of another column, so the values are asked as well.
    let values: Vec<f64> = speed.numbers.iter().flatten().copied().filter(|v| !missing.contains(v)).collect();
    let (unit, reason) =
        match units::named(&shape.header).filter(|_| shape.names.iter().all(String::is_empty)) {
            Some(unit) => (unit, format!("speed unit {}: the lines above the data say so", unit.label())),
            None => units::from_values(&values),
        };
    notes.cautions.push(Caution::new("speed-unit-guessed", format!("{reason}. Please check.")));
    notes.reasons.push(reason);
    unit
}

/// Codes present in either column: negative ones always; positive ones where nothing leads up to them.
fn missing_codes(speed: &Column, direction: &Column) -> Vec<f64> {
    let mut found: Vec<f64> = Vec::new();
    for (column, most) in [(speed, 75.0), (direction, 360.0)] {
        let real = column.numbers.iter().flatten().copied().filter(|v| !is_code(*v));
        let greatest = real.fold(0.0, f64::max);
        for value in column.numbers.iter().flatten().copied().filter(|v| is_code(*v)) {
            let stands_apart = value < 0.0 || value > most || (most < 360.0 && value > 1.5 * greatest);
            if stands_apart && !found.contains(&value) {
                found.push(value);
            }
        }
    }
    found.sort_by(f64::total_cmp);
    found
}

fn sense(name: &str, notes: &mut Notes) -> DirectionSense {
    let lower = name.to_lowercase();
    if lower.contains("toward") || lower.contains("blowing to") || lower.contains("going to") {
        notes.reasons.push("directions say where the wind goes: the name says so".to_owned());
        return DirectionSense::Toward;
    }
    notes.reasons.push("directions say where the wind comes from: the rule in weather records".to_owned());
    DirectionSense::From
}

/// Direction 0 means "none" where north is written 360 and 0 comes with calm.
fn zero_direction(speed: &Column, direction: &Column, notes: &mut Notes) -> ZeroDirection {
    let (mut calm, mut windy, mut north) = (0, 0, 0);
    for (speed, direction) in speed.numbers.iter().zip(&direction.numbers) {
        match (speed, direction) {
            (Some(v), Some(0.0)) if *v > 0.0 => windy += 1,
            (_, Some(0.0)) => calm += 1,
            (_, Some(360.0)) => north += 1,
            _ => {}
        }
    }
    if calm > 0 && north > 0 && calm > 9 * windy {
        notes.reasons.push(format!(
            "direction 0 means calm: {calm} of {} zeros come with no wind, and north is written 360 ({north} times)",
            calm + windy
        ));
        return ZeroDirection::NoDirection;
    }
    ZeroDirection::North
}

/// Which of day and month comes first in written dates.
fn day_order(text: &str, shape: &Shape, time: &[usize], notes: &mut Notes) -> bool {
    let [column, rest @ ..] = time else { return false };
    if rest.len() > 1 {
        return false;
    }
    let mut ambiguous = false;
    let mut shown = None;
    for_each_row(text, shape.delimiter, shape.header_lines, |_, cells| {
        if let Some(cell) = cells.get(*column) {
            shown = day_first_shown(cell);
            ambiguous |= cell.contains('/') && cell.find('/').is_some_and(|at| at <= 2);
        }
        shown.is_none()
    });
    match shown {
        Some(day_first) => {
            let order = if day_first { "the day" } else { "the month" };
            notes.reasons.push(format!("dates put {order} first: a number above 12 shows it"));
            day_first
        }
        None => {
            let name = shape.names[*column].to_lowercase();
            if ambiguous && !name.contains("mm/dd") {
                notes.cautions.push(Caution::new(
                    "date-order",
                    "No date shows whether day or month comes first; the month was taken. Please check.",
                ));
            }
            name.contains("dd/mm")
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn a_frequency_table_is_seen_and_read() {
        let text = "from,3-10 kt,11-16 kt,17-21 kt,Total\nN,4,10,0,14\nE,0,0,0,0\nS,1,0,0,1\nW,2,0,5,7\nTotal,7,10,5,22\n";
        let guess = guess_text(text).expect("a table");
        assert_eq!(guess.import.speed_unit, SpeedUnit::Knot);
        let record = super::super::read_text(text, &guess.import).expect("a record");
        assert!(record.is_table);
        // 22 % are listed; the rest of the time is calm.
        assert_eq!(record.samples.iter().map(|s| s.weight).sum::<f64>(), 100.0);
        assert_eq!(record.samples.last().and_then(|s| s.speed), Some(0.0));
        let speed = record.samples[1].speed.expect("a speed");
        crate::assert_close!(speed, 13.5 * 1852.0 / 3600.0, 1e-12, "middle of 11-16 kt");
    }

    #[test]
    fn codes_calms_and_toward_are_seen() {
        let mut text = String::from("date;wind speed (km/h);wind direction toward\n");
        for day in 1..=28 {
            text.push_str(&format!("{day}/2/2013;{};{}\n", 10 + day, 10 * day));
        }
        text.push_str("1/3/2013;0,0;0\n2/3/2013;-999;360\n");
        let guess = guess_text(&text).expect("a table");
        assert_eq!(guess.import.speed_unit, SpeedUnit::KilometrePerHour);
        assert_eq!(guess.import.direction, DirectionSense::Toward);
        assert_eq!(guess.import.missing, vec![-999.0]);
        assert_eq!(guess.import.zero_direction, ZeroDirection::NoDirection);
        assert!(guess.import.day_first);
        let record = super::super::read_text(&text, &guess.import).expect("a record");
        assert_eq!(record.samples[29].speed, None);
        assert_eq!(record.samples[28].from, None);
        crate::assert_close!(
            record.samples[0].from.map_or(0.0, |a| a.deg()),
            190.0,
            1e-12,
            "toward 10 is from 190"
        );
        assert_eq!(record.samples[0].time, Some(1_359_676_800));
    }

    proptest! {
        #[test]
        fn any_text_gives_a_guess_or_a_reason(text in "([0-9]{1,5}|-9999|NA|N|wind|dir|speed|[ ,;/:.T\"\t\r\n-]){0,120}") {
            if let Ok(guess) = guess_text(&text) {
                let outcome = super::super::read_text(&text, &guess.import);
                prop_assert!(outcome.is_err() || !outcome.is_ok_and(|r| r.samples.is_empty()));
            }
        }
    }

    #[test]
    fn nothing_like_wind_is_refused() {
        assert!(matches!(
            guess_text("a,b\n1,-5\n2,-6\n3,-7\n"),
            Err(WindFileError::NoWindColumns { columns: 2 })
        ));
        assert!(guess_text("").is_err());
    }
}
