//! The CSV writer: columns and rows without geometry (RFC 4180, UTF-8, dot as decimal sign).

use std::path::Path;

use crate::files::save;

use super::{Column, LayerError, Value, io_error};

/// Writes a table, replacing the file in one step. Missing cells are empty; numbers keep every
/// digit that tells them apart.
///
/// # Errors
/// [`LayerError::Row`] when a row has not as many values as there are columns, [`LayerError::Io`].
pub fn write_csv(path: &Path, columns: &[Column], rows: &[Vec<Value>]) -> Result<(), LayerError> {
    for (row, values) in rows.iter().enumerate() {
        if values.len() != columns.len() {
            return Err(LayerError::Row {
                layer: path.file_name().unwrap_or_default().to_string_lossy().into_owned(),
                row: row + 1,
                problem: format!("{} values for {} columns", values.len(), columns.len()),
            });
        }
    }
    let text = encode(columns, rows).map_err(|source| io_error(path, "making the table", source))?;
    save::bytes(path, &text, None).map_err(|source| io_error(path, "writing the table", source))
}

fn encode(columns: &[Column], rows: &[Vec<Value>]) -> std::io::Result<Vec<u8>> {
    let mut table = csv::WriterBuilder::new().terminator(csv::Terminator::CRLF).from_writer(Vec::new());
    table.write_record(columns.iter().map(|column| column.name.as_str()))?;
    for values in rows {
        table.write_record(values.iter().map(cell))?;
    }
    table.into_inner().map_err(|error| std::io::Error::other(error.to_string()))
}

fn cell(value: &Value) -> String {
    match value {
        Value::Missing => String::new(),
        Value::Text(text) => text.clone(),
        Value::Real(number) if number.is_finite() => number.to_string(),
        Value::Real(_) => String::new(),
        Value::Integer(number) => number.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn text_is_quoted_where_it_must_be() {
        let columns = [Column::text("name"), Column::real("spacing_m"), Column::integer("n")];
        let rows = [
            vec![Value::from("long, \"seif\""), Value::from(0.1 + 0.2), Value::from(7)],
            vec![Value::Missing, Value::Real(f64::NAN), Value::from(None::<i64>)],
        ];
        let text = String::from_utf8(encode(&columns, &rows).unwrap()).unwrap();
        assert_eq!(text, "name,spacing_m,n\r\n\"long, \"\"seif\"\"\",0.30000000000000004,7\r\n,,\r\n");
    }

    #[test]
    fn a_short_row_is_named() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("t.csv");
        let error = write_csv(&path, &[Column::text("name")], &[vec![]]).unwrap_err();
        assert_eq!(error.to_string(), "layer “t.csv”, row 1: 0 values for 1 columns");
        assert!(!path.exists());
    }
}
