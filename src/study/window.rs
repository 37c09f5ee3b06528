//! The pixels a patch needs: its box and a margin, read at a level that fits the memory.

use crate::files::raster::{RasterError, Window};
use crate::ground::{Grid, Place, Point, Polygon, Work};

use super::{OpenRaster, Patch, RasterEntry};

/// Pixels of a patch, ready to measure.
pub struct PatchPixels {
    pub image: Grid<f32>,
    /// The patch in pixel coordinates of `image`.
    pub outline: Polygon,
    /// The place of `image`.
    pub place: Place,
    /// Full-resolution pixels per image pixel.
    pub factor: usize,
    /// Full-resolution pixel of the image's upper left corner.
    pub origin: Point,
    /// Valid share of the pixels inside the outline.
    pub valid_fraction: f64,
    /// Ground area of the outline, in the square of the place's unit.
    pub area: f64,
}

/// How finely a patch is measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Detail {
    /// A first answer within a quarter second: at most about half a million pixels.
    Coarse,
    /// Full resolution, up to what memory allows.
    Exact,
}

impl Detail {
    /// Most pixels read: 2¹⁹ for a first answer; 2²⁷ (half a gibibyte of f32) for the exact one.
    fn most_pixels(self) -> usize {
        match self {
            Self::Coarse => 1 << 19,
            Self::Exact => 1 << 27,
        }
    }
}

/// Reads the patch's box with a margin in which filters find their support.
///
/// # Errors
/// [`RasterError`].
pub fn read(
    open: &OpenRaster,
    entry: &RasterEntry,
    patch: &Patch,
    detail: Detail,
    work: &Work,
) -> Result<PatchPixels, RasterError> {
    const MARGIN: f64 = 16.0;
    let info = open.raster.info();
    let bounds = patch
        .outline
        .bounds()
        .unwrap_or_else(|| crate::ground::Bounds { min: Point::new(0.0, 0.0), max: Point::new(0.0, 0.0) });
    let clamp = |x: f64, most: usize| x.clamp(0.0, most as f64) as usize;
    let (col, row) = (
        clamp((bounds.min.x - MARGIN).floor(), info.width),
        clamp((bounds.min.y - MARGIN).floor(), info.height),
    );
    let right = clamp((bounds.max.x + MARGIN).ceil(), info.width);
    let lower = clamp((bounds.max.y + MARGIN).ceil(), info.height);
    let window = Window { col, row, width: right.saturating_sub(col), height: lower.saturating_sub(row) };
    let pixels = window.width as f64 * window.height as f64;
    let factor = (pixels / detail.most_pixels() as f64).sqrt().ceil().max(1.0) as usize;
    let image = open.raster.read_reduced(window, factor, &entry.bands, work)?;
    let scale = factor as f64;
    let origin = Point::new(col as f64, row as f64);
    let outline = patch.outline.map(|p| Point::new((p.x - origin.x) / scale, (p.y - origin.y) / scale));
    let place = open.place.window(origin.x, origin.y, [scale, scale]);
    let (valid_fraction, area) = cover(&image, &outline, &place);
    Ok(PatchPixels { image, outline, place, factor, origin, valid_fraction, area })
}

/// Valid share and ground area of the outline; the pixel area is taken at every row's middle, since
/// it changes across a map.
fn cover(image: &Grid<f32>, outline: &Polygon, place: &Place) -> (f64, f64) {
    let (mut inside, mut valid, mut area) = (0usize, 0usize, 0.0);
    for row in 0..image.height() {
        for (from, to) in outline.row_spans(row, image.width()) {
            let middle = Point::new(0.5 * (from + to) as f64, row as f64 + 0.5);
            let cell = place.local_frame(middle).map_or(0.0, |frame| frame.pixel_area());
            inside += to - from;
            valid += (from..to).filter(|col| image.is_valid(*col, row)).count();
            area += (to - from) as f64 * cell;
        }
    }
    (if inside > 0 { valid as f64 / inside as f64 } else { 0.0 }, area)
}
