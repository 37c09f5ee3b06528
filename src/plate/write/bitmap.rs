//! Figures as pixels: PNG with its dpi recorded, and plain RGBA for the window.

use std::io::Cursor;

use crate::plate::Figure;

use super::{CSS_PER_MM, WriteError, tree};

/// How large a PNG should be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum PngSize {
    WidthPx(u32),
    Dpi(f64),
}

/// Pixels a picture may have: 256 million, 1 GiB of RGBA.
const MOST_PIXELS: u64 = 1 << 28;

/// The figure as a PNG with its resolution in the pHYs chunk. The same figure gives the same bytes.
///
/// # Errors
/// [`WriteError`]: no area, too many pixels, or the renderer's own words.
pub fn png(figure: &Figure, size: PngSize) -> Result<Vec<u8>, WriteError> {
    let (width, height, pixels) = rgba(figure, size)?;
    let per_metre = f64::from(width) / figure.width_mm * 1000.0;
    encode(&pixels, width as usize, height as usize, Some(per_metre))
        .ok_or_else(|| WriteError::Render("PNG encoding failed".into()))
}

/// The figure as (width, height, RGBA with straight alpha, row by row).
///
/// # Errors
/// As [`png`].
pub fn rgba(figure: &Figure, size: PngSize) -> Result<(u32, u32, Vec<u8>), WriteError> {
    let tree = tree(figure)?;
    let per_mm = match size {
        PngSize::WidthPx(width) => f64::from(width.max(1)) / figure.width_mm,
        PngSize::Dpi(dpi) => dpi.max(1.0) / 25.4,
    };
    let (width, height) =
        ((figure.width_mm * per_mm).round().max(1.0), (figure.height_mm * per_mm).round().max(1.0));
    let pixels = width * height;
    if pixels.is_nan() || pixels > MOST_PIXELS as f64 {
        return Err(WriteError::TooLarge { width: width as u64, height: height as u64, limit: MOST_PIXELS });
    }
    let mut pixmap = resvg::tiny_skia::Pixmap::new(width as u32, height as u32)
        .ok_or_else(|| WriteError::Render("no memory for the picture".into()))?;
    let scale = (per_mm / CSS_PER_MM) as f32;
    let transform = resvg::tiny_skia::Transform::from_scale(scale, scale);
    resvg::render(&tree, transform, &mut pixmap.as_mut());
    let straight = pixmap.pixels().iter().flat_map(|p| {
        let c = p.demultiply();
        [c.red(), c.green(), c.blue(), c.alpha()]
    });
    Ok((width as u32, height as u32, straight.collect()))
}

/// PNG bytes; opaque pictures are written without alpha. `None` when lengths disagree.
pub(super) fn encode(
    rgba: &[u8],
    width: usize,
    height: usize,
    pixels_per_metre: Option<f64>,
) -> Option<Vec<u8>> {
    if width == 0 || height == 0 || rgba.len() != width * height * 4 {
        return None;
    }
    let opaque = rgba.chunks_exact(4).all(|p| p[3] == 255);
    let gray = opaque && rgba.chunks_exact(4).all(|p| p[0] == p[1] && p[1] == p[2]);
    let (color, data) = if gray {
        (png::ColorType::Grayscale, rgba.chunks_exact(4).map(|p| p[0]).collect())
    } else if opaque {
        (png::ColorType::Rgb, rgba.chunks_exact(4).flat_map(|p| [p[0], p[1], p[2]]).collect())
    } else {
        (png::ColorType::Rgba, rgba.to_vec())
    };
    let mut bytes = Vec::new();
    let mut encoder = png::Encoder::new(Cursor::new(&mut bytes), width as u32, height as u32);
    encoder.set_color(color);
    encoder.set_depth(png::BitDepth::Eight);
    encoder.set_compression(png::Compression::Balanced);
    if let Some(ppm) = pixels_per_metre {
        let ppu = ppm.round() as u32;
        encoder.set_pixel_dims(Some(png::PixelDimensions { xppu: ppu, yppu: ppu, unit: png::Unit::Meter }));
    }
    let mut writer = encoder.write_header().ok()?;
    let data: Vec<u8> = data;
    writer.write_image_data(&data).ok()?;
    writer.finish().ok()?;
    Some(bytes)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Point;
    use crate::plate::{Item, Rgba};

    fn square() -> Figure {
        let corners = [(0.0, 0.0), (5.0, 0.0), (5.0, 10.0), (0.0, 10.0)];
        Figure {
            width_mm: 10.0,
            height_mm: 10.0,
            items: vec![Item::Path {
                points: corners.map(|(x, y)| Point::new(x, y)).to_vec(),
                closed: true,
                fill: Some(Rgba([255, 0, 0, 255])),
                stroke: None,
            }],
        }
    }

    #[test]
    fn millimetres_become_pixels() {
        let (width, height, pixels) = rgba(&square(), PngSize::WidthPx(20)).expect("renders");
        assert_eq!((width, height), (20, 20));
        assert_eq!(pixels[..4], [255, 0, 0, 255]);
        assert_eq!(pixels[19 * 4..][..4], [0, 0, 0, 0]);
    }

    #[test]
    fn the_resolution_is_recorded() {
        let bytes = png(&square(), PngSize::Dpi(300.0)).expect("encodes");
        let reader = png::Decoder::new(Cursor::new(bytes)).read_info().expect("a PNG");
        let dims = reader.info().pixel_dims.expect("pHYs");
        // 118 px over 10 mm.
        assert_eq!((reader.info().width, dims.xppu), (118, 11_800));
    }

    #[test]
    fn absurd_sizes_are_refused() {
        assert!(matches!(png(&square(), PngSize::Dpi(1e9)), Err(WriteError::TooLarge { .. })));
        assert!(matches!(png(&square(), PngSize::Dpi(f64::INFINITY)), Err(WriteError::TooLarge { .. })));
        let flat = Figure { height_mm: 0.0, ..square() };
        assert!(matches!(png(&flat, PngSize::WidthPx(100)), Err(WriteError::NoArea { .. })));
    }
}
