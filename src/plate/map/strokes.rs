//! Trend strokes: ink with a light halo, longer where the trend is more coherent, none where the
//! noise floor was not passed, thinned so that they do not touch in print.

use std::collections::BTreeMap;

use crate::ground::{Place, Point};
use crate::study::Node;

use super::view::Sheet;
use crate::plate::Theme;
use crate::plate::sketch::Sketch;

/// One stroke on the page: its two ends.
pub(super) type Stroke = [Point; 2];

/// Strokes no closer than about `pitch_mm`: in each cell of that size the most coherent node.
pub(super) fn strokes(nodes: &[Node], sheet: &Sheet, place: &Place, pitch_mm: f64) -> Vec<Stroke> {
    let mut cells: BTreeMap<(i64, i64), (&Node, Point)> = BTreeMap::new();
    for node in nodes.iter().filter(|n| n.significant && n.coherence.is_finite()) {
        let at = sheet.at(node.at);
        if !sheet.holds(at) {
            continue;
        }
        let cell = ((at.y / pitch_mm).floor() as i64, (at.x / pitch_mm).floor() as i64);
        let best = cells.entry(cell).or_insert((node, at));
        if node.coherence > best.0.coherence {
            *best = (node, at);
        }
    }
    cells
        .into_values()
        .filter_map(|(node, at)| {
            let frame = place.local_frame(node.at)?;
            let along = sheet.along(&frame, node.axis)?;
            let half = 0.5 * pitch_mm * (0.3 + 0.65 * node.coherence.clamp(0.0, 1.0));
            let end = |sign: f64| Point::new(at.x + sign * half * along.x, at.y + sign * half * along.y);
            Some([end(-1.0), end(1.0)])
        })
        .collect()
}

/// All halos first, so that no halo cuts a neighbour.
pub(super) fn draw(sketch: &mut Sketch, strokes: &[Stroke], theme: &Theme) {
    for [from, to] in strokes {
        sketch.line(*from, *to, theme.stroke(theme.halo, 2.1 * theme.widths.line));
    }
    for [from, to] in strokes {
        sketch.line(*from, *to, theme.stroke(theme.over_image, 0.85 * theme.widths.line));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{Axis, Body, Bounds};

    fn sheet() -> Sheet {
        Sheet {
            min: Point::new(0.0, 0.0),
            max: Point::new(100.0, 100.0),
            covers: Bounds { min: Point::new(0.0, 0.0), max: Point::new(1000.0, 1000.0) },
        }
    }

    fn node(x: f64, y: f64, coherence: f64, significant: bool) -> Node {
        Node { at: Point::new(x, y), axis: Axis::from_deg(30.0), coherence, significant }
    }

    #[test]
    fn noise_draws_nothing_and_crowds_are_thinned_to_the_best() {
        let place = Place::pixels(0.0);
        let nodes =
            [node(500.0, 500.0, 0.4, true), node(505.0, 505.0, 0.9, true), node(700.0, 500.0, 0.9, false)];
        let drawn = strokes(&nodes, &sheet(), &place, 3.0);
        assert_eq!(drawn.len(), 1);
        assert_close!(0.5 * (drawn[0][0].x + drawn[0][1].x), 50.5, 1e-9, "the coherent one is kept");
    }

    #[test]
    fn strokes_turn_with_a_rotated_raster() {
        for north in [0.0, 40.0, 215.0] {
            let place = Place::plane([5.0, 5.0], north, Body::earth()).expect("a place");
            let [a, b] = strokes(&[node(500.0, 500.0, 0.9, true)], &sheet(), &place, 3.0)[0];
            // On the page, up is the image's up, which points to `north`.
            let page = Axis::from_east_north(b.x - a.x, a.y - b.y);
            assert_close!(page.separation(Axis::from_deg(30.0 - north)), 0.0, 1e-9, "north {north}");
        }
    }

    #[test]
    fn coherence_sets_the_length() {
        let place = Place::pixels(0.0);
        let length = |coherence| {
            let [a, b] = strokes(&[node(500.0, 500.0, coherence, true)], &sheet(), &place, 3.0)[0];
            a.distance(b)
        };
        assert!(length(0.9) > length(0.4));
        assert!(length(1.0) < 3.0, "shorter than the pitch");
    }
}
