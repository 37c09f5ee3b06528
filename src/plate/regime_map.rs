//! The map of two-wind regimes: divergence across, strength ratio up; the posterior as shade with its
//! 50 and 95 % outlines, the curves of equal obliquity, and the regime picked.

use std::sync::Arc;

use crate::ground::Point;
use crate::science::alignment::backwards::{Regimes, obliquity_curve};
use crate::study::{BackwardsFinding, arc_words};

use super::contour::contour;
use super::sketch::{Sketch, Type};
use super::{Figure, Item, TextAnchor, Theme};

/// Obliquities whose curves are drawn, degrees.
const CURVES: [f64; 4] = [15.0, 30.0, 45.0, 75.0];
const LEFT: f64 = 8.4;
const TOP: f64 = 1.6;
const RIGHT: f64 = 2.4;
/// Height of the map over its width.
const SHAPE: f64 = 0.72;
/// Cells of the picture for each cell of the map.
const FINE: usize = 5;

/// A regime on the map.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MapPoint {
    /// Degrees in (0, 180).
    pub divergence_deg: f64,
    /// Strength of the dominant wind over the other, 1 to 10.
    pub ratio: f64,
}

/// Where the map lies in its figure.
struct Layout {
    min: Point,
    max: Point,
}

impl Layout {
    fn of(size_mm: f64) -> Self {
        let width = size_mm - LEFT - RIGHT;
        Self { min: Point::new(LEFT, TOP), max: Point::new(LEFT + width, TOP + SHAPE * width) }
    }

    fn at(&self, divergence: f64, log_ratio: f64) -> Point {
        let (width, height) = (self.max.x - self.min.x, self.max.y - self.min.y);
        Point::new(self.min.x + divergence / 180.0 * width, self.max.y - log_ratio * height)
    }
}

/// The regime under a point of a figure `size_mm` wide; `None` beside the map.
pub fn regime_at(size_mm: f64, at: Point) -> Option<MapPoint> {
    let Layout { min, max } = Layout::of(size_mm);
    let (across, up) = ((at.x - min.x) / (max.x - min.x), (max.y - at.y) / (max.y - min.y));
    let on = (0.0..=1.0).contains(&across) && (0.0..=1.0).contains(&up);
    on.then(|| MapPoint { divergence_deg: (180.0 * across).clamp(0.5, 179.5), ratio: 10f64.powf(up) })
}

/// The map with its caption: `size_mm` wide, as high as the words need.
pub fn regime_map(found: &BackwardsFinding, picked: Option<MapPoint>, size_mm: f64, theme: &Theme) -> Figure {
    let layout = Layout::of(size_mm);
    let mut sketch = Sketch::default();
    shade(&mut sketch, &found.regimes, &layout, theme);
    if found.tells() {
        outlines(&mut sketch, &found.regimes, &layout, theme);
    }
    curves(&mut sketch, &layout, theme);
    if !found.tells() {
        let centre = layout.at(45.0, 0.5);
        let look =
            Type::new(theme.text.body, theme.predicted).anchored(TextAnchor::Middle).haloed(theme.paper);
        sketch.text(Point::new(centre.x, centre.y - 1.2), "any regime", look);
        sketch.text(Point::new(centre.x, centre.y + 2.2), "can be turned to fit", look);
    }
    axes(&mut sketch, &layout, theme);
    if let Some(point) = picked {
        let p = layout.at(point.divergence_deg, point.ratio.max(1.0).log10());
        for (radius, color, width) in [(1.5, theme.paper, 3.2), (1.5, theme.ink, 1.6), (0.35, theme.ink, 1.0)]
        {
            sketch.circle(p, radius, None, Some(theme.stroke(color, width * theme.widths.thin)));
        }
    }
    let y = words(&mut sketch, found, layout.max.y + 8.6, size_mm, theme);
    sketch.finish(size_mm, y)
}

/// The posterior against its greatest cell, smooth between cell centres.
fn shade(sketch: &mut Sketch, regimes: &Regimes, layout: &Layout, theme: &Theme) {
    let (columns, rows) = (Regimes::COLUMNS, Regimes::ROWS);
    let most = regimes.map.iter().copied().fold(0.0, f64::max);
    let value = |i: usize, j: usize| regimes.map[j.min(rows - 1) * columns + i.min(columns - 1)] / most;
    let (width, height) = (FINE * columns, FINE * rows);
    let mut rgba = Vec::with_capacity(4 * width * height);
    let even = regimes.map.len() as f64 * most < 1.0 + 1e-6;
    for row in 0..height {
        for column in 0..width {
            let place = |k: usize| ((k as f64 + 0.5) / FINE as f64 - 0.5).max(0.0);
            let (x, y) = (place(column), place(height - 1 - row));
            let (i, j) = (x as usize, y as usize);
            let (u, v) = (x - i as f64, y - j as f64);
            let low = (1.0 - u) * value(i, j) + u * value(i + 1, j);
            let high = (1.0 - u) * value(i, j + 1) + u * value(i + 1, j + 1);
            let share = (1.0 - v) * low + v * high;
            // An even map is one pale tone, not the darkest.
            let tone = if even { 0.12 } else { 0.62 * share.powf(0.8) };
            rgba.extend(theme.tint(theme.predicted, tone).0);
        }
    }
    let Layout { min, max } = *layout;
    sketch.items.push(Item::Image { min, max, width, height, rgba: Arc::from(rgba) });
}

fn outlines(sketch: &mut Sketch, regimes: &Regimes, layout: &Layout, theme: &Theme) {
    let mut inside = Sketch::default();
    // Predictions are rounded to whole degrees, which roughens the flanks: smoothed for the eye only.
    let even = Regimes { map: smoothed(&regimes.map, Regimes::COLUMNS), ..regimes.clone() };
    for (mass, width) in [(0.95, theme.widths.thin), (0.5, 1.1 * theme.widths.line)] {
        for line in contour(&even.map, Regimes::COLUMNS, even.level(mass)) {
            let on_map = |p: &[f64; 2]| {
                let divergence = 180.0 * (p[0] + 0.5) / Regimes::COLUMNS as f64;
                layout.at(divergence, (p[1] + 0.5) / Regimes::ROWS as f64)
            };
            inside.polyline(line.iter().map(on_map).collect(), theme.stroke(theme.predicted, width));
        }
    }
    sketch.items.push(Item::Clip { min: layout.min, max: layout.max, items: inside.items });
}

/// Each cell averaged with its neighbours, weights ¼ ½ ¼ both ways, three times over; the border is
/// repeated.
fn smoothed(map: &[f64], columns: usize) -> Vec<f64> {
    let rows = map.len() / columns;
    let pass = |map: Vec<f64>| -> Vec<f64> {
        let value = |i: isize, j: isize| {
            let (i, j) = (i.clamp(0, columns as isize - 1), j.clamp(0, rows as isize - 1));
            map[j as usize * columns + i as usize]
        };
        let at = |k: usize| {
            let (i, j) = ((k % columns) as isize, (k / columns) as isize);
            let row = |j| 0.25 * value(i - 1, j) + 0.5 * value(i, j) + 0.25 * value(i + 1, j);
            0.25 * row(j - 1) + 0.5 * row(j) + 0.25 * row(j + 1)
        };
        (0..map.len()).map(at).collect()
    };
    (0..3).fold(map.to_vec(), |map, _| pass(map))
}

/// Curves of equal obliquity under gross transport; left of 90° it is 90° everywhere.
fn curves(sketch: &mut Sketch, layout: &Layout, theme: &Theme) {
    let hair = theme.stroke(theme.ink_soft, theme.widths.thin);
    let look = Type::new(0.95 * theme.text.small, theme.ink_soft).haloed(theme.paper);
    sketch.line(layout.at(90.0, 0.0), layout.at(90.0, 1.0), hair);
    for phi in CURVES {
        let curve = obliquity_curve(phi);
        sketch.polyline(curve.iter().map(|p| layout.at(p[0], p[1])).collect(), hair);
    }
    for phi in CURVES {
        // Beside the line at 90°, where the curves lie farthest apart.
        let curve = obliquity_curve(phi);
        let Some(p) = curve.iter().find(|p| p[0] >= 97.0) else { continue };
        let at = layout.at(p[0], p[1]);
        sketch.text(Point::new(at.x, at.y - 0.5), format!("{phi:.0}°"), look);
    }
    let at = layout.at(86.0, 0.06);
    sketch.text(at, "90°", look.anchored(TextAnchor::End));
}

fn axes(sketch: &mut Sketch, layout: &Layout, theme: &Theme) {
    let Layout { min, max } = *layout;
    sketch.rectangle(min, max, None, Some(theme.stroke(theme.ink_soft, theme.widths.thin)));
    let tick = theme.stroke(theme.ink_soft, theme.widths.hair);
    let small = Type::new(theme.text.small, theme.ink_soft);
    for step in 0..=6 {
        let divergence = 30.0 * f64::from(step);
        let p = layout.at(divergence, 0.0);
        sketch.line(p, Point::new(p.x, p.y + 0.8), tick);
        let at = Point::new(p.x, p.y + 1.3 + theme.text.small);
        sketch.text(at, format!("{divergence:.0}°"), small.anchored(TextAnchor::Middle));
    }
    for ratio in [1.0f64, 1.5, 2.0, 3.0, 5.0, 7.0, 10.0] {
        let p = layout.at(0.0, ratio.log10());
        sketch.line(p, Point::new(p.x - 0.8, p.y), tick);
        let at = Point::new(p.x - 1.3, p.y + 0.35 * theme.text.small);
        sketch.text(at, format!("{ratio}"), small.anchored(TextAnchor::End));
    }
    let below = Point::new(0.5 * (min.x + max.x), max.y + 3.4 + 2.0 * theme.text.small);
    sketch.text(below, "divergence of the two winds", small.anchored(TextAnchor::Middle));
    let beside = Point::new(theme.text.small, 0.5 * (min.y + max.y));
    sketch.turned_text(beside, "strength ratio N", small.anchored(TextAnchor::Middle), -90.0);
}

fn words(sketch: &mut Sketch, found: &BackwardsFinding, top: f64, size_mm: f64, theme: &Theme) -> f64 {
    let middle = |y: f64| Point::new(0.5 * size_mm, y);
    let r = &found.regimes;
    let between = |low: f64| {
        format!(
            "RDP/DP {:.2} to {:.2}, divergence {:.0}° to {:.0}°",
            r.ratio_quantile(low, false),
            r.ratio_quantile(1.0 - low, false),
            r.divergence_quantile(low),
            r.divergence_quantile(1.0 - low)
        )
    };
    let headline = if found.tells() { between(0.25) } else { "divergence and ratio stay open".to_owned() };
    let look = Type::new(theme.text.heading, theme.predicted).bold().anchored(TextAnchor::Middle);
    let mut y = top + sketch.paragraph(middle(top), &headline, look, size_mm);
    let arcs: Vec<String> = found.drift_arcs().iter().map(arc_words).collect();
    let mut caption = String::new();
    if found.tells() {
        caption += &format!("(even odds; 95 %: {})\n", between(0.025));
    }
    caption += &format!("drift toward {} (95 %)\nshade: chance", arcs.join(" or "));
    if found.tells() {
        caption += ", outlines: 50 and 95 %";
    }
    caption += "; curves: obliquity of gross transport";
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &caption, look, size_mm);
    y
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_map_and_the_pointer_agree() {
        let layout = Layout::of(90.0);
        let at = regime_at(90.0, layout.at(120.0, 0.5)).expect("on the map");
        crate::assert_close!(at.divergence_deg, 120.0, 1e-9, "divergence");
        crate::assert_close!(at.ratio, 10f64.sqrt(), 1e-9, "ratio");
        assert_eq!(regime_at(90.0, Point::new(1.0, 1.0)), None);
    }

    #[test]
    fn smoothing_keeps_an_even_map_and_the_sum_of_a_hill_inside() {
        assert!(smoothed(&[0.25; 12], 4).iter().all(|v| (v - 0.25).abs() < 1e-15));
        let mut map = vec![0.0; 121];
        map[60] = 1.0;
        crate::assert_close!(smoothed(&map, 11).iter().sum::<f64>(), 1.0, 1e-12, "sum");
    }
}
