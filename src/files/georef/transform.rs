//! The affine from pixels to map coordinates: tie point and pixel size, a full matrix, or a fit to
//! ground control points; and the six numbers of a world file.

use crate::ground::{Affine, Caution, Point};

use super::{GeoTags, GeorefError};

/// Where pixels lie, and how that was found.
#[derive(Debug)]
pub(super) struct Transform {
    pub affine: Affine,
    pub fit_residual_px: Option<f64>,
    pub cautions: Vec<Caution>,
}

/// Key 1025 with this value: a pixel's coordinates are those of its centre.
const PIXEL_IS_POINT: u16 = 2;

/// The affine of a world file: six numbers A D B E C F, one a line, where (C, F) is the CENTRE of
/// the upper-left pixel. The result is for pixel-corner coordinates.
///
/// # Errors
/// [`GeorefError::WorldFile`] when a number is missing or unreadable, [`GeorefError::Singular`]
/// when pixels have no area.
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
    regular(half_pixel_back(Affine { a, b, c, d, e, f }))
}

/// The transform the tags give; `None` when they give none.
pub(super) fn from_tags(tags: &GeoTags) -> Result<Option<Transform>, GeorefError> {
    for (key, values) in
        [(33550, &tags.pixel_scale), (33922, &tags.tie_points), (34264, &tags.transformation)]
    {
        if let Some(value) = values.iter().find(|v| !v.is_finite()) {
            return Err(GeorefError::BadNumber { key, value: *value });
        }
    }
    let found = if let Some(found) = from_scale(tags) {
        found
    } else if let Some(affine) = from_matrix(tags) {
        Transform { affine, fit_residual_px: None, cautions: Vec::new() }
    } else if tags.tie_points.len() >= 6 {
        fit(&tags.tie_points)?
    } else {
        return Ok(None);
    };
    let point = tags.code(1025) == Some(PIXEL_IS_POINT);
    let affine = regular(if point { half_pixel_back(found.affine) } else { found.affine })?;
    Ok(Some(Transform { affine, ..found }))
}

/// From an affine whose (0, 0) is the centre of the first pixel to one whose (0, 0) is its corner.
fn half_pixel_back(centred: Affine) -> Affine {
    let Affine { a, b, c, d, e, f } = centred;
    Affine { c: c - 0.5 * (a + b), f: f - 0.5 * (d + e), ..centred }
}

fn regular(affine: Affine) -> Result<Affine, GeorefError> {
    affine.inverse().map(|_| affine).ok_or(GeorefError::Singular(affine))
}

/// From tie point and pixel size. Rows run south for a positive y size, as the format says.
fn from_scale(tags: &GeoTags) -> Option<Transform> {
    let [scale_x, scale_y] = *tags.pixel_scale.first_chunk()?;
    let [col, row, _, x, y, _] = *tags.tie_points.first_chunk()?;
    if scale_x == 0.0 || scale_y == 0.0 {
        return None;
    }
    let affine =
        Affine { a: scale_x, b: 0.0, c: x - col * scale_x, d: 0.0, e: -scale_y, f: y + row * scale_y };
    let mut cautions = Vec::new();
    if scale_x < 0.0 || scale_y < 0.0 {
        cautions.push(Caution::new(
            "negative-pixel-size",
            format!(
                "the file states pixel sizes {scale_x} × {scale_y}; the negative one is read as a flipped \
                 axis, as the format says, though some writers mean its amount only"
            ),
        ));
    }
    Some(Transform { affine, fit_residual_px: None, cautions })
}

/// From the 4 × 4 matrix, without its z parts.
fn from_matrix(tags: &GeoTags) -> Option<Affine> {
    let [a, b, _, c, d, e, _, f] = *tags.transformation.first_chunk()?;
    ([a, b, d, e] != [0.0; 4]).then_some(Affine { a, b, c, d, e, f })
}

/// Least squares through ground control points (col, row, _, x, y, _), at least three of them and
/// not on a line.
///
/// With p = (col, row) and q = (x, y) about their means: A = (Σ q pᵀ)(Σ p pᵀ)⁻¹.
fn fit(tie_points: &[f64]) -> Result<Transform, GeorefError> {
    let pairs: Vec<(Point, Point)> =
        tie_points.chunks_exact(6).map(|t| (Point::new(t[0], t[1]), Point::new(t[3], t[4]))).collect();
    let count = pairs.len();
    if count < 3 {
        return Err(GeorefError::TooFewControlPoints { count });
    }
    let n = count as f64;
    let mean = |of: fn(&(Point, Point)) -> f64| pairs.iter().map(of).sum::<f64>() / n;
    let (pc, pr, qx, qy) = (mean(|t| t.0.x), mean(|t| t.0.y), mean(|t| t.1.x), mean(|t| t.1.y));
    let (mut cc, mut cr, mut rr, mut xc, mut xr, mut yc, mut yr) = (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0);
    for (p, q) in &pairs {
        let (c, r, x, y) = (p.x - pc, p.y - pr, q.x - qx, q.y - qy);
        cc += c * c;
        cr += c * r;
        rr += r * r;
        xc += x * c;
        xr += x * r;
        yc += y * c;
        yr += y * r;
    }
    let det = cc * rr - cr * cr;
    if !det.is_finite() || det <= 1e-9 * cc * rr || det == 0.0 {
        return Err(GeorefError::ControlPointsInLine { count });
    }
    let (a, b) = ((xc * rr - xr * cr) / det, (xr * cc - xc * cr) / det);
    let (d, e) = ((yc * rr - yr * cr) / det, (yr * cc - yc * cr) / det);
    let affine = Affine { a, b, c: qx - a * pc - b * pr, d, e, f: qy - d * pc - e * pr };
    let back = affine.inverse().ok_or(GeorefError::Singular(affine))?;
    let squares = pairs.iter().map(|(p, q)| back.apply(*q).distance(*p).powi(2));
    let residual = (squares.sum::<f64>() / n).sqrt();
    let mut cautions = Vec::new();
    if residual > 1.0 {
        cautions.push(Caution::new(
            "control-point-misfit",
            format!(
                "an affine through the {count} ground control points misses them by {residual:.2} px (root \
                 mean square); positions and trends carry that error, rectify the raster for better ones"
            ),
        ));
    }
    if count == 3 {
        cautions.push(Caution::new(
            "control-points-unchecked",
            "three ground control points fix the affine without any check on it".to_owned(),
        ));
    }
    Ok(Transform { affine, fit_residual_px: Some(residual), cautions })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    fn ties(affine: &Affine, at: &[[f64; 2]]) -> Vec<f64> {
        at.iter()
            .flat_map(|[c, r]| {
                let map = affine.apply(Point::new(*c, *r));
                [*c, *r, 0.0, map.x, map.y, 0.0]
            })
            .collect()
    }

    const SHEARED: Affine = Affine { a: 3.0, b: 1.0, c: 5e5, d: -0.5, e: -4.0, f: 4e6 };
    const CORNERS: [[f64; 2]; 5] = [[0.0, 0.0], [900.0, 0.0], [900.0, 700.0], [0.0, 700.0], [400.0, 300.0]];

    #[test]
    fn a_tie_point_inside_the_raster_moves_the_corner() {
        let tags = GeoTags {
            pixel_scale: vec![10.0, 20.0, 0.0],
            tie_points: vec![3.0, 4.0, 0.0, 1000.0, 2000.0, 0.0],
            ..GeoTags::default()
        };
        let corner = from_tags(&tags).unwrap().unwrap().affine.apply(Point::new(0.0, 0.0));
        assert_eq!(corner, Point::new(970.0, 2080.0));
    }

    #[test]
    fn pixel_is_point_shifts_by_half_a_pixel_along_both_axes() {
        let matrix = vec![3.0, 1.0, 0.0, 50.0, -0.5, -4.0, 0.0, 70.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 1.0];
        let area = GeoTags { transformation: matrix, ..GeoTags::default() };
        let point = GeoTags { key_directory: vec![1, 1, 0, 1, 1025, 0, 1, 2], ..area.clone() };
        let at = |tags: &GeoTags, p: Point| from_tags(tags).unwrap().unwrap().affine.apply(p);
        assert_eq!(at(&area, Point::new(0.0, 0.0)), at(&point, Point::new(0.5, 0.5)));
    }

    #[test]
    fn a_negative_pixel_size_flips_and_says_so() {
        let tags = GeoTags {
            pixel_scale: vec![10.0, -10.0, 0.0],
            tie_points: vec![0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
            ..GeoTags::default()
        };
        let found = from_tags(&tags).unwrap().unwrap();
        assert_eq!(found.affine.e, 10.0);
        assert_eq!(found.cautions[0].code, "negative-pixel-size");
    }

    #[test]
    fn control_points_give_back_their_affine_and_their_misfit() {
        let exact = fit(&ties(&SHEARED, &CORNERS)).unwrap();
        for (got, want) in [
            (exact.affine.a, SHEARED.a),
            (exact.affine.b, SHEARED.b),
            (exact.affine.c, SHEARED.c),
            (exact.affine.d, SHEARED.d),
            (exact.affine.e, SHEARED.e),
            (exact.affine.f, SHEARED.f),
        ] {
            assert_close!(got, want, 1e-6, "coefficient");
        }
        assert_close!(exact.fit_residual_px.unwrap(), 0.0, 1e-6, "misfit");
        assert!(exact.cautions.is_empty());

        // One point of five off by 10 columns (30 m along x, −5 m along y).
        let mut bent = ties(&SHEARED, &CORNERS);
        bent[6 * 4 + 3] += 30.0;
        bent[6 * 4 + 4] -= 5.0;
        let found = fit(&bent).unwrap();
        // The centre point has leverage 1/5 or little more, so nearly all of 10/√5 stays as misfit.
        assert_close!(found.fit_residual_px.unwrap(), 10.0 / 5f64.sqrt() * 0.8f64.sqrt(), 0.05, "misfit");
        assert_eq!(found.cautions[0].code, "control-point-misfit");
    }

    #[test]
    fn degenerate_control_points_are_refused() {
        let line = ties(&SHEARED, &[[0.0, 0.0], [10.0, 10.0], [500.0, 500.0], [900.0, 900.0]]);
        assert!(matches!(fit(&line), Err(GeorefError::ControlPointsInLine { count: 4 })));
        assert!(matches!(fit(&line[..12]), Err(GeorefError::TooFewControlPoints { count: 2 })));
        let same = ties(&SHEARED, &[[5.0, 5.0]; 4]);
        assert!(matches!(fit(&same), Err(GeorefError::ControlPointsInLine { .. })));
    }

    #[test]
    fn world_files_name_the_centre_of_the_first_pixel() {
        let affine = from_world_file("2.0\n0.0\n0.0\n-2.0\n101.0\n199.0\n").unwrap();
        assert_eq!(affine.apply(Point::new(0.0, 0.0)), Point::new(100.0, 200.0));
        assert_eq!(affine.apply(Point::new(0.5, 0.5)), Point::new(101.0, 199.0));
        assert_eq!(
            from_world_file("2.0\n0.0\nnorth\n").unwrap_err().to_string(),
            "world file: number 3 of 6 is “north”; expected A, D, B, E, C, F, one a line"
        );
        assert!(matches!(from_world_file("0 0 0 0 1 1"), Err(GeorefError::Singular(_))));
    }
}
