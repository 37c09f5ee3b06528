//! Sector × speed-class tables: finding the classes in a header, and reading the cells.

use crate::ground::{WindRecord, WindSample};

use super::WindFileError;
use super::import::{SpeedClass, WindImport};
use super::number::{Cell, cell, sector};
use super::read::oriented;
use super::text::for_each_row;

/// Reads a table: each cell above 0 becomes a sample at the middle of its class. Frequencies that
/// add to less than 1, or than 100, are shares or percents of all time: what is missing is calm.
pub(super) fn read(
    text: &str,
    import: &WindImport,
    sector_column: usize,
    classes: &[SpeedClass],
) -> Result<WindRecord, WindFileError> {
    if let Some(bad) = classes.iter().find(|c| !(c.low >= 0.0 && c.high > c.low && c.high.is_finite())) {
        return Err(WindFileError::SpeedClass { low: bad.low, high: bad.high });
    }
    let wanted = classes.iter().map(|c| c.column).chain([sector_column]).max().unwrap_or(0);
    let decimal_comma = import.delimiter != ',';
    let unit = import.speed_unit.metres_per_second();
    let mut samples = Vec::new();
    let mut failure = None;
    for_each_row(text, import.delimiter, import.header_lines, |line, cells| {
        if cells.len() <= wanted {
            failure = Some(WindFileError::MissingColumn { line, wanted: wanted + 1, found: cells.len() });
            return false;
        }
        let name = cells[sector_column];
        let lower = name.to_lowercase();
        if ["total", "sum", "all", "mean"].iter().any(|w| lower.starts_with(w)) {
            return true;
        }
        let calm = lower.starts_with("calm");
        let from = sector(name, decimal_comma).map(|deg| oriented(deg, import.direction));
        if from.is_none() && !calm {
            failure = Some(WindFileError::NotASector { line, cell: name.chars().take(40).collect() });
            return false;
        }
        for class in classes {
            match cell(cells[class.column], decimal_comma) {
                Cell::Number(weight) if weight > 0.0 => {
                    let speed = if calm { 0.0 } else { 0.5 * (class.low + class.high) * unit };
                    samples.push(WindSample { line, time: None, speed: Some(speed), from, weight });
                }
                Cell::Number(_) | Cell::Absent => {}
                Cell::Text => {
                    let cell = cells[class.column].chars().take(40).collect();
                    failure = Some(WindFileError::NotNumbers {
                        column: class.column + 1,
                        line,
                        cell,
                        count: 1,
                        rows: 1,
                    });
                    return false;
                }
            }
        }
        true
    });
    match failure {
        Some(error) => Err(error),
        None if samples.is_empty() => Err(WindFileError::Empty { needed: 1 }),
        None => {
            samples.extend(unlisted_calm(&samples));
            Ok(WindRecord { samples, is_table: true, gusts: Vec::new() })
        }
    }
}

/// The time a table of shares or percents does not list; `None` for counts and full tables.
fn unlisted_calm(samples: &[WindSample]) -> Option<WindSample> {
    let listed: f64 = samples.iter().map(|s| s.weight).sum();
    let whole = if listed <= 1.005 { 1.0 } else { 100.0 };
    let weight = whole - listed;
    // Half a percent is rounding.
    (weight > 0.005 * whole).then(|| WindSample {
        line: samples.last().map_or(0, |s| s.line),
        time: None,
        speed: Some(0.0),
        from: None,
        weight,
    })
}

/// The speed classes named in the cells of a header row, with the columns they head. An open
/// class (`> 40`) is given the width of the one before it.
pub(super) fn classes(header: &[String]) -> Vec<SpeedClass> {
    let mut found: Vec<SpeedClass> = Vec::new();
    for (column, name) in header.iter().enumerate() {
        let open = name.contains(['>', '≥', '+']) || name.to_lowercase().contains("over");
        let class = match bounds(name)[..] {
            [low, high] if high > low => Some((low, high)),
            [low] if open => found.last().map(|c| (low, low + c.high - c.low)),
            [high] if name.contains(['<', '≤']) => Some((0.0, high)),
            _ => None,
        };
        found.extend(class.map(|(low, high)| SpeedClass { column, low, high }));
    }
    found
}

/// The numbers in a class name; `11-16` and `5.0 to 7.5` hold two.
fn bounds(name: &str) -> Vec<f64> {
    name.split(|c: char| !(c.is_ascii_digit() || c == '.'))
        .filter_map(|part| part.parse::<f64>().ok().filter(|v| v.is_finite()))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn class_names_are_read_and_the_open_class_takes_the_width_before() {
        let header: Vec<String> =
            ["From", "< 3", "3–10 kt", "11 to 16", "> 16", "Total"].iter().map(|s| (*s).to_owned()).collect();
        let got: Vec<(usize, f64, f64)> =
            classes(&header).iter().map(|c| (c.column, c.low, c.high)).collect();
        assert_eq!(got, vec![(1, 0.0, 3.0), (2, 3.0, 10.0), (3, 11.0, 16.0), (4, 16.0, 21.0)]);
    }
}
