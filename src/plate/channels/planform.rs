//! A channel in plan over the line its valley takes, and its width along the way.

use crate::ground::{Bounds, LengthUnit, Point};
use crate::science::network::planform::{Meander, Planform};
use crate::study::NetworkFinding;

use super::super::chart::{Chart, FINEST_MM, Span, simplified};
use super::super::sketch::Sketch;
use super::super::{Figure, Item, Theme, numbers};
use super::lines::{length_bar, pixel_shape};
use super::{SHAPE, length_ruler, table, verdict_words, words_only};

/// The first channel that was measured (the trunk when it could be), turned so that it runs from left to right.
pub fn planform_sketch(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some((planform, line)) =
        finding.planforms.iter().map(|p| (p, channel(finding, p))).find(|(_, line)| line.len() > 1)
    else {
        return words_only(
            "No planform: no channel is long enough to part bends from valley.",
            width_mm,
            theme,
        );
    };
    let shape = pixel_shape(&finding.network);
    let turned = Turned::along(&line, shape);
    let (line, valley) = (turned.all(&line), turned.all(&planform.valley.0));
    let Some(bounds) = Bounds::of(line.iter().chain(&valley).copied()) else {
        return words_only("No planform: the channel has no extent.", width_mm, theme);
    };
    let mut sketch = Sketch::default();
    let pad = 1.6;
    let room = [width_mm - 2.0 * pad, 0.75 * width_mm];
    let per = (room[0] / bounds.width().max(1e-9)).min(room[1] / bounds.height().max(1e-9));
    let height = per * bounds.height() + 2.0 * pad;
    let left = 0.5 * (width_mm - per * bounds.width());
    let page = |p: &Point| Point::new(left + per * (p.x - bounds.min.x), pad + per * (p.y - bounds.min.y));
    let (min, max) = (Point::default(), Point::new(width_mm, height));
    sketch.rectangle(min, max, Some(theme.panel), Some(theme.stroke(theme.rule, theme.widths.thin)));
    let mut inside = Sketch::default();
    let valley: Vec<Point> = valley.iter().map(page).collect();
    inside.polyline(simplified(&valley, FINEST_MM), theme.stroke(theme.tint(theme.measured, 0.3), 1.5));
    let line: Vec<Point> = line.iter().map(page).collect();
    inside.polyline(simplified(&line, FINEST_MM), theme.stroke(theme.water, 1.5 * theme.widths.line));
    inside.circle(line[0], 0.7, Some(theme.panel), Some(theme.stroke(theme.water, theme.widths.line)));
    sketch.items.push(Item::Clip { min, max, items: inside.items });
    let mut y = height + 2.2;
    length_bar(&mut sketch, per, finding.unit, Point::new(0.0, y), 0.3 * width_mm, theme);
    y += 1.6;
    let headline = format!("sinuosity {}", numbers::fixed(planform.sinuosity, 2));
    y += verdict_words(&mut sketch, &headline, &caption(planform, finding.unit), y, width_mm, theme) + 0.8;
    y += table(&mut sketch, &measures(planform, finding.unit), y, width_mm, theme);
    sketch.finish(width_mm, y)
}

/// Points of the channel, downstream.
fn channel(finding: &NetworkFinding, planform: &Planform) -> Vec<Point> {
    let reaches = planform.reaches.iter().filter_map(|r| finding.network.reaches.get(*r));
    let mut line: Vec<Point> = Vec::new();
    for reach in reaches {
        let again = usize::from(line.last() == reach.line.0.first() && !line.is_empty());
        line.extend(reach.line.0.iter().skip(again));
    }
    line
}

/// Pixels to ground lengths with the channel's ends on a level line.
struct Turned {
    shape: [f64; 2],
    cos: f64,
    sin: f64,
}

impl Turned {
    fn along(line: &[Point], [sx, sy]: [f64; 2]) -> Self {
        let (a, b) = (line[0], line[line.len() - 1]);
        let (dx, dy) = (sx * (b.x - a.x), sy * (b.y - a.y));
        let length = dx.hypot(dy);
        let (cos, sin) = if length > 0.0 { (dx / length, dy / length) } else { (1.0, 0.0) };
        Self { shape: [sx, sy], cos, sin }
    }

    fn all(&self, points: &[Point]) -> Vec<Point> {
        let [sx, sy] = self.shape;
        let turn = |p: &Point| {
            let (x, y) = (sx * p.x, sy * p.y);
            Point::new(self.cos * x + self.sin * y, self.cos * y - self.sin * x)
        };
        points.iter().filter(|p| p.x.is_finite() && p.y.is_finite()).map(turn).collect()
    }
}

fn caption(p: &Planform, unit: LengthUnit) -> String {
    format!(
        "{} of channel over {} of valley line (pale), smoothed over {}\nturned to run from left (ring: upper end) to right",
        numbers::length(p.length, unit, 3),
        numbers::length(p.valley_length, unit, 3),
        numbers::length(p.valley_scale, unit, 2),
    )
}

fn measures(p: &Planform, unit: LengthUnit) -> Vec<(String, String)> {
    let mut rows = Vec::new();
    let scales: Vec<String> = p
        .sinuosity_by_scale
        .iter()
        .map(|[scale, s]| format!("{} ({})", numbers::fixed(*s, 2), numbers::length(*scale, unit, 2)))
        .collect();
    if !scales.is_empty() {
        rows.push(("sinuosity by valley scale".to_owned(), scales.join(", ")));
    }
    let meander = |m: &Meander| {
        format!(
            "{}, amplitude {}",
            numbers::length_with_interval(m.wavelength, m.ci95, unit),
            numbers::length(m.amplitude, unit, 2)
        )
    };
    let wave = |m: &Option<Meander>| m.as_ref().map_or("none stands out".to_owned(), meander);
    rows.push(("wavelength by spectrum".to_owned(), wave(&p.wavelength_spectrum)));
    rows.push(("wavelength by inflections".to_owned(), wave(&p.wavelength_inflections)));
    rows.push(("bends".to_owned(), p.bends.to_string()));
    if let Some([lower, middle, upper]) = p.radius {
        let text = format!(
            "{} (middle half {}–{})",
            numbers::length(middle, unit, 2),
            numbers::significant(lower, 2),
            numbers::significant(upper, 2)
        );
        rows.push(("radius of curvature".to_owned(), text));
    }
    if let Some(widths) = p.wavelength_widths {
        rows.push((
            "wavelength in widths".to_owned(),
            format!("{}; near 11 in free meanders", numbers::significant(widths, 2)),
        ));
    }
    rows
}

/// Width against distance along the first channel that has one, with mean, interval and middle half.
pub fn width_plot(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let found = finding.planforms.iter().find_map(|p| p.width.as_ref());
    let spans = found.and_then(|w| {
        let x = Span::from_zero(w.along.iter().map(|p| p[0]))?;
        Some((w, x, Span::from_zero(w.along.iter().map(|p| p[1]))?))
    });
    let Some((widths, x, y)) = spans else {
        return words_only("No widths: the banks of no channel were measured.", width_mm, theme);
    };
    let (per, symbol) = length_ruler(x.max, finding.unit);
    let height = SHAPE * width_mm;
    let chart = Chart::new(x.per(per), y, Point::default(), [width_mm, height]);
    let mut sketch = Sketch::default();
    let mut inside = Sketch::default();
    let (min, max) = chart.corners();
    let mut band = |low: f64, high: f64, fill| {
        let (a, b) = (Point::new(min.x, chart.y.at(high)), Point::new(max.x, chart.y.at(low)));
        inside.rectangle(a, b, Some(fill), None);
    };
    band(widths.quartiles[0], widths.quartiles[2], theme.panel);
    if let Some([low, high]) = widths.mean_ci95 {
        band(low, high, theme.tint(theme.measured, 0.22));
    }
    chart.curve(&mut inside, widths.along.iter().copied(), theme.stroke(theme.water, theme.widths.line));
    let mean = chart.y.at(widths.mean);
    inside.line(
        Point::new(min.x, mean),
        Point::new(max.x, mean),
        theme.stroke(theme.measured, theme.widths.line),
    );
    chart.clipped(&mut sketch, inside);
    let y_title = format!("width, {}", finding.unit.symbol());
    chart.axes(&mut sketch, &format!("distance from the head, {symbol}"), &y_title, theme);
    let headline =
        format!("mean width {}", numbers::length_with_interval(widths.mean, widths.mean_ci95, finding.unit));
    let [low, middle, high] = widths.quartiles.map(|v| numbers::significant(v, 3));
    let caption = format!(
        "median {middle}, middle half {low}–{high} (shaded)\n{} places, effective n {}",
        widths.n,
        numbers::significant(widths.n_eff, 3)
    );
    let y = height + 0.6;
    let used = verdict_words(&mut sketch, &headline, &caption, y, width_mm, theme);
    sketch.finish(width_mm, y + used)
}
