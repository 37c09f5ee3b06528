//! The outer shape of a table: delimiter, header lines, number of columns and their names.

use super::WindFileError;
use super::number::{Cell, cell};
use super::text::for_each_row;

/// Rows looked at for the shape.
const LOOKED_AT: usize = 400;

/// Preferred first: a table with `;` may use the comma inside its numbers, never the other way round.
const DELIMITERS: [char; 5] = ['\t', ';', '|', ',', ' '];

pub(super) struct Shape {
    pub delimiter: char,
    pub header_lines: usize,
    pub columns: usize,
    /// One per column; empty where the header names none.
    pub names: Vec<String>,
    /// All text above the data, for hints such as units.
    pub header: String,
}

/// Finds the shape of a table.
///
/// # Errors
/// [`WindFileError::Empty`] when no delimiter makes rows of two or more columns.
pub(super) fn shape(text: &str) -> Result<Shape, WindFileError> {
    let empty = WindFileError::Empty { needed: 1 };
    let mut best: Option<(f64, char, usize)> = None;
    for delimiter in DELIMITERS {
        let rows = rows(text, delimiter);
        let Some((columns, share)) = commonest_width(&rows) else { continue };
        // A later delimiter must be clearly more regular to be preferred.
        if columns >= 2 && best.is_none_or(|(so_far, ..)| share > so_far + 0.1) {
            best = Some((share, delimiter, columns));
        }
    }
    let (_, delimiter, columns) = best.ok_or(empty)?;
    let rows = rows(text, delimiter);
    let first = first_data_row(&rows, columns, delimiter != ',').ok_or(WindFileError::Empty { needed: 1 })?;
    let header_lines = rows[first].0 as usize - 1;
    Ok(Shape {
        delimiter,
        header_lines,
        columns,
        names: names(&rows[..first], columns),
        header: text.lines().take(header_lines).collect::<Vec<_>>().join("\n"),
    })
}

/// The first rows of a file with their line numbers.
pub(super) fn rows(text: &str, delimiter: char) -> Vec<(u32, Vec<String>)> {
    let mut rows = Vec::new();
    for_each_row(text, delimiter, 0, |line, cells| {
        rows.push((line, cells.iter().map(|c| (*c).to_owned()).collect()));
        rows.len() < LOOKED_AT
    });
    rows
}

/// The commonest number of columns and the share of rows that have it.
fn commonest_width(rows: &[(u32, Vec<String>)]) -> Option<(usize, f64)> {
    let widest = rows.iter().map(|(_, cells)| cells.len()).max()?;
    let mut counts = vec![0usize; widest + 1];
    for (_, cells) in rows {
        counts[cells.len()] += 1;
    }
    let (width, count) = counts.iter().enumerate().max_by_key(|&(width, &count)| (count, width))?;
    Some((width, *count as f64 / rows.len() as f64))
}

/// The first row that looks like the body: right width, and numbers where the body has numbers.
fn first_data_row(rows: &[(u32, Vec<String>)], columns: usize, decimal_comma: bool) -> Option<usize> {
    let body: Vec<&[String]> = rows
        .iter()
        .skip(rows.len() / 2)
        .filter(|(_, cells)| cells.len() == columns)
        .map(|(_, cells)| cells.as_slice())
        .collect();
    let is_number = |text: &str| matches!(cell(text, decimal_comma), Cell::Number(_));
    let numeric: Vec<usize> = (0..columns)
        .filter(|&c| {
            let counted = body.iter().filter(|r| cell(&r[c], decimal_comma) != Cell::Absent);
            let (mut all, mut numbers) = (0, 0);
            for row in counted {
                all += 1;
                numbers += usize::from(is_number(&row[c]));
            }
            all > 0 && numbers * 10 >= all * 9
        })
        .collect();
    if numeric.is_empty() {
        return None;
    }
    rows.iter().position(|(_, cells)| {
        let words = |&&c: &&usize| cell(&cells[c], decimal_comma) == Cell::Text;
        cells.len() == columns && 2 * numeric.iter().filter(words).count() < numeric.len().max(1)
    })
}

/// Column names: the header rows of full width, read downwards (a second row often holds units).
fn names(header: &[(u32, Vec<String>)], columns: usize) -> Vec<String> {
    let mut names = vec![String::new(); columns];
    for (_, cells) in header {
        // A comment mark standing alone shifts the names by one.
        let cells = match cells.split_first() {
            Some((mark, rest)) if mark == "#" && rest.len() == columns => rest,
            _ => cells,
        };
        if cells.len() != columns {
            continue;
        }
        for (name, cell) in names.iter_mut().zip(cells) {
            let cell = cell.trim_start_matches('#').trim();
            if !name.is_empty() && !cell.is_empty() {
                name.push(' ');
            }
            name.push_str(cell);
        }
    }
    names
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_title_line_a_name_line_and_a_unit_line_are_header() {
        let text =
            "Mast at the ford, 1999\ntime;dir;speed\n;deg;km/h\n1;270;3,5\n2;280;4,5\n3;280;4,0\n4;280;4,0\n";
        let shape = shape(text).expect("a table");
        assert_eq!((shape.delimiter, shape.header_lines, shape.columns), (';', 3, 3));
        assert_eq!(shape.names, ["time", "dir deg", "speed km/h"]);
    }

    #[test]
    fn a_table_without_header_has_none() {
        let shape = shape("1 270 3.5\n2 280 4.5\n").expect("a table");
        assert_eq!((shape.delimiter, shape.header_lines), (' ', 0));
        assert!(shape.names.iter().all(String::is_empty));
    }

    #[test]
    fn prose_and_nothing_are_refused() {
        assert!(shape("").is_err());
        assert!(shape("once\nupon\na\ntime\n").is_err());
    }
}
