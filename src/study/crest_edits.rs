//! The user's edits of crests in the pixels crests are traced in, and crests out of a file.

use std::path::Path;

use crate::files::layers::{LayerError, LineImport, read_lines};
use crate::ground::{Point, Polyline};
use crate::science::crest::{CrestEdits, Stroke, clip};

use super::{CrestEntry, CrestStroke, OpenRaster, Patch, StrokeKind};

/// Where the pixels of a traced image lie among those of its raster.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pixels {
    /// Full-resolution pixel of the image's corner.
    pub origin: Point,
    /// Full-resolution pixels per pixel of the image.
    pub factor: f64,
}

impl Pixels {
    /// A full-resolution pixel in the image.
    pub fn reduced(self, p: Point) -> Point {
        Point::new((p.x - self.origin.x) / self.factor, (p.y - self.origin.y) / self.factor)
    }

    /// A pixel of the image at full resolution.
    pub fn full(self, p: Point) -> Point {
        Point::new(self.origin.x + p.x * self.factor, self.origin.y + p.y * self.factor)
    }
}

/// The edits of an entry in pixels of the traced image.
pub fn reduced(entry: &CrestEntry, at: Pixels) -> CrestEdits {
    let all = |points: &[Point]| points.iter().map(|p| at.reduced(*p)).collect::<Vec<_>>();
    CrestEdits {
        rejected: all(&entry.rejected),
        accepted: all(&entry.accepted),
        cuts: all(&entry.cuts),
        strokes: entry
            .strokes
            .iter()
            .map(|stroke| Stroke { kind: stroke.kind, line: Polyline(all(&stroke.line.0)) })
            .collect(),
    }
}

/// Crests of a patch out of a file.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ImportedCrests {
    /// Lines clipped to the patch, full-resolution pixels of its raster.
    pub strokes: Vec<CrestStroke>,
    /// Lines of the file that do not touch the patch.
    pub outside: usize,
    /// What was put right or left out, a sentence each.
    pub notes: Vec<String>,
}

/// Reads the lines of a GeoPackage or GeoJSON file as crests of a patch. A file without a line in this patch gives
/// no strokes and is no error: it may hold those of others.
///
/// # Errors
/// [`LayerError`], naming file and feature.
pub fn import_crests(path: &Path, open: &OpenRaster, patch: &Patch) -> Result<ImportedCrests, LayerError> {
    let read = crest_lines(path, open)?;
    let (strokes, outside) = strokes_in(&read, patch);
    Ok(ImportedCrests { strokes, outside, notes: read.notes })
}

/// The lines of a file in full-resolution pixels of a raster, to be laid into several patches.
///
/// # Errors
/// [`LayerError`], naming file and feature.
pub fn crest_lines(path: &Path, open: &OpenRaster) -> Result<LineImport, LayerError> {
    let info = open.raster.info();
    let epsg = info.georeference.as_ref().and_then(|g| g.epsg);
    read_lines(path, &open.place, epsg, [info.width, info.height])
}

/// What of them lies in a patch, as strokes, and how many lines do not touch it.
pub fn strokes_in(read: &LineImport, patch: &Patch) -> (Vec<CrestStroke>, usize) {
    let (mut strokes, mut outside) = (Vec::new(), 0);
    for shape in &read.shapes {
        let parts = clip(&shape.line.0, &patch.outline);
        outside += usize::from(parts.is_empty());
        let lines = parts.into_iter().map(|(points, _)| Polyline(points)).filter(|l| l.length() > 0.0);
        strokes.extend(lines.map(|line| CrestStroke { kind: StrokeKind::Import, picks: Vec::new(), line }));
    }
    (strokes, outside)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::files::layers::LineShape;
    use crate::ground::Polygon;
    use crate::study::Id;

    #[test]
    fn pixels_go_and_come_back() {
        let at = Pixels { origin: Point::new(120.0, 7.0), factor: 3.0 };
        assert_eq!(at.reduced(Point::new(126.0, 10.0)), Point::new(2.0, 1.0));
        assert_eq!(at.full(Point::new(2.0, 1.0)), Point::new(126.0, 10.0));
    }

    #[test]
    fn lines_are_cut_at_the_patch() {
        let outline = Polygon::rectangle(10.0, 10.0).map(|p| Point::new(p.x + 5.0, p.y));
        let patch = Patch::new(Id(1), "a", Id(2), outline);
        let line = |points: &[[f64; 2]]| LineShape {
            label: "feature 1".into(),
            line: Polyline(points.iter().copied().map(Point::from).collect()),
        };
        let read = LineImport {
            shapes: vec![
                line(&[[0.0, 2.0], [20.0, 2.0], [20.0, 4.0], [12.0, 4.0]]),
                line(&[[0.0, 2.0], [4.0, 2.0]]),
            ],
            notes: Vec::new(),
        };
        let (strokes, outside) = strokes_in(&read, &patch);
        let lines: Vec<&[Point]> = strokes.iter().map(|s| s.line.0.as_slice()).collect();
        let p = Point::new;
        assert_eq!(lines, [[p(5.0, 2.0), p(15.0, 2.0)], [p(15.0, 4.0), p(12.0, 4.0)]]);
        assert!(outside == 1 && strokes.iter().all(|s| s.kind == StrokeKind::Import));
    }
}
