//! The crest lines of a patch made ready for a scale: simplified to what the screen can show, the shortest left
//! out when there are too many.

use std::sync::Arc;

use crate::ground::{Bounds, Point, Polyline};
use crate::study::CrestsFinding;

use super::lines::{SLACK, bounds, meet, simplified};

/// Shorter lines are not drawn, screen points.
const SHORTEST: f64 = 1.5;

/// The lines of one finding as they are drawn at one scale.
pub struct CrestChart {
    pub finding: Arc<CrestsFinding>,
    boxes: Vec<Bounds>,
    /// Greater side of each box, pixels.
    sizes: Vec<f64>,
    /// Power of two of the scale the lines are for.
    level: i32,
    /// A line that was never in sight at this scale has none yet.
    lines: Vec<Option<Vec<Point>>>,
    chosen: Vec<usize>,
}

impl CrestChart {
    pub fn new(finding: Arc<CrestsFinding>) -> Self {
        let boxes: Vec<Bounds> = finding.lines.iter().map(|line| bounds(&line.line.0)).collect();
        let sizes = boxes.iter().map(|b| b.width().max(b.height())).collect();
        Self { boxes, sizes, level: i32::MIN, lines: Vec::new(), chosen: Vec::new(), finding }
    }

    /// Makes it ready for `scale` screen points a pixel.
    pub fn fit(&mut self, scale: f64) {
        let level = scale.max(f64::MIN_POSITIVE).log2().ceil() as i32;
        if self.level != level {
            self.level = level;
            self.lines = vec![None; self.boxes.len()];
        }
    }

    /// Chooses the lines in sight; the shortest are left out as long as the others have more than `most` points.
    pub fn choose(&mut self, seen: Bounds, most: usize) {
        let scale = 2f64.powi(self.level);
        let mut shortest = SHORTEST / scale;
        let mut in_sight: Vec<usize> =
            (0..self.boxes.len()).filter(|i| meet(&self.boxes[*i], &seen)).collect();
        loop {
            in_sight.retain(|i| self.sizes[*i] >= shortest);
            if in_sight.iter().map(|i| self.about(*i, scale)).sum::<usize>() <= most {
                break;
            }
            shortest *= 2.0;
        }
        for i in &in_sight {
            let line = &self.finding.lines[*i].line;
            self.lines[*i].get_or_insert_with(|| simplified(&line.0, SLACK / scale));
        }
        self.chosen = in_sight;
    }

    /// About how many points a line will have: one a few points of screen, and never more than it has.
    fn about(&self, i: usize, scale: f64) -> usize {
        let on_screen = 2.0 * self.sizes[i] * scale;
        (2 + (0.2 * on_screen) as usize).min(self.finding.lines[i].line.0.len())
    }

    /// Numbers of the chosen lines, with their points.
    pub fn chosen(&self) -> impl Iterator<Item = (usize, &[Point])> {
        self.chosen.iter().filter_map(|i| Some((*i, self.lines[*i].as_deref()?)))
    }
}

/// The points of a line that comes into sight, simplified.
pub fn seen(line: &Polyline, seen: Bounds, scale: f64) -> Option<Vec<Point>> {
    let b = bounds(&line.0);
    meet(&b, &seen).then(|| simplified(&line.0, SLACK / scale.max(f64::MIN_POSITIVE)))
}
