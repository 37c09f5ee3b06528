//! Rings as people draw them: closed or not, with doubled points, crossing themselves.

use crate::ground::{Point, Polygon};

/// Rings longer than this are not searched for crossings.
const MOST_SEARCHED: usize = 20_000;

/// The ring open, without doubled points, with area, not crossing itself.
///
/// # Errors
/// What is wrong and where, in the ring's own coordinates.
pub(super) fn tidy(ring: &[Point], label: &str, notes: &mut Vec<String>) -> Result<Vec<Point>, String> {
    if let Some(bad) = ring.iter().find(|p| !p.x.is_finite() || !p.y.is_finite()) {
        return Err(format!("a ring has the coordinate ({}, {})", bad.x, bad.y));
    }
    let mut open = ring.to_vec();
    if open.len() > 1 && open.first() == open.last() {
        open.pop();
    } else if open.len() > 2 {
        notes.push(format!("{label}: a ring was not closed; its last point was joined to its first"));
    }
    open.dedup();
    if open.len() < 3 {
        return Err(format!("a ring has {} distinct points; it needs 3", open.len()));
    }
    let extent = open.iter().fold(0.0f64, |most, p| most.max(p.distance(open[0])));
    let shape = Polygon { outer: open, holes: Vec::new() };
    // A ring whose ends meet encloses something unless it runs out and back on itself.
    if shape.area() <= 1e-12 * extent * extent && crossing(&shape.outer).is_none() {
        return Err("a ring has no area: it runs out and back on the same line".to_owned());
    }
    if let Some(at) = crossing(&shape.outer) {
        return Err(format!(
            "a ring crosses itself near ({:.6}, {:.6}); draw it as two polygons or without the loop",
            at.x, at.y
        ));
    }
    Ok(shape.outer)
}

/// Checks that holes lie in the outline.
pub(super) fn check_holes(outline: &Polygon) -> Result<(), String> {
    let outer = Polygon { outer: outline.outer.clone(), holes: Vec::new() };
    for hole in &outline.holes {
        if let Some(out) = hole.iter().find(|p| !outer.contains(**p) && outer.distance_to_edge(**p) > 1e-6) {
            return Err(format!("a hole leaves its outline at pixel ({:.2}, {:.2})", out.x, out.y));
        }
    }
    Ok(())
}

/// Where two edges of a ring properly cross; touching is allowed. Edges are swept along x.
fn crossing(ring: &[Point]) -> Option<Point> {
    if ring.len() > MOST_SEARCHED {
        return None;
    }
    let mut edges: Vec<(Point, Point)> =
        (0..ring.len()).map(|i| (ring[i], ring[(i + 1) % ring.len()])).collect();
    edges.sort_by(|p, q| p.0.x.min(p.1.x).total_cmp(&q.0.x.min(q.1.x)));
    for (i, (a, b)) in edges.iter().enumerate() {
        let right = a.x.max(b.x);
        for (c, d) in edges[i + 1..].iter().take_while(|(c, d)| c.x.min(d.x) < right) {
            let (from_c, from_d) = (side(*a, *b, *c), side(*a, *b, *d));
            let (from_a, from_b) = (side(*c, *d, *a), side(*c, *d, *b));
            if from_c * from_d < 0.0 && from_a * from_b < 0.0 {
                let t = from_a / (from_a - from_b);
                return Some(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y)));
            }
        }
    }
    None
}

/// Twice the signed area of the triangle: which side of a→b the point is on.
fn side(a: Point, b: Point, p: Point) -> f64 {
    (b.x - a.x) * (p.y - a.y) - (b.y - a.y) * (p.x - a.x)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ring(points: &[[f64; 2]]) -> Vec<Point> {
        points.iter().map(|[x, y]| Point::new(*x, *y)).collect()
    }

    #[test]
    fn rings_are_put_right_or_refused() {
        let mut notes = Vec::new();
        let open = ring(&[[0.0, 0.0], [4.0, 0.0], [4.0, 0.0], [4.0, 3.0]]);
        assert_eq!(tidy(&open, "feature 1", &mut notes).unwrap().len(), 3);
        assert_eq!(notes, ["feature 1: a ring was not closed; its last point was joined to its first"]);

        let mut refused = |points: &[[f64; 2]]| tidy(&ring(points), "f", &mut notes).unwrap_err();
        assert_eq!(
            refused(&[[0.0, 0.0], [1.0, 1.0], [0.0, 0.0]]),
            "a ring has 2 distinct points; it needs 3"
        );
        assert!(refused(&[[0.0, 0.0], [2.0, 2.0], [1.0, 1.0], [0.0, 0.0]]).contains("no area"));
        let bow = [[0.0, 0.0], [4.0, 4.0], [4.0, 0.0], [0.0, 4.0], [0.0, 0.0]];
        assert!(refused(&bow).contains("crosses itself near (2.000000, 2.000000)"));
        assert!(refused(&[[0.0, f64::NAN], [4.0, 0.0], [4.0, 3.0]]).contains("NaN"));
    }

    #[test]
    fn touching_is_no_crossing() {
        let eight = [[0.0, 0.0], [4.0, 0.0], [2.0, 2.0], [4.0, 4.0], [0.0, 4.0], [2.0, 2.0], [0.0, 0.0]];
        assert!(tidy(&ring(&eight), "f", &mut Vec::new()).is_ok());
    }

    #[test]
    fn a_hole_must_lie_inside() {
        let outer = ring(&[[0.0, 0.0], [9.0, 0.0], [9.0, 9.0], [0.0, 9.0]]);
        let inside =
            Polygon { outer: outer.clone(), holes: vec![ring(&[[0.0, 0.0], [3.0, 1.0], [1.0, 3.0]])] };
        assert_eq!(check_holes(&inside), Ok(()));
        let astray = Polygon { outer, holes: vec![ring(&[[5.0, 5.0], [12.0, 5.0], [5.0, 7.0]])] };
        assert!(check_holes(&astray).unwrap_err().contains("(12.00, 5.00)"));
    }
}
