//! The components of the mixture of trends as a short list: each axis drawn, with its share and
//! concentration.

use crate::ground::Point;
use crate::study::TrendFinding;

use super::sketch::{Sketch, Type, toward};
use super::{Figure, TextAnchor, Theme, font, numbers};

/// The list, largest share first: `width_mm` wide; no height where the mixture has no component.
pub fn modes(trend: &TrendFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    if trend.modes.is_empty() {
        return sketch.finish(width_mm, 0.0);
    }
    let mut rows = trend.modes.clone();
    rows.sort_by(|a, b| b.weight.total_cmp(&a.weight));
    let size = theme.text.small;
    let pitch = 2.0 * size;
    let heads = Type::new(size, theme.ink_soft);
    let columns = [0.22, 0.46, 1.0].map(|share| share * width_mm);
    sketch.text(Point::new(0.0, size), "trend", heads);
    sketch.text(Point::new(columns[1], size), "share", heads.anchored(TextAnchor::End));
    sketch.text(Point::new(columns[2], size), "κ of the doubled angle", heads.anchored(TextAnchor::End));
    for (i, mode) in rows.iter().enumerate() {
        let middle = 1.5 * size + (i as f64 + 0.5) * pitch;
        let base = middle + 0.5 * font::CAP_HEIGHT * size;
        let centre = Point::new(0.8 * pitch, middle);
        let (from, to) = (
            toward(centre, 0.42 * pitch, mode.axis.azimuth()),
            toward(centre, 0.42 * pitch, mode.axis.azimuth().reversed()),
        );
        sketch.line(from, to, theme.stroke(theme.measured, theme.widths.bold));
        let look = Type::new(size, theme.ink);
        let end = look.anchored(TextAnchor::End);
        sketch.text(
            Point::new(columns[0], base),
            format!("{}°", numbers::angle(mode.axis.deg(), 0, 180.0)),
            end,
        );
        sketch.text(Point::new(columns[1], base), numbers::percent(mode.weight), end);
        sketch.text(Point::new(columns[2], base), numbers::significant(mode.kappa_doubled, 2), end);
    }
    sketch.finish(width_mm, 1.5 * size + rows.len() as f64 * pitch)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Axis;
    use crate::plate::Item;
    use crate::study::ModeFinding;

    #[test]
    fn the_largest_share_comes_first() {
        let mode = |deg, weight| ModeFinding { axis: Axis::from_deg(deg), weight, kappa_doubled: 4.0 };
        let trend =
            TrendFinding { modes: vec![mode(20.0, 0.3), mode(110.0, 0.7)], ..TrendFinding::default() };
        let figure = modes(&trend, 50.0, &Theme::print());
        let texts: Vec<&str> = figure
            .items
            .iter()
            .filter_map(|i| match i {
                Item::Text { text, .. } if text.contains('%') => Some(text.as_str()),
                _ => None,
            })
            .collect();
        assert_eq!(texts, ["70 %", "30 %"]);
    }

    #[test]
    fn an_axis_just_below_half_a_turn_reads_as_zero() {
        let mode = ModeFinding { axis: Axis::from_deg(179.8), weight: 1.0, kappa_doubled: 4.0 };
        let trend = TrendFinding { modes: vec![mode], ..TrendFinding::default() };
        let figure = modes(&trend, 50.0, &Theme::print());
        assert!(figure.items.iter().any(|i| matches!(i, Item::Text { text, .. } if text == "0°")));
    }
}
