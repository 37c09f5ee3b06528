//! One ground on two rasters: where a pixel of one lies on the other, and which ground both show.

use rayon::prelude::*;

use crate::ground::{Place, Point, Polygon, Stopped, Work};
use crate::study::OpenRaster;
use crate::study::window::PatchPixels;

/// How pixels of two rasters belong together.
pub struct Crossing<'a> {
    places: [&'a Place; 2],
    middles: [Point; 2],
    /// Pixel for pixel: neither raster says where it lies.
    same_pixels: bool,
}

impl<'a> Crossing<'a> {
    /// Between two open rasters; in words why they cannot be held together.
    pub fn new(first: &'a OpenRaster, second: &'a OpenRaster) -> Result<Self, String> {
        let places = [&first.place, &second.place];
        let sizes = [first, second].map(|o| [o.raster.info().width, o.raster.info().height]);
        let middles = sizes.map(|[w, h]| Point::new(0.5 * w as f64, 0.5 * h as f64));
        let known = places.map(Place::is_georeferenced);
        if known != [true, true] && known != [false, false] {
            return Err("one of the two rasters says where it lies, the other does not".into());
        }
        if known[0] && places[0].body.shape != places[1].body.shape {
            return Err(format!(
                "the two rasters lie on bodies of different shape ({} and {})",
                places[0].body.name, places[1].body.name
            ));
        }
        if !known[0] && sizes[0] != sizes[1] {
            return Err(
                "neither raster says where it lies, and they differ in size, so that pixels do not belong together"
                    .into(),
            );
        }
        Ok(Self { places, middles, same_pixels: !known[0] })
    }

    /// Whether both are taken to show the same ground in the same pixel.
    pub fn is_by_pixel(&self) -> bool {
        self.same_pixels
    }

    /// A pixel of the first raster on the second.
    pub fn to_second(&self, p: Point) -> Option<Point> {
        self.cross(p, 0, 1)
    }

    /// A pixel of the second raster on the first.
    pub fn to_first(&self, p: Point) -> Option<Point> {
        self.cross(p, 1, 0)
    }

    fn cross(&self, p: Point, from: usize, to: usize) -> Option<Point> {
        if self.same_pixels {
            return Some(p);
        }
        self.places[to].pixel_of_lonlat(self.places[from].lonlat_of(p)?, self.middles[to])
    }

    /// An outline on the first raster as it lies on the second, its edges followed closely; empty where it has no
    /// place there.
    pub fn outline(&self, outline: &Polygon) -> Polygon {
        /// Pieces of an edge: a map's bend within one is far below a pixel.
        const PIECES: usize = 32;
        let ring = |ring: &[Point]| {
            let mut out = Vec::new();
            for (i, a) in ring.iter().enumerate() {
                let b = ring[(i + 1) % ring.len()];
                out.extend((0..PIECES).filter_map(|k| {
                    let t = k as f64 / PIECES as f64;
                    self.to_second(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y)))
                }));
            }
            out
        };
        Polygon {
            outer: ring(&outline.outer),
            holes: outline.holes.iter().map(|h| ring(h)).filter(|h| h.len() > 2).collect(),
        }
    }
}

/// A map between two images, taken exactly at the corners of a mesh and by straight lines between.
struct Mesh {
    corners: Vec<Option<Point>>,
    columns: usize,
}

impl Mesh {
    const STEP: usize = 32;

    fn new(width: usize, height: usize, to: impl Fn(Point) -> Option<Point> + Sync) -> Self {
        let (columns, rows) = (width / Self::STEP + 2, height / Self::STEP + 2);
        let corner =
            |i: usize| to(Point::new((i % columns * Self::STEP) as f64, (i / columns * Self::STEP) as f64));
        Self { corners: (0..columns * rows).into_par_iter().map(corner).collect(), columns }
    }

    fn at(&self, col: usize, row: usize) -> Option<Point> {
        let share = |k: usize| (k % Self::STEP) as f64 / Self::STEP as f64 + 0.5 / Self::STEP as f64;
        let (u, v) = (share(col), share(row));
        let i = row / Self::STEP * self.columns + col / Self::STEP;
        let [a, b] = [self.corners[i]?, self.corners[i + 1]?];
        let [c, d] = [self.corners[i + self.columns]?, self.corners[i + self.columns + 1]?];
        let mix = |a: f64, b: f64, c: f64, d: f64| {
            (a * (1.0 - u) + b * u) * (1.0 - v) + (c * (1.0 - u) + d * u) * v
        };
        Some(Point::new(mix(a.x, b.x, c.x, d.x), mix(a.y, b.y, c.y, d.y)))
    }
}

/// Leaves in both images only ground that both show, and says which share of the patch that is.
///
/// # Errors
/// [`Stopped`].
pub(super) fn keep_common(
    first: &mut PatchPixels,
    second: &mut PatchPixels,
    crossing: &Crossing<'_>,
    work: &Work,
) -> Result<f64, Stopped> {
    let full = |p: &PatchPixels, q: Point| {
        let by = p.factor as f64;
        Point::new(p.origin.x + by * q.x, p.origin.y + by * q.y)
    };
    let own = |p: &PatchPixels, q: Point| {
        let by = p.factor as f64;
        Point::new((q.x - p.origin.x) / by, (q.y - p.origin.y) / by)
    };
    let there = Mesh::new(first.image.width(), first.image.height(), |q| {
        Some(own(second, crossing.to_second(full(first, q))?))
    });
    let back = Mesh::new(second.image.width(), second.image.height(), |q| {
        Some(own(first, crossing.to_first(full(second, q))?))
    });
    let seen = |of: &PatchPixels, by: &PatchPixels, mesh: &Mesh| -> Result<Vec<bool>, Stopped> {
        let width = of.image.width();
        let rows = (0..of.image.height())
            .into_par_iter()
            .map(|row| {
                work.advance(0)?;
                Ok((0..width).map(|col| mesh.at(col, row).is_some_and(|q| shows(by, q))).collect())
            })
            .collect::<Result<Vec<Vec<bool>>, Stopped>>()?;
        Ok(rows.concat())
    };
    let kept = [seen(first, second, &there)?, seen(second, first, &back)?];
    let (mut inside, mut common) = (0usize, 0usize);
    let width = first.image.width();
    for row in 0..first.image.height() {
        for (from, to) in first.outline.row_spans(row, width) {
            inside += to - from;
            let both = |col: &usize| kept[0][row * width + col] && first.image.is_valid(*col, row);
            common += (from..to).filter(both).count();
        }
    }
    for (pixels, kept) in [first, second].into_iter().zip(kept) {
        let width = pixels.image.width();
        if kept.iter().any(|k| !k) {
            pixels.image.mask_where(|col, row| kept[row * width + col]);
        }
    }
    Ok(common as f64 / inside.max(1) as f64)
}

/// Whether an image has a valid pixel at a point.
fn shows(pixels: &PatchPixels, at: Point) -> bool {
    let (width, height) = (pixels.image.width() as f64, pixels.image.height() as f64);
    let inside = at.x >= 0.0 && at.y >= 0.0 && at.x < width && at.y < height;
    inside && pixels.image.is_valid(at.x as usize, at.y as usize)
}
