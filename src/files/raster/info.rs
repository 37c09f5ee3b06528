//! What a raster file is, as far as its header tells.

use std::path::PathBuf;

use serde::{Serialize, Serializer};

use crate::files::georef::Georeference;
use crate::ground::{Affine, Azimuth, Caution};

/// The type of a sample once unpacked. Fields of fewer than 8 bits become `U8`, of 9 to 15 bits `U16`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum SampleType {
    U8,
    I8,
    U16,
    I16,
    U32,
    I32,
    F16,
    F32,
    F64,
}

/// One band that can be read.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct BandInfo {
    /// A name from the file (“red”, “VV amplitude”) or “band 3”.
    pub label: String,
    /// The unit a writer stated, if any.
    pub unit: Option<String>,
    /// Physical value = scale · sample + offset; `read` applies it.
    pub scale: f64,
    pub offset: f64,
}

/// A stored level; the first is the full resolution.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub struct LevelInfo {
    pub width: usize,
    pub height: usize,
}

/// Where the Sun or the radar was, when a tag says so.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Light {
    /// Azimuth of the Sun as the writer gave it, clockwise from north.
    pub sun_azimuth: Option<Azimuth>,
    /// Height of the Sun above the horizon, degrees.
    pub sun_elevation_deg: Option<f64>,
    /// Direction the radar looked toward, clockwise from north.
    pub radar_look: Option<Azimuth>,
}

/// A world file beside the raster: an affine whose units and projection it does not name.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct WorldFile {
    pub path: PathBuf,
    /// Pixel corner coordinates → map coordinates of unknown unit.
    #[serde(skip)]
    pub affine: Affine,
}

/// Everything the header of a raster file says.
#[derive(Clone, Debug, Serialize)]
pub struct RasterInfo {
    pub path: PathBuf,
    /// `"TIFF"`, `"BigTIFF"`, `"PNG"` or `"JPEG"`.
    pub format: &'static str,
    pub width: usize,
    pub height: usize,
    /// Bands that can be read: opacity is not one of them, a palette counts as three.
    pub bands: Vec<BandInfo>,
    pub sample: SampleType,
    /// Bits of a stored sample: 1 for a bitmap, 12 for some scanners.
    pub stored_bits: usize,
    pub compression: &'static str,
    /// `"tiles 256 × 256"`, `"strips of 8 rows"`, `"one piece"`.
    pub layout: String,
    pub levels: Vec<LevelInfo>,
    /// The value that stands for “no data”, as the file states it.
    #[serde(serialize_with = "number_or_nan")]
    pub nodata: Option<f64>,
    /// A band of opacity tells which pixels are valid.
    pub alpha: bool,
    /// A separate mask tells which pixels are valid.
    pub mask: bool,
    /// The place on a body. `None` without georeferencing keys: the user then states pixel size and
    /// north, or works in pixels.
    #[serde(skip)]
    pub georeference: Option<Georeference>,
    /// Not a place by itself: its numbers may be metres, feet or degrees of any projection.
    pub world_file: Option<WorldFile>,
    pub light: Option<Light>,
    pub cautions: Vec<Caution>,
}

impl Light {
    /// Where the light comes from: the Sun's azimuth, else the way back along the radar's look.
    pub fn from(self) -> Option<Azimuth> {
        self.sun_azimuth.or_else(|| self.radar_look.map(Azimuth::reversed))
    }
}

impl SampleType {
    /// `"u8"`, `"f32"`, ...
    pub fn name(self) -> &'static str {
        match self {
            Self::U8 => "u8",
            Self::I8 => "i8",
            Self::U16 => "u16",
            Self::I16 => "i16",
            Self::U32 => "u32",
            Self::I32 => "i32",
            Self::F16 => "f16",
            Self::F32 => "f32",
            Self::F64 => "f64",
        }
    }

    /// Bytes of one unpacked sample.
    pub fn bytes(self) -> usize {
        match self {
            Self::U8 | Self::I8 => 1,
            Self::U16 | Self::I16 | Self::F16 => 2,
            Self::U32 | Self::I32 | Self::F32 => 4,
            Self::F64 => 8,
        }
    }

    pub fn is_float(self) -> bool {
        matches!(self, Self::F16 | Self::F32 | Self::F64)
    }
}

impl BandInfo {
    pub(super) fn plain(label: impl Into<String>) -> Self {
        Self { label: label.into(), unit: None, scale: 1.0, offset: 0.0 }
    }
}

/// JSON has no NaN, so it is written as the text `"nan"`.
fn number_or_nan<S: Serializer>(value: &Option<f64>, to: S) -> Result<S::Ok, S::Error> {
    match value {
        Some(v) if v.is_nan() => to.serialize_str("nan"),
        Some(v) => to.serialize_f64(*v),
        None => to.serialize_none(),
    }
}
