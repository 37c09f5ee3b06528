//! Crests on the map: solid on a light halo, heavier the surer; filled dots on what was edited, open dots on what was
//! drawn, long dashes for what was imported; free ends filled, forks as rings, crossings as squares; masked ground
//! hatched. Populations have a line style each.

use crate::ground::{Bounds, Point, Polygon};
use crate::science::crest::{CrestLine, CrestOrigin, End, Junction};

use super::overlap;
use super::view::Sheet;
use crate::plate::chart::{FINEST_MM, simplified};
use crate::plate::sketch::Sketch;
use crate::plate::{Item, Rgba, Stroke, Theme};

/// Crests as a map shows them, all in full-resolution pixels of the map's raster.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct MapCrests<'a> {
    pub lines: &'a [CrestLine],
    pub junctions: &'a [Junction],
    /// Ground that the user said is no bedform.
    pub masks: &'a [Polygon],
    /// Of several populations, which: sets the style of the line instead of the crest's origin.
    pub population: Option<usize>,
    /// Of the population, for the key.
    pub name: &'a str,
}

/// Crest length on the ground they take from which lines become thinner, and the most that is drawn, mm per mm².
const DENSE: f64 = 0.3;
const MOST_DENSE: f64 = 1.1;
/// Distance between dots along a line, millimetres.
const DOT_PITCH_MM: f64 = 4.0;
const DOT_MM: f64 = 0.42;
/// Slanted lines on masked ground, millimetres.
const HATCH_MM: f64 = 1.1;

/// What the page holds of a set of crests.
pub(super) struct Shown<'a> {
    lines: Vec<(&'a CrestLine, Vec<Point>)>,
    /// Share of the usual widths.
    pub finer: f64,
    /// Crests too short to be held apart, left out.
    pub left_out: usize,
}

/// The crests that touch the frame; of too many the longest.
pub(super) fn shown<'a>(crests: &[MapCrests<'a>], sheet: &Sheet) -> Vec<Shown<'a>> {
    let frame = Bounds { min: sheet.min, max: sheet.max };
    let on_page = |line: &'a CrestLine| {
        let points: Vec<Point> = line.line.0.iter().map(|p| sheet.at(*p)).collect();
        let Bounds { min, max } = Bounds::of(points.iter().copied())?;
        let touches = overlap(Bounds { min, max: Point::new(max.x + 1e-9, max.y + 1e-9) }, frame);
        touches.then(|| (line, simplified(&points, FINEST_MM)))
    };
    let mut sets: Vec<Vec<(&CrestLine, Vec<Point>)>> =
        crests.iter().map(|c| c.lines.iter().filter_map(on_page).collect()).collect();
    let mut lengths: Vec<f64> = sets.iter().flatten().map(|(_, points)| length(points)).collect();
    let taken =
        Bounds::of(sets.iter().flatten().flat_map(|(_, points)| points).copied().filter(|p| sheet.holds(*p)));
    let area =
        taken.map_or(0.0, |b| b.width() * b.height()).max(0.05 * sheet.width() * sheet.height()).max(1e-9);
    let density = lengths.iter().sum::<f64>() / area;
    lengths.sort_by(|a, b| b.total_cmp(a));
    let mut room = MOST_DENSE * area;
    let least = lengths.iter().find(|l| {
        room -= **l;
        room < 0.0
    });
    let least = least.copied().unwrap_or(0.0);
    let finer = (DENSE / density.clamp(1e-9, MOST_DENSE)).clamp(0.35, 1.0);
    sets.iter_mut()
        .map(|set| {
            let all = set.len();
            let lines: Vec<_> = set.drain(..).filter(|(_, points)| length(points) >= least).collect();
            Shown { left_out: all - lines.len(), lines, finer }
        })
        .collect()
}

/// Width of a line of this confidence, millimetres.
pub(super) fn width(confidence: f64) -> f64 {
    0.2 + 0.42 * if confidence.is_finite() { confidence.clamp(0.0, 1.0) } else { 0.0 }
}

/// What the machine traced keeps the colour of measured things; what a hand or a file gave is ink.
pub(super) fn color(origin: CrestOrigin, theme: &Theme) -> Rgba {
    match origin {
        CrestOrigin::Traced | CrestOrigin::Edited => theme.measured,
        CrestOrigin::Drawn | CrestOrigin::Imported => theme.over_image,
    }
}

/// The style of a line by its origin, or by its population where there are several.
pub(super) fn stroke(
    origin: CrestOrigin,
    population: Option<usize>,
    confidence: f64,
    finer: f64,
    theme: &Theme,
) -> Stroke {
    let wide = finer * width(confidence);
    match population {
        Some(n) => {
            let inks = [theme.measured, theme.over_image, theme.predicted];
            let dash_mm = [None, Some([1.5, 0.7]), Some([0.5, 0.6])][n % 3];
            Stroke { dash_mm, ..theme.stroke(inks[n % 3], wide) }
        }
        None => {
            let dash_mm = (origin == CrestOrigin::Imported).then_some([2.4, 0.8]);
            Stroke { dash_mm, ..theme.stroke(color(origin, theme), wide) }
        }
    }
}

/// All halos first, so that no halo cuts a neighbour; then lines, dots, ends and junctions.
pub(super) fn draw(sketch: &mut Sketch, crests: &[MapCrests], sheet: &Sheet, theme: &Theme) {
    // Over an image the look is always ink on light paper.
    let light = Theme::light();
    let theme = &Theme { measured: light.measured, predicted: light.predicted, ..*theme };
    for mask in crests.iter().flat_map(|c| c.masks) {
        hatch(sketch, mask, sheet, theme);
    }
    let sets = shown(crests, sheet);
    for (line, points) in sets.iter().flat_map(|s| &s.lines) {
        let finer = sets.first().map_or(1.0, |s| s.finer);
        let wide = finer * (width(line.confidence) + 2.4 * theme.widths.thin);
        sketch.polyline(points.clone(), theme.stroke(theme.halo.with_alpha(190), wide));
    }
    for (set, of) in sets.iter().zip(crests) {
        for (line, points) in &set.lines {
            let look = stroke(line.origin, of.population, line.confidence, set.finer, theme);
            sketch.polyline(points.clone(), look);
        }
    }
    for (set, of) in sets.iter().zip(crests) {
        if of.population.is_none() {
            for (line, points) in &set.lines {
                dots(sketch, line.origin, points, set.finer, theme);
            }
        }
    }
    for (set, of) in sets.iter().zip(crests) {
        ends(sketch, set, theme);
        for junction in of.junctions {
            let at = sheet.at(junction.at);
            if sheet.holds(at) {
                joint(sketch, at, junction.branches.len() > 1, mark_size(set.finer), theme);
            }
        }
    }
}

fn mark_size(finer: f64) -> f64 {
    finer.max(0.55)
}

/// Filled dots along an edited line, open ones along a drawn line.
pub(super) fn dots(sketch: &mut Sketch, origin: CrestOrigin, line: &[Point], finer: f64, theme: &Theme) {
    let fill = match origin {
        CrestOrigin::Edited => color(origin, theme),
        CrestOrigin::Drawn => theme.halo,
        CrestOrigin::Traced | CrestOrigin::Imported => return,
    };
    let edge = theme.stroke(color(origin, theme), theme.widths.thin);
    let mut ahead = 0.5 * DOT_PITCH_MM.min(length(line));
    for w in line.windows(2) {
        let step = w[0].distance(w[1]);
        while step > 0.0 && ahead <= step {
            let share = ahead / step;
            let at = Point::new(w[0].x + share * (w[1].x - w[0].x), w[0].y + share * (w[1].y - w[0].y));
            sketch.circle(at, DOT_MM * mark_size(finer), Some(fill), Some(edge));
            ahead += DOT_PITCH_MM;
        }
        ahead -= step;
    }
}

fn ends(sketch: &mut Sketch, set: &Shown, theme: &Theme) {
    for (line, points) in &set.lines {
        for (end, at) in line.ends.iter().zip([points.first(), points.last()]) {
            if let (End::Free, Some(at)) = (end, at) {
                free_end(sketch, *at, mark_size(set.finer), theme);
            }
        }
    }
}

pub(super) fn free_end(sketch: &mut Sketch, at: Point, size: f64, theme: &Theme) {
    let edge = theme.stroke(theme.halo, theme.widths.thin);
    sketch.circle(at, 0.62 * size, Some(theme.measured), Some(edge));
}

/// A ring where three arms meet, a square where more do.
pub(super) fn joint(sketch: &mut Sketch, at: Point, is_crossing: bool, size: f64, theme: &Theme) {
    let edge = theme.stroke(theme.measured, 1.3 * theme.widths.thin);
    if is_crossing {
        let r = 0.6 * size;
        let (min, max) = (Point::new(at.x - r, at.y - r), Point::new(at.x + r, at.y + r));
        sketch.rectangle(min, max, Some(theme.halo), Some(edge));
    } else {
        sketch.circle(at, 0.62 * size, Some(theme.halo), Some(edge));
    }
}

/// Paler ground with slanted lines inside a dashed edge.
fn hatch(sketch: &mut Sketch, mask: &Polygon, sheet: &Sheet, theme: &Theme) {
    let page = mask.map(|p| sheet.at(p));
    if page.holes.is_empty() {
        sketch.polygon(page.outer.clone(), Some(theme.halo.with_alpha(110)), None);
    }
    for ring in page.rings() {
        let halo = theme.stroke(theme.halo.with_alpha(200), 4.0 * theme.widths.thin);
        sketch.polygon(ring.to_vec(), None, Some(halo));
        sketch.polygon(ring.to_vec(), None, Some(theme.dashed(theme.over_image, 1.4 * theme.widths.thin)));
    }
    let thin = theme.stroke(theme.over_image, theme.widths.hair);
    let halo = theme.stroke(theme.halo.with_alpha(120), 3.0 * theme.widths.hair);
    let lines = slanted(&page, HATCH_MM, Bounds { min: sheet.min, max: sheet.max });
    for look in [halo, thin] {
        for [from, to] in &lines {
            sketch.line(*from, *to, look);
        }
    }
}

/// The parts inside a polygon of lines that rise to the right, `pitch` apart, no farther than `within`.
pub(super) fn slanted(polygon: &Polygon, pitch: f64, within: Bounds) -> Vec<[Point; 2]> {
    // In (u, v) = (x + y, x − y) the lines are those of one u.
    let Some(bounds) = polygon.bounds() else { return Vec::new() };
    let low = (bounds.min.x + bounds.min.y).max(within.min.x + within.min.y);
    let high = (bounds.max.x + bounds.max.y).min(within.max.x + within.max.y);
    let step = pitch * std::f64::consts::SQRT_2;
    let mut parts = Vec::new();
    let mut k = (low / step).ceil();
    while k * step < high {
        let u = k * step;
        let mut crossings: Vec<f64> = Vec::new();
        for ring in polygon.rings() {
            for (i, a) in ring.iter().enumerate() {
                let b = ring[(i + 1) % ring.len()];
                let (ua, ub) = (a.x + a.y, b.x + b.y);
                if (ua > u) != (ub > u) {
                    let share = (u - ua) / (ub - ua);
                    crossings.push((a.x - a.y) + share * ((b.x - b.y) - (a.x - a.y)));
                }
            }
        }
        crossings.sort_by(f64::total_cmp);
        let at = |v: f64| Point::new(0.5 * (u + v), 0.5 * (u - v));
        parts.extend(crossings.chunks_exact(2).map(|v| [at(v[0]), at(v[1])]));
        k += 1.0;
    }
    parts
}

fn length(line: &[Point]) -> f64 {
    line.windows(2).map(|w| w[0].distance(w[1])).sum()
}

/// A mask in the key.
pub(super) fn mask_sample(sketch: &mut Sketch, min: Point, max: Point, theme: &Theme) {
    let edge = Stroke { color: theme.ink, ..theme.dashed(theme.ink, theme.widths.thin) };
    let mut inside = Sketch::default();
    let square = Polygon {
        outer: vec![min, Point::new(max.x, min.y), max, Point::new(min.x, max.y)],
        holes: Vec::new(),
    };
    for [from, to] in slanted(&square, HATCH_MM, Bounds { min, max }) {
        inside.line(from, to, theme.stroke(theme.ink, theme.widths.hair));
    }
    sketch.items.push(Item::Clip { min, max, items: inside.items });
    sketch.rectangle(min, max, None, Some(edge));
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Polyline;
    use crate::science::crest::CrestModel;

    fn sheet() -> Sheet {
        Sheet {
            min: Point::new(0.0, 0.0),
            max: Point::new(100.0, 100.0),
            covers: Bounds { min: Point::new(0.0, 0.0), max: Point::new(1000.0, 1000.0) },
        }
    }

    fn crest(y: f64, long: f64, origin: CrestOrigin, confidence: f64) -> CrestLine {
        CrestLine {
            line: Polyline(vec![Point::new(10.0, y), Point::new(10.0 + long, y)]),
            confidence,
            ends: [End::Free, End::Border],
            bridged_px: 0.0,
            model: CrestModel::BrightRidge,
            origin,
            accepted: false,
            by_hand_px: 0.0,
        }
    }

    #[test]
    fn origins_differ_without_colour() {
        let theme = Theme::print();
        let look = |origin| {
            let mut sketch = Sketch::default();
            dots(&mut sketch, origin, &[Point::new(0.0, 0.0), Point::new(20.0, 0.0)], 1.0, &theme);
            let filled = sketch
                .items
                .iter()
                .any(|i| matches!(i, Item::Circle { fill: Some(f), stroke: Some(s), .. } if *f == s.color));
            (stroke(origin, None, 0.8, 1.0, &theme).dash_mm.is_some(), sketch.items.len(), filled)
        };
        let all =
            [CrestOrigin::Traced, CrestOrigin::Edited, CrestOrigin::Drawn, CrestOrigin::Imported].map(look);
        for i in 0..4 {
            for j in 0..i {
                assert_ne!(all[i], all[j], "{i} and {j}");
            }
        }
        let styles = [0, 1, 2].map(|n| stroke(CrestOrigin::Traced, Some(n), 0.8, 1.0, &theme).dash_mm);
        assert!(styles[0] != styles[1] && styles[1] != styles[2] && styles[0] != styles[2]);
    }

    #[test]
    fn the_surer_the_heavier_and_a_crowd_is_drawn_thin() {
        assert!(width(0.9) > width(0.3) && width(f64::NAN) > 0.0);
        let few = [crest(500.0, 800.0, CrestOrigin::Traced, 1.0)];
        let many: Vec<CrestLine> = (0..3000)
            .map(|i| {
                let long = if i % 3 == 0 { 20.0 } else { 700.0 + 0.01 * f64::from(i) };
                crest(0.33 * f64::from(i), long, CrestOrigin::Traced, 1.0)
            })
            .collect();
        let set = |lines| shown(&[MapCrests { lines, ..MapCrests::default() }], &sheet());
        let (one, crowd) = (&set(&few)[0], &set(&many)[0]);
        assert_eq!((one.finer, one.left_out, one.lines.len()), (1.0, 0, 1));
        assert!(crowd.finer < 0.5 && crowd.left_out >= 1000, "{} {}", crowd.finer, crowd.left_out);
        let drawn: f64 = crowd.lines.iter().map(|(_, points)| length(points)).sum();
        assert!(drawn <= MOST_DENSE * 1e4 * 1.01, "{drawn}");
    }

    #[test]
    fn hatching_stays_inside_and_leaves_holes_free() {
        let mut ring = Polygon::rectangle(40.0, 40.0);
        ring.holes.push(
            [(15.0, 15.0), (25.0, 15.0), (25.0, 25.0), (15.0, 25.0)].map(|(x, y)| Point::new(x, y)).to_vec(),
        );
        let within = Bounds { min: Point::new(-100.0, -100.0), max: Point::new(100.0, 100.0) };
        let parts = slanted(&ring, 1.0, within);
        let total: f64 = parts.iter().map(|[a, b]| a.distance(*b)).sum();
        // Lines a millimetre apart have as much length as the area.
        assert_close!(total, 1500.0, 15.0, "length of hatching");
        for [a, b] in &parts {
            assert!(ring.contains(Point::new(0.5 * (a.x + b.x), 0.5 * (a.y + b.y))));
            assert_close!(a.x + a.y, b.x + b.y, 1e-9, "one slant");
        }
    }
}
