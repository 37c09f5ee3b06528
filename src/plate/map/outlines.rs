//! Patch outlines with their holes and names, and where a label may stand inside a patch.

use crate::ground::{Bounds, Point, Polygon};

use super::view::Sheet;
use crate::plate::sketch::{Sketch, Type};
use crate::plate::{TextAnchor, Theme, font};

/// Outer ring and holes: ink on a light halo; dashed where the patch is only neighbourhood.
pub(super) fn draw(sketch: &mut Sketch, outline: &Polygon, sheet: &Sheet, is_subject: bool, theme: &Theme) {
    let width = if is_subject { 1.5 * theme.widths.line } else { theme.widths.line };
    let rings: Vec<Vec<Point>> =
        outline.rings().map(|ring| ring.iter().map(|p| sheet.at(*p)).collect()).collect();
    for ring in &rings {
        let halo = theme.stroke(theme.halo, width + 2.4 * theme.widths.thin);
        sketch.polygon(ring.clone(), None, Some(halo));
    }
    let ink = if is_subject {
        theme.stroke(theme.over_image, width)
    } else {
        theme.dashed(theme.over_image, width)
    };
    for ring in rings {
        sketch.polygon(ring, None, Some(ink));
    }
}

/// A name above the outline where there is room, else below it, kept inside the frame.
pub(super) fn name(
    sketch: &mut Sketch,
    text: &str,
    outline: &Polygon,
    sheet: &Sheet,
    size: f64,
    theme: &Theme,
) {
    let points = outline.outer.iter().map(|p| sheet.at(*p)).filter(|p| sheet.holds(*p));
    let Some(bounds) = Bounds::of(points) else { return };
    let room = sheet.width() - 2.0;
    let text = font::shortened(text, size, true, room);
    let half = 0.5 * font::text_width(&text, size, true) + 0.6;
    let x = bounds.centre().x.clamp(sheet.min.x + half, (sheet.max.x - half).max(sheet.min.x + half));
    let above = bounds.min.y - 1.1;
    let below = bounds.max.y + 1.1 + font::CAP_HEIGHT * size;
    let y = if above - size > sheet.min.y {
        above
    } else if below < sheet.max.y - 0.8 {
        below
    } else {
        bounds.min.y + 1.4 * size
    };
    let look = Type::new(size, theme.over_image).bold().anchored(TextAnchor::Middle).haloed(theme.halo);
    sketch.text(Point::new(x, y), text, look);
}

/// A point well inside the polygon, in its own plane: among the middles of the spans of 40 scan
/// lines, the one farthest from any edge.
pub(super) fn inner_point(outline: &Polygon) -> Option<Point> {
    const LINES: usize = 40;
    let bounds = outline.bounds()?;
    let mut best: Option<(f64, Point)> = None;
    for i in 0..LINES {
        let y = bounds.min.y + (i as f64 + 0.5) / LINES as f64 * bounds.height();
        let mut crossings: Vec<f64> = Vec::new();
        for ring in outline.rings() {
            for (k, a) in ring.iter().enumerate() {
                let b = ring[(k + 1) % ring.len()];
                if (a.y > y) != (b.y > y) {
                    crossings.push(a.x + (y - a.y) / (b.y - a.y) * (b.x - a.x));
                }
            }
        }
        crossings.sort_by(f64::total_cmp);
        for span in crossings.chunks_exact(2) {
            let p = Point::new(0.5 * (span[0] + span[1]), y);
            let distance = outline.distance_to_edge(p);
            if best.is_none_or(|(most, _)| distance > most) {
                best = Some((distance, p));
            }
        }
    }
    best.map(|(_, p)| p)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_inner_point_avoids_holes_and_bays() {
        let u_shape = [
            (0.0, 0.0),
            (10.0, 0.0),
            (10.0, 30.0),
            (20.0, 30.0),
            (20.0, 0.0),
            (30.0, 0.0),
            (30.0, 40.0),
            (0.0, 40.0),
        ];
        let outer = u_shape.map(|(x, y)| Point::new(x, y)).to_vec();
        let polygon = Polygon { outer, holes: Vec::new() };
        assert!(polygon.contains(inner_point(&polygon).expect("inside")));
        let mut ring = Polygon::rectangle(40.0, 40.0);
        ring.holes.push(
            [(5.0, 5.0), (35.0, 5.0), (35.0, 35.0), (5.0, 35.0)].map(|(x, y)| Point::new(x, y)).to_vec(),
        );
        assert!(ring.contains(inner_point(&ring).expect("inside")));
        assert_eq!(inner_point(&Polygon::default()), None);
    }
}
