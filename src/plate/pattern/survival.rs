//! A curve of lengths of which the border cut some, and single readings of the same length beneath it on one axis.

use crate::ground::{LengthUnit, Point};
use crate::science::crest::Survival;

use super::super::chart::{Chart, Ruler, Span};
use super::super::sketch::{Sketch, Type};
use super::super::words::length_ruler;
use super::super::{Rgba, TextAnchor, Theme, font};

/// A reading of the same length by another way.
#[derive(Clone, Copy, Debug)]
pub(super) struct Reading {
    pub name: &'static str,
    pub value: f64,
    pub interval: Option<[f64; 2]>,
    pub sign: Sign,
}

/// How a reading is marked; each is told from the others without colour.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Sign {
    /// What the curve itself says: a filled circle.
    Own,
    Square,
    Diamond,
    /// What would be said if nothing had been cut: a faint ring on a dashed line.
    Faint,
}

/// Height of the curve's ground over its width, and of one lane of readings.
const SHAPE: f64 = 0.62;
const LANE_MM: f64 = 3.3;
const LEFT_MM: f64 = 11.0;
const RIGHT_MM: f64 = 1.6;
const TOP_MM: f64 = 1.6;
/// Below this share the tail of the curve is left off.
const TAIL: f64 = 0.03;
/// Cuts closer than this are one mark, millimetres.
const CUT_PITCH_MM: f64 = 0.5;

/// The curve with its quarters and cuts, the readings in lanes beneath; returns the height used.
#[allow(clippy::too_many_arguments)]
pub(super) fn draw(
    sketch: &mut Sketch,
    survival: &Survival,
    quantiles: [Option<f64>; 3],
    readings: &[Reading],
    titles: [&str; 2],
    unit: LengthUnit,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let greatest = reach(survival, readings);
    let (per, symbol) = length_ruler(greatest, unit);
    let (left, right) = (LEFT_MM, width_mm - RIGHT_MM);
    let bottom = TOP_MM + SHAPE * (right - left);
    let foot = bottom + 0.8 + LANE_MM * readings.len() as f64;
    let x = Ruler { span: Span::between(0.0, greatest).per(per), from_mm: left, to_mm: right };
    let y = Ruler { span: Span::between(0.0, 1.0), from_mm: bottom, to_mm: TOP_MM };
    let chart = Chart { x, y };
    let middle = |lane: usize| bottom + 0.8 + LANE_MM * (lane as f64 + 0.5);
    for (i, reading) in readings.iter().enumerate() {
        let at = x.at(reading.value);
        let thin = theme.widths.thin;
        let line = match reading.sign {
            Sign::Faint => theme.dashed(theme.rule, thin),
            sign => theme.stroke(color(sign, theme), thin),
        };
        sketch.line(Point::new(at, TOP_MM), Point::new(at, middle(i)), line);
    }
    curve(sketch, &chart, survival, theme);
    for (share, quantile) in [0.75, 0.5, 0.25].into_iter().zip(quantiles) {
        let Some(at) = quantile.map(|q| chart.at(q, share)).filter(|p| p.x <= right) else { continue };
        let guide = theme.stroke(theme.ink_soft, theme.widths.hair);
        sketch.line(Point::new(left, at.y), at, guide);
        sketch.circle(at, 0.6, Some(theme.paper), Some(theme.stroke(theme.measured, theme.widths.line)));
    }
    let shares = [0.0, 0.25, 0.5, 0.75, 1.0].map(|s| (s, format!("{:.0}", 100.0 * s)));
    chart.bare_axes(sketch, "", titles[1], &[], &shares, theme);
    for (i, reading) in readings.iter().enumerate() {
        let crossed: Vec<f64> = readings[i + 1..].iter().map(|r| x.at(r.value)).collect();
        lane(sketch, reading, &x, middle(i), &crossed, theme);
    }
    // The foot of the lanes carries the ruler.
    let lanes = Chart { x, y: Ruler { span: Span::between(0.0, 1.0), from_mm: foot, to_mm: bottom } };
    let title = format!("{}, {symbol}", titles[0]);
    lanes.bare_axes(sketch, &title, "", &x.ticks(9.0), &[], theme);
    foot + 2.4 + 2.6 * theme.text.small
}

/// How far the ruler goes: over all readings, and so far that the curve has come down, but not over a long tail.
fn reach(survival: &Survival, readings: &[Reading]) -> f64 {
    let told = readings.iter().map(|r| r.interval.map_or(r.value, |i| i[1].max(r.value))).fold(0.0, f64::max);
    let down = survival.quantile(1.0 - TAIL).unwrap_or(survival.longest);
    let most = survival.quantile(0.5).map_or(f64::INFINITY, |median| 5.0 * median);
    let greatest = down.min(most).min(survival.longest).max(told);
    if greatest > 0.0 && greatest.is_finite() { 1.12 * greatest } else { 1.0 }
}

fn curve(sketch: &mut Sketch, chart: &Chart, survival: &Survival, theme: &Theme) {
    let mut corners = vec![[0.0, 1.0]];
    let mut level = 1.0;
    for (t, s) in &survival.steps {
        corners.extend([[*t, level], [*t, *s]]);
        level = *s;
    }
    corners.push([survival.longest, level]);
    let mut inside = Sketch::default();
    chart.curve(&mut inside, corners, theme.stroke(theme.measured, theme.widths.line));
    chart.clipped(sketch, inside);
    // Cuts and steps both ascend.
    let (mut steps, mut level) = (survival.steps.iter().peekable(), 1.0);
    let mut free = f64::NEG_INFINITY;
    for cut in &survival.cuts {
        while let Some((_, s)) = steps.next_if(|(t, _)| t <= cut) {
            level = *s;
        }
        let at = chart.at(*cut, level);
        if at.x < free || at.x > chart.x.to_mm {
            continue;
        }
        free = at.x + CUT_PITCH_MM;
        let stroke = theme.stroke(theme.measured, theme.widths.thin);
        sketch.line(Point::new(at.x, at.y - 0.75), Point::new(at.x, at.y + 0.75), stroke);
    }
}

fn color(sign: Sign, theme: &Theme) -> Rgba {
    match sign {
        Sign::Own => theme.measured,
        Sign::Square | Sign::Diamond => theme.ink,
        Sign::Faint => theme.ink_soft,
    }
}

/// The mark with its interval, and its name on the side where there is room and fewer lines run to lanes below.
fn lane(sketch: &mut Sketch, reading: &Reading, x: &Ruler, middle: f64, crossed: &[f64], theme: &Theme) {
    let at = Point::new(x.at(reading.value), middle);
    let ink = color(reading.sign, theme);
    let (mut low, mut high) = (at.x, at.x);
    if let Some(interval) = reading.interval {
        [low, high] = interval.map(|v| x.at(v).clamp(x.from_mm, x.to_mm));
        sketch.line(Point::new(low, middle), Point::new(high, middle), theme.stroke(ink, theme.widths.line));
        for end in [low, high] {
            let stroke = theme.stroke(ink, theme.widths.thin);
            sketch.line(Point::new(end, middle - 0.6), Point::new(end, middle + 0.6), stroke);
        }
        (low, high) = (low.min(at.x), high.max(at.x));
    }
    let corners = |list: [(f64, f64); 4]| list.map(|(dx, dy)| Point::new(at.x + dx, at.y + dy)).to_vec();
    match reading.sign {
        Sign::Own => sketch.circle(at, 0.8, Some(ink), None),
        Sign::Square => {
            let square = corners([(-0.7, -0.7), (0.7, -0.7), (0.7, 0.7), (-0.7, 0.7)]);
            sketch.polygon(square, Some(ink), None);
        }
        Sign::Diamond => {
            let diamond = corners([(0.0, -1.0), (1.0, 0.0), (0.0, 1.0), (-1.0, 0.0)]);
            sketch.polygon(diamond, Some(ink), None);
        }
        Sign::Faint => {
            let edge = theme.stroke(ink, theme.widths.thin);
            sketch.circle(at, 0.75, Some(theme.paper), Some(edge));
        }
    }
    let size = theme.text.small;
    let base = middle + 0.5 * font::CAP_HEIGHT * size;
    let width = font::text_width(reading.name, size, false);
    let text_color = if reading.sign == Sign::Faint { theme.ink_soft } else { theme.ink };
    let look = Type::new(size, text_color).haloed(theme.paper);
    let (to_right, to_left) = (x.to_mm - high - 1.8, low - 1.8 - x.from_mm);
    let lines = |from: f64| crossed.iter().filter(|at| (from..from + width).contains(*at)).count();
    let on_right = match (to_right >= width, to_left >= width) {
        (true, true) => lines(high + 1.8) <= lines(low - 1.8 - width),
        (true, false) => true,
        (false, true) => false,
        (false, false) => to_right >= to_left,
    };
    if on_right {
        let name = font::shortened(reading.name, size, false, to_right.max(4.0));
        sketch.text(Point::new(high + 1.8, base), name, look);
    } else {
        let name = font::shortened(reading.name, size, false, to_left.max(4.0));
        sketch.text(Point::new(low - 1.8, base), name, look.anchored(TextAnchor::End));
    }
}
