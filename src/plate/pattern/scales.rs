//! Trend and coherence against scale: superposed bedforms show as two stretches of scales with a trend of their own.

use crate::ground::{LengthUnit, Point};
use crate::study::{PatternFinding, PlateauFinding, ScaleFinding};

use super::super::chart::{Chart, Ruler, Scale, Span};
use super::super::sketch::{Sketch, Type};
use super::super::words::{length_ruler, verdict_words, words_only};
use super::super::{Figure, TextAnchor, Theme, font, numbers};

const LEFT_MM: f64 = 11.0;
const RIGHT_MM: f64 = 1.6;
/// Height of the chart of coherence over its width, and of that of trends.
const SHAPE: f64 = 0.34;
const TREND_SHAPE: f64 = 0.62;
/// Half width of the band that marks a plateau, degrees.
const BAND_DEG: f64 = 9.0;
/// Radius of the mark of R̄ = 1, millimetres.
const MARK_MM: f64 = 1.25;

/// Coherence beyond noise over the trend at each scale, on one logarithmic axis of spacing with the scale above.
/// Marks have the area of their resultant length; plateaus are bands.
pub fn scale_sweep(pattern: &PatternFinding, unit: LengthUnit, width_mm: f64, theme: &Theme) -> Figure {
    let scales: Vec<&ScaleFinding> = pattern.scales.iter().filter(|s| s.spacing > 0.0).collect();
    let Some(span) = Span::logarithmic(scales.iter().map(|s| s.spacing)) else {
        return words_only("No sweep of scales: the patch was looked at on one scale only.", width_mm, theme);
    };
    let size = theme.text.small;
    let (per, symbol) = length_ruler(span.max, unit);
    let (left, right) = (LEFT_MM, width_mm - RIGHT_MM);
    // The ruler of scales stands above.
    let top = 2.9 * size + 0.9;
    let bottom = top + SHAPE * (right - left);
    let (upper, lower) = (bottom + 3.2, bottom + 3.2 + TREND_SHAPE * (right - left));
    let x = Ruler { span: span.per(per), from_mm: left, to_mm: right };
    let most = scales.iter().map(|s| s.coherence).filter(|c| c.is_finite()).fold(0.1, f64::max);
    let coherence = Chart {
        x,
        y: Ruler { span: Span::between(0.0, (1.08 * most).min(1.0)), from_mm: bottom, to_mm: top },
    };
    let trend = Chart { x, y: Ruler { span: Span::between(0.0, 180.0), from_mm: lower, to_mm: upper } };

    let mut sketch = Sketch::default();
    let ranges: Vec<(f64, f64, &PlateauFinding)> =
        pattern.plateaus.iter().filter_map(|p| Some((low(pattern, p)?, high(pattern, p)?, p))).collect();
    for (from, to, plateau) in &ranges {
        bands(&mut sketch, [&coherence, &trend], [*from, *to], plateau, theme);
    }
    scale_ruler(&mut sketch, &scales, &x, top, theme);
    let mut inside = Sketch::default();
    let line = theme.stroke(theme.measured, theme.widths.line);
    coherence.curve(&mut inside, scales.iter().map(|s| [s.spacing, s.coherence]), line);
    let faint = theme.dashed(theme.ink_soft, theme.widths.thin);
    let share = |s: &&ScaleFinding| [s.spacing, s.share.min(1.0) * coherence.y.span.max];
    coherence.curve(&mut inside, scales.iter().map(share), faint);
    coherence.clipped(&mut sketch, inside);
    coherence.dots(&mut sketch, scales.iter().map(|s| [s.spacing, s.coherence]), 0.5, theme.measured);
    marks(&mut sketch, &trend, &scales, theme);
    coherence.bare_axes(&mut sketch, "", "coherence", &[], &coherence.y.ticks(5.5), theme);
    let degrees: Vec<(f64, String)> = (0..=4).map(|k| (45.0 * f64::from(k), (45 * k).to_string())).collect();
    let title = format!("spacing that scale shows, {symbol}");
    trend.bare_axes(&mut sketch, &title, "trend, °", &x.ticks(9.0), &degrees, theme);
    for (from, to, plateau) in &ranges {
        name(&mut sketch, &trend, [*from, *to], plateau, theme);
    }
    let mut y = lower + 2.4 + 2.6 * size;
    y += verdict_words(&mut sketch, &headline(pattern), CAPTION, y, width_mm, theme);
    sketch.finish(width_mm, y)
}

const CAPTION: &str = "coherence beyond noise (solid) and share of nodes above the noise (dashed, 0 to all); marks: mean trend, area = R\u{304}; bands: the trend stands still. 0° and 180° are one.";

fn headline(pattern: &PatternFinding) -> String {
    let trends: Vec<String> =
        pattern.plateaus.iter().map(|p| format!("{}°", numbers::angle(p.axis.deg(), 0, 180.0))).collect();
    match trends.as_slice() {
        [] => "no plateau".into(),
        [one] => format!("one plateau: {one}"),
        many => format!("{} plateaus: {}", many.len(), many.join(", ")),
    }
}

/// Half-way to the neighbouring scale beyond the plateau's ends, by ratio.
fn low(pattern: &PatternFinding, plateau: &PlateauFinding) -> Option<f64> {
    let first = pattern.scales.get(plateau.scales[0])?.spacing;
    let before = plateau.scales[0].checked_sub(1).and_then(|i| pattern.scales.get(i));
    Some(before.map_or(first, |s| (s.spacing * first).sqrt())).filter(|v| *v > 0.0)
}

fn high(pattern: &PatternFinding, plateau: &PlateauFinding) -> Option<f64> {
    let last = pattern.scales.get(plateau.scales[1])?.spacing;
    Some(pattern.scales.get(plateau.scales[1] + 1).map_or(last, |s| (s.spacing * last).sqrt()))
        .filter(|v| *v > 0.0)
}

/// The scales of a plateau as a pale ground over both charts, its trend as a darker band, whole or in two parts.
fn bands(
    sketch: &mut Sketch,
    [coherence, trend]: [&Chart; 2],
    [from, to]: [f64; 2],
    plateau: &PlateauFinding,
    theme: &Theme,
) {
    let (x0, x1) = (trend.x.at(from), trend.x.at(to));
    let pale = theme.tint(theme.measured, 0.09);
    for chart in [coherence, trend] {
        let (min, max) = chart.corners();
        sketch.rectangle(Point::new(x0, min.y), Point::new(x1, max.y), Some(pale), None);
    }
    let deg = plateau.axis.deg();
    let band = theme.tint(theme.measured, 0.26);
    for [low, high] in super::recovery::unwrapped([deg - BAND_DEG, deg + BAND_DEG]) {
        let (min, max) = (Point::new(x0, trend.y.at(high)), Point::new(x1, trend.y.at(low)));
        sketch.rectangle(min, max, Some(band), None);
    }
}

/// Round scales along the top, in pixels: spacing and scale are in one proportion.
fn scale_ruler(sketch: &mut Sketch, scales: &[&ScaleFinding], x: &Ruler, top: f64, theme: &Theme) {
    let Some(ratio) = scales.iter().find(|s| s.scale_px > 0.0).map(|s| s.spacing / s.scale_px) else {
        return;
    };
    let span = Span { scale: Scale::Logarithmic, min: x.span.min / ratio, max: x.span.max / ratio, per: 1.0 };
    let above = Ruler { span, ..*x };
    let rule = theme.stroke(theme.ink_soft, theme.widths.thin);
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    sketch.line(Point::new(x.from_mm, top), Point::new(x.to_mm, top), rule);
    let mut free = f64::NEG_INFINITY;
    for (value, label) in above.ticks(8.0) {
        let at = above.at(value);
        sketch.line(Point::new(at, top - 0.9), Point::new(at, top), rule);
        let half = 0.5 * font::text_width(&label, look.size_mm, false);
        if at - half > free && at + half < x.to_mm + RIGHT_MM {
            sketch.text(Point::new(at, top - 1.4), label, look);
            free = at + half + 1.0;
        }
    }
    let middle = 0.5 * (x.from_mm + x.to_mm);
    sketch.text(Point::new(middle, top - 1.9 - 1.1 * look.size_mm), "gradient scale, px", look);
}

/// Each scale's mean trend; near 0° and 180° it stands at both ends.
fn marks(sketch: &mut Sketch, chart: &Chart, scales: &[&ScaleFinding], theme: &Theme) {
    let mut inside = Sketch::default();
    let edge = theme.stroke(theme.paper, theme.widths.hair);
    for scale in scales {
        let Some(axis) = scale.axis else { continue };
        let radius = MARK_MM * scale.resultant_length.clamp(0.02, 1.0).sqrt();
        for turn in [-180.0, 0.0, 180.0] {
            let deg = axis.deg() + turn;
            if (-12.0..=192.0).contains(&deg) {
                inside.circle(chart.at(scale.spacing, deg), radius, Some(theme.measured), Some(edge));
            }
        }
    }
    chart.clipped(sketch, inside);
}

/// The plateau's trend above its band, or below where there is no room.
fn name(sketch: &mut Sketch, chart: &Chart, [from, to]: [f64; 2], plateau: &PlateauFinding, theme: &Theme) {
    let size = theme.text.small;
    let text = format!("{}°", numbers::angle(plateau.axis.deg(), 0, 180.0));
    let middle = 0.5 * (chart.x.at(from) + chart.x.at(to));
    let half = 0.5 * font::text_width(&text, size, true);
    let at =
        middle.clamp(chart.x.from_mm + half + 0.4, (chart.x.to_mm - half).max(chart.x.from_mm + half + 0.4));
    let deg = plateau.axis.deg();
    let above = chart.y.at(deg + BAND_DEG) - 0.6;
    let base = if above - size > chart.y.to_mm { above } else { chart.y.at(deg - BAND_DEG) + 1.15 * size };
    let look = Type::new(size, theme.measured).bold().anchored(TextAnchor::Middle).haloed(theme.paper);
    sketch.text(Point::new(at, base), text, look);
}
