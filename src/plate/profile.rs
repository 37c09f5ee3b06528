//! Power above the background against wavelength, along the crest-normal direction: the peak with
//! the interval of the spacing.

use crate::ground::{LengthUnit, Point};
use crate::study::SpectrumFinding;

use super::sketch::{Sketch, Type};
use super::{Figure, Item, TextAnchor, Theme, font, numbers};

/// Room for the ticks of power and their title, millimetres.
const LEFT_MM: f64 = 10.4;

/// A logarithmic axis from `min` to `max` laid between two places on the page.
#[derive(Clone, Copy, Debug, PartialEq)]
struct LogAxis {
    min: f64,
    max: f64,
    from_mm: f64,
    to_mm: f64,
}

impl LogAxis {
    fn at(&self, value: f64) -> f64 {
        let share = (value / self.min).ln() / (self.max / self.min).ln();
        self.from_mm + share * (self.to_mm - self.from_mm)
    }

    /// 1, 2 and 5 of each decade inside; only 1 where there would be more than `most`.
    fn ticks(&self, most: usize) -> Vec<f64> {
        let decades = self.min.log10().floor() as i32..=self.max.log10().ceil() as i32;
        let with = |steps: &[f64]| -> Vec<f64> {
            decades
                .clone()
                .flat_map(|d| steps.iter().map(move |s| s * 10f64.powi(d)))
                .filter(|v| *v >= self.min * (1.0 - 1e-9) && *v <= self.max * (1.0 + 1e-9))
                .collect()
        };
        let all = with(&[1.0, 2.0, 5.0]);
        if all.len() > most { with(&[1.0]) } else { all }
    }
}

/// The profile: `width_mm` wide, 0.62 as high. Wavelengths of the finding are in `unit`. Without
/// data, a figure of no height.
pub fn profile(finding: &SpectrumFinding, unit: LengthUnit, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let points = clean(&finding.profile);
    let (Some(first), Some(last)) = (points.first(), points.last()) else {
        return sketch.finish(width_mm, 0.0);
    };
    if last[0] <= first[0] {
        return sketch.finish(width_mm, 0.0);
    }
    let height = 0.62 * width_mm;
    let (left, right, top, bottom) = (LEFT_MM, width_mm - 1.5, 2.4, height - 8.2);
    let highest = points.iter().map(|p| p[1]).fold(0.0, f64::max);
    let x = LogAxis { min: first[0], max: last[0], from_mm: left, to_mm: right };
    let y = LogAxis { min: 0.3, max: (1.4 * highest).max(3.0), from_mm: bottom, to_mm: top };

    band(&mut sketch, finding, &x, [top, bottom], theme);
    axes(&mut sketch, &x, &y, unit, theme);
    let background = y.at(1.0);
    let dashed = theme.dashed(theme.ink_soft, theme.widths.hair);
    sketch.line(Point::new(left, background), Point::new(right, background), dashed);
    let line = points.iter().map(|p| Point::new(x.at(p[0]), y.at(p[1].max(y.min)))).collect();
    let mut inside = Sketch::default();
    inside.polyline(line, theme.stroke(theme.ink, theme.widths.line));
    let (min, max) = (Point::new(left, top), Point::new(right, bottom));
    sketch.items.push(Item::Clip { min, max, items: inside.items });
    sketch.finish(width_mm, height)
}

/// Finite, positive, in order of wavelength.
fn clean(profile: &[[f64; 2]]) -> Vec<[f64; 2]> {
    let usable = |p: &&[f64; 2]| p.iter().all(|v| v.is_finite() && *v > 0.0);
    let mut points: Vec<[f64; 2]> = profile.iter().filter(usable).copied().collect();
    points.sort_by(|a, b| a[0].total_cmp(&b[0]));
    points
}

/// The spacing as a line, its interval as a band.
fn band(sketch: &mut Sketch, finding: &SpectrumFinding, x: &LogAxis, rows: [f64; 2], theme: &Theme) {
    let Some(spacing) = finding.spacing.filter(|s| finding.defined && (x.min..=x.max).contains(s)) else {
        return;
    };
    let [top, bottom] = rows;
    let clamp = |v: f64| x.at(v.clamp(x.min, x.max));
    if let Some([low, high]) = finding.spacing_ci95 {
        let (min, max) = (Point::new(clamp(low), top), Point::new(clamp(high), bottom));
        sketch.rectangle(min, max, Some(theme.tint(theme.measured, 0.22)), None);
    }
    let at = clamp(spacing);
    let stroke = theme.stroke(theme.measured, theme.widths.line);
    sketch.line(Point::new(at, top), Point::new(at, bottom), stroke);
}

fn axes(sketch: &mut Sketch, x: &LogAxis, y: &LogAxis, unit: LengthUnit, theme: &Theme) {
    let rule = theme.stroke(theme.ink_soft, theme.widths.thin);
    let (left, bottom) = (x.from_mm, y.from_mm);
    sketch.line(Point::new(left, bottom), Point::new(x.to_mm, bottom), rule);
    sketch.line(Point::new(left, bottom), Point::new(left, y.to_mm), rule);
    let look = Type::new(theme.text.small, theme.ink_soft);
    let kilometres = unit == LengthUnit::Metre && x.max >= 10_000.0;
    let (scale, symbol) = if kilometres { (1000.0, "km") } else { (1.0, unit.symbol()) };
    let mut free = f64::NEG_INFINITY;
    for tick in x.ticks(9) {
        let at = x.at(tick);
        sketch.line(Point::new(at, bottom), Point::new(at, bottom + 0.9), rule);
        let label = numbers::plain(tick / scale, 3);
        let half = 0.5 * font::text_width(&label, look.size_mm, false);
        if at - half > free {
            let base = bottom + 1.3 + look.size_mm;
            sketch.text(Point::new(at, base), label, look.anchored(TextAnchor::Middle));
            free = at + half + 1.0;
        }
    }
    for tick in y.ticks(6) {
        let at = y.at(tick);
        sketch.line(Point::new(left - 0.9, at), Point::new(left, at), rule);
        let base = at + 0.5 * font::CAP_HEIGHT * look.size_mm;
        let label = numbers::plain(tick, 1);
        sketch.text(Point::new(left - 1.4, base), label, look.anchored(TextAnchor::End));
    }
    let middle = Point::new(0.5 * (left + x.to_mm), bottom + 2.2 + 2.2 * look.size_mm);
    sketch.text(middle, format!("wavelength, {symbol}"), look.anchored(TextAnchor::Middle));
    let side = Point::new(look.size_mm, 0.5 * (bottom + y.to_mm));
    sketch.turned_text(side, "power / background", look.anchored(TextAnchor::Middle), -90.0);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn decades_are_equally_long() {
        let axis = LogAxis { min: 1.0, max: 1000.0, from_mm: 0.0, to_mm: 30.0 };
        assert_close!(axis.at(10.0), 10.0, 1e-12);
        assert_close!(axis.at(100.0), 20.0, 1e-12);
        assert_eq!(axis.ticks(20).len(), 10);
        assert_eq!(axis.ticks(5), [1.0, 10.0, 100.0, 1000.0]);
    }

    #[test]
    fn the_spacing_is_marked_where_it_is() {
        let theme = Theme::print();
        let finding = SpectrumFinding {
            profile: vec![[1000.0, 0.8], [100.0, 1.0], [400.0, 20.0], [f64::NAN, 1.0], [50.0, -1.0]],
            ..super::super::spectrum::tests::finding()
        };
        let figure = profile(&finding, LengthUnit::Metre, 60.0, &theme);
        let mark = figure.items.iter().find_map(|item| match item {
            Item::Path { points, stroke: Some(s), .. } if s.color == theme.measured => Some(points[0].x),
            _ => None,
        });
        let share = 4f64.ln() / 10f64.ln();
        assert_close!(mark.expect("a line at the spacing"), LEFT_MM + share * (58.5 - LEFT_MM), 1e-9);
    }

    #[test]
    fn no_data_takes_no_room() {
        let figure = profile(&SpectrumFinding::default(), LengthUnit::Pixel, 60.0, &Theme::light());
        assert_eq!((figure.height_mm, figure.items.len()), (0.0, 0));
    }
}
