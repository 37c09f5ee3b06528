//! A frame with two rulers, linear or logarithmic, for plots of one quantity against another.

use crate::ground::Point;

use super::sketch::{Sketch, Type};
use super::{Item, Rgba, Stroke, TextAnchor, Theme, font, numbers};

/// Lines and marks closer than this are one in print, millimetres.
pub(super) const FINEST_MM: f64 = 0.04;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Scale {
    Linear,
    Logarithmic,
}

/// What a ruler reads: from `min` to `max`, printed after division by `per`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Span {
    pub scale: Scale,
    pub min: f64,
    pub max: f64,
    pub per: f64,
}

impl Span {
    /// The values and a twentieth more on either side; `None` without two different finite values.
    pub fn linear(values: impl IntoIterator<Item = f64>) -> Option<Self> {
        let (min, max) = limits(values.into_iter().filter(|v| v.is_finite()))?;
        let pad = 0.05 * (max - min);
        (max > min).then_some(Self { scale: Scale::Linear, min: min - pad, max: max + pad, per: 1.0 })
    }

    /// From 0 to a little above the greatest value; `None` when none is above 0.
    pub fn from_zero(values: impl IntoIterator<Item = f64>) -> Option<Self> {
        let (_, max) = limits(values.into_iter().filter(|v| v.is_finite()))?;
        (max > 0.0).then_some(Self { scale: Scale::Linear, min: 0.0, max: 1.03 * max, per: 1.0 })
    }

    /// The positive values with a little room; a single value gets half a decade on either side.
    pub fn logarithmic(values: impl IntoIterator<Item = f64>) -> Option<Self> {
        let (min, max) = limits(values.into_iter().filter(|v| v.is_finite() && *v > 0.0))?;
        let pad = if max > min { (max / min).powf(0.06).max(1.05) } else { 10f64.sqrt() };
        Some(Self { scale: Scale::Logarithmic, min: min / pad, max: max * pad, per: 1.0 })
    }

    pub fn between(min: f64, max: f64) -> Self {
        Self { scale: Scale::Linear, min, max, per: 1.0 }
    }

    /// Printed in thousands: metres as kilometres.
    pub fn per(self, per: f64) -> Self {
        Self { per, ..self }
    }
}

fn limits(values: impl Iterator<Item = f64>) -> Option<(f64, f64)> {
    let (min, max) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)));
    (min <= max).then_some((min, max))
}

/// A span laid between two places on the page.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Ruler {
    pub span: Span,
    pub from_mm: f64,
    pub to_mm: f64,
}

impl Ruler {
    pub fn at(&self, value: f64) -> f64 {
        let Span { scale, min, max, .. } = self.span;
        let share = match scale {
            Scale::Linear => (value - min) / (max - min),
            Scale::Logarithmic => (value.max(min * 1e-3) / min).ln() / (max / min).ln(),
        };
        self.from_mm + share * (self.to_mm - self.from_mm)
    }

    /// Round values about `apart_mm` from one another, each with its label.
    pub fn ticks(&self, apart_mm: f64) -> Vec<(f64, String)> {
        let most = ((self.to_mm - self.from_mm).abs() / apart_mm).max(2.0);
        let Span { scale, min, max, per } = self.span;
        match scale {
            Scale::Linear => linear_ticks(min / per, max / per, most),
            Scale::Logarithmic => log_ticks(min / per, max / per, most),
        }
        .into_iter()
        .map(|(value, label)| (value * per, label))
        .collect()
    }
}

fn linear_ticks(min: f64, max: f64, most: f64) -> Vec<(f64, String)> {
    let least = (max - min) / most;
    let decade = 10f64.powf(least.log10().floor());
    let step =
        [1.0, 2.0, 5.0, 10.0].into_iter().find(|s| s * decade >= least * 0.999).unwrap_or(10.0) * decade;
    if !(step > 0.0 && step.is_finite()) {
        return Vec::new();
    }
    let decimals = (-step.log10() - 1e-9).ceil().clamp(0.0, 9.0) as usize;
    let (first, last) = ((min / step - 1e-9).ceil() as i64, (max / step + 1e-9).floor() as i64);
    (first..=last)
        .map(|k| k as f64 * step)
        .map(|v| {
            let large = v.abs() >= 10_000.0;
            (v, if large { numbers::significant(v, 5) } else { numbers::fixed(v, decimals) })
        })
        .collect()
}

/// 1, 2 and 5 of each decade, or 1 and 3, or 1 only, or every second, third … decade, so that `most` is not passed by
/// much.
fn log_ticks(min: f64, max: f64, most: f64) -> Vec<(f64, String)> {
    let (low, high) = (min.log10().floor() as i32, max.log10().ceil() as i32);
    let fits = |v: &f64| *v >= min * (1.0 - 1e-9) && *v <= max * (1.0 + 1e-9);
    let with = |steps: &[f64], every: i32| -> Vec<f64> {
        (low..=high)
            .filter(|d| d.rem_euclid(every) == 0)
            .flat_map(|d| steps.iter().map(move |s| s * 10f64.powi(d)).collect::<Vec<_>>())
            .filter(|v| fits(v))
            .collect()
    };
    let enough = |ticks: &Vec<f64>| ticks.len() as f64 <= most + 1.5;
    let fine = [&[1.0, 2.0, 5.0][..], &[1.0, 3.0]].map(|steps| with(steps, 1));
    let coarse = (1..60).map(|every| with(&[1.0], every));
    let ticks = fine.into_iter().chain(coarse).find(enough).unwrap_or_default();
    // Powers of ten in figures while they are short.
    let short = ticks.iter().all(|v| (0.000_99..10_001.0).contains(v));
    ticks.into_iter().map(|v| (v, if short { numbers::plain(v, 4) } else { power_of_ten(v) })).collect()
}

/// `"10⁵"`, `"2·10⁵"`.
pub(super) fn power_of_ten(value: f64) -> String {
    let exponent = (value.log10() + 1e-9).floor();
    let mantissa = (value / 10f64.powf(exponent)).round();
    let power = format!("10{}", raised(exponent as i32));
    if mantissa == 1.0 { power } else { format!("{mantissa:.0}·{power}") }
}

/// An exponent in raised figures.
pub(super) fn raised(exponent: i32) -> String {
    const FIGURES: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    // The typeface has no raised minus; its macron stands as high.
    let figure = |c: char| c.to_digit(10).map_or('¯', |d| FIGURES[d as usize]);
    exponent.to_string().chars().map(figure).collect()
}

/// A plot's frame.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Chart {
    pub x: Ruler,
    pub y: Ruler,
}

/// Room for the labels and the title of a ruler, millimetres.
const LEFT_MM: f64 = 11.0;
const BELOW_MM: f64 = 8.2;
const ABOVE_MM: f64 = 1.6;
const RIGHT_MM: f64 = 1.6;

impl Chart {
    /// A chart of `size_mm` (its labels and titles within) whose upper left corner is `at`.
    pub fn new(x: Span, y: Span, at: Point, size_mm: [f64; 2]) -> Self {
        let (left, right) = (at.x + LEFT_MM, at.x + size_mm[0] - RIGHT_MM);
        let (top, bottom) = (at.y + ABOVE_MM, at.y + size_mm[1] - BELOW_MM);
        Self {
            x: Ruler { span: x, from_mm: left, to_mm: right },
            y: Ruler { span: y, from_mm: bottom, to_mm: top },
        }
    }

    pub fn at(&self, x: f64, y: f64) -> Point {
        Point::new(self.x.at(x), self.y.at(y))
    }

    /// Corners of the plotting ground.
    pub fn corners(&self) -> (Point, Point) {
        (Point::new(self.x.from_mm, self.y.to_mm), Point::new(self.x.to_mm, self.y.from_mm))
    }

    /// Rulers with round values and what they read.
    pub fn axes(&self, sketch: &mut Sketch, x_title: &str, y_title: &str, theme: &Theme) {
        self.bare_axes(sketch, x_title, y_title, &self.x.ticks(9.0), &self.y.ticks(5.5), theme);
    }

    /// Rulers with given marks.
    pub fn bare_axes(
        &self,
        sketch: &mut Sketch,
        x_title: &str,
        y_title: &str,
        x_ticks: &[(f64, String)],
        y_ticks: &[(f64, String)],
        theme: &Theme,
    ) {
        let rule = theme.stroke(theme.ink_soft, theme.widths.thin);
        let (top_left, bottom_right) = self.corners();
        let (left, bottom) = (top_left.x, bottom_right.y);
        sketch.line(Point::new(left, bottom), bottom_right, rule);
        sketch.line(Point::new(left, bottom), top_left, rule);
        let look = Type::new(theme.text.small, theme.ink_soft);
        let mut free = f64::NEG_INFINITY;
        for (value, label) in x_ticks {
            let at = self.x.at(*value);
            sketch.line(Point::new(at, bottom), Point::new(at, bottom + 0.9), rule);
            let half = 0.5 * font::text_width(label, look.size_mm, false);
            if at - half > free && at + half < bottom_right.x + RIGHT_MM + 0.4 {
                let base = Point::new(at, bottom + 1.3 + look.size_mm);
                sketch.text(base, label.as_str(), look.anchored(TextAnchor::Middle));
                free = at + half + 1.0;
            }
        }
        for (value, label) in y_ticks {
            let at = self.y.at(*value);
            sketch.line(Point::new(left - 0.9, at), Point::new(left, at), rule);
            let base = Point::new(left - 1.4, at + 0.5 * font::CAP_HEIGHT * look.size_mm);
            sketch.text(base, label.as_str(), look.anchored(TextAnchor::End));
        }
        let middle = Point::new(0.5 * (left + bottom_right.x), bottom + 2.2 + 2.2 * look.size_mm);
        let room = bottom_right.x - left + LEFT_MM;
        let title = font::shortened(x_title, look.size_mm, false, room);
        sketch.text(middle, title, look.anchored(TextAnchor::Middle));
        let side = Point::new(left - LEFT_MM + look.size_mm, 0.5 * (bottom + top_left.y));
        let title = font::shortened(y_title, look.size_mm, false, bottom - top_left.y + 6.0);
        sketch.turned_text(side, title, look.anchored(TextAnchor::Middle), -90.0);
    }

    /// Items that must not leave the plotting ground.
    pub fn clipped(&self, sketch: &mut Sketch, inside: Sketch) {
        let (min, max) = self.corners();
        sketch.items.push(Item::Clip { min, max, items: inside.items });
    }

    /// A line through values, no finer than print shows; broken where a value is missing.
    pub fn curve(&self, sketch: &mut Sketch, points: impl IntoIterator<Item = [f64; 2]>, stroke: Stroke) {
        let mut run: Vec<Point> = Vec::new();
        let flush = |run: &mut Vec<Point>, sketch: &mut Sketch| {
            if run.len() > 1 {
                sketch.polyline(simplified(run, FINEST_MM), stroke);
            }
            run.clear();
        };
        for [x, y] in points {
            if x.is_finite() && y.is_finite() {
                run.push(self.at(x, y));
            } else {
                flush(&mut run, sketch);
            }
        }
        flush(&mut run, sketch);
    }

    /// Small filled dots, one for each place that print can tell apart.
    pub fn dots(
        &self,
        sketch: &mut Sketch,
        points: impl IntoIterator<Item = [f64; 2]>,
        radius_mm: f64,
        fill: Rgba,
    ) {
        let mut taken = std::collections::BTreeSet::new();
        for [x, y] in points {
            let at = self.at(x, y);
            if !(at.x.is_finite() && at.y.is_finite()) {
                continue;
            }
            let cell = ((at.x / (0.5 * radius_mm)).round() as i64, (at.y / (0.5 * radius_mm)).round() as i64);
            if taken.insert(cell) {
                sketch.circle(at, radius_mm, Some(fill), None);
            }
        }
    }
}

/// The line with as few of its points as stay within `tolerance` of it (Douglas & Peucker 1973); its ends are kept.
pub(super) fn simplified(line: &[Point], tolerance: f64) -> Vec<Point> {
    let Some(last) = line.len().checked_sub(1).filter(|n| *n > 1) else { return line.to_vec() };
    let mut kept = vec![false; line.len()];
    (kept[0], kept[last]) = (true, true);
    let mut waiting = vec![(0, last)];
    while let Some((from, to)) = waiting.pop() {
        let off = |i: &usize| segment_distance(line[*i], line[from], line[to]);
        let farthest = (from + 1..to).max_by(|a, b| off(a).total_cmp(&off(b)));
        if let Some(i) = farthest.filter(|i| off(i) > tolerance) {
            kept[i] = true;
            waiting.extend([(from, i), (i, to)]);
        }
    }
    line.iter().zip(kept).filter(|(_, keep)| *keep).map(|(p, _)| *p).collect()
}

fn segment_distance(p: Point, a: Point, b: Point) -> f64 {
    let (dx, dy) = (b.x - a.x, b.y - a.y);
    let square = dx * dx + dy * dy;
    let share =
        if square > 0.0 { (((p.x - a.x) * dx + (p.y - a.y) * dy) / square).clamp(0.0, 1.0) } else { 0.0 };
    p.distance(Point::new(a.x + share * dx, a.y + share * dy))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::plate::font;

    #[test]
    fn ticks_are_round_and_lie_on_the_ruler() {
        let ruler = |span| Ruler { span, from_mm: 0.0, to_mm: 40.0 };
        let labels = |span| -> Vec<String> { ruler(span).ticks(9.0).into_iter().map(|t| t.1).collect() };
        assert_eq!(labels(Span::between(0.0, 41_000.0).per(1000.0)), ["0", "10", "20", "30", "40"]);
        assert_eq!(labels(Span::between(-0.3, 0.3)), ["−0.2", "0.0", "0.2"]);
        let decades = Span { scale: Scale::Logarithmic, min: 1e4, max: 1e9, per: 1.0 };
        assert_eq!(labels(decades), ["10⁴", "10⁶", "10⁸"]);
        assert_close!(ruler(decades).at(1e9), 40.0, 1e-12, "end");
        assert_close!(ruler(decades).at(1e6), 16.0, 1e-12, "two of five decades");
        for text in [power_of_ten(5e-12), power_of_ten(2e34), power_of_ten(6.7e8)] {
            assert!(font::covers(&text), "{text}");
        }
        assert_eq!(power_of_ten(1e-7), "10¯⁷");
    }

    #[test]
    fn odd_values_make_no_ruler_or_a_sound_one() {
        assert_eq!(Span::linear([f64::NAN, 3.0]), None);
        assert_eq!(Span::logarithmic([-1.0, 0.0]), None);
        let single = Span::logarithmic([7.0]).expect("a span");
        assert!(single.min < 7.0 && single.max > 7.0);
        assert!(linear_ticks(1.0, 1.0, 4.0).is_empty());
    }

    #[test]
    fn simplifying_keeps_corners_and_drops_what_lies_on_the_way() {
        let line: Vec<Point> = (0..=1000)
            .map(|i| f64::from(i) / 100.0)
            .map(|t| Point::new(t, if t < 5.0 { t } else { 10.0 - t } + 0.003 * (40.0 * t).sin()))
            .collect();
        let thin = simplified(&line, 0.01);
        assert_eq!((thin[0], *thin.last().expect("points")), (line[0], line[1000]));
        assert!(thin.len() < 6, "{}", thin.len());
        assert!(thin.iter().any(|p| p.distance(Point::new(5.0, 5.0)) < 0.02), "the corner stays");
        assert_eq!(simplified(&line[..1], 0.1).len(), 1);
    }
}
