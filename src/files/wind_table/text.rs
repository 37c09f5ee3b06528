//! From bytes to lines and cells.

use std::io::Read as _;
use std::path::Path;

use super::WindFileError;

/// A century of minutes in a wide layout stays below this.
const LARGEST_BYTES: u64 = 1 << 30;

/// Rows of data are shorter; a file without line ends is no table and would only fill the memory.
const LONGEST_LINE: usize = 1 << 15;

/// The text of a file: UTF-8 or UTF-16 by its mark, else one byte a character.
pub(super) fn load(path: &Path) -> Result<String, WindFileError> {
    let name = path.display().to_string();
    let io = |source| WindFileError::Io { path: name.clone(), source };
    let file = std::fs::File::open(path).map_err(io)?;
    let bytes = file.metadata().map_err(io)?.len();
    if bytes > LARGEST_BYTES {
        return Err(WindFileError::TooLarge { path: name, bytes, limit: LARGEST_BYTES });
    }
    let mut raw = Vec::new();
    file.take(LARGEST_BYTES).read_to_end(&mut raw).map_err(io)?;
    let text = decode(raw);
    let too_long = text.split('\n').enumerate().find(|(_, line)| line.len() > LONGEST_LINE);
    match too_long {
        Some((at, line)) => {
            Err(WindFileError::LongLine { line: at + 1, bytes: line.len(), limit: LONGEST_LINE })
        }
        None => Ok(text),
    }
}

fn decode(raw: Vec<u8>) -> String {
    let wide = |pairs: &[u8], join: fn([u8; 2]) -> u16| {
        let units: Vec<u16> = pairs.chunks_exact(2).map(|p| join([p[0], p[1]])).collect();
        String::from_utf16_lossy(&units)
    };
    match raw.as_slice() {
        [0xEF, 0xBB, 0xBF, rest @ ..] => String::from_utf8_lossy(rest).into_owned(),
        [0xFF, 0xFE, rest @ ..] => wide(rest, u16::from_le_bytes),
        [0xFE, 0xFF, rest @ ..] => wide(rest, u16::from_be_bytes),
        _ => String::from_utf8(raw)
            .unwrap_or_else(|error| error.into_bytes().iter().map(|&b| char::from(b)).collect()),
    }
}

/// Calls `each(line, cells)` for every row below the first `skip` lines that is not blank. Lines
/// count from 1; cells are trimmed and unquoted. `each` returns `false` to stop.
pub(super) fn for_each_row(
    text: &str,
    delimiter: char,
    skip: usize,
    mut each: impl FnMut(u32, &[&str]) -> bool,
) {
    let body = text.split_inclusive('\n').skip(skip);
    if delimiter == '\t' || delimiter.is_ascii() && !delimiter.is_whitespace() {
        let offset = text.split_inclusive('\n').take(skip).map(str::len).sum::<usize>();
        let bytes = &text.as_bytes()[offset..];
        // The reader's own line count falls behind at blank lines and at CR LF, so lines are
        // counted here, up to the first byte of each record.
        let (mut counted, mut line) = (0, skip + 1);
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .delimiter(delimiter as u8)
            .trim(csv::Trim::All)
            .from_reader(bytes);
        let mut record = csv::StringRecord::new();
        // The text is UTF-8 and rows may differ in length, so no row can fail.
        while reader.read_record(&mut record).unwrap_or(false) {
            let mut start = record.position().map_or(0, |p| p.byte() as usize);
            start += bytes[start..].iter().take_while(|b| matches!(b, b'\r' | b'\n')).count();
            line += bytes[counted..start].iter().filter(|b| **b == b'\n').count();
            counted = start;
            let cells: Vec<&str> = record.iter().collect();
            if cells.iter().any(|c| !c.is_empty()) && !each(line as u32, &cells) {
                return;
            }
        }
        return;
    }
    for (at, line) in body.enumerate() {
        let cells: Vec<&str> = if delimiter.is_whitespace() {
            line.split_whitespace().map(|c| c.trim_matches('"')).collect()
        } else {
            line.split(delimiter).map(str::trim).collect()
        };
        if cells.iter().any(|c| !c.is_empty()) && !each((at + skip + 1) as u32, &cells) {
            return;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rows(text: &str, delimiter: char, skip: usize) -> Vec<(u32, Vec<String>)> {
        let mut out = Vec::new();
        for_each_row(text, delimiter, skip, |line, cells| {
            out.push((line, cells.iter().map(|c| (*c).to_owned()).collect()));
            true
        });
        out
    }

    #[test]
    fn quoted_cells_keep_their_delimiter_and_lines_are_counted_from_the_top() {
        let got = rows("a note\n\"x, y\", 2\r\n\n3,4\n", ',', 1);
        assert_eq!(got[0], (2, vec!["x, y".to_owned(), "2".into()]));
        assert_eq!(got[1], (4, vec!["3".to_owned(), "4".into()]));
    }

    #[test]
    fn runs_of_blanks_are_one_delimiter() {
        assert_eq!(rows(" 1   2\t3 \n", ' ', 0), vec![(1, vec!["1".to_owned(), "2".into(), "3".into()])]);
    }

    #[test]
    fn bytes_that_are_not_utf8_are_read_one_a_character() {
        assert_eq!(decode(vec![b'1', 0xB0]), "1°");
        assert_eq!(decode(vec![0xFF, 0xFE, b'7', 0]), "7");
    }
}
