//! Figures to bytes: SVG as text, PNG and PDF through one renderer with the bundled typeface only.

mod bitmap;
mod pdf;
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

/// The figure as the renderer's tree, in CSS pixels.
fn tree(figure: &Figure) -> Result<usvg::Tree, WriteError> {
    let (width_mm, height_mm) = (figure.width_mm, figure.height_mm);
    if !(width_mm > 0.0 && height_mm > 0.0 && width_mm.is_finite() && height_mm.is_finite()) {
        return Err(WriteError::NoArea { width_mm, height_mm });
    }
    let options = usvg::Options {
        fontdb: FONTS.clone(),
        font_family: font::FAMILY.into(),
        image_rendering: usvg::ImageRendering::OptimizeQuality,
        ..usvg::Options::default()
    };
    usvg::Tree::from_str(&svg(figure), &options).map_err(|e| WriteError::Render(e.to_string()))
}
