//! The strokes of a trend field: one for each patch of screen, so that they never crowd.

use std::collections::BTreeMap;

use crate::ground::{Axis, Place, Point};
use crate::study::TrendFinding;

/// Least distance between strokes, screen points.
const APART: f64 = 11.0;

/// One stroke in pixel coordinates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stroke {
    pub at: Point,
    /// The axis as a pixel step of unit length on the screen once scaled: see [`Stroke::direction`].
    axis: Axis,
    /// From 0 (just past the noise floor) to 1.
    pub strength: f64,
}

/// The significant nodes of one finding.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct StrokeField {
    nodes: Vec<Stroke>,
    step_px: f64,
}

impl Stroke {
    /// Pixel step along the axis; `None` where the place has no north.
    pub fn direction(&self, place: &Place) -> Option<(f64, f64)> {
        let (east, north) = self.axis.azimuth().east_north();
        Some(place.local_frame(self.at)?.pixel(east, north))
    }
}

impl StrokeField {
    /// Keeps the nodes that passed the noise floor.
    pub fn new(trend: &TrendFinding) -> Self {
        let floor = trend.coherence_floor.clamp(0.0, 0.99);
        let nodes = trend
            .nodes
            .iter()
            .filter(|node| node.significant)
            .map(|node| Stroke {
                at: node.at,
                axis: node.axis,
                strength: ((node.coherence - floor) / (1.0 - floor)).clamp(0.0, 1.0),
            })
            .collect();
        Self { nodes, step_px: trend.node_step_px.max(1.0) }
    }

    /// Raster pixels between strokes when a pixel is `scale` points on the screen: the node step,
    /// doubled until strokes are far enough apart. Powers of two keep strokes still while panning
    /// and make them merge in pairs while zooming.
    pub fn spacing_px(&self, scale: f64) -> f64 {
        let mut spacing = self.step_px;
        while spacing * scale < APART {
            spacing *= 2.0;
        }
        spacing
    }

    /// Strokes `spacing_px` apart: where nodes share a cell, their strength-weighted mean axis, as
    /// long as they agree.
    pub fn thinned(&self, spacing_px: f64) -> Vec<Stroke> {
        if spacing_px <= self.step_px {
            return self.nodes.clone();
        }
        let mut cells: BTreeMap<(i64, i64), Vec<&Stroke>> = BTreeMap::new();
        for node in &self.nodes {
            let cell = |v: f64| (v / spacing_px).floor() as i64;
            cells.entry((cell(node.at.y), cell(node.at.x))).or_default().push(node);
        }
        cells.into_values().filter_map(|nodes| mean(&nodes)).collect()
    }
}

/// The mean of nodes: axial, weighted by strength; `None` when they cancel.
fn mean(nodes: &[&Stroke]) -> Option<Stroke> {
    // Every significant node has some say, also the one just past the floor.
    let weight = |node: &Stroke| 0.05 + node.strength;
    let (mut sin, mut cos, mut x, mut y, mut total) = (0.0, 0.0, 0.0, 0.0, 0.0);
    for node in nodes {
        let w = weight(node);
        let (s, c) = node.axis.doubled().sin_cos();
        sin += w * s;
        cos += w * c;
        x += w * node.at.x;
        y += w * node.at.y;
        total += w;
    }
    let agreement = sin.hypot(cos) / total;
    let strength = nodes.iter().map(|n| n.strength).sum::<f64>() / nodes.len() as f64 * agreement;
    let axis = Axis::from_doubled(sin.atan2(cos));
    (agreement > 0.3).then_some(Stroke { at: Point::new(x / total, y / total), axis, strength })
}

#[cfg(test)]
mod tests {
    use super::{APART, StrokeField};
    use crate::assert_close;
    use crate::ground::{Axis, Place, Point};
    use crate::study::{Node, TrendFinding};

    fn field(axes: &[(f64, f64, f64)], significant: bool) -> StrokeField {
        let nodes = axes
            .iter()
            .map(|(x, y, deg)| Node {
                at: Point::new(*x, *y),
                axis: Axis::from_deg(*deg),
                coherence: 0.6,
                significant,
            })
            .collect();
        StrokeField::new(&TrendFinding {
            nodes,
            node_step_px: 8.0,
            coherence_floor: 0.2,
            ..Default::default()
        })
    }

    #[test]
    fn below_the_noise_floor_nothing_is_drawn() {
        assert!(field(&[(4.0, 4.0, 10.0)], false).thinned(8.0).is_empty());
    }

    #[test]
    fn strength_counts_from_the_floor() {
        let stroke = field(&[(4.0, 4.0, 10.0)], true).thinned(8.0)[0];
        assert_close!(stroke.strength, 0.5, 1e-12, "(0.6 − 0.2)/(1 − 0.2)");
    }

    #[test]
    fn strokes_keep_their_distance() {
        let field = field(&[], true);
        for scale in [4.0, 1.0, 0.3, 0.01] {
            let spacing = field.spacing_px(scale);
            assert!(spacing * scale >= APART || spacing == 8.0, "scale {scale}: spacing {spacing}");
            assert_close!((spacing / 8.0).log2().fract(), 0.0, 0.0, "a power of two of the node step");
        }
    }

    #[test]
    fn merged_strokes_take_the_axial_mean() {
        // 178° and 4° are 6° apart across north.
        let merged = field(&[(4.0, 4.0, 178.0), (12.0, 4.0, 4.0)], true).thinned(16.0);
        assert_eq!(merged.len(), 1);
        assert_close!(merged[0].axis.separation(Axis::from_deg(1.0)), 0.0, 1e-9, "axial mean");
        assert_eq!(merged[0].at, Point::new(8.0, 4.0));
    }

    #[test]
    fn strokes_that_contradict_are_left_out() {
        assert!(field(&[(4.0, 4.0, 20.0), (12.0, 4.0, 110.0)], true).thinned(16.0).is_empty());
    }

    #[test]
    fn direction_follows_the_ground() {
        let stroke = field(&[(4.0, 4.0, 90.0)], true).thinned(8.0)[0];
        // Image-up points east: an east–west axis runs along the rows' normal.
        let (dcol, drow) = stroke.direction(&Place::pixels(90.0)).expect("pixels have a north");
        assert_close!(dcol.abs(), 0.0, 1e-12, "columns");
        assert_close!(drow.abs(), 1.0, 1e-12, "rows");
    }
}
