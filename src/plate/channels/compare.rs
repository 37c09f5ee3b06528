//! Two networks of the same ground over one another, and how far they agree.

use crate::ground::{Bounds, LengthUnit, Network, Point};
use crate::science::network::compare::Agreement;
use crate::study::{Id, NetworkFinding};

use super::super::chart::{FINEST_MM, simplified};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, Item, Stroke, TextAnchor, Theme, font, numbers};
use super::lines::{Panel, pixel_shape};
use super::{table, words_only};

/// This network over each other one of the same ground. `others` are networks by the id of their finding, in pixels
/// of this one's raster; an agreement whose network is not among them has its numbers only.
pub fn network_compare(
    finding: &NetworkFinding,
    others: &[(Id, Network)],
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    if finding.agreements.is_empty() {
        return words_only("No other network of this sheet lies on the same ground.", width_mm, theme);
    }
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    for (id, name, agreement) in &finding.agreements {
        if y > 0.0 {
            y += 3.0;
        }
        if let Some((_, other)) = others.iter().find(|(other, _)| other == id) {
            y += overlay(&mut sketch, finding, other, y, width_mm, theme);
        }
        y += key(&mut sketch, &finding.name, name, y, width_mm, theme);
        y += shares(&mut sketch, agreement, y, width_mm, theme) + 0.6;
        y += table(&mut sketch, &facts(agreement, finding.unit), y, width_mm, theme);
    }
    sketch.finish(width_mm, y)
}

/// The other as a broad pale band, this one as a thin line on it; returns the height used.
fn overlay(
    sketch: &mut Sketch,
    finding: &NetworkFinding,
    other: &Network,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let networks = [other, &finding.network];
    let points = networks.iter().flat_map(|n| n.reaches.iter().flat_map(|r| r.line.0.iter().copied()));
    let Some(covers) = Bounds::of(points) else { return 0.0 };
    let shape = pixel_shape(&finding.network);
    let panel = Panel::fit(covers, shape, Point::new(0.0, top), [width_mm, 1.1 * width_mm]);
    panel.frame(sketch, theme);
    let mut inside = Sketch::default();
    let strokes = [band(theme), theme.stroke(theme.water, 1.2 * theme.widths.line)];
    let mut least = [1; 2];
    for (i, (network, stroke)) in networks.into_iter().zip(strokes).enumerate() {
        let shown = panel.printable(network, MOST_DENSE[i]);
        least[i] = shown.least_order;
        for reach in shown.reaches {
            let line: Vec<Point> = reach.line.0.iter().map(|p| panel.at(*p)).collect();
            inside.polyline(simplified(&line, FINEST_MM), stroke);
        }
    }
    sketch.items.push(Item::Clip { min: panel.min, max: panel.max, items: inside.items });
    let mut y = panel.max.y + 0.8;
    if least != [1, 1] {
        let [other, this] = least.map(|order| format!("order\u{a0}{order}"));
        let text = format!("drawn from {this} here, from {other} there");
        y += sketch.paragraph(
            Point::new(0.0, y),
            &text,
            Type::new(theme.text.small, theme.ink_soft),
            width_mm,
        );
    }
    y - top
}

/// Channel length that broad bands and thin lines still hold apart, mm per mm².
const MOST_DENSE: [f64; 2] = [0.22, 0.5];

fn band(theme: &Theme) -> Stroke {
    theme.stroke(theme.tint(theme.ink_soft, 0.45), 1.5)
}

/// Which line is which; returns the height used.
fn key(sketch: &mut Sketch, this: &str, other: &str, top: f64, width_mm: f64, theme: &Theme) -> f64 {
    let size = theme.text.small;
    let look = Type::new(size, theme.ink);
    let row = 1.6 * size;
    let strokes = [theme.stroke(theme.water, 1.2 * theme.widths.line), band(theme)];
    for (i, (name, stroke)) in [this, other].into_iter().zip(strokes).enumerate() {
        let y = top + (i as f64 + 0.5) * row;
        sketch.line(Point::new(0.0, y), Point::new(5.0, y), stroke);
        let name = font::shortened(name, size, false, width_mm - 6.4);
        sketch.text(Point::new(6.4, y + 0.5 * font::CAP_HEIGHT * size), name, look);
    }
    2.0 * row + 0.8
}

/// Shares as bars; returns the height used.
fn shares(sketch: &mut Sketch, a: &Agreement, top: f64, width_mm: f64, theme: &Theme) -> f64 {
    let size = theme.text.small;
    let rows = [
        ("found of the other", Some(a.found)),
        ("confirmed by the other", Some(a.confirmed)),
        ("same sense of flow", a.same_sense),
        ("same order", a.same_order),
    ];
    let pitch = 1.75 * size;
    let left = rows.iter().map(|r| font::text_width(r.0, size, false)).fold(0.0, f64::max) + 1.6;
    let right = width_mm - font::text_width(">99 %", size, true) - 1.2;
    for (i, (name, share)) in rows.into_iter().enumerate() {
        let middle = top + (i as f64 + 0.5) * pitch;
        let base = middle + 0.5 * font::CAP_HEIGHT * size;
        sketch.text(Point::new(0.0, base), name, Type::new(size, theme.ink));
        let Some(share) = share else {
            sketch.text(Point::new(left, base), "not told by both", Type::new(size, theme.ink_soft));
            continue;
        };
        let (low, high) = (middle + 0.3 * size, middle - 0.3 * size);
        sketch.rectangle(Point::new(left, high), Point::new(right, low), Some(theme.panel), None);
        let end = left + share.clamp(0.0, 1.0) * (right - left);
        sketch.rectangle(Point::new(left, high), Point::new(end, low), Some(theme.water), None);
        let look = Type::new(size, theme.ink).bold().anchored(TextAnchor::End);
        sketch.text(Point::new(width_mm, base), numbers::percent(share), look);
    }
    rows.len() as f64 * pitch
}

fn facts(a: &Agreement, unit: LengthUnit) -> Vec<(String, String)> {
    let length = |v: f64| numbers::length(v, unit, 3);
    let row = |name: &str, value: String| (name.to_owned(), value);
    let [other, found, this] = a.junctions;
    vec![
        row("same within", length(a.tolerance)),
        row("mean distance where both", length(a.mean_distance)),
        row("junctions", format!("{found} of the other’s {other}; {this} here")),
        row("length here, there", format!("{}, {}", length(a.lengths[1]), length(a.lengths[0]))),
    ]
}
