//! Words, tables and lengths that figures of networks and of bedform patterns share.

use crate::ground::{LengthUnit, Point};

use super::sketch::{Sketch, Type};
use super::{Figure, TextAnchor, Theme, numbers};

/// Height of a plot over its width.
pub(super) const SHAPE: f64 = 0.66;

/// A figure that only says why there is none.
pub(super) fn words_only(why: &str, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let look = Type::new(theme.text.small, theme.ink_soft);
    let height = sketch.paragraph(Point::new(0.0, 0.0), why, look, width_mm);
    sketch.finish(width_mm, height)
}

/// The measured value and what it rests on, centred beneath a plot; returns the height used.
pub(super) fn verdict_words(
    sketch: &mut Sketch,
    headline: &str,
    caption: &str,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let middle = |y: f64| Point::new(0.5 * width_mm, y);
    let look = Type::new(theme.text.heading, theme.measured).bold().anchored(TextAnchor::Middle);
    let mut y = top + sketch.paragraph(middle(top), headline, look, width_mm);
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), caption, look, width_mm);
    y - top
}

/// Labels at the left, values at the right of each line, a hair rule between lines; returns the height used.
pub(super) fn table(
    sketch: &mut Sketch,
    rows: &[(String, String)],
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let (label, value) =
        (Type::new(theme.text.small, theme.ink_soft), Type::new(theme.text.small, theme.ink));
    let rule = theme.stroke(theme.rule, theme.widths.hair);
    let room = 0.44 * width_mm;
    let mut y = top;
    for (i, (name, text)) in rows.iter().enumerate() {
        if i > 0 {
            sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
        }
        let left = sketch.paragraph(Point::new(0.0, y + 0.35), name, label, room - 1.0);
        let right = sketch.paragraph(Point::new(room, y + 0.35), text, value, width_mm - room);
        y += left.max(right) + 0.5;
    }
    y - top
}

/// `"0.45 (0.38–0.52)"`.
pub(super) fn with_interval(value: f64, interval: Option<[f64; 2]>, decimals: usize) -> String {
    let text = numbers::fixed(value, decimals);
    match interval {
        Some([low, high]) if low < 0.0 => {
            format!("{text} ({} to {})", numbers::fixed(low, decimals), numbers::fixed(high, decimals))
        }
        Some([low, high]) => {
            format!("{text} ({}–{})", numbers::fixed(low, decimals), numbers::fixed(high, decimals))
        }
        None => text,
    }
}

/// Three significant figures without zeros at the end.
pub(super) fn brief(value: f64) -> String {
    let text = numbers::significant(value, 3);
    if !text.contains('.') || text.contains('e') {
        return text;
    }
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// An area in m² from 10⁶ m² on in km²; pixels squared without ground size.
pub(super) fn area(value: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre if value >= 1e4 => format!("{} km²", brief(value / 1e6)),
        LengthUnit::Metre => format!("{} m²", brief(value)),
        LengthUnit::Pixel => format!("{} px²", brief(value)),
    }
}

/// What a length ruler is printed in when its greatest value is `greatest`.
pub(super) fn length_ruler(greatest: f64, unit: LengthUnit) -> (f64, &'static str) {
    if unit == LengthUnit::Metre && greatest >= 10_000.0 { (1000.0, "km") } else { (1.0, unit.symbol()) }
}
