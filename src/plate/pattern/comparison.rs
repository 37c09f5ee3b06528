//! One ground on two pictures: the two roses, their difference and its tests, and how far crests moved.

use crate::ground::Point;
use crate::science::crest::Shift;
use crate::study::ComparisonFinding;

use super::super::chart::{Chart, Ruler, Span};
use super::super::rose::{FACE_PAD_MM, Face, NO_TREND, faces};
use super::super::sketch::{Sketch, Type};
use super::super::words::{length_ruler, verdict_words};
use super::super::{Figure, TextAnchor, Theme, font, numbers};

const GAP_MM: f64 = 2.4;
/// Height of the histogram over its width.
const SHAPE: f64 = 0.55;
const BINS: usize = 24;

/// The roses on one scale, each with the other's mean dashed; the difference on a ruler; the tests; the movements.
pub fn comparison_figure(comparison: &ComparisonFinding, width_mm: f64, theme: &Theme) -> Figure {
    let trends = trends_compared(comparison, width_mm, theme);
    let moved = crests_moved(comparison, width_mm, theme);
    let mut sketch = Sketch::default();
    sketch.place(&trends, Point::default());
    let size = theme.text.small;
    let top = trends.height_mm + 1.6;
    let heading = Type::new(size, theme.ink).bold();
    sketch.text(Point::new(0.0, top + size), "Movement square to the crests", heading);
    sketch.place(&moved, Point::new(0.0, top + 1.3 * size));
    sketch.finish(width_mm, top + 1.3 * size + moved.height_mm)
}

/// The roses, the difference and the tests.
pub(in super::super) fn trends_compared(
    comparison: &ComparisonFinding,
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    let mut sketch = Sketch::default();
    let mut y = roses(&mut sketch, comparison, width_mm, theme) + 0.8;
    y += difference(&mut sketch, comparison, y, width_mm, theme) + 0.8;
    y += tests(&mut sketch, comparison, y, width_mm, theme);
    sketch.finish(width_mm, y)
}

/// How far crests moved square to themselves, or why that is not known.
pub(in super::super) fn crests_moved(comparison: &ComparisonFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let height = match &comparison.shift {
        Ok(shift) => moved(&mut sketch, comparison, shift, width_mm, theme),
        Err(why) => {
            let look = Type::new(theme.text.small, theme.ink_soft);
            sketch.paragraph(Point::default(), &format!("No movement of crests: {why}."), look, width_mm)
        }
    };
    sketch.finish(width_mm, height)
}

fn roses(sketch: &mut Sketch, comparison: &ComparisonFinding, width_mm: f64, theme: &Theme) -> f64 {
    let size = theme.text.small;
    let side = 0.5 * (width_mm - GAP_MM);
    let rim = (0.5 * side - FACE_PAD_MM).max(2.0);
    let middles = [0.5 * side, width_mm - 0.5 * side];
    let mut head: f64 = 0.0;
    for (x, name) in middles.iter().zip(&comparison.raster_names) {
        let look = Type::new(size, theme.ink).bold().anchored(TextAnchor::Middle);
        head = head.max(sketch.paragraph(Point::new(*x, 0.0), name, look, side));
    }
    let centres = middles.map(|x| Point::new(x, head + 0.5 * side));
    let means = [0, 1].map(|i| {
        let trend = &comparison.trends[i];
        trend.axis.filter(|_| trend.defined)
    });
    let face = |i: usize| {
        let trend = &comparison.trends[i];
        Face {
            shares: &trend.rose,
            bin_deg: trend.rose_bin_deg,
            mean: means[i].map(|axis| (axis, trend.ci95_half_deg)),
            other: means[1 - i],
            modes: &[],
        }
    };
    faces(sketch, &[(face(0), centres[0]), (face(1), centres[1])], rim, theme);
    let top = head + side;
    let mut foot: f64 = top;
    for (i, x) in middles.into_iter().enumerate() {
        let trend = &comparison.trends[i];
        let told = means[i]
            .map_or(NO_TREND.to_owned(), |axis| numbers::axis_with_interval(axis, trend.ci95_half_deg));
        let color = if means[i].is_some() { theme.measured } else { theme.ink };
        let look = Type::new(theme.text.heading, color).bold().anchored(TextAnchor::Middle);
        let mut used = sketch.paragraph(Point::new(x, top), &told, look, side);
        let light = comparison.light_from[i]
            .map_or(String::new(), |from| format!("\nlight from {}°", numbers::angle(from.deg(), 0, 360.0)));
        let under = format!(
            "{} nodes\neffective n {}\nR\u{304} {:.2}{light}",
            numbers::count(trend.n),
            numbers::significant(trend.n_eff, 3),
            trend.resultant_length
        );
        let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle);
        used += sketch.paragraph(Point::new(x, top + used), &under, look, side + GAP_MM);
        foot = foot.max(top + used);
    }
    foot
}

/// The difference with its interval on a ruler about 0, and what the advised test says.
fn difference(
    sketch: &mut Sketch,
    comparison: &ComparisonFinding,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let axes = &comparison.axes;
    let size = theme.text.small;
    let Some(difference) = axes.difference_deg.filter(|d| d.is_finite()) else {
        let look = Type::new(size, theme.ink_soft);
        let text = "No difference of trends: one of the two has none.";
        return sketch.paragraph(Point::new(0.0, top), text, look, width_mm);
    };
    let interval = axes.difference_ci95_deg;
    let most = interval.map_or(difference.abs(), |[a, b]| a.abs().max(b.abs())).max(difference.abs());
    let span = Span::between(-1.3 * most.max(2.0), 1.3 * most.max(2.0));
    let chart = Chart {
        x: Ruler { span, from_mm: 3.0, to_mm: width_mm - 3.0 },
        y: Ruler { span: Span::between(0.0, 1.0), from_mm: top + 4.6, to_mm: top },
    };
    let zero = theme.stroke(theme.ink_soft, theme.widths.thin);
    sketch.line(chart.at(0.0, 0.0), chart.at(0.0, 1.0), zero);
    let bar = theme.stroke(theme.measured, theme.widths.line);
    if let Some([low, high]) = interval {
        sketch.line(chart.at(low, 0.5), chart.at(high, 0.5), bar);
        for end in [low, high] {
            sketch.line(chart.at(end, 0.3), chart.at(end, 0.7), bar);
        }
    }
    sketch.circle(chart.at(difference, 0.5), 0.9, Some(theme.measured), None);
    let foot = chart.y.from_mm;
    sketch.line(Point::new(chart.x.from_mm, foot), Point::new(chart.x.to_mm, foot), zero);
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle);
    for (value, label) in chart.x.ticks(9.0) {
        let at = chart.x.at(value);
        sketch.line(Point::new(at, foot), Point::new(at, foot + 0.9), zero);
        sketch.text(Point::new(at, foot + 1.3 + size), format!("{label}°"), look);
    }
    let d = if interval.is_some_and(|[a, b]| b - a < 20.0) { 1 } else { 0 };
    let told = match interval {
        Some([low, high]) => format!(
            "second less first {}° ({} to {}°)",
            numbers::fixed(difference, d),
            numbers::fixed(low, d),
            numbers::fixed(high, d)
        ),
        None => format!("second less first {}°", numbers::fixed(difference, d)),
    };
    let advised = axes.tests.first().map_or(String::new(), |t| {
        let says = if axes.differ { "the trends differ" } else { "no difference is shown" };
        format!("{says}: {}, {}", t.name, numbers::p_value(t.p).replace(' ', "\u{a0}"))
    });
    let y = foot + 1.8 + 1.5 * size;
    y - top + verdict_words(sketch, &told, &advised, y, width_mm, theme)
}

/// Each test with its statistic and p at the right, what is to be said of it beneath.
fn tests(sketch: &mut Sketch, comparison: &ComparisonFinding, top: f64, width_mm: f64, theme: &Theme) -> f64 {
    let size = theme.text.small;
    let rule = theme.stroke(theme.rule, theme.widths.hair);
    let mut y = top;
    for test in &comparison.axes.tests {
        sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
        y += 0.5;
        let told = format!("{} · {}", numbers::significant(test.statistic, 3), numbers::p_value(test.p));
        let right = Type::new(size, theme.ink).anchored(TextAnchor::End);
        sketch.text(Point::new(width_mm, y + size), told.as_str(), right);
        let room = width_mm - font::text_width(&told, size, false) - 2.0;
        y += sketch.paragraph(Point::new(0.0, y), test.name, Type::new(size, theme.ink), room);
        if !test.remark.is_empty() {
            let look = Type::new(size, theme.ink_soft);
            y += sketch.paragraph(Point::new(0.0, y), &test.remark, look, width_mm);
        }
        y += 0.4;
    }
    y - top
}

/// Movements square to the crests as a histogram with the median, its interval and the quarters.
fn moved(
    sketch: &mut Sketch,
    comparison: &ComparisonFinding,
    shift: &Shift,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let unit = comparison.unit;
    let values: Vec<f64> = shift.moves.iter().map(|m| f64::from(*m)).filter(|m| m.is_finite()).collect();
    let told = values.iter().copied().chain(shift.ci95).chain([0.0]);
    let Some(span) = Span::linear(told) else {
        let look = Type::new(theme.text.small, theme.ink_soft);
        return sketch.paragraph(Point::default(), "Crests did not move at all.", look, width_mm);
    };
    let (low, width) = (span.min, (span.max - span.min) / BINS as f64);
    let mut bins = [0usize; BINS];
    for value in &values {
        bins[(((value - low) / width) as usize).min(BINS - 1)] += 1;
    }
    let most = bins.iter().copied().max().unwrap_or(0).max(1) as f64 / values.len().max(1) as f64;
    let (per, symbol) = length_ruler(span.max.abs().max(span.min.abs()), unit);
    let height = SHAPE * width_mm;
    let y = Span::between(0.0, 1.25 * most.max(1e-3));
    let chart = Chart::new(span.per(per), y, Point::default(), [width_mm, height]);
    let edge = theme.stroke(theme.paper, theme.widths.hair);
    let fill = theme.tint(theme.measured, 0.35);
    for (i, count) in bins.iter().enumerate().filter(|(_, n)| **n > 0) {
        let (from, share) = (low + i as f64 * width, *count as f64 / values.len() as f64);
        let (min, max) = (chart.at(from, share), chart.at(from + width, 0.0));
        sketch.rectangle(min, max, Some(fill), Some(edge));
    }
    let (head, foot) = chart.corners();
    let zero = theme.dashed(theme.ink_soft, theme.widths.thin);
    let x = |v: f64| chart.x.at(v);
    sketch.line(Point::new(x(0.0), head.y), Point::new(x(0.0), foot.y), zero);
    let median = theme.stroke(theme.measured, theme.widths.line);
    sketch.line(Point::new(x(shift.median), head.y + 1.6), Point::new(x(shift.median), foot.y), median);
    let level = head.y + 1.6;
    let [a, b] = shift.ci95.map(x);
    sketch.line(Point::new(a, level), Point::new(b, level), theme.stroke(theme.measured, theme.widths.bold));
    let quarters = theme.stroke(theme.ink_soft, theme.widths.thin);
    for quartile in shift.quartiles.map(x) {
        sketch.line(Point::new(quartile, foot.y - 1.2), Point::new(quartile, foot.y), quarters);
        sketch.circle(Point::new(quartile, foot.y - 1.2), 0.35, Some(theme.ink_soft), None);
    }
    let toward = numbers::angle(shift.toward.deg(), 0, 360.0);
    let percent: Vec<(f64, String)> =
        chart.y.ticks(6.0).into_iter().map(|(v, _)| (v, numbers::plain(100.0 * v, 1))).collect();
    let title = format!("toward {toward}°, {symbol}");
    chart.bare_axes(sketch, &title, "of points, %", &chart.x.ticks(9.0), &percent, theme);
    let mut y = height;
    let headline = length_between(shift.median, shift.ci95, per, symbol);
    let rate = comparison.years.filter(|years| *years > 0.0).map_or(String::new(), |years| {
        let a_year = |v: f64| numbers::significant(v / years, 2);
        format!(
            "{} {} a year ({} to {}) over {} years · ",
            a_year(shift.median),
            unit.symbol(),
            a_year(shift.ci95[0]),
            a_year(shift.ci95[1]),
            numbers::plain(years, 1)
        )
    });
    let chance = shift.chance.map_or(String::new(), |c| {
        format!("; by chance {}, as close {}", numbers::percent(c.share), numbers::p_value(c.p))
    });
    let vector = shift.vector.as_ref().map_or(String::new(), |v| {
        let [east, north] = v.east_north.map(|d| numbers::significant(d / per, 3));
        format!(" · as one vector {east} {symbol} east, {north} {symbol} north")
    });
    let others: Vec<String> =
        shift.alternatives.iter().map(|d| format!("{} {symbol}", numbers::significant(d / per, 3))).collect();
    let others = match others.as_slice() {
        [] => String::new(),
        some => format!(" · nearly as well explained, were the next crest the same: {}", some.join(", ")),
    };
    let caption = format!(
        "{rate}{} crests matched, {} of their points ({}{chance}){vector}{others} · thick: 95 % interval of the median by crests redrawn; small marks: quarters",
        numbers::count(shift.crests),
        numbers::count(shift.matched),
        numbers::percent(shift.share),
    );
    y += verdict_words(sketch, &headline, &caption, y, width_mm, theme);
    y
}

/// `"14.0 m (9.10 to 18.7)"`; intervals may pass 0.
fn length_between(value: f64, [low, high]: [f64; 2], per: f64, symbol: &str) -> String {
    let figure = |v: f64| numbers::significant(v / per, 3);
    format!("{} {symbol} ({} to {})", figure(value), figure(low), figure(high))
}
