//! What would have been seen: how often bedforms of each trend, laid into the patch, were found again, and how far
//! off.

use crate::ground::{Axis, Point};
use crate::study::{RecoveredTrend, RecoveryFinding, TrendFinding};

use super::super::chart::{Chart, Ruler, Span};
use super::super::sketch::{Sketch, Type};
use super::super::words::{brief, words_only};
use super::super::{Figure, TextAnchor, Theme, font, numbers};

const LEFT_MM: f64 = 11.0;
const RIGHT_MM: f64 = 1.6;
/// Height of the chart of probabilities over its width, and of that of biases.
const SHAPE: f64 = 0.46;
const BIAS_SHAPE: f64 = 0.24;

/// Probability of detection against the trend laid in, with Wilson intervals, arcs that would have been missed, the
/// light and the patch's own trend; beneath it the bias and spread of what was found.
pub fn recovery_curve(
    recovery: &RecoveryFinding,
    trend: &TrendFinding,
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    if recovery.trends.is_empty() {
        return words_only("No recovery: no trend was laid in.", width_mm, theme);
    }
    let size = theme.text.small;
    let (left, right) = (LEFT_MM, width_mm - RIGHT_MM);
    // Two rows of names above the chart.
    let top = 2.9 * size;
    let bottom = top + SHAPE * (right - left);
    let (upper, lower) = (bottom + 3.0, bottom + 3.0 + BIAS_SHAPE * (right - left));
    let x = Ruler { span: Span::between(0.0, 180.0), from_mm: left, to_mm: right };
    let chance = Chart { x, y: Ruler { span: Span::between(0.0, 1.0), from_mm: bottom, to_mm: top } };
    let bias = Chart { x, y: Ruler { span: bias_span(&recovery.trends), from_mm: lower, to_mm: upper } };

    let mut sketch = Sketch::default();
    for chart in [&chance, &bias] {
        shade(&mut sketch, chart, &recovery.missed, theme);
    }
    names(&mut sketch, recovery, trend, &x, [top, lower], theme);
    found(&mut sketch, &chance, &recovery.trends, theme);
    off(&mut sketch, &bias, &recovery.trends, theme);
    let shares = [0.0, 0.5, 1.0].map(|s| (s, format!("{:.0}", 100.0 * s)));
    chance.bare_axes(&mut sketch, "", "found, %", &[], &shares, theme);
    let ticks: Vec<(f64, String)> = (0..=6).map(|k| (30.0 * f64::from(k), (30 * k).to_string())).collect();
    bias.bare_axes(&mut sketch, "trend laid in, °", "bias, °", &ticks, &bias.y.ticks(4.0), theme);

    let mut y = lower + 2.4 + 2.6 * size;
    let middle = |y: f64| Point::new(0.5 * width_mm, y);
    let look = Type::new(theme.text.body, theme.ink).bold().anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &recovery.sentence, look, width_mm);
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &caption(recovery), look, width_mm);
    sketch.finish(width_mm, y)
}

/// Symmetric about 0 and wide enough for all biases with their spread, 5° at least, 45° at most.
fn bias_span(trends: &[RecoveredTrend]) -> Span {
    let reach = |t: &RecoveredTrend| t.bias_deg.map_or(0.0, f64::abs) + t.spread_deg.unwrap_or(0.0);
    let most = trends.iter().map(reach).filter(|v| v.is_finite()).fold(0.0, f64::max);
    let most = (1.1 * most).clamp(5.0, 45.0);
    Span::between(-most, most)
}

/// The places of a stretch of axes between 0° and 180°, in one part or in two.
pub(super) fn unwrapped([from, to]: [f64; 2]) -> Vec<[f64; 2]> {
    if to.is_nan() || from.is_nan() || to <= from {
        return Vec::new();
    }
    [-180.0, 0.0, 180.0]
        .into_iter()
        .map(|turn| [(from + turn).max(0.0), (to + turn).min(180.0)])
        .filter(|[a, b]| b > a)
        .collect()
}

/// Missed arcs: a pale ground with slanted lines, so that it shows without colour.
fn shade(sketch: &mut Sketch, chart: &Chart, missed: &[[f64; 2]], theme: &Theme) {
    const PITCH_MM: f64 = 1.5;
    let (top_left, bottom_right) = chart.corners();
    for [from, to] in missed.iter().flat_map(|arc| unwrapped(*arc)) {
        let (min, max) =
            (Point::new(chart.x.at(from), top_left.y), Point::new(chart.x.at(to), bottom_right.y));
        sketch.rectangle(min, max, Some(theme.tint(theme.caution, 0.14)), None);
        let mut inside = Sketch::default();
        let stroke = theme.stroke(theme.tint(theme.caution, 0.55), theme.widths.hair);
        let height = max.y - min.y;
        let mut x = min.x - height;
        while x < max.x {
            inside.line(Point::new(x, max.y), Point::new(x + height, min.y), stroke);
            x += PITCH_MM;
        }
        sketch.items.push(super::super::Item::Clip { min, max, items: inside.items });
    }
}

/// Lines at the light, square to it and at the patch's own trend, their names above the chart: the light's in the
/// first row, the trend's in the second.
fn names(
    sketch: &mut Sketch,
    recovery: &RecoveryFinding,
    trend: &TrendFinding,
    x: &Ruler,
    [top, bottom]: [f64; 2],
    theme: &Theme,
) {
    let size = theme.text.small;
    let mut mark = |axis: Axis, text: &str, row: f64, look: Type, stroke| {
        let at = x.at(axis.deg());
        let base = top - 0.7 - row * 1.15 * size;
        sketch.line(Point::new(at, base + 0.3), Point::new(at, bottom), stroke);
        let half = 0.5 * font::text_width(text, size, look.bold);
        let place = at.clamp(x.from_mm + half, (x.to_mm - half).max(x.from_mm + half));
        sketch.text(Point::new(place, base), text, look);
    };
    if let Some(light) = recovery.light_from.map(|from| from.axis()) {
        let look = Type::new(size, theme.caution).anchored(TextAnchor::Middle).haloed(theme.paper);
        let thin = theme.stroke(theme.caution, theme.widths.thin);
        mark(light, "light", 1.0, look, thin);
        let dashed = theme.dashed(theme.caution, theme.widths.thin);
        mark(light.perpendicular(), "light + 90°", 1.0, look, dashed);
    }
    if let Some(axis) = trend.axis.filter(|_| trend.defined) {
        let look = Type::new(size, theme.measured).bold().anchored(TextAnchor::Middle).haloed(theme.paper);
        let text = format!("trend {}°", numbers::angle(axis.deg(), 0, 180.0));
        mark(axis, &text, 0.0, look, theme.stroke(theme.measured, theme.widths.line));
    }
}

/// The trends in order, with one more at either end so that the curve goes round.
fn round(trends: &[RecoveredTrend]) -> Vec<(f64, &RecoveredTrend)> {
    let mut sorted: Vec<(f64, &RecoveredTrend)> = trends.iter().map(|t| (t.trend.deg(), t)).collect();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    let before = sorted.last().map(|(deg, t)| (deg - 180.0, *t));
    let after = sorted.first().map(|(deg, t)| (deg + 180.0, *t));
    before.into_iter().chain(sorted).chain(after).collect()
}

fn share(trend: &RecoveredTrend) -> f64 {
    if trend.tries > 0 { f64::from(trend.found) / f64::from(trend.tries) } else { f64::NAN }
}

fn found(sketch: &mut Sketch, chart: &Chart, trends: &[RecoveredTrend], theme: &Theme) {
    let half = theme.stroke(theme.rule, theme.widths.thin);
    sketch.line(chart.at(0.0, 0.5), chart.at(180.0, 0.5), half);
    let all = round(trends);
    let mut inside = Sketch::default();
    let line = theme.stroke(theme.predicted, theme.widths.line);
    chart.curve(&mut inside, all.iter().map(|(deg, t)| [*deg, share(t)]), line);
    chart.clipped(sketch, inside);
    for (deg, t) in all.iter().filter(|(deg, _)| (0.0..=180.0).contains(deg)) {
        if t.tries == 0 {
            continue;
        }
        let [low, high] = t.probability_ci95.map(|p| chart.at(*deg, p.clamp(0.0, 1.0)));
        sketch.line(low, high, theme.stroke(theme.predicted, theme.widths.thin));
        let edge = theme.stroke(theme.paper, theme.widths.thin);
        sketch.circle(chart.at(*deg, share(t)), 0.75, Some(theme.predicted), Some(edge));
    }
}

/// Bias as an arrow's stem from 0 with a dot at its end, the spread as a thin whisker about it.
fn off(sketch: &mut Sketch, chart: &Chart, trends: &[RecoveredTrend], theme: &Theme) {
    let zero = theme.stroke(theme.ink_soft, theme.widths.thin);
    sketch.line(chart.at(0.0, 0.0), chart.at(180.0, 0.0), zero);
    let mut inside = Sketch::default();
    for (deg, t) in round(trends).into_iter().filter(|(deg, _)| (0.0..=180.0).contains(deg)) {
        let Some(bias) = t.bias_deg.filter(|b| b.is_finite()) else { continue };
        if let Some(spread) = t.spread_deg.filter(|s| s.is_finite()) {
            let [low, high] = [bias - spread, bias + spread].map(|v| chart.at(deg, v));
            inside.line(low, high, theme.stroke(theme.predicted, theme.widths.hair));
        }
        let stem = theme.stroke(theme.predicted, theme.widths.bold);
        inside.line(chart.at(deg, 0.0), chart.at(deg, bias), stem);
        inside.circle(chart.at(deg, bias), 0.55, Some(theme.predicted), None);
    }
    chart.clipped(sketch, inside);
}

fn caption(recovery: &RecoveryFinding) -> String {
    let tries = recovery.trends.iter().map(|t| t.tries).max().unwrap_or(0);
    let mut parts = vec![format!(
        "{} trends × {tries} fields laid into {} px of this ground: {} apart, {} high, defects {} · Wilson’s 95 % intervals; bias with its spread, clockwise up",
        recovery.trends.len(),
        recovery.window_px,
        numbers::length(recovery.spacing, recovery.unit, 3),
        numbers::length(recovery.height, recovery.unit, 2),
        brief(recovery.defects),
    )];
    if recovery.light_from.is_none() {
        parts.push("no light or look is stated".into());
    }
    let along = recovery
        .uniform_axis
        .map_or(String::new(), |axis| format!(" along {}°", numbers::angle(axis.deg(), 0, 180.0)));
    parts.push(format!("all trends alike would show R\u{304} {:.2}{along}", recovery.uniform_resultant));
    if let Some(c) = recovery.corrected {
        parts.push(format!("the trend less its bias is {}°", numbers::angle(c.axis.deg(), 1, 180.0)));
    }
    parts.join(" · ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn arcs_past_half_a_turn_come_in_two_parts() {
        assert_eq!(unwrapped([160.0, 200.0]), [[0.0, 20.0], [160.0, 180.0]]);
        assert_eq!(unwrapped([70.0, 100.0]), [[70.0, 100.0]]);
        assert_eq!(unwrapped([0.0, 180.0]), [[0.0, 180.0]]);
        assert!(unwrapped([f64::NAN, 3.0]).is_empty());
    }
}
