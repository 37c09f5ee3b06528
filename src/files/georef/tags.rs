//! The georeferencing tags of a TIFF as they stand in the file, and reading single keys from them.

use super::GeorefError;

/// The georeferencing tags of one TIFF directory, as they stand in the file.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct GeoTags {
    /// Tag 33550: map units per pixel along x, y, z.
    pub pixel_scale: Vec<f64>,
    /// Tag 33922: groups of (col, row, level, x, y, z).
    pub tie_points: Vec<f64>,
    /// Tag 34264: a 4 × 4 matrix, row by row.
    pub transformation: Vec<f64>,
    /// Tag 34735: header of four numbers, then (key, tag, count, value or index).
    pub key_directory: Vec<u16>,
    /// Tag 34736.
    pub double_params: Vec<f64>,
    /// Tag 34737.
    pub ascii_params: String,
}

/// "User-defined": the value is given by other keys.
pub(super) const USER_DEFINED: u16 = 32767;

const DOUBLE_PARAMS: u16 = 34736;
const ASCII_PARAMS: u16 = 34737;

impl GeoTags {
    /// Whether nothing at all is said about the place.
    pub fn is_empty(&self) -> bool {
        self.pixel_scale.is_empty()
            && self.tie_points.is_empty()
            && self.transformation.is_empty()
            && self.key_directory.len() <= 4
    }

    /// A key whose value is a code; `None` when absent.
    pub(super) fn code(&self, key: u16) -> Option<u16> {
        self.entry(key).filter(|entry| entry[1] == 0).map(|entry| entry[3])
    }

    /// A key whose value is a number; `None` when absent.
    pub(super) fn number(&self, key: u16) -> Result<Option<f64>, GeorefError> {
        let Some(entry) = self.entry(key) else { return Ok(None) };
        let value = match entry[1] {
            DOUBLE_PARAMS => self.double_params.get(usize::from(entry[3])).copied(),
            0 => Some(f64::from(entry[3])),
            _ => None,
        };
        match value {
            Some(number) if number.is_finite() => Ok(Some(number)),
            Some(number) => Err(GeorefError::BadNumber { key, value: number }),
            None => Err(GeorefError::BrokenKey { key }),
        }
    }

    /// A key whose value is text, without the closing bar; `None` when absent or out of range.
    pub(super) fn text(&self, key: u16) -> Option<&str> {
        let entry = self.entry(key).filter(|entry| entry[1] == ASCII_PARAMS)?;
        let start = usize::from(entry[3]);
        let end = start + usize::from(entry[2]);
        let text = self.ascii_params.get(start..end.min(self.ascii_params.len()))?;
        Some(text.trim_end_matches(['|', '\0']).trim()).filter(|text| !text.is_empty())
    }

    fn entry(&self, key: u16) -> Option<&[u16]> {
        self.key_directory.get(4..)?.chunks_exact(4).find(|entry| entry[0] == key)
    }
}
