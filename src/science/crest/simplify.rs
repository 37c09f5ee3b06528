//! Fewer points within a stated tolerance.

use crate::ground::Point;

/// Indices of the points to keep: no dropped point lies farther than `tolerance` from the kept line
/// (Douglas and Peucker). First and last stay.
pub(super) fn keep(points: &[Point], tolerance: f64) -> Vec<usize> {
    let Some(last) = points.len().checked_sub(1) else { return Vec::new() };
    let mut keep = vec![false; points.len()];
    keep[0] = true;
    keep[last] = true;
    let mut parts = vec![(0, last)];
    while let Some((from, to)) = parts.pop() {
        let farthest = (from + 1..to)
            .map(|i| (i, apart(points[i], points[from], points[to])))
            .fold((0, tolerance), |best, next| if next.1 > best.1 { next } else { best });
        if farthest.0 > 0 {
            keep[farthest.0] = true;
            parts.push((from, farthest.0));
            parts.push((farthest.0, to));
        }
    }
    (0..points.len()).filter(|i| keep[*i]).collect()
}

/// Points moved `rounds` times to the weighted mean ¼, ½, ¼ of themselves and their neighbours; the ends stay.
pub(super) fn calmed(points: &[Point], rounds: usize) -> Vec<Point> {
    let mut out = points.to_vec();
    for _ in 0..rounds {
        let before = out.clone();
        for (i, w) in before.windows(3).enumerate() {
            let mean = |a: f64, b: f64, c: f64| 0.25 * (a + 2.0 * b + c);
            out[i + 1] = Point::new(mean(w[0].x, w[1].x, w[2].x), mean(w[0].y, w[1].y, w[2].y));
        }
    }
    out
}

/// Distance of a point from a segment.
fn apart(p: Point, a: Point, b: Point) -> f64 {
    let (dx, dy) = (b.x - a.x, b.y - a.y);
    let squared = dx * dx + dy * dy;
    let t =
        if squared > 0.0 { (((p.x - a.x) * dx + (p.y - a.y) * dy) / squared).clamp(0.0, 1.0) } else { 0.0 };
    p.distance(Point::new(a.x + t * dx, a.y + t * dy))
}
