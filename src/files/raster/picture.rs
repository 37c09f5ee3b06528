//! PNG and JPEG files: described from their header, decoded as a whole.

use std::panic::{AssertUnwindSafe, catch_unwind};

use super::info::SampleType;
use super::jpeg;
use super::layout::{Colour, Layout};
use super::limits::Limits;
use super::source::Source;
use super::unpack;
use crate::files::error::{FileError, Spot};

/// Which picture format.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Kind {
    Png,
    Jpeg,
}

/// Reads the header and refuses pictures past the limits.
pub(super) fn describe(source: &Source, kind: Kind, limits: &Limits) -> Result<(Layout, usize), FileError> {
    let damaged = |problem: String| FileError::malformed(source.path(), Spot::File, problem);
    let (layout, stored_bits) = match kind {
        Kind::Png => {
            let reader = png_reader(source, limits.chunk_bytes)?;
            let (colour, depth) = reader.output_color_type();
            let (samples, colour, alpha) = match colour {
                png::ColorType::Grayscale => (1, Colour::Grey { white_is_zero: false }, None),
                png::ColorType::GrayscaleAlpha => (2, Colour::Grey { white_is_zero: false }, Some(1)),
                png::ColorType::Rgb | png::ColorType::Indexed => (3, Colour::Rgb, None),
                png::ColorType::Rgba => (4, Colour::Rgb, Some(3)),
            };
            let sample = if depth == png::BitDepth::Sixteen { SampleType::U16 } else { SampleType::U8 };
            let info = reader.info();
            let size = (info.width as usize, info.height as usize);
            (Layout::whole(size, samples, sample, colour, alpha), info.bit_depth as usize)
        }
        Kind::Jpeg => {
            let stream = whole_file(source, limits.chunk_bytes)?;
            let (width, height, components) = guarded(|| jpeg::header(&stream)).map_err(damaged)?;
            if !matches!(components, 1 | 3) {
                let feature = format!("a JPEG of {components} components (printing colours)");
                return Err(FileError::unsupported(
                    source.path(),
                    Spot::File,
                    feature,
                    "save it as grey or RGB",
                ));
            }
            let colour = if components == 3 { Colour::Rgb } else { Colour::Grey { white_is_zero: false } };
            (Layout::whole((width, height), components, SampleType::U8, colour, None), 8)
        }
    };
    if layout.width == 0 || layout.height == 0 {
        return Err(damaged("the picture has no pixels".into()));
    }
    let bytes = layout.chunk_bytes().map_or(u64::MAX, |n| n as u64);
    if bytes > limits.chunk_bytes as u64 {
        return Err(FileError::too_large(
            source.path(),
            "the decoded picture in bytes",
            bytes,
            limits.chunk_bytes as u64,
        ));
    }
    Ok((layout, stored_bits))
}

/// All samples of the picture, side by side, in the machine's byte order.
pub(super) fn decode(source: &Source, kind: Kind, layout: &Layout) -> Result<Vec<u8>, FileError> {
    let damaged = |problem: String| FileError::malformed(source.path(), Spot::File, problem);
    let need = layout.chunk_bytes().unwrap_or(usize::MAX);
    let bytes = match kind {
        Kind::Jpeg => {
            let stream = whole_file(source, usize::MAX)?;
            guarded(|| jpeg::decode(&stream, layout.width, layout.height)).map_err(damaged)?.bytes
        }
        Kind::Png => {
            let mut reader = png_reader(source, need)?;
            let size = reader
                .output_buffer_size()
                .ok_or_else(|| damaged("the picture does not fit in memory".into()))?;
            let mut bytes = vec![0; size];
            guarded(|| reader.next_frame(&mut bytes).map_err(|e| format!("PNG: {e}"))).map_err(damaged)?;
            unpack::to_native(&mut bytes, layout.sample.bytes(), true);
            bytes
        }
    };
    if bytes.len() != need {
        return Err(damaged(format!("{need} bytes of pixels are expected, {} came out", bytes.len())));
    }
    Ok(bytes)
}

/// A reader that expands palettes, transparency and small bit depths.
fn png_reader(
    source: &Source,
    bytes: usize,
) -> Result<png::Reader<std::io::BufReader<std::fs::File>>, FileError> {
    let limits = png::Limits { bytes: bytes.max(1 << 20) };
    let mut decoder = png::Decoder::new_with_limits(source.stream()?, limits);
    decoder.set_transformations(png::Transformations::EXPAND);
    decoder.ignore_checksums(false);
    guarded(|| decoder.read_info().map_err(|e| format!("PNG: {e}")))
        .map_err(|problem| FileError::malformed(source.path(), Spot::File, problem))
}

fn whole_file(source: &Source, limit: usize) -> Result<Vec<u8>, FileError> {
    let len = usize::try_from(source.len()).ok().filter(|len| *len <= limit);
    let Some(len) = len else {
        return Err(FileError::too_large(source.path(), "the file in bytes", source.len(), limit as u64));
    };
    source.read(0, len)
}

/// Runs a decoder; a panic inside it on damaged bytes becomes an error.
fn guarded<T>(decode: impl FnOnce() -> Result<T, String>) -> Result<T, String> {
    catch_unwind(AssertUnwindSafe(decode))
        .unwrap_or_else(|_| Err("the decoder gave up on these bytes".into()))
}
