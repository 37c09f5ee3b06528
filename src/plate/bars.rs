//! Bars of probabilities with their priors marked: classes of the verdict, weights of the theories,
//! and the narrow three-part bar of a ledger row.

use crate::ground::Point;
use crate::study::VerdictFinding;

use super::sketch::{Sketch, Type};
use super::{Figure, Rgba, TextAnchor, Theme, font, numbers};

/// One bar: a share in [0, 1] and what it was before the data.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Row {
    pub label: String,
    pub value: f64,
    pub prior: f64,
}

/// Rows of label, bar with the prior as a tick across it, percent. Labels too long to leave the bar
/// half the width stand above their bars.
pub(super) fn bars(rows: &[Row], width_mm: f64, accent: Rgba, theme: &Theme) -> Figure {
    let size = theme.text.small;
    let widest = rows.iter().map(|r| font::text_width(&r.label, size, false)).fold(0.0, f64::max);
    let stacked = widest + 1.6 > 0.45 * width_mm;
    let value_room = font::text_width(">99 %", size, true);
    let (left, right) = (if stacked { 0.0 } else { widest + 1.6 }, width_mm - value_room - 1.2);
    let (above, pitch) = if stacked { (1.3 * size, 2.9 * size) } else { (0.0, 1.75 * size) };
    let mut sketch = Sketch::default();
    for (i, row) in rows.iter().enumerate() {
        let top = i as f64 * pitch;
        let middle = top + above + 0.5 * (pitch - above);
        let base = middle + 0.5 * font::CAP_HEIGHT * size;
        let label = font::shortened(&row.label, size, false, width_mm);
        let label_base = if stacked { top + 1.15 * size } else { base };
        sketch.text(Point::new(0.0, label_base), label, Type::new(size, theme.ink));
        bar(&mut sketch, row, [left, right], middle, accent, theme);
        let look = Type::new(size, theme.ink).bold().anchored(TextAnchor::End);
        sketch.text(Point::new(width_mm, base), numbers::percent(row.value), look);
    }
    let y = rows.len() as f64 * pitch;
    let look = Type::new(0.92 * size, theme.ink_soft);
    let used = sketch.paragraph(Point::new(left, y), "tick: before the data", look, width_mm - left);
    sketch.finish(width_mm, y + used)
}

/// The share as a bar between two places, the prior as a tick across it.
fn bar(sketch: &mut Sketch, row: &Row, [left, right]: [f64; 2], middle: f64, accent: Rgba, theme: &Theme) {
    let size = theme.text.small;
    let x = |share: f64| left + share.clamp(0.0, 1.0) * (right - left);
    let (top, bottom) = (middle - 0.3 * size, middle + 0.3 * size);
    sketch.rectangle(Point::new(left, top), Point::new(right, bottom), Some(theme.panel), None);
    sketch.rectangle(Point::new(left, top), Point::new(x(row.value), bottom), Some(accent), None);
    let reach = 0.25 * size;
    let (from, to) = (Point::new(x(row.prior), top - reach), Point::new(x(row.prior), bottom + reach));
    sketch.line(from, to, theme.stroke(theme.paper, 3.0 * theme.widths.thin));
    sketch.line(from, to, theme.stroke(theme.ink, theme.widths.thin));
}

/// Weights of the theories that were weighed, each with its prior; empty for a refused verdict.
pub fn posterior_bars(verdict: &VerdictFinding, width_mm: f64, theme: &Theme) -> Figure {
    let rows: Vec<Row> = verdict
        .theories
        .iter()
        .filter(|t| t.prior > 0.0)
        .map(|t| Row { label: t.name.to_owned(), value: t.posterior, prior: t.prior })
        .collect();
    if rows.is_empty() {
        return Sketch::default().finish(width_mm, 0.0);
    }
    bars(&rows, width_mm, theme.predicted, theme)
}

/// The three classes side by side in one bar, dark where likely, for a row of the ledger; an empty
/// frame where there is no verdict. Longitudinal, oblique, transverse from left to right.
pub fn verdict_bar(verdict: Option<&VerdictFinding>, size_mm: [f64; 2], theme: &Theme) -> Figure {
    let [width, height] = size_mm;
    let mut sketch = Sketch::default();
    let whole = (Point::new(0.0, 0.0), Point::new(width, height));
    let shares = verdict.filter(|v| v.refused.is_none()).and_then(|v| v.probabilities);
    if let Some(shares) = shares {
        let mut x = 0.0;
        for (share, depth) in shares.into_iter().zip([0.95, 0.55, 0.2]) {
            let end = (x + share * width).min(width);
            let fill = theme.tint(theme.measured, depth);
            sketch.rectangle(Point::new(x, 0.0), Point::new(end, height), Some(fill), None);
            x = end;
        }
    }
    let edge = theme.stroke(if shares.is_some() { theme.ink_soft } else { theme.rule }, theme.widths.hair);
    sketch.rectangle(whole.0, whole.1, None, Some(edge));
    sketch.finish(width, height)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::plate::Item;
    use crate::plate::dial::tests::verdict;

    #[test]
    fn bars_are_as_long_as_their_share() {
        let theme = Theme::print();
        let rows = [(0.5, 0.25), (0.25, 0.25)].map(|(value, prior)| Row { label: "x".into(), value, prior });
        let figure = bars(&rows, 60.0, theme.measured, &theme);
        let lengths: Vec<f64> = figure
            .items
            .iter()
            .filter_map(|i| match i {
                Item::Path { points, fill: Some(f), .. } if *f == theme.measured => {
                    Some(points[1].x - points[0].x)
                }
                _ => None,
            })
            .collect();
        assert_close!(lengths[0] / lengths[1], 2.0, 1e-12);
    }

    #[test]
    fn the_verdict_bar_fills_its_frame_or_stays_empty() {
        let theme = Theme::light();
        let filled = |v: Option<&VerdictFinding>| {
            let figure = verdict_bar(v, [20.0, 2.0], &theme);
            figure.items.iter().filter(|i| matches!(i, Item::Path { fill: Some(_), .. })).count()
        };
        assert_eq!(filled(Some(&verdict())), 3);
        assert_eq!(filled(None), 0);
        let refused = VerdictFinding { refused: Some("calm".into()), ..verdict() };
        assert_eq!(filled(Some(&refused)), 0);
    }
}
