//! What the samples of one TIFF directory are: their type, which of them is opacity, and the colours
//! of a palette.

use super::ifd::Directory;
use super::info::SampleType;
use super::layout::Colour;
use super::source::Source;
use super::tag;
use crate::files::error::FileError;

pub(super) const RESAVE: &str = "save it as grey, RGB or separate bands of 8 to 32 bits";

/// Stored bits and unpacked type of the samples, the same for every band or refused.
pub(super) fn kind(source: &Source, dir: &Directory) -> Result<(usize, SampleType), FileError> {
    let path = source.path();
    let same = |tag: u16, default: u64, what: &str| -> Result<u64, FileError> {
        let values = dir.unsigned(source, tag, 1 << 16)?.unwrap_or_default();
        let first = values.first().copied().unwrap_or(default);
        if values.iter().any(|v| *v != first) {
            return Err(FileError::unsupported(
                path,
                dir.spot(tag),
                format!("bands of different sample {what}"),
                RESAVE,
            ));
        }
        Ok(first)
    };
    let bits = same(tag::BITS_PER_SAMPLE, 1, "size")?;
    let format = same(tag::SAMPLE_FORMAT, 1, "type")?;
    let sample = match (format, bits) {
        (1 | 4, 1..=8) => SampleType::U8,
        (1 | 4, 9..=16) => SampleType::U16,
        (1 | 4, 32) => SampleType::U32,
        (2, 8) => SampleType::I8,
        (2, 16) => SampleType::I16,
        (2, 32) => SampleType::I32,
        (3, 16) => SampleType::F16,
        (3, 32) => SampleType::F32,
        (3, 64) => SampleType::F64,
        (5 | 6, _) => {
            return Err(FileError::unsupported(
                path,
                dir.spot(tag::SAMPLE_FORMAT),
                "complex samples",
                RESAVE,
            ));
        }
        (_, 0) => {
            return Err(FileError::malformed(path, dir.spot(tag::BITS_PER_SAMPLE), "samples of 0 bits"));
        }
        _ => {
            let kind = match format {
                1 | 4 => "unsigned",
                2 => "signed",
                3 => "floating-point",
                _ => "unknown",
            };
            let feature = format!("{kind} samples of {bits} bits");
            return Err(FileError::unsupported(path, dir.spot(tag::BITS_PER_SAMPLE), feature, RESAVE));
        }
    };
    Ok((bits as usize, sample))
}

/// The first extra sample that is declared an opacity.
pub(super) fn alpha(
    source: &Source,
    dir: &Directory,
    samples: usize,
    colour: Colour,
) -> Result<Option<usize>, FileError> {
    let extras = dir.unsigned(source, tag::EXTRA_SAMPLES, 1 << 16)?.unwrap_or_default();
    let Some(first) = samples.checked_sub(extras.len()) else { return Ok(None) };
    let least = match colour {
        Colour::Rgb | Colour::YCbCr => 3,
        Colour::Cmyk => 4,
        _ => 1,
    };
    let found = extras.iter().position(|kind| matches!(kind, 1 | 2)).map(|i| first + i);
    Ok(found.filter(|i| *i >= least))
}

/// The colour map with its 16-bit colours brought to 8 bits. Full scale is 65535 by the format; some
/// writers shift 8-bit colours up instead, or leave them as they are.
pub(super) fn palette(
    source: &Source,
    dir: &Directory,
    bits: usize,
    sample: SampleType,
) -> Result<[Vec<u8>; 3], FileError> {
    let path = source.path();
    if !matches!(sample, SampleType::U8 | SampleType::U16) {
        let feature = format!("a palette over {} samples", sample.name());
        return Err(FileError::unsupported(path, dir.spot(tag::COLOR_MAP), feature, RESAVE));
    }
    let size = 1 << bits;
    let map = dir.unsigned(source, tag::COLOR_MAP, 3 << 16)?.unwrap_or_default();
    if map.len() < 3 * size {
        let problem = format!("{} palette entries are expected, {} are listed", 3 * size, map.len());
        return Err(FileError::malformed(path, dir.spot(tag::COLOR_MAP), problem));
    }
    let divisor = if map.iter().all(|v| *v < 256) {
        1
    } else if map.iter().all(|v| v % 256 == 0) {
        256
    } else {
        257
    };
    let channel = |c: usize| map[c * size..(c + 1) * size].iter().map(|v| (v / divisor) as u8).collect();
    Ok([channel(0), channel(1), channel(2)])
}
