//! What lies under the pointer: corners, edges, patches.

use egui::{Pos2, Rect, Vec2};

use crate::ground::{Point, Polygon};
use crate::study::{Id, Patch};

use super::lens::Lens;

/// How near the pointer must be, screen points.
const REACH: f32 = 8.0;

/// A corner of a polygon: ring 0 is the outline, the others are holes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Corner {
    pub ring: usize,
    pub index: usize,
}

/// The place on an edge under the pointer: the corner a new one would become, and its position.
pub fn edge_at(polygon: &Polygon, lens: &Lens, at: Pos2) -> Option<(Corner, Point)> {
    let mut best: Option<(f32, Corner, Point)> = None;
    for (ring, points) in polygon.rings().enumerate() {
        for (i, from) in points.iter().enumerate() {
            let to = points[(i + 1) % points.len()];
            let (a, b) = (lens.to_screen(*from), lens.to_screen(to));
            let along = b - a;
            let t = ((at - a).dot(along) / along.length_sq().max(f32::MIN_POSITIVE)).clamp(0.0, 1.0);
            let distance = (a + along * t).distance(at);
            if distance <= REACH && best.is_none_or(|(nearest, ..)| distance < nearest) {
                let t = f64::from(t);
                let point = Point::new(from.x + t * (to.x - from.x), from.y + t * (to.y - from.y));
                best = Some((distance, Corner { ring, index: i + 1 }, point));
            }
        }
    }
    best.map(|(_, corner, point)| (corner, point))
}

/// The patch under the pointer: one whose edge is in reach, or else the smallest that contains it.
pub fn patch_at<'a>(patches: impl Iterator<Item = &'a Patch> + Clone, lens: &Lens, at: Pos2) -> Option<Id> {
    let pixel = lens.to_pixel(at);
    let on_edge = patches.clone().find(|patch| edge_at(&patch.outline, lens, at).is_some());
    let inside = || {
        patches
            .filter(|patch| patch.outline.contains(pixel))
            .min_by(|a, b| a.outline.area().total_cmp(&b.outline.area()))
    };
    on_edge.or_else(inside).map(|patch| patch.id)
}

/// All corners with their positions, outline first.
pub fn corners(polygon: &Polygon) -> impl Iterator<Item = (Corner, Point)> + '_ {
    polygon.rings().enumerate().flat_map(|(ring, points)| {
        points.iter().enumerate().map(move |(index, p)| (Corner { ring, index }, *p))
    })
}

/// The polygon with one corner elsewhere.
pub fn with_corner_moved(polygon: &Polygon, corner: Corner, to: Point) -> Polygon {
    let mut changed = polygon.clone();
    if let Some(p) = ring_mut(&mut changed, corner.ring).and_then(|ring| ring.get_mut(corner.index)) {
        *p = to;
    }
    changed
}

/// The polygon with a new corner before `corner.index`.
pub fn with_corner_added(polygon: &Polygon, corner: Corner, at: Point) -> Polygon {
    let mut changed = polygon.clone();
    if let Some(ring) = ring_mut(&mut changed, corner.ring).filter(|ring| corner.index <= ring.len()) {
        ring.insert(corner.index, at);
    }
    changed
}

/// The polygon without one corner. A hole left with two corners goes with it; `None` when the
/// outline itself would be left with two.
pub fn with_corner_removed(polygon: &Polygon, corner: Corner) -> Option<Polygon> {
    let mut changed = polygon.clone();
    let ring = ring_mut(&mut changed, corner.ring).filter(|ring| corner.index < ring.len())?;
    ring.remove(corner.index);
    if ring.len() < 3 {
        if corner.ring == 0 {
            return None;
        }
        changed.holes.remove(corner.ring - 1);
    }
    Some(changed)
}

/// The polygon shifted by a pixel step.
pub fn shifted(polygon: &Polygon, dcol: f64, drow: f64) -> Polygon {
    polygon.map(|p| Point::new(p.x + dcol, p.y + drow))
}

/// Where the name of a patch stands: the middle of its widest horizontal run, which lies inside
/// also when the patch is bent or holed.
pub fn name_place(polygon: &Polygon) -> Option<Point> {
    let bounds = polygon.bounds()?;
    let middle = bounds.centre().y;
    let mut best: Option<(f64, Point)> = None;
    for part in [0.0, -0.2, 0.2, -0.35, 0.35] {
        let y = middle + part * bounds.height();
        let mut crossings: Vec<f64> = polygon
            .rings()
            .flat_map(|ring| (0..ring.len()).map(move |i| (ring[i], ring[(i + 1) % ring.len()])))
            .filter(|(a, b)| (a.y > y) != (b.y > y))
            .map(|(a, b)| a.x + (y - a.y) / (b.y - a.y) * (b.x - a.x))
            .collect();
        crossings.sort_by(f64::total_cmp);
        for run in crossings.as_chunks::<2>().0 {
            let width = run[1] - run[0];
            // A run further from the middle must be clearly wider to win.
            if best.is_none_or(|(widest, _)| width > 1.25 * widest) {
                best = Some((width, Point::new(0.5 * (run[0] + run[1]), y)));
            }
        }
    }
    best.map(|(_, at)| at)
}

/// The screen box of a handle: wide enough to be hit.
pub fn handle_rect(at: Pos2) -> Rect {
    Rect::from_center_size(at, Vec2::splat(2.0 * REACH))
}

fn ring_mut(polygon: &mut Polygon, ring: usize) -> Option<&mut Vec<Point>> {
    match ring {
        0 => Some(&mut polygon.outer),
        hole => polygon.holes.get_mut(hole - 1),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use egui::{pos2, vec2};

    fn lens() -> Lens {
        // One pixel is two points; pixel (0, 0) lies at the upper left of the frame.
        Lens::new(Rect::from_min_size(pos2(0.0, 0.0), vec2(400.0, 400.0)), Point::new(100.0, 100.0), 2.0, 1.0)
    }

    fn square(min: f64, max: f64) -> Vec<Point> {
        vec![Point::new(min, min), Point::new(max, min), Point::new(max, max), Point::new(min, max)]
    }

    fn holed() -> Polygon {
        Polygon { outer: square(20.0, 120.0), holes: vec![square(50.0, 80.0)] }
    }

    fn patch(id: u32, outline: Polygon) -> Patch {
        Patch::new(Id(id), format!("Patch {id}"), Id(1), outline)
    }

    #[test]
    fn an_edge_gives_the_place_of_a_new_corner() {
        let (corner, at) = edge_at(&holed(), &lens(), pos2(243.0, 140.0)).expect("near the right edge");
        assert_eq!((corner, at), (Corner { ring: 0, index: 2 }, Point::new(120.0, 70.0)));
        let added = with_corner_added(&holed(), corner, at);
        assert_eq!(added.outer[2], at);
        assert_eq!(added.area(), holed().area());
    }

    #[test]
    fn the_smaller_patch_wins_and_holes_do_not_count() {
        let patches = [patch(1, holed()), patch(2, Polygon { outer: square(90.0, 110.0), holes: vec![] })];
        assert_eq!(patch_at(patches.iter(), &lens(), pos2(200.0, 200.0)), Some(Id(2)));
        assert_eq!(patch_at(patches.iter(), &lens(), pos2(60.0, 60.0)), Some(Id(1)));
        assert_eq!(patch_at(patches.iter(), &lens(), pos2(130.0, 130.0)), None, "the hole is open");
        assert_eq!(patch_at(patches.iter(), &lens(), pos2(5.0, 5.0)), None);
    }

    #[test]
    fn a_triangle_keeps_its_corners_and_a_hole_may_go() {
        let triangle = Polygon { outer: square(0.0, 10.0)[..3].to_vec(), holes: vec![square(4.0, 5.0)] };
        assert_eq!(with_corner_removed(&triangle, Corner { ring: 0, index: 0 }), None);
        let once = with_corner_removed(&triangle, Corner { ring: 1, index: 0 }).expect("a hole of three");
        assert_eq!(once.holes[0].len(), 3);
        let twice = with_corner_removed(&once, Corner { ring: 1, index: 0 }).expect("no hole");
        assert!(twice.holes.is_empty());
    }

    #[test]
    fn the_name_stands_inside() {
        // A horseshoe: its centre is outside.
        let horseshoe = Polygon {
            outer: [[0, 0], [90, 0], [90, 90], [60, 90], [60, 30], [30, 30], [30, 90], [0, 90]]
                .map(|[x, y]| Point::new(f64::from(x), f64::from(y)))
                .to_vec(),
            holes: vec![],
        };
        let at = name_place(&horseshoe).expect("a place");
        assert!(horseshoe.contains(at), "{at:?}");
        let at = name_place(&holed()).expect("a place");
        assert!(holed().contains(at), "{at:?}");
    }
}
