//! Lines cut at the outline of a patch.

use crate::ground::{Bounds, Point, Polygon};

use super::near::length_to;

/// The parts of a line inside an outline, in order, each with whether its first and its last point were made by
/// cutting. Points that are no numbers end a part. An outline without area holds nothing.
pub fn clip(line: &[Point], outline: &Polygon) -> Vec<(Vec<Point>, [bool; 2])> {
    let mut parts: Vec<(Vec<Point>, [bool; 2])> = Vec::new();
    let finite = |p: &Point| p.x.is_finite() && p.y.is_finite();
    let Some(bounds) = outline.bounds() else { return parts };
    // Whether the next piece goes on from the last point of the last part.
    let mut open = false;
    for (i, w) in line.windows(2).enumerate() {
        if !(finite(&w[0]) && finite(&w[1])) {
            open = false;
            continue;
        }
        let mut cuts = vec![0.0];
        cuts.extend(crossings(w[0], w[1], outline, bounds));
        cuts.push(1.0);
        cuts.sort_by(f64::total_cmp);
        let at = |t: f64| match t {
            0.0 => w[0],
            1.0 => w[1],
            _ => Point::new(w[0].x + t * (w[1].x - w[0].x), w[0].y + t * (w[1].y - w[0].y)),
        };
        for span in cuts.windows(2) {
            let (from, to) = (span[0], span[1]);
            if to <= from && !(from == 0.0 && to == 1.0) {
                continue;
            }
            let middle = at(0.5 * (from + to));
            let inside = outline.contains(middle) || outline.distance_to_edge(middle) < 1e-9;
            if !inside {
                open = false;
                continue;
            }
            if !open {
                parts.push((vec![at(from)], [from > 0.0 || i > 0, false]));
            }
            if let Some((points, cut)) = parts.last_mut() {
                points.push(at(to));
                cut[1] = to < 1.0 || i + 2 < line.len();
            }
            open = true;
        }
    }
    parts
}

/// Shares of a segment at which it meets the edges of an outline.
fn crossings(a: Point, b: Point, outline: &Polygon, bounds: Bounds) -> Vec<f64> {
    let apart = a.x.max(b.x) < bounds.min.x
        || a.x.min(b.x) > bounds.max.x
        || a.y.max(b.y) < bounds.min.y
        || a.y.min(b.y) > bounds.max.y;
    let mut found = Vec::new();
    if apart {
        return found;
    }
    for ring in outline.rings() {
        for i in 0..ring.len() {
            let (c, d) = (ring[i], ring[(i + 1) % ring.len()]);
            let (rx, ry, sx, sy) = (b.x - a.x, b.y - a.y, d.x - c.x, d.y - c.y);
            let cross = rx * sy - ry * sx;
            if cross == 0.0 {
                continue;
            }
            let t = ((c.x - a.x) * sy - (c.y - a.y) * sx) / cross;
            let u = ((c.x - a.x) * ry - (c.y - a.y) * rx) / cross;
            if (0.0..=1.0).contains(&u) && t > 0.0 && t < 1.0 {
                found.push(t);
            }
        }
    }
    found
}

/// A line cut at lengths along it, which must rise, with the segment flags of each part; parts share their ends.
pub(super) fn cut_flagged(points: &[Point], hand: &[bool], at: &[f64]) -> Vec<(Vec<Point>, Vec<bool>)> {
    let mut parts = vec![(vec![points[0]], Vec::new())];
    let (mut before, mut next) = (0.0, 0);
    for (w, hand) in points.windows(2).zip(hand) {
        let length = w[0].distance(w[1]);
        while next < at.len() && at[next] < before + length {
            let t = ((at[next] - before) / length).clamp(0.0, 1.0);
            let p = Point::new(w[0].x + t * (w[1].x - w[0].x), w[0].y + t * (w[1].y - w[0].y));
            if let Some((points, flags)) = parts.last_mut() {
                points.push(p);
                flags.push(*hand);
            }
            parts.push((vec![p], Vec::new()));
            next += 1;
        }
        if let Some((points, flags)) = parts.last_mut() {
            points.push(w[1]);
            flags.push(*hand);
        }
        before += length;
    }
    parts.retain(|(points, _)| points.len() >= 2);
    parts
}

/// The line without what lies before its place nearest to `p` within its first `reach` pixels, or half of it.
pub(super) fn without_lead(points: &mut Vec<Point>, p: Point, reach: f64) {
    let whole: f64 = points.windows(2).map(|w| w[0].distance(w[1])).sum();
    let reach = reach.min(0.5 * whole);
    let mut best: Option<(f64, usize, Point)> = None;
    for (segment, w) in points.windows(2).enumerate() {
        let Some(foot) = crate::ground::Polyline(w.to_vec()).nearest(p) else { continue };
        if length_to(points, segment, foot.at) > reach {
            break;
        }
        if best.is_none_or(|(least, ..)| foot.distance < least) {
            best = Some((foot.distance, segment, foot.at));
        }
    }
    if let Some((_, segment, at)) = best {
        points.drain(..=segment);
        points.insert(0, at);
        points.dedup();
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(points: &[[f64; 2]]) -> Vec<Point> {
        points.iter().copied().map(Point::from).collect()
    }

    #[test]
    fn a_line_through_a_hole_comes_in_two_parts() {
        let outline = Polygon {
            outer: Polygon::rectangle(20.0, 10.0).outer,
            holes: vec![line(&[[8.0, 2.0], [12.0, 2.0], [12.0, 8.0], [8.0, 8.0]])],
        };
        let parts = clip(&line(&[[-5.0, 5.0], [5.0, 5.0], [25.0, 5.0]]), &outline);
        assert_eq!(parts.len(), 2);
        assert_eq!(parts[0], (line(&[[0.0, 5.0], [5.0, 5.0], [8.0, 5.0]]), [true, true]));
        assert_eq!(parts[1], (line(&[[12.0, 5.0], [20.0, 5.0]]), [true, true]));
        let whole = clip(&line(&[[1.0, 1.0], [3.0, 1.0]]), &outline);
        assert_eq!(whole, [(line(&[[1.0, 1.0], [3.0, 1.0]]), [false, false])]);
        assert_eq!(clip(&line(&[[30.0, 1.0], [40.0, 1.0]]), &outline), []);
        assert_eq!(clip(&line(&[[1.0, f64::NAN], [40.0, 1.0]]), &outline), []);
        assert_eq!(clip(&line(&[[1.0, 1.0], [2.0, 1.0]]), &Polygon::default()), []);
    }

    #[test]
    fn what_runs_beside_the_line_it_joins_is_cut_off() {
        let mut stroke = line(&[[0.0, 0.0], [4.0, 0.0], [20.0, 0.0]]);
        without_lead(&mut stroke, Point::new(5.0, 0.2), 8.0);
        assert_eq!(stroke, line(&[[5.0, 0.0], [20.0, 0.0]]));
    }
}
