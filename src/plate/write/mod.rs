//! Figures to bytes: SVG as text, PNG through a renderer that knows the bundled typeface only, PDF
//! written directly.

mod bitmap;
mod pdf;
mod pdf_font;
mod svg;

use std::sync::{Arc, LazyLock};

pub use bitmap::{PngSize, png, rgba};
pub use pdf::pdf;
pub use svg::svg;

use super::{Figure, font};

/// A figure that cannot be written.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum WriteError {
    #[error("a figure of {width_mm} × {height_mm} mm has no area: give it a width and a height above 0")]
    NoArea { width_mm: f64, height_mm: f64 },
    #[error(
        "{width} × {height} pixels are more than the {limit} a picture may have: ask for a smaller width or dpi"
    )]
    TooLarge { width: u64, height: u64, limit: u64 },
    #[error("the figure could not be rendered: {0}")]
    Render(String),
}

/// CSS pixels per millimetre, the renderer's own unit.
const CSS_PER_MM: f64 = 96.0 / 25.4;

static FONTS: LazyLock<Arc<usvg::fontdb::Database>> = LazyLock::new(|| {
    let mut fonts = usvg::fontdb::Database::new();
    for face in [font::REGULAR, font::BOLD] {
        fonts.load_font_data(face.to_vec());
    }
    fonts.set_sans_serif_family(font::FAMILY);
    fonts.set_serif_family(font::FAMILY);
    Arc::new(fonts)
});

/// Refuses a figure that has no area.
fn check_area(figure: &Figure) -> Result<(), WriteError> {
    let (width_mm, height_mm) = (figure.width_mm, figure.height_mm);
    if width_mm > 0.0 && height_mm > 0.0 && width_mm.is_finite() && height_mm.is_finite() {
        return Ok(());
    }
    Err(WriteError::NoArea { width_mm, height_mm })
}

/// The figure as the renderer's tree, in CSS pixels.
fn tree(figure: &Figure) -> Result<usvg::Tree, WriteError> {
    check_area(figure)?;
    let options = usvg::Options {
        fontdb: FONTS.clone(),
        font_family: font::FAMILY.into(),
        image_rendering: usvg::ImageRendering::OptimizeQuality,
        ..usvg::Options::default()
    };
    usvg::Tree::from_str(&svg(figure), &options).map_err(|e| WriteError::Render(e.to_string()))
}

/// zlib, always at the same level.
fn deflated(data: &[u8]) -> Vec<u8> {
    let level = libdeflater::CompressionLvl::default();
    let mut compressor = libdeflater::Compressor::new(level);
    let mut out = vec![0; compressor.zlib_compress_bound(data.len())];
    // The bound is the library's own, so there is always room.
    let written = compressor.zlib_compress(data, &mut out).unwrap_or(0);
    out.truncate(written);
    out
}
