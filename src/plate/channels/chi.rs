//! Elevation against χ with its line, and how well each concavity gathers the channels on one line.

use crate::ground::Point;
use crate::science::network::profile::{ChiFit, Profile, ProfileStation};
use crate::study::NetworkFinding;

use super::super::chart::{Chart, Span};
use super::super::sketch::Sketch;
use super::super::{Figure, Theme, numbers};
use super::{SHAPE, verdict_words, with_interval, words_only};

/// z against χ, and beneath it the scatter against θ.
pub fn chi_plot(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some(fit) = &finding.chi else {
        return words_only(
            "No χ plot: it needs elevations and contributing areas along several channels.",
            width_mm,
            theme,
        );
    };
    let stations = || finding.profiles.iter().flat_map(|p| &p.stations);
    let spans =
        Span::from_zero(stations().map(|s| s.chi)).zip(Span::linear(stations().map(|s| s.elevation_m)));
    let Some((x, y)) = spans else {
        return words_only("No χ plot: no channel rises above its outlet.", width_mm, theme);
    };
    let mut sketch = Sketch::default();
    let height = SHAPE * width_mm;
    let chart = Chart::new(x, y, Point::default(), [width_mm, height]);
    channels(&mut sketch, &finding.profiles, fit, &chart, theme);
    chart.axes(&mut sketch, "χ, m (A₀ = 1 m²)", "elevation, m", theme);
    let mut y = height + 0.8;
    y += scatter(&mut sketch, fit, y, width_mm, theme);
    y += verdict_words(&mut sketch, &headline(fit), &caption(fit), y, width_mm, theme);
    sketch.finish(width_mm, y)
}

fn headline(fit: &ChiFit) -> String {
    if fit.found {
        format!("concavity θ {}", with_interval(fit.theta, fit.theta_range, 2))
    } else {
        format!("concavity θ {}, as stated", numbers::fixed(fit.theta, 2))
    }
}

fn caption(fit: &ChiFit) -> String {
    let slope = match fit.slope_ci95 {
        Some([low, high]) => format!(
            "{} ({} to {})",
            numbers::significant(fit.slope, 3),
            numbers::significant(low, 3),
            numbers::significant(high, 3)
        ),
        None => numbers::significant(fit.slope, 3),
    };
    let range = if fit.found && fit.theta_range.is_some() {
        "\nrange: concavities that gather the channels as well"
    } else {
        ""
    };
    format!("elevation on χ {slope} · r² {}{range}", numbers::fixed(fit.r2, 3))
}

/// Channels as lines in χ with the fitted line through their centre.
fn channels(sketch: &mut Sketch, profiles: &[Profile], fit: &ChiFit, chart: &Chart, theme: &Theme) {
    let mut inside = Sketch::default();
    let line = |p: &Profile| p.stations.iter().map(|s| [s.chi, s.elevation_m]).collect::<Vec<_>>();
    let thin = theme.stroke(theme.tint(theme.water, 0.55), theme.widths.thin);
    for profile in profiles.iter().filter(|p| !p.is_trunk) {
        chart.curve(&mut inside, line(profile), thin);
    }
    for profile in profiles.iter().filter(|p| p.is_trunk) {
        chart.curve(&mut inside, line(profile), theme.stroke(theme.water, 1.8 * theme.widths.line));
    }
    let points = || {
        let usable = |s: &&ProfileStation| s.chi.is_finite() && s.elevation_m.is_finite();
        profiles.iter().flat_map(|p| &p.stations).filter(usable)
    };
    let n = points().count() as f64;
    if n > 0.0 && fit.slope.is_finite() {
        let (chi, z) = points().fold((0.0, 0.0), |(c, z), s| (c + s.chi / n, z + s.elevation_m / n));
        let ends = [chart.x.span.min, chart.x.span.max].map(|c| [c, z + fit.slope * (c - chi)]);
        chart.curve(&mut inside, ends, theme.stroke(theme.measured, theme.widths.line));
    }
    chart.clipped(sketch, inside);
}

/// Distance from one line against θ, the concavity used and its range; returns the height used.
fn scatter(sketch: &mut Sketch, fit: &ChiFit, top: f64, width_mm: f64, theme: &Theme) -> f64 {
    let spans =
        Span::linear(fit.scatter.iter().map(|p| p[0])).zip(Span::from_zero(fit.scatter.iter().map(|p| p[1])));
    let Some((x, y)) = spans else { return 0.0 };
    let height = 0.44 * width_mm;
    let chart = Chart::new(Span { min: x.min.max(0.0), ..x }, y, Point::new(0.0, top), [width_mm, height]);
    let (min, max) = chart.corners();
    let mut inside = Sketch::default();
    if let Some([from, to]) = fit.theta_range.filter(|_| fit.found) {
        let (a, b) = (Point::new(chart.x.at(from), min.y), Point::new(chart.x.at(to), max.y));
        inside.rectangle(a, b, Some(theme.tint(theme.measured, 0.22)), None);
    }
    let at = chart.x.at(fit.theta);
    let stroke = theme.stroke(theme.measured, theme.widths.line);
    inside.line(Point::new(at, min.y), Point::new(at, max.y), stroke);
    chart.curve(&mut inside, fit.scatter.iter().copied(), theme.stroke(theme.ink, theme.widths.line));
    chart.clipped(sketch, inside);
    chart.axes(sketch, "concavity θ", "scatter, m", theme);
    height + 0.6
}
