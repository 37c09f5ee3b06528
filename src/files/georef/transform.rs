//! The affine from pixels to map coordinates: tie point and pixel size, a full matrix, or a fit to
//! ground control points; and the six numbers of a world file.

use crate::ground::Affine;

use super::{GeoTags, GeorefError};

/// The affine of a world file: six numbers A D B E C F, one a line, where (C, F) is the CENTRE of
/// the upper-left pixel. The result is for pixel-corner coordinates.
///
/// # Errors
/// [`GeorefError::WorldFile`] when a number is missing or unreadable, or pixels have no area.
pub fn from_world_file(text: &str) -> Result<Affine, GeorefError> {
    let mut numbers = [0.0; 6];
    let mut tokens = text.split_whitespace();
    for (index, number) in numbers.iter_mut().enumerate() {
        let token = tokens.next().unwrap_or("");
        *number = token.replace(',', ".").parse().ok().filter(|n: &f64| n.is_finite()).ok_or_else(|| {
            GeorefError::WorldFile { index: index + 1, found: token.chars().take(40).collect() }
        })?;
    }
    let [a, d, b, e, c, f] = numbers;
    let centred = Affine { a, b, c, d, e, f };
    centred.inverse().ok_or(GeorefError::Singular(centred))?;
    Ok(half_pixel_back(centred))
}

/// From an affine whose (0, 0) is the centre of the first pixel to one whose (0, 0) is its corner.
pub(super) fn half_pixel_back(centred: Affine) -> Affine {
    let Affine { a, b, c, d, e, f } = centred;
    Affine { c: c - 0.5 * (a + b), f: f - 0.5 * (d + e), ..centred }
}

/// The affine from tie point and pixel size.
pub(super) fn from_scale(tags: &GeoTags) -> Option<Affine> {
    let [scale_x, scale_y] = *tags.pixel_scale.first_chunk()?;
    let [col, row, _, x, y, _] = *tags.tie_points.first_chunk()?;
    Some(Affine { a: scale_x, b: 0.0, c: x - col * scale_x, d: 0.0, e: -scale_y, f: y + row * scale_y })
}
