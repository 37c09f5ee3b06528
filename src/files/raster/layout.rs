//! How the pixels of one TIFF directory are laid out, read from its tags and checked, before any
//! pixel is touched.

use super::ifd::Directory;
use super::info::SampleType;
use super::limits::Limits;
use super::samples::{self, RESAVE};
use super::source::Source;
use super::tag;
use crate::files::error::{FileError, Spot};

/// The codecs this program decodes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Compression {
    None,
    Lzw,
    Deflate,
    PackBits,
    Jpeg,
    Zstd,
    WebP,
}

/// What was subtracted before compression.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Predictor {
    None,
    /// Differences along a row.
    Horizontal,
    /// Differences along a row of the bytes of floating-point values, most significant first.
    Float,
}

/// What the samples mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Colour {
    /// Grey, or bands of no particular colour.
    Grey {
        white_is_zero: bool,
    },
    Rgb,
    Palette,
    Mask,
    Cmyk,
    YCbCr,
}

/// The checked layout of one image.
#[derive(Clone, Debug)]
pub(super) struct Layout {
    pub(super) directory: usize,
    pub(super) width: usize,
    pub(super) height: usize,
    /// Samples per pixel, alpha included.
    pub(super) samples: usize,
    /// Bits of one stored sample.
    pub(super) bits: usize,
    /// The type of a sample once unpacked.
    pub(super) sample: SampleType,
    pub(super) big_endian: bool,
    pub(super) compression: Compression,
    pub(super) predictor: Predictor,
    /// One plane after the other instead of samples side by side.
    pub(super) planar: bool,
    pub(super) colour: Colour,
    /// Which sample says how opaque the pixel is.
    pub(super) alpha: Option<usize>,
    pub(super) tiled: bool,
    pub(super) chunk_width: usize,
    pub(super) chunk_height: usize,
    pub(super) offsets: Vec<u64>,
    pub(super) counts: Vec<u64>,
    pub(super) jpeg_tables: Option<Vec<u8>>,
    /// Red, green and blue of each index, for palette images.
    pub(super) palette: Option<[Vec<u8>; 3]>,
}

const CONVERT: &str = "convert the file with a general-purpose tool to Deflate, LZW or no compression";

impl Layout {
    /// Reads and checks the layout tags of `dir`.
    pub(super) fn read(
        source: &Source,
        dir: &Directory,
        big_endian: bool,
        limits: &Limits,
    ) -> Result<Self, FileError> {
        let path = source.path();
        let number = |tag: u16, default: u64| dir.first(source, tag).map(|v| v.unwrap_or(default));
        let refuse = |tag: u16, feature: String, advice| {
            Err(FileError::unsupported(path, dir.spot(tag), feature, advice))
        };
        let damaged = |tag: u16, problem: String| FileError::malformed(path, dir.spot(tag), problem);

        let width = size(number(tag::WIDTH, 0)?)
            .ok_or_else(|| damaged(tag::WIDTH, "the width must be 1 or more".into()))?;
        let height = size(number(tag::HEIGHT, 0)?)
            .ok_or_else(|| damaged(tag::HEIGHT, "the height must be 1 or more".into()))?;
        let samples = number(tag::SAMPLES_PER_PIXEL, 1)?;
        if samples == 0 {
            return Err(damaged(tag::SAMPLES_PER_PIXEL, "a pixel must have 1 sample or more".into()));
        }
        if samples > limits.samples as u64 {
            return Err(FileError::too_large(
                path,
                "the number of samples per pixel",
                samples,
                limits.samples as u64,
            ));
        }
        let samples = samples as usize;

        let compression = match number(tag::COMPRESSION, 1)? {
            1 => Compression::None,
            5 => Compression::Lzw,
            7 => Compression::Jpeg,
            8 | 32946 => Compression::Deflate,
            32773 => Compression::PackBits,
            50000 => Compression::Zstd,
            50001 => Compression::WebP,
            other => {
                let feature = format!("{} compression (code {other})", unread_codec(other));
                return refuse(tag::COMPRESSION, feature, CONVERT);
            }
        };
        if number(tag::FILL_ORDER, 1)? == 2 {
            return refuse(tag::FILL_ORDER, "bits stored from the least significant end".into(), RESAVE);
        }
        let (bits, sample) = samples::kind(source, dir)?;
        let colour = match number(tag::PHOTOMETRIC, 1)? {
            0 => Colour::Grey { white_is_zero: true },
            1 => Colour::Grey { white_is_zero: false },
            2 => Colour::Rgb,
            3 => Colour::Palette,
            4 => Colour::Mask,
            5 => Colour::Cmyk,
            6 => Colour::YCbCr,
            other => {
                let name = match other {
                    8..=10 => "L*a*b* colour",
                    32803 | 34892 => "raw camera mosaic",
                    32844 | 32845 => "logarithmic luminance",
                    _ => "unknown colour model",
                };
                return refuse(tag::PHOTOMETRIC, format!("{name} (code {other})"), RESAVE);
            }
        };
        let lossy = matches!(compression, Compression::Jpeg | Compression::WebP);
        if lossy && (bits != 8 || sample != SampleType::U8) {
            return refuse(tag::BITS_PER_SAMPLE, format!("JPEG or WebP samples of {bits} bits"), CONVERT);
        }
        if colour == Colour::YCbCr && !lossy {
            return refuse(tag::PHOTOMETRIC, "luminance and chroma outside JPEG".into(), RESAVE);
        }
        if colour == Colour::YCbCr && samples != 3 {
            return refuse(tag::PHOTOMETRIC, format!("luminance and chroma in {samples} samples"), RESAVE);
        }
        if colour == Colour::Cmyk && lossy {
            return refuse(tag::PHOTOMETRIC, "printing colours (CMYK) inside JPEG".into(), RESAVE);
        }
        let predictor = match number(tag::PREDICTOR, 1)? {
            _ if !matches!(compression, Compression::Lzw | Compression::Deflate | Compression::Zstd) => {
                Predictor::None
            }
            1 => Predictor::None,
            2 if bits.is_multiple_of(8) => Predictor::Horizontal,
            3 if matches!(sample, SampleType::F16 | SampleType::F32 | SampleType::F64) => Predictor::Float,
            other => {
                let feature = format!("predictor {other} over {bits}-bit samples of type {}", sample.name());
                return refuse(tag::PREDICTOR, feature, CONVERT);
            }
        };
        let planar = match number(tag::PLANAR_CONFIGURATION, 1)? {
            1 => false,
            2 => samples > 1,
            other => {
                return Err(damaged(
                    tag::PLANAR_CONFIGURATION,
                    format!("1 or 2 is expected, here it is {other}"),
                ));
            }
        };
        if planar && lossy && samples > 1 && matches!(colour, Colour::YCbCr) {
            return refuse(
                tag::PLANAR_CONFIGURATION,
                "luminance and chroma in separate planes".into(),
                RESAVE,
            );
        }

        let alpha = samples::alpha(source, dir, samples, colour)?;
        let palette =
            if colour == Colour::Palette { Some(samples::palette(source, dir, bits, sample)?) } else { None };
        if palette.is_some() && (samples - usize::from(alpha.is_some())) != 1 {
            return refuse(
                tag::SAMPLES_PER_PIXEL,
                format!("a palette over {samples} samples per pixel"),
                RESAVE,
            );
        }

        let mut layout = Self {
            directory: dir.index,
            width,
            height,
            samples,
            bits,
            sample,
            big_endian,
            compression,
            predictor,
            planar,
            colour,
            alpha,
            tiled: dir.has(tag::TILE_WIDTH),
            chunk_width: width,
            chunk_height: height,
            offsets: Vec::new(),
            counts: Vec::new(),
            jpeg_tables: dir.blob(source, tag::JPEG_TABLES, limits.tag_bytes)?,
            palette,
        };
        layout.read_chunk_tables(source, dir, limits)?;
        Ok(layout)
    }

    /// The layout of a picture that is decoded in one piece.
    pub(super) fn whole(
        (width, height): (usize, usize),
        samples: usize,
        sample: SampleType,
        colour: Colour,
        alpha: Option<usize>,
    ) -> Self {
        Self {
            directory: 0,
            width,
            height,
            samples,
            bits: 8 * sample.bytes(),
            sample,
            big_endian: cfg!(target_endian = "big"),
            compression: Compression::None,
            predictor: Predictor::None,
            planar: false,
            colour,
            alpha,
            tiled: false,
            chunk_width: width,
            chunk_height: height,
            offsets: vec![0],
            counts: vec![0],
            jpeg_tables: None,
            palette: None,
        }
    }

    fn read_chunk_tables(
        &mut self,
        source: &Source,
        dir: &Directory,
        limits: &Limits,
    ) -> Result<(), FileError> {
        let path = source.path();
        if self.tiled {
            for (tag, name, into) in [
                (tag::TILE_WIDTH, "width", &mut self.chunk_width),
                (tag::TILE_LENGTH, "length", &mut self.chunk_height),
            ] {
                *into = size(dir.first(source, tag)?.unwrap_or(0)).ok_or_else(|| {
                    FileError::malformed(path, dir.spot(tag), format!("the tile {name} must be 1 or more"))
                })?;
            }
        } else {
            let rows = dir.first(source, tag::ROWS_PER_STRIP)?.filter(|r| *r > 0).unwrap_or(u64::MAX);
            self.chunk_height = self.height.min(usize::try_from(rows).unwrap_or(usize::MAX));
        }
        let planes = if self.planar { self.samples } else { 1 };
        let expected = self.across().checked_mul(self.down()).and_then(|n| n.checked_mul(planes));
        let expected = expected.filter(|n| *n <= limits.chunks).ok_or_else(|| {
            let asked = self.across() as u64 * self.down() as u64;
            FileError::too_large(path, "the number of strips or tiles", asked, limits.chunks as u64)
        })?;

        // Some writers put tiles under the strip tags.
        let tile_tags = self.tiled && dir.has(tag::TILE_OFFSETS);
        let (at, sizes) = if tile_tags {
            (tag::TILE_OFFSETS, tag::TILE_BYTE_COUNTS)
        } else {
            (tag::STRIP_OFFSETS, tag::STRIP_BYTE_COUNTS)
        };
        self.offsets = dir.unsigned(source, at, limits.chunks)?.unwrap_or_default();
        if self.offsets.len() < expected {
            let problem =
                format!("{expected} strips or tiles are expected, {} are listed", self.offsets.len());
            return Err(FileError::malformed(path, dir.spot(at), problem));
        }
        self.counts = match dir.unsigned(source, sizes, limits.chunks)? {
            Some(counts) => counts,
            None => self.guessed_counts(source),
        };
        if self.counts.len() < expected {
            let problem = format!("{expected} byte counts are expected, {} are listed", self.counts.len());
            return Err(FileError::malformed(path, dir.spot(sizes), problem));
        }
        self.split_large_strips(source);
        let bytes = self.chunk_bytes().map_or(u64::MAX, |n| n as u64);
        if bytes > limits.chunk_bytes as u64 {
            return Err(FileError::too_large(
                path,
                "a decoded strip or tile in bytes",
                bytes,
                limits.chunk_bytes as u64,
            ));
        }
        Ok(())
    }

    /// Byte counts that a writer left out: the size follows from the layout when nothing is
    /// compressed, and a single strip may run to the end of the file.
    fn guessed_counts(&self, source: &Source) -> Vec<u64> {
        match (self.compression, self.offsets.as_slice()) {
            (Compression::None, offsets) => {
                let rows = |i: usize| self.stored_rows(i % (self.across() * self.down()));
                let bytes =
                    |i: usize| self.row_bytes().and_then(|b| b.checked_mul(rows(i))).unwrap_or(0) as u64;
                (0..offsets.len()).map(bytes).collect()
            }
            (_, [only]) => vec![source.len().saturating_sub(*only)],
            _ => Vec::new(),
        }
    }

    /// Cuts uncompressed strips into ones of about a megabyte, so that a window of a file written as
    /// one strip does not read all of it. Only strips that the file holds in full are cut.
    fn split_large_strips(&mut self, source: &Source) {
        const TARGET: usize = 1 << 20;
        let Some(row) = self.row_bytes() else { return };
        let rows = (TARGET / row.max(1)).max(1);
        if self.tiled || self.compression != Compression::None || self.chunk_height < 2 * rows {
            return;
        }
        let per_plane = self.down();
        let planes = if self.planar { self.samples } else { 1 };
        let whole = |i: usize| {
            let need = (row as u64).checked_mul(self.stored_rows(i % per_plane) as u64);
            need.is_some_and(|need| {
                self.counts[i] >= need
                    && self.offsets[i].checked_add(need).is_some_and(|end| end <= source.len())
            })
        };
        if !(0..per_plane * planes).all(whole) || !self.chunk_height.is_multiple_of(rows) && per_plane > 1 {
            return;
        }
        let (mut offsets, mut counts) = (Vec::new(), Vec::new());
        for i in 0..per_plane * planes {
            let held = self.stored_rows(i % per_plane);
            for first in (0..held).step_by(rows) {
                offsets.push(self.offsets[i] + (first * row) as u64);
                counts.push((rows.min(held - first) * row) as u64);
            }
        }
        (self.offsets, self.counts, self.chunk_height) = (offsets, counts, rows);
    }

    pub(super) fn across(&self) -> usize {
        self.width.div_ceil(self.chunk_width)
    }

    pub(super) fn down(&self) -> usize {
        self.height.div_ceil(self.chunk_height)
    }

    /// Samples of one pixel inside one chunk.
    pub(super) fn chunk_samples(&self) -> usize {
        if self.planar { 1 } else { self.samples }
    }

    /// Rows that the chunk at this place of a plane stores: all of a tile, the remainder of a strip.
    pub(super) fn stored_rows(&self, chunk_in_plane: usize) -> usize {
        if self.tiled {
            return self.chunk_height;
        }
        self.chunk_height.min(self.height.saturating_sub(chunk_in_plane / self.across() * self.chunk_height))
    }

    /// Stored bytes of one row of a chunk, padded to whole bytes.
    pub(super) fn row_bytes(&self) -> Option<usize> {
        let bits = self.chunk_width.checked_mul(self.chunk_samples())?.checked_mul(self.bits)?;
        Some(bits.div_ceil(8))
    }

    /// Bytes of one unpacked row of a chunk.
    pub(super) fn unpacked_row_bytes(&self) -> Option<usize> {
        self.chunk_width.checked_mul(self.chunk_samples())?.checked_mul(self.sample.bytes())
    }

    /// Unpacked bytes of a full chunk.
    pub(super) fn chunk_bytes(&self) -> Option<usize> {
        self.unpacked_row_bytes()?.max(self.row_bytes()?).checked_mul(self.chunk_height)
    }

    /// Where a chunk's bytes are, for messages.
    pub(super) fn spot(&self, chunk: usize) -> Spot {
        let offset = self.offsets.get(chunk).copied().unwrap_or(0);
        Spot::Chunk { directory: self.directory, chunk, offset }
    }
}

fn size(value: u64) -> Option<usize> {
    // Sizes past 32 bits are not legal in the format.
    u32::try_from(value).ok().filter(|v| *v > 0).map(|v| v as usize)
}

fn unread_codec(code: u64) -> &'static str {
    match code {
        2..=4 | 32771 => "CCITT fax",
        6 => "old-style JPEG",
        9 | 10 | 34661 => "JBIG",
        33003 | 33005 | 34712 => "JPEG 2000",
        34676 | 34677 => "SGI log luminance",
        34887 => "LERC",
        34925 => "LZMA",
        50002 | 52546 => "JPEG XL",
        _ => "unknown",
    }
}
