//! An outcrop as a wind vane: the crests round it over the lines of the flow that explains their turn
//! best, and beneath the turn by bearing beside what crests along and across the wind would do.

use std::collections::BTreeMap;

use crate::ground::{Axis, Azimuth, Point};
use crate::numeric::quantile;
use crate::science::obstacle::{Flow, Outcome};
use crate::study::{NodeAround, ObstacleFinding, ObstaclesFinding};

use super::sketch::{Sketch, Type, arc, toward};
use super::{Figure, Item, TextAnchor, Theme, numbers};

/// Radii from the centre to the panel's edge.
const REACH: f64 = 3.9;
/// Distance between strokes, millimetres.
const PITCH_MM: f64 = 2.3;
/// Sectors in which turns are gathered.
const SECTORS: usize = 24;
/// Nodes a sector needs to be drawn.
const LEAST_IN_SECTOR: usize = 3;

/// One outcrop, `width_mm` wide. `annulus` holds the radii that were looked at.
pub fn obstacle(finding: &ObstacleFinding, annulus: [f64; 2], width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let side = width_mm;
    panel(&mut sketch, finding, annulus, side, theme);
    let mut y = side + 1.6;
    match &finding.outcome {
        Err(why) => {
            let look = Type::new(theme.text.body, theme.ink);
            y += sketch.paragraph(Point::new(0.0, y), &format!("No obstacle test: {why}."), look, width_mm);
        }
        Ok(outcome) => {
            y += turns(&mut sketch, finding, outcome, annulus, Point::new(0.0, y), width_mm, theme);
            for line in words(finding, outcome) {
                let look = Type::new(theme.text.small, theme.ink);
                y += sketch.paragraph(Point::new(0.0, y), &line, look, width_mm) + 0.25;
            }
        }
    }
    sketch.finish(width_mm, y)
}

/// Obliquities of all outcrops on one scale from along to across, and all together beneath; no height
/// for a single one.
pub fn obstacles_together(finding: &ObstaclesFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let Some(combined) = &finding.combined else { return sketch.finish(width_mm, 0.0) };
    let small = Type::new(theme.text.small, theme.ink_soft);
    let body = Type::new(theme.text.body, theme.ink);
    let (left, right) = (0.36 * width_mm, width_mm - 1.6);
    let x = |deg: f64| left + (right - left) * deg / 90.0;
    let row = 4.6;
    let rows = finding.outcrops.len() as f64 + 1.0;
    let foot = 1.0 + row * rows;
    for deg in [0.0, 15.0, 45.0, 75.0, 90.0] {
        sketch.line(
            Point::new(x(deg), 0.6),
            Point::new(x(deg), foot),
            theme.stroke(theme.rule, theme.widths.hair),
        );
        let text = format!("{deg:.0}°");
        sketch.text(
            Point::new(x(deg), foot + 1.3 * theme.text.small),
            text,
            small.anchored(TextAnchor::Middle),
        );
    }
    let mut y = 1.0 + 0.5 * row;
    for outcrop in &finding.outcrops {
        let name = super::font::shortened(&outcrop.name, theme.text.body, false, left - 2.0);
        sketch.text(Point::new(0.0, y + 0.35 * theme.text.body), name, body);
        match &outcrop.outcome {
            Ok(o) if o.undecided.is_none() => {
                whisker(
                    &mut sketch,
                    o.obliquity.folded_deg(),
                    o.obliquity.interval_deg(),
                    y,
                    &x,
                    theme,
                    false,
                );
            }
            _ => sketch.text(Point::new(x(2.0), y + 0.35 * theme.text.small), "no decision", small),
        }
        y += row;
    }
    sketch.text(Point::new(0.0, y + 0.35 * theme.text.body), "together", body.bold());
    if finding.combined_undecided.is_none() {
        let o = &combined.obliquity;
        whisker(&mut sketch, o.folded_deg(), o.interval_deg(), y, &x, theme, true);
    } else {
        sketch.text(Point::new(x(2.0), y + 0.35 * theme.text.small), "no decision", small);
    }
    let mut below = foot + 1.7 * theme.text.small;
    sketch.text(Point::new(x(0.0), below + theme.text.small), "along the wind", small);
    sketch.text(Point::new(x(90.0), below + theme.text.small), "across", small.anchored(TextAnchor::End));
    below += 1.9 * theme.text.small;
    let text = format!(
        "Random effects: amplitude {}, scatter beyond errors I² {}; {} of {} wrap round (sign test p = {}).",
        numbers::fixed(combined.obliquity.amplitude, 2),
        numbers::percent(combined.i2),
        combined.wrapping,
        combined.count,
        numbers::fixed(combined.sign_p, 2),
    );
    below +=
        sketch.paragraph(Point::new(0.0, below), &text, Type::new(theme.text.small, theme.ink), width_mm);
    sketch.finish(width_mm, below)
}

/// A value with its interval; larger for what stands for all.
fn whisker(
    sketch: &mut Sketch,
    at: f64,
    interval: Option<[f64; 2]>,
    y: f64,
    x: &impl Fn(f64) -> f64,
    theme: &Theme,
    strong: bool,
) {
    if let Some([low, high]) = interval {
        let width = if strong { theme.widths.bold } else { theme.widths.line };
        sketch.line(Point::new(x(low), y), Point::new(x(high), y), theme.stroke(theme.measured, width));
    }
    let radius = if strong { 1.1 } else { 0.8 };
    sketch.circle(
        Point::new(x(at), y),
        radius,
        Some(theme.measured),
        Some(theme.stroke(theme.paper, theme.widths.thin)),
    );
}

/// The plan: outcrop, lines of the flow, crests, axes on the rim.
fn panel(sketch: &mut Sketch, finding: &ObstacleFinding, annulus: [f64; 2], side: f64, theme: &Theme) {
    let (min, max) = (Point::new(0.0, 0.0), Point::new(side, side));
    let centre = Point::new(0.5 * side, 0.5 * side);
    let scale = 0.5 * side / REACH;
    let page = |p: Point| Point::new(centre.x + scale * p.x, centre.y - scale * p.y);
    let mut inside = Sketch::default();
    inside.rectangle(min, max, Some(theme.panel), None);
    let flow = Flow::round(finding.shape);
    if let Some(wind) = finding.wind {
        let turn = std::f64::consts::FRAC_PI_2 - wind.rad();
        let ink = theme.stroke(theme.predicted.with_alpha(150), theme.widths.thin);
        for line in flow.lines(turn, 14, 0.62, 1.45 * REACH) {
            // Every third point is closer than print shows.
            inside.polyline(line.into_iter().step_by(3).map(page).collect(), ink);
        }
    }
    for radius in annulus {
        let ring = arc(centre, radius * scale, 0.0, 360.0);
        inside.polyline(ring, theme.dashed(theme.ink_soft, theme.widths.hair));
    }
    let strokes: Vec<([Point; 2], bool)> = thinned(&finding.around, &page)
        .into_iter()
        .map(|node| {
            // Turns are counter-clockwise, axes clockwise.
            let (east, north) = finding.crest.rotated(-node.residual_deg).azimuth().east_north();
            let (at, half) = (page(node.at), 0.36 * PITCH_MM);
            let end = |s: f64| Point::new(at.x + s * half * east, at.y - s * half * north);
            ([end(-1.0), end(1.0)], node.used)
        })
        .collect();
    for ([from, to], _) in &strokes {
        inside.line(*from, *to, theme.stroke(theme.panel, 2.6 * theme.widths.line));
    }
    for ([from, to], used) in strokes {
        let color = if used { theme.ink } else { theme.ink_soft.with_alpha(150) };
        inside.line(from, to, theme.stroke(color, 1.1 * theme.widths.line));
    }
    let outline: Vec<Point> = finding.outline.iter().map(|p| page(*p)).collect();
    inside.polygon(
        outline.clone(),
        Some(theme.tint(theme.ink_soft, 0.45)),
        Some(theme.stroke(theme.ink, theme.widths.line)),
    );
    axes(&mut inside, finding, centre, 0.5 * side, theme);
    sketch.items.push(Item::Clip { min, max, items: inside.items });
    sketch.rectangle(min, max, None, Some(theme.stroke(theme.rule, theme.widths.thin)));
}

/// Crest axis and wind axis as marks where they leave the panel, the wind with its interval.
fn axes(sketch: &mut Sketch, finding: &ObstacleFinding, centre: Point, half: f64, theme: &Theme) {
    let rim = half - 1.2;
    let ends = |axis: Axis| [axis.azimuth(), axis.azimuth().reversed()];
    let outcome = finding.outcome.as_ref().ok();
    if let (Some(wind), Some(outcome)) = (finding.wind, outcome) {
        let spread = outcome.obliquity.half_deg.unwrap_or(0.0);
        for end in ends(wind) {
            let band = arc(centre, rim, end.deg() - spread, end.deg() + spread);
            sketch.polyline(band.clone(), theme.stroke(theme.panel, 3.6 * theme.widths.line));
            sketch.polyline(band, theme.stroke(theme.predicted, 2.4 * theme.widths.line));
            let (tip, back) = (toward(centre, rim + 1.0, end), toward(centre, rim - 3.0, end));
            sketch.line(back, tip, theme.stroke(theme.predicted, theme.widths.bold));
        }
    }
    if outcome.is_some() {
        for end in ends(finding.crest) {
            let (tip, back) = (toward(centre, rim + 1.0, end), toward(centre, rim - 5.0, end));
            sketch.line(back, tip, theme.stroke(theme.panel, 2.2 * theme.widths.bold));
            sketch.line(back, tip, theme.stroke(theme.measured, theme.widths.bold));
        }
    }
    label(sketch, finding.wind.map(Axis::azimuth), "wind", centre, rim, theme.predicted, theme, 1.0);
    let crest = outcome.map(|_| finding.crest.azimuth());
    label(sketch, crest, "crests", centre, rim, theme.measured, theme, -1.0);
    let north = Azimuth::from_deg(0.0);
    let corner = Point::new(centre.x + half - 3.4, centre.y - half + 8.4);
    sketch.line(corner, toward(corner, 4.0, north), theme.stroke(theme.ink_soft, theme.widths.thin));
    sketch.polygon(
        super::sketch::arrow_head(toward(corner, 4.6, north), 1.6, north),
        Some(theme.ink_soft),
        None,
    );
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    sketch.text(Point::new(corner.x, corner.y - 5.4), "N", look);
}

/// A word beside the end of an axis, on the side `turn` (1 clockwise, −1 counter-clockwise).
#[allow(clippy::too_many_arguments)]
fn label(
    sketch: &mut Sketch,
    end: Option<Azimuth>,
    word: &str,
    centre: Point,
    rim: f64,
    color: super::Rgba,
    theme: &Theme,
    turn: f64,
) {
    let Some(end) = end else { return };
    let at = toward(centre, rim - 4.2, end.rotated(turn * 13.0));
    let look = Type::new(theme.text.small, color).bold().anchored(TextAnchor::Middle).haloed(theme.panel);
    sketch.text(Point::new(at.x, at.y + 0.35 * theme.text.small), word, look);
}

/// At most one node in each cell of the page, the one nearest its middle.
fn thinned(nodes: &[NodeAround], page: &impl Fn(Point) -> Point) -> Vec<NodeAround> {
    let mut cells: BTreeMap<(i64, i64), (f64, NodeAround)> = BTreeMap::new();
    for node in nodes {
        let p = page(node.at);
        let cell = ((p.y / PITCH_MM).floor(), (p.x / PITCH_MM).floor());
        let middle = Point::new((cell.1 + 0.5) * PITCH_MM, (cell.0 + 0.5) * PITCH_MM);
        let off = p.distance(middle);
        let best = cells.entry((cell.0 as i64, cell.1 as i64)).or_insert((off, *node));
        if off < best.0 {
            *best = (off, *node);
        }
    }
    cells.into_values().map(|(_, node)| node).collect()
}

/// Turn of the crests by bearing from the crest axis: middle halves of the nodes in each sector, and what a wind
/// along, a wind across and the fitted wind would do to the same annulus. Returns the height used.
fn turns(
    sketch: &mut Sketch,
    finding: &ObstacleFinding,
    outcome: &Outcome,
    annulus: [f64; 2],
    at: Point,
    width: f64,
    theme: &Theme,
) -> f64 {
    let small = Type::new(theme.text.small, theme.ink_soft);
    let (left, top, height) = (at.x + 7.0, at.y + 1.5 * theme.text.small, 0.40 * width);
    let (right, foot) = (at.x + width - 0.6, top + height);
    let crest_turn = std::f64::consts::FRAC_PI_2 - finding.crest.rad();
    let flow = Flow::round(finding.shape);
    let annulus = seen(finding, &flow, annulus);
    let predicted = |phi_deg: f64| -> Vec<f64> {
        (0..=72).map(|k| mean_turn(&flow, crest_turn, phi_deg, f64::from(k) * 5.0, annulus)).collect()
    };
    let (wrap, across) = (predicted(0.0), predicted(90.0));
    let sectors = sectors(finding, crest_turn);
    let highest = wrap.iter().chain(&across).map(|v| v.abs()).fold(1.0, f64::max);
    let measured = sectors.iter().flat_map(|(_, q)| q.iter()).map(|v| v.abs()).fold(0.0, f64::max);
    let limit = (1.12 * highest.max(measured)).min(60.0);
    let x = |deg: f64| left + (right - left) * deg / 360.0;
    let y = |turn: f64| foot - height * (turn.clamp(-limit, limit) + limit) / (2.0 * limit);
    sketch.rectangle(
        Point::new(left, top),
        Point::new(right, foot),
        None,
        Some(theme.stroke(theme.rule, theme.widths.thin)),
    );
    sketch.line(
        Point::new(left, y(0.0)),
        Point::new(right, y(0.0)),
        theme.stroke(theme.rule, theme.widths.thin),
    );
    let tick = if limit > 24.0 { 20.0 } else { 10.0 };
    for turn in [-tick, 0.0, tick] {
        let text = format!("{}°", numbers::fixed(turn, 0));
        sketch.text(
            Point::new(left - 0.8, y(turn) + 0.35 * theme.text.small),
            text,
            small.anchored(TextAnchor::End),
        );
    }
    for deg in [0.0, 90.0, 180.0, 270.0, 360.0] {
        sketch.line(
            Point::new(x(deg), foot),
            Point::new(x(deg), foot + 0.7),
            theme.stroke(theme.ink_soft, theme.widths.hair),
        );
        let anchor = match deg {
            0.0 => TextAnchor::Start,
            360.0 => TextAnchor::End,
            _ => TextAnchor::Middle,
        };
        let text = format!("{deg:.0}°");
        sketch.text(Point::new(x(deg), foot + 0.9 + theme.text.small), text, small.anchored(anchor));
    }
    sketch.text(
        Point::new(at.x, at.y + theme.text.small),
        "turn of the crests by bearing from their axis",
        small,
    );
    let curve = |values: &[f64]| -> Vec<Point> {
        values.iter().enumerate().map(|(k, v)| Point::new(x(5.0 * k as f64), y(*v))).collect()
    };
    sketch.polyline(curve(&wrap), theme.dashed(theme.predicted, theme.widths.line));
    sketch.polyline(curve(&across), theme.dashed(theme.caution, theme.widths.line));
    let o = &outcome.obliquity;
    let fitted: Vec<f64> =
        predicted(o.signed_deg).iter().map(|v| outcome.estimate.offset_deg + o.amplitude * v).collect();
    sketch.polyline(curve(&fitted), theme.stroke(theme.measured, 1.4 * theme.widths.line));
    for (deg, [low, middle, high]) in sectors {
        sketch.line(
            Point::new(x(deg), y(low)),
            Point::new(x(deg), y(high)),
            theme.stroke(theme.ink, theme.widths.line),
        );
        sketch.circle(Point::new(x(deg), y(middle)), 0.55, Some(theme.ink), None);
    }
    let mut used = foot + 1.2 + 1.2 * theme.text.small - at.y;
    let look = |color| Type::new(theme.text.small, color);
    let key = at.y + used + theme.text.small;
    let mut from = at.x;
    for (word, color) in [
        ("– – along: wraps round", theme.predicted),
        ("– – across", theme.caution),
        ("— fitted", theme.measured),
    ] {
        sketch.text(Point::new(from, key), word, look(color));
        from += super::font::text_width(word, theme.text.small, false) + 2.4;
    }
    used += 1.9 * theme.text.small;
    used
}

/// The part of the annulus that nodes were measured in: those at its inner edge would read the outcrop itself.
fn seen(finding: &ObstacleFinding, flow: &Flow, [inner, outer]: [f64; 2]) -> [f64; 2] {
    let used = finding.around.iter().filter(|n| n.used).map(|n| flow.radii(n.at));
    let nearest = used.fold(f64::INFINITY, f64::min);
    [if nearest < outer { inner.max(nearest) } else { inner }, outer]
}

/// Lower quartile, median and upper quartile of the turns in each sector, at its middle bearing (degrees
/// counter-clockwise from the crest axis).
fn sectors(finding: &ObstacleFinding, crest_turn: f64) -> Vec<(f64, [f64; 3])> {
    let mut turns: Vec<Vec<f64>> = vec![Vec::new(); SECTORS];
    for node in finding.around.iter().filter(|n| n.used) {
        let bearing = (node.at.y.atan2(node.at.x) - crest_turn).to_degrees().rem_euclid(360.0);
        turns[(bearing / 360.0 * SECTORS as f64) as usize % SECTORS].push(node.residual_deg);
    }
    turns
        .iter_mut()
        .enumerate()
        .filter(|(_, t)| t.len() >= LEAST_IN_SECTOR)
        .map(|(k, t)| ((k as f64 + 0.5) * 360.0 / SECTORS as f64, quantile::of(t, [0.25, 0.5, 0.75])))
        .collect()
}

/// The mean deflection over the annulus at one bearing from the crest axis, degrees, by radii of equal area.
fn mean_turn(flow: &Flow, crest_turn: f64, phi_deg: f64, bearing_deg: f64, [inner, outer]: [f64; 2]) -> f64 {
    const STEPS: usize = 12;
    let wind = crest_turn - phi_deg.to_radians();
    let (sin, cos) = (crest_turn + bearing_deg.to_radians()).sin_cos();
    let turn = |k: usize| {
        let share = (k as f64 + 0.5) / STEPS as f64;
        let r = (inner * inner + share * (outer * outer - inner * inner)).sqrt();
        flow.turn(Point::new(r * cos, r * sin), wind).deflection.to_degrees()
    };
    (0..STEPS).map(turn).sum::<f64>() / STEPS as f64
}

/// The numbers under the figure.
fn words(finding: &ObstacleFinding, outcome: &Outcome) -> Vec<String> {
    let (e, o) = (&outcome.estimate, &outcome.obliquity);
    let half = o.half_deg.map_or("all angles".to_owned(), |h| format!("± {}°", numbers::fixed(h, 1)));
    let mut lines = Vec::new();
    match (&outcome.undecided, finding.wind) {
        (None, Some(wind)) => lines.push(format!(
            "Crests {}° {half} (95 %) from the wind axis, which lies at {}°.",
            numbers::fixed(o.folded_deg(), 1),
            numbers::angle(wind.deg(), 0, 180.0)
        )),
        (why, _) => lines.push(format!("No decision: {}.", why.as_deref().unwrap_or("no wind axis"))),
    }
    lines.push(format!(
        "Amplitude {} (b sin {} ± {}, b cos {} ± {}); {} nodes worth {}.",
        numbers::fixed(o.amplitude, 2),
        numbers::fixed(e.b_s, 2),
        numbers::fixed(1.96 * e.se_s, 2),
        numbers::fixed(e.b_c, 2),
        numbers::fixed(1.96 * e.se_c, 2),
        e.n,
        numbers::significant(e.n_eff, 2),
    ));
    let p = outcome.null.as_ref().and_then(|n| n.p);
    let chance = numbers::p_value(outcome.pattern_p);
    lines.push(match p {
        Some(p) => format!("No turn: {chance} by its error, {} among virtual outcrops.", numbers::p_value(p)),
        None => format!("No turn: {chance} by its error; too few virtual outcrops to rank it."),
    });
    lines
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::science::obstacle::Ellipse;

    #[test]
    fn the_two_hypotheses_turn_crests_opposite_ways() {
        let flow = Flow::round(Ellipse::circle(Point::default(), 1.0));
        let (wrap, across) =
            (mean_turn(&flow, 0.3, 0.0, 45.0, [1.5, 3.0]), mean_turn(&flow, 0.3, 90.0, 45.0, [1.5, 3.0]));
        assert!(wrap < -5.0, "crests along the wind turn clockwise ahead on the left: {wrap}");
        assert!(across > 5.0, "crests across it the other way: {across}");
        assert_close!(mean_turn(&flow, 0.3, 0.0, 90.0, [1.5, 3.0]), 0.0, 1e-9, "abeam nothing turns");
    }
}
