//! Elevation along the channels, and how much of a basin lies how high.

use crate::ground::{LengthUnit, Point};
use crate::science::network::profile::{Knickpoint, Profile};
use crate::study::NetworkFinding;

use super::super::chart::{Chart, Span};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, font, numbers};
use super::{SHAPE, area, brief, length_ruler, table, verdict_words, words_only};

/// Breaks of steepness that are named at most.
const MOST_NAMED: usize = 5;
/// Breaks marked at most on channels other than the trunk.
const MOST_BESIDE: usize = 12;

/// Elevation against distance from the outlet: the trunk heavy, other channels thin, breaks of steepness marked.
pub fn long_profile(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let stations = || finding.profiles.iter().flat_map(|p| &p.stations);
    let spans = Span::from_zero(stations().map(|s| s.from_outlet_m))
        .zip(Span::linear(stations().map(|s| s.elevation_m)));
    let Some((x, y)) = spans else {
        return words_only("No long profile: no channel has a fall that is known along it.", width_mm, theme);
    };
    let (per, symbol) = length_ruler(x.max, LengthUnit::Metre);
    let height = SHAPE * width_mm;
    let chart = Chart::new(x.per(per), y, Point::default(), [width_mm, height]);
    let mut sketch = Sketch::default();
    let mut inside = Sketch::default();
    let line = |p: &Profile| p.stations.iter().map(|s| [s.from_outlet_m, s.elevation_m]).collect::<Vec<_>>();
    let thin = theme.stroke(theme.tint(theme.water, 0.55), theme.widths.thin);
    for profile in finding.profiles.iter().filter(|p| !p.is_trunk) {
        chart.curve(&mut inside, line(profile), thin);
    }
    let trunk = finding.profiles.iter().find(|p| p.is_trunk);
    if let Some(profile) = trunk {
        chart.curve(&mut inside, line(profile), theme.stroke(theme.water, 1.6 * theme.widths.line));
    }
    knickpoints(&mut inside, &finding.profiles, &chart, theme);
    chart.clipped(&mut sketch, inside);
    chart.axes(&mut sketch, &format!("distance from the outlet, {symbol}"), "elevation, m", theme);
    let y = height + 0.6;
    let used = verdict_words(&mut sketch, &headline(trunk), &caption(finding), y, width_mm, theme);
    sketch.finish(width_mm, y + used)
}

fn headline(trunk: Option<&Profile>) -> String {
    let ends = trunk.and_then(|t| t.stations.first().zip(t.stations.last()));
    ends.map_or(String::new(), |(foot, head)| {
        let length = numbers::length(head.from_outlet_m - foot.from_outlet_m, LengthUnit::Metre, 3);
        format!(
            "trunk falls {} m over {length}",
            numbers::significant(head.elevation_m - foot.elevation_m, 3)
        )
    })
}

fn caption(finding: &NetworkFinding) -> String {
    let others = finding.profiles.iter().filter(|p| !p.is_trunk).count();
    let breaks = [true, false].map(|of_trunk| surest(&finding.profiles, of_trunk).len());
    let mut text = String::from("heavy: trunk");
    if others > 0 {
        text += &format!("; thin: {others} other channel{}", if others == 1 { "" } else { "s" });
    }
    text += match breaks {
        [0, 0] => "\nno break of steepness found",
        _ => "\ntriangle: break of steepness, with its chance on a uniform profile",
    };
    if breaks[1] > MOST_BESIDE {
        text += &format!("; pale: the surest {MOST_BESIDE} of {} beside the trunk", breaks[1]);
    }
    text
}

/// Triangles above the profiles: all of the trunk, the surest of them named by their chance; the surest of other
/// channels small and pale.
fn knickpoints(sketch: &mut Sketch, profiles: &[Profile], chart: &Chart, theme: &Theme) {
    let mark = |sketch: &mut Sketch, k: &Knickpoint, half: f64, fill| {
        let at = chart.at(k.from_outlet_m, k.elevation_m);
        let corner = |dx: f64, dy: f64| Point::new(at.x + dx * half, at.y - 0.7 - dy * half);
        let corners = vec![corner(0.0, 0.0), corner(1.0, 1.7), corner(-1.0, 1.7)];
        sketch.polygon(corners, Some(fill), Some(theme.stroke(theme.paper, theme.widths.hair)));
    };
    for k in surest(profiles, false).into_iter().take(MOST_BESIDE) {
        mark(sketch, k, 0.6, theme.tint(theme.measured, 0.6));
    }
    let small = theme.text.small;
    let (min, max) = chart.corners();
    let mut taken: Vec<(f64, f64, f64)> = Vec::new();
    for (i, k) in surest(profiles, true).into_iter().enumerate() {
        mark(sketch, k, 0.85, theme.measured);
        let text = numbers::p_value(k.p);
        let half = 0.5 * font::text_width(&text, small, false);
        let at = chart.at(k.from_outlet_m, k.elevation_m);
        let x = at.x.clamp(min.x + half + 0.5, (max.x - half - 0.5).max(min.x + half + 0.5));
        let y = (at.y - 2.9).max(min.y + small);
        let clash =
            |(a, b, c): &(f64, f64, f64)| (x - a).abs() < half + b + 0.8 && (y - c).abs() < 1.2 * small;
        if i >= MOST_NAMED || taken.iter().any(clash) {
            continue;
        }
        taken.push((x, half, y));
        let look = Type::new(small, theme.measured).anchored(TextAnchor::Middle).haloed(theme.paper);
        sketch.text(Point::new(x, y), text, look);
    }
}

/// Breaks of the trunk or of the other channels, the least probable by chance first.
fn surest(profiles: &[Profile], of_trunk: bool) -> Vec<&Knickpoint> {
    let mut all: Vec<&Knickpoint> =
        profiles.iter().filter(|p| p.is_trunk == of_trunk).flat_map(|p| &p.knickpoints).collect();
    all.sort_by(|a, b| a.p.total_cmp(&b.p).then(a.from_outlet_m.total_cmp(&b.from_outlet_m)));
    all
}

/// Share of the basin above each share of its height, with the integral beneath the curve.
pub fn hypsometric_curve(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some(found) = finding.hypsometry.as_ref().filter(|h| h.curve.len() > 1) else {
        return words_only("No hypsometric curve: no basin with elevations was found.", width_mm, theme);
    };
    let height = 0.8 * width_mm;
    let chart =
        Chart::new(Span::between(0.0, 1.0), Span::between(0.0, 1.0), Point::default(), [width_mm, height]);
    let mut sketch = Sketch::default();
    let mut inside = Sketch::default();
    let mut ground: Vec<Point> = found
        .curve
        .iter()
        .filter(|p| p[0].is_finite() && p[1].is_finite())
        .map(|p| chart.at(p[0], p[1]))
        .collect();
    ground.extend([chart.at(1.0, 0.0), chart.at(0.0, 0.0)]);
    inside.polygon(ground, Some(theme.tint(theme.measured, 0.16)), None);
    let middle = chart.y.at(found.integral.clamp(0.0, 1.0));
    let (min, max) = chart.corners();
    let mark = theme.stroke(theme.measured, theme.widths.thin);
    inside.line(Point::new(min.x, middle), Point::new(max.x, middle), mark);
    let look = Type::new(theme.text.small, theme.measured).anchored(TextAnchor::End).haloed(theme.paper);
    inside.text(Point::new(max.x - 0.8, middle - 0.7), "mean elevation", look);
    chart.curve(&mut inside, found.curve.iter().copied(), theme.stroke(theme.ink, 1.4 * theme.widths.line));
    chart.clipped(&mut sketch, inside);
    chart.axes(&mut sketch, "share of the area above", "share of the height", theme);
    let y = height + 0.6;
    let basin = finding.drainage.as_ref().and_then(|d| d.basins.first());
    let whose = basin.map_or("the greatest basin".to_owned(), |b| {
        let cut = if b.touches_edge { ", cut off by the edge" } else { "" };
        format!("the greatest basin, {}{cut}", area(b.area_m2, LengthUnit::Metre))
    });
    let headline = format!("hypsometric integral {}", numbers::fixed(found.integral, 3));
    let mut used = verdict_words(&mut sketch, &headline, &whose, y, width_mm, theme) + 0.8;
    let metres = |v: f64| format!("{} m", numbers::fixed(v, 0));
    let mut rows = vec![
        (
            "lowest, mean, highest".into(),
            [found.lowest_m, found.mean_m, found.highest_m].map(metres).join(", "),
        ),
        ("Melton ratio".into(), brief(found.melton)),
    ];
    if let Some(ratio) = found.relief_ratio {
        rows.push(("relief ratio".into(), brief(ratio)));
    }
    used += table(&mut sketch, &rows, y + used, width_mm, theme);
    sketch.finish(width_mm, y + used)
}
