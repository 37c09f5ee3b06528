//! Raster files: TIFF, BigTIFF, PNG and JPEG, described from their header and read by window and level.
//!
//! A TIFF's tags are read and checked first, within [`Limits`]; its strips and tiles are decoded when a
//! window needs them, one task each, and kept for the next window. Pixels come out as 32-bit floats
//! with a mask: a pixel is missing where it equals the no-data value, is not finite, is fully
//! transparent, is masked, lies in a strip or tile the writer left out, or outside the raster.

mod bands;
mod cache;
mod codec;
mod ifd;
mod image;
mod info;
mod jpeg;
mod layout;
mod limits;
mod metadata;
mod open;
mod picture;
mod read;
mod reduce;
mod samples;
mod source;
mod tag;
mod tiff;
mod unpack;
mod window;
mod write;

use std::path::Path;
use std::sync::Arc;

use crate::files::error::FileError;
use crate::ground::{Grid, Work};

pub use bands::Bands;
pub use info::{BandInfo, LevelInfo, Light, RasterInfo, SampleType, WorldFile};
pub use limits::Limits;
pub use window::Window;
pub use write::{write_png_gray, write_tiff};

/// What can go wrong with a raster file.
pub type RasterError = FileError;

/// An opened raster file; clones share it.
#[derive(Clone, Debug)]
pub struct Raster(Arc<Inner>);

#[derive(Debug)]
struct Inner {
    info: RasterInfo,
    limits: Limits,
    levels: Vec<tiff::Level>,
    cache: cache::ChunkCache,
    coarse: reduce::Coarse,
}

impl Raster {
    /// Opens a file and reads its header; pixels stay where they are.
    ///
    /// # Errors
    /// [`FileError::Malformed`] when the header contradicts its format, [`FileError::Unsupported`] when
    /// it names something this program does not read, [`FileError::TooLarge`] past `limits`,
    /// [`FileError::Io`] when the system refuses.
    pub fn open(path: &Path, limits: &Limits) -> Result<Self, RasterError> {
        open::open(path, limits).map(|inner| Self(Arc::new(inner)))
    }

    /// What the header says.
    pub fn info(&self) -> &RasterInfo {
        &self.0.info
    }

    /// The pixels of `window` at a stored level (0 = full resolution, the window in pixels of that
    /// level), with scale and offset applied. Cells outside the level are missing; missing cells hold 0. 64-bit floats and
    /// integers past 2²⁴ are rounded to 32-bit floats.
    ///
    /// # Errors
    /// [`FileError::NoLevel`], [`FileError::NoBand`], [`FileError::TooLarge`] for a window past the limit,
    /// [`FileError::Malformed`] naming the strip or tile, [`FileError::Stopped`].
    pub fn read(
        &self,
        level: usize,
        window: Window,
        bands: &Bands,
        work: &Work,
    ) -> Result<Grid<f32>, RasterError> {
        self.0.read(level, window, bands, work)
    }

    /// The window of full-resolution pixels averaged to `factor` × `factor` pixels per output pixel
    /// (1 or more; the last column and row may cover less), taken from the coarsest level, stored or
    /// built, that is at least as fine. An output pixel is the mean of the valid pixels it covers,
    /// weighted by covered area, and missing where there are none.
    ///
    /// Stored levels are what their writer made of the pixels (some writers pick rather than
    /// average): good to look at. Measure on level 0.
    ///
    /// # Errors
    /// As [`read`](Self::read).
    pub fn read_reduced(
        &self,
        window: Window,
        factor: usize,
        bands: &Bands,
        work: &Work,
    ) -> Result<Grid<f32>, RasterError> {
        self.0.read_reduced(window, factor, bands, work)
    }

    /// Builds in memory the coarse levels that the file lacks, within `Limits::coarse_bytes`, reading
    /// the raster once, strip by strip. Nothing happens when the stored levels reach down to a
    /// screenful or the levels are already built.
    ///
    /// # Errors
    /// As [`read`](Self::read).
    pub fn build_coarse(&self, bands: &Bands, work: &Work) -> Result<(), RasterError> {
        self.0.build_coarse(bands, work)
    }
}

impl Inner {
    fn read(&self, level: usize, window: Window, bands: &Bands, work: &Work) -> Result<Grid<f32>, FileError> {
        let path = &self.info.path;
        let Some(stored) = self.levels.get(level) else {
            return Err(FileError::NoLevel { path: path.clone(), asked: level, last: self.levels.len() - 1 });
        };
        self.check_bands(bands)?;
        if window.pixels() > self.limits.pixels_per_read as u64 {
            let limit = self.limits.pixels_per_read as u64;
            return Err(FileError::too_large(path, "the number of pixels to read", window.pixels(), limit));
        }
        let pick = read::Pick { bands, about: &self.info.bands, nodata: self.info.nodata };
        read::window(stored, window, &pick, &self.cache, work)
    }

    fn check_bands(&self, bands: &Bands) -> Result<(), FileError> {
        let have = self.info.bands.len();
        let asked = match bands {
            Bands::One(band) => Some(*band).filter(|b| *b >= have),
            Bands::Mix(parts) => parts.iter().map(|(band, _)| *band).find(|b| *b >= have),
        };
        asked.map_or(Ok(()), |asked| {
            Err(FileError::NoBand { path: self.info.path.clone(), asked, bands: have })
        })
    }
}
