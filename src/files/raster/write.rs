//! Writing a grid as a raster file: 32-bit floats as tiled Deflate TIFF, 8-bit grey as PNG.

use std::path::Path;

use libdeflater::{CompressionLvl, Compressor};
use rayon::iter::{IntoParallelIterator, ParallelIterator};

use super::tag;
use crate::files::error::FileError;
use crate::files::georef::GeoTags;
use crate::files::save;
use crate::ground::Grid;

const TILE: usize = 256;

/// Field types of tag values.
const ASCII: u16 = 2;
const SHORT: u16 = 3;
const LONG: u16 = 4;
const DOUBLE: u16 = 12;

/// Saves `grid` as a single-band TIFF of 32-bit floats in tiles of 256 × 256, Deflate with the
/// floating-point predictor. Missing cells are written as NaN and declared so. The same grid
/// gives the same bytes.
///
/// # Errors
/// [`FileError::TooLarge`] past 4 GB, [`FileError::Io`] when the system refuses.
pub fn write_tiff(path: &Path, grid: &Grid<f32>, geo: Option<&GeoTags>) -> Result<(), FileError> {
    let bytes = tiff(grid, geo).ok_or_else(|| {
        FileError::too_large(path, "the file in bytes", 4 * grid.len() as u64, u64::from(u32::MAX))
    })?;
    save::bytes(path, &bytes, None).map_err(|e| FileError::io(path, "writing", e))
}

/// Saves `grid` as an 8-bit grey PNG; missing cells are transparent.
///
/// # Errors
/// [`FileError::TooLarge`] when a side does not fit the format, [`FileError::Io`] when the system
/// refuses.
pub fn write_png_gray(path: &Path, grid: &Grid<u8>) -> Result<(), FileError> {
    let side = |n: usize| {
        u32::try_from(n).ok().filter(|n| *n > 0 && *n < 1 << 31).ok_or_else(|| {
            FileError::too_large(path, "a side of the picture in pixels", n as u64, (1 << 31) - 1)
        })
    };
    let fail = |e: png::EncodingError| match e {
        png::EncodingError::IoError(e) => FileError::io(path, "writing", e),
        other => FileError::io(path, "writing", std::io::Error::other(other.to_string())),
    };
    let mut bytes = Vec::new();
    let mut encoder = png::Encoder::new(&mut bytes, side(grid.width())?, side(grid.height())?);
    encoder.set_depth(png::BitDepth::Eight);
    let pixels = match grid.mask() {
        None => {
            encoder.set_color(png::ColorType::Grayscale);
            grid.values().to_vec()
        }
        Some(mask) => {
            encoder.set_color(png::ColorType::GrayscaleAlpha);
            grid.values().iter().zip(mask).flat_map(|(v, ok)| [*v, if *ok { 255 } else { 0 }]).collect()
        }
    };
    let mut writer = encoder.write_header().map_err(fail)?;
    writer.write_image_data(&pixels).map_err(fail)?;
    writer.finish().map_err(fail)?;
    save::bytes(path, &bytes, None).map_err(|e| FileError::io(path, "writing", e))
}

/// The whole file, or `None` when an offset would pass 32 bits.
fn tiff(grid: &Grid<f32>, geo: Option<&GeoTags>) -> Option<Vec<u8>> {
    let (across, down) = (grid.width().div_ceil(TILE), grid.height().div_ceil(TILE));
    let tiles: Vec<Vec<u8>> =
        (0..across * down).into_par_iter().map(|i| tile(grid, i % across, i / across)).collect();
    let mut out = b"II\x2A\0\0\0\0\0".to_vec();
    let (mut offsets, mut counts) = (Vec::new(), Vec::new());
    for tile in tiles {
        offsets.push(u32::try_from(out.len()).ok()?);
        counts.push(tile.len() as u32);
        out.extend(tile);
        out.resize(out.len().next_multiple_of(2), 0);
    }
    let short = |v: u16| (SHORT, v.to_le_bytes().to_vec());
    let long = |v: usize| u32::try_from(v).ok().map(|v| (LONG, v.to_le_bytes().to_vec()));
    let longs = |v: Vec<u32>| (LONG, v.into_iter().flat_map(u32::to_le_bytes).collect::<Vec<u8>>());
    let doubles = |v: &[f64]| (DOUBLE, v.iter().copied().flat_map(f64::to_le_bytes).collect::<Vec<u8>>());
    let text = |v: &str| (ASCII, v.bytes().chain([0]).collect::<Vec<u8>>());
    let mut tags = vec![
        (tag::WIDTH, long(grid.width())?),
        (tag::HEIGHT, long(grid.height())?),
        (tag::BITS_PER_SAMPLE, short(32)),
        (tag::COMPRESSION, short(8)),
        (tag::PHOTOMETRIC, short(1)),
        (tag::SAMPLES_PER_PIXEL, short(1)),
        (tag::PREDICTOR, short(3)),
        (tag::TILE_WIDTH, short(TILE as u16)),
        (tag::TILE_LENGTH, short(TILE as u16)),
        (tag::TILE_OFFSETS, longs(offsets)),
        (tag::TILE_BYTE_COUNTS, longs(counts)),
        (tag::SAMPLE_FORMAT, short(3)),
    ];
    if let Some(geo) = geo {
        for (tag, values) in [
            (tag::PIXEL_SCALE, &geo.pixel_scale),
            (tag::TIE_POINTS, &geo.tie_points),
            (tag::TRANSFORMATION, &geo.transformation),
            (tag::GEO_DOUBLES, &geo.double_params),
        ] {
            if !values.is_empty() {
                tags.push((tag, doubles(values)));
            }
        }
        if !geo.key_directory.is_empty() {
            tags.push((
                tag::GEO_KEYS,
                (SHORT, geo.key_directory.iter().copied().flat_map(u16::to_le_bytes).collect()),
            ));
        }
        if !geo.ascii_params.is_empty() {
            tags.push((tag::GEO_ASCII, text(&geo.ascii_params)));
        }
    }
    if grid.mask().is_some() {
        tags.push((tag::NODATA, text("nan")));
    }
    tags.sort_by_key(|(tag, _)| *tag);
    directory(out, &tags)
}

/// Appends the directory and the values that do not fit in its entries, and points the header to it.
fn directory(mut out: Vec<u8>, tags: &[(u16, (u16, Vec<u8>))]) -> Option<Vec<u8>> {
    let mut entries = (tags.len() as u16).to_le_bytes().to_vec();
    for (tag, (kind, value)) in tags {
        let width = match *kind {
            SHORT => 2,
            LONG => 4,
            DOUBLE => 8,
            _ => 1,
        };
        entries.extend(tag.to_le_bytes());
        entries.extend(kind.to_le_bytes());
        entries.extend(((value.len() / width) as u32).to_le_bytes());
        let mut field = value.clone();
        if field.len() > 4 {
            field = u32::try_from(out.len()).ok()?.to_le_bytes().to_vec();
            out.extend(value);
            out.resize(out.len().next_multiple_of(2), 0);
        }
        field.resize(4, 0);
        entries.extend(field);
    }
    entries.extend([0; 4]);
    let at = u32::try_from(out.len()).ok()?;
    out[4..8].copy_from_slice(&at.to_le_bytes());
    out.extend(entries);
    Some(out)
}

/// One tile: rows split into byte planes, differenced, deflated. Cells past the edge repeat nothing
/// and are zero.
fn tile(grid: &Grid<f32>, across: usize, down: usize) -> Vec<u8> {
    let mut bytes = vec![0u8; TILE * TILE * 4];
    for (r, row) in bytes.chunks_exact_mut(TILE * 4).enumerate() {
        let y = down * TILE + r;
        for c in 0..TILE {
            let x = across * TILE + c;
            let value = match (x < grid.width() && y < grid.height(), grid.get(x, y)) {
                (false, _) => 0.0,
                (true, None) => f32::NAN,
                (true, Some(v)) => v,
            };
            for (k, byte) in value.to_be_bytes().into_iter().enumerate() {
                row[k * TILE + c] = byte;
            }
        }
        for i in (1..row.len()).rev() {
            row[i] = row[i].wrapping_sub(row[i - 1]);
        }
    }
    let mut compressor = Compressor::new(CompressionLvl::default());
    let mut out = vec![0; compressor.zlib_compress_bound(bytes.len())];
    // The bound is the worst case, so there is always room.
    let size = compressor.zlib_compress(&bytes, &mut out).unwrap_or(0);
    out.truncate(size);
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::files::raster::{Bands, Limits, Raster, Window};
    use crate::ground::Work;

    #[test]
    fn a_written_grid_reads_back_with_its_mask() {
        let folder = tempfile::tempdir().expect("a folder");
        let mut grid = Grid::from_fn(300, 270, |c, r| (c as f32 - 7.5) * 1e-3 + r as f32 * 1e3);
        grid.mask_where(|c, r| (c + r) % 11 != 0);
        let path = folder.path().join("grid.tif");
        let geo = GeoTags {
            pixel_scale: vec![2.0, 3.0, 0.0],
            tie_points: vec![0.0, 0.0, 0.0, 500_000.0, 4_000_000.0, 0.0],
            key_directory: vec![1, 1, 0, 2, 1024, 0, 1, 1, 3072, 0, 1, 32633],
            ..GeoTags::default()
        };
        write_tiff(&path, &grid, Some(&geo)).expect("writes");
        let raster = Raster::open(&path, &Limits::default()).expect("opens");
        assert_eq!(raster.info().georeference.as_ref().and_then(|g| g.epsg), Some(32633));
        let back = raster.read(0, Window::whole(300, 270), &Bands::One(0), &Work::quiet()).expect("reads");
        for row in 0..270 {
            for col in 0..300 {
                assert_eq!(back.get(col, row), grid.get(col, row));
            }
        }
    }

    #[test]
    fn a_written_picture_reads_back_with_its_mask() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("grid.png");
        let mut grid = Grid::from_fn(33, 9, |c, r| (c * 7 + r) as u8);
        grid.mask_where(|c, _| c != 4);
        write_png_gray(&path, &grid).expect("writes");
        let raster = Raster::open(&path, &Limits::default()).expect("opens");
        assert_eq!((raster.info().bands.len(), raster.info().alpha), (1, true));
        let back = raster.read(0, Window::whole(33, 9), &Bands::One(0), &Work::quiet()).expect("reads");
        assert!((0..9).all(|r| (0..33).all(|c| back.get(c, r) == grid.get(c, r).map(f32::from))));
    }
}
