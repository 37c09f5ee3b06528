//! Hatching: slanted lines inside a polygon on the screen.

use egui::{Pos2, Rect, pos2};

/// Distance between the lines along the screen's rows, points.
const STEP: f32 = 9.0;

/// Lines at 45° inside the rings (the first the outer one, the others holes) and inside `frame`.
pub fn hatched(rings: &[Vec<Pos2>], frame: Rect) -> Vec<[Pos2; 2]> {
    let points = || rings.iter().flatten().filter(|p| p.x.is_finite() && p.y.is_finite());
    // A line is the points with x + y = c.
    let ends = points().map(|p| p.x + p.y).fold([f32::INFINITY, f32::NEG_INFINITY], widened);
    let low = ends[0].max(frame.min.x + frame.min.y);
    let high = ends[1].min(frame.max.x + frame.max.y);
    let mut lines = Vec::new();
    let mut c = (low / STEP).ceil() * STEP;
    while c <= high {
        let mut meets: Vec<f32> = rings.iter().flat_map(|ring| met(ring, c)).collect();
        meets.sort_by(f32::total_cmp);
        for pair in meets.chunks_exact(2) {
            // Inside the frame in both directions.
            let from = pair[0].max(frame.min.x).max(c - frame.max.y);
            let to = pair[1].min(frame.max.x).min(c - frame.min.y);
            if from < to {
                lines.push([pos2(from, c - from), pos2(to, c - to)]);
            }
        }
        c += STEP;
    }
    lines
}

fn widened([low, high]: [f32; 2], value: f32) -> [f32; 2] {
    [low.min(value), high.max(value)]
}

/// x where the line x + y = c crosses the ring.
fn met(ring: &[Pos2], c: f32) -> impl Iterator<Item = f32> {
    (0..ring.len()).filter_map(move |i| {
        let (a, b) = (ring[i], ring[(i + 1) % ring.len()]);
        let (u, v) = (a.x + a.y - c, b.x + b.y - c);
        ((u < 0.0) != (v < 0.0)).then(|| a.x + (b.x - a.x) * (u / (u - v)))
    })
}

#[cfg(test)]
mod tests {
    use super::hatched;
    use egui::{Pos2, Rect, pos2};

    fn square(from: f32, to: f32) -> Vec<Pos2> {
        vec![pos2(from, from), pos2(to, from), pos2(to, to), pos2(from, to)]
    }

    #[test]
    fn lines_stay_inside_the_ring_and_outside_its_hole() {
        let frame = Rect::from_min_max(pos2(0.0, 0.0), pos2(500.0, 500.0));
        let lines = hatched(&[square(100.0, 300.0), square(150.0, 250.0)], frame);
        assert!(lines.len() > 30, "{}", lines.len());
        for [a, b] in lines {
            let middle = a + 0.5 * (b - a);
            let within =
                |from: f32, to: f32| middle.x > from && middle.x < to && middle.y > from && middle.y < to;
            assert!(within(99.9, 300.1) && !within(150.1, 249.9), "{a:?} {b:?}");
        }
    }

    #[test]
    fn only_what_is_in_the_frame_is_hatched_however_large_the_ground() {
        let frame = Rect::from_min_max(pos2(40.0, 10.0), pos2(140.0, 90.0));
        let lines = hatched(&[square(-1e6, 1e6)], frame);
        assert!(!lines.is_empty() && lines.len() < 40);
        let outside = lines.iter().flatten().find(|p| !frame.expand(0.6).contains(**p));
        assert_eq!(outside, None);
    }
}
