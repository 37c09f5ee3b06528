//! Which way crests run, by their length, beside the nodes of the trend field.

use crate::ground::{LengthUnit, Point};
use crate::study::{CrestsFinding, TrendFinding};

use super::super::rose::{FACE_PAD_MM, Face, NO_TREND, faces};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, numbers};

/// Between the two roses, millimetres.
const GAP_MM: f64 = 2.4;

/// The rose of crest length and the rose of nodes on one scale; each with its mean, the other's dashed.
pub fn crest_rose(
    crests: &CrestsFinding,
    trend: &TrendFinding,
    unit: LengthUnit,
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    let side = 0.5 * (width_mm - GAP_MM);
    let rim = (0.5 * side - FACE_PAD_MM).max(2.0);
    let head = 1.5 * theme.text.small;
    let centres = [0.5 * side, width_mm - 0.5 * side].map(|x| Point::new(x, head + 0.5 * side));
    let by_length = crests.numbers.azimuth.map(|(axis, _)| axis);
    let by_node = trend.axis.filter(|_| trend.defined);
    let left = Face {
        shares: &crests.rose,
        bin_deg: crests.rose_bin_deg,
        mean: by_length.map(|axis| (axis, None)),
        other: by_node,
        modes: &[],
    };
    let modes: Vec<_> =
        if trend.modes.len() > 1 { trend.modes.iter().map(|m| m.axis).collect() } else { Vec::new() };
    let right = Face {
        shares: &trend.rose,
        bin_deg: trend.rose_bin_deg,
        mean: by_node.map(|axis| (axis, trend.ci95_half_deg)),
        other: by_length,
        modes: &modes,
    };
    let mut sketch = Sketch::default();
    let look = Type::new(theme.text.small, theme.ink).bold().anchored(TextAnchor::Middle);
    for (centre, name) in centres.iter().zip(["length of crest", "nodes of the trend field"]) {
        sketch.text(Point::new(centre.x, theme.text.small), name, look);
    }
    faces(&mut sketch, &[(left, centres[0]), (right, centres[1])], rim, theme);
    let top = head + side;
    let crest_words = match crests.numbers.azimuth {
        Some((axis, resultant)) => [
            format!("{}°", numbers::angle(axis.deg(), 1, 180.0)),
            format!(
                "{} crests\n{} long in all\nR\u{304} {:.2}",
                numbers::count(crests.numbers.count),
                numbers::length(crests.numbers.total_length, unit, 3),
                resultant
            ),
        ],
        None => ["no crests".to_owned(), String::new()],
    };
    let node_words = [
        by_node.map_or(NO_TREND.to_owned(), |axis| numbers::axis_with_interval(axis, trend.ci95_half_deg)),
        format!(
            "{} nodes\neffective n {}\nR\u{304} {:.2}",
            numbers::count(trend.n),
            numbers::significant(trend.n_eff, 3),
            trend.resultant_length
        ),
    ];
    let mut y: f64 = top;
    for (centre, [headline, under]) in centres.iter().zip([crest_words, node_words]) {
        let claimed = headline.contains('°');
        let color = if claimed { theme.measured } else { theme.ink };
        let look = Type::new(theme.text.heading, color).bold().anchored(TextAnchor::Middle);
        let mut used = sketch.paragraph(Point::new(centre.x, top), &headline, look, side);
        let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
        used += sketch.paragraph(Point::new(centre.x, top + used), &under, look, side + GAP_MM);
        y = y.max(top + used);
    }
    let caption = format!(
        "{}° bins · petal area = share, one scale for both, drawn both ways · the other’s mean is dashed",
        numbers::plain(crests.rose_bin_deg, 1)
    );
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(Point::new(0.5 * width_mm, y + 0.4), &caption, look, width_mm) + 0.4;
    sketch.finish(width_mm, y)
}
