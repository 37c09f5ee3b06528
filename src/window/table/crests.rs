//! Crest lines on the raster: traced ones thin and as strong as they are sure, those accepted full, those laid by
//! hand as a double rail, those out of files dashed; with what the user said of them.

use std::collections::BTreeMap;
use std::sync::Arc;

use egui::{Color32, Painter, Pos2, Shape, Stroke, Vec2};

use crate::desk::{Crested, Tool, crests};
use crate::ground::{Bounds, Point, Polygon, Polyline};
use crate::science::crest::{CrestLine, CrestOrigin, End, Junction};
use crate::study::{CrestEntry, Id, Patch, StrokeKind};

use super::Table;
use super::crest_lines::{CrestChart, seen};
use super::hatch::hatched;
use super::ink::Ink;
use super::lens::Lens;

/// Points of all lines of a patch on the screen; when there are more, the shortest are left out.
const MOST_POINTS: usize = 30_000;
/// Most marks of ends and forks; more would hide the lines.
const MOST_MARKS: usize = 400;

/// What is kept from frame to frame, by patch.
#[derive(Default)]
pub struct Charts {
    kept: BTreeMap<Id, CrestChart>,
}

/// A line the user rejected.
const REJECTED: Style = Style { width: 1.1, strength: 0.55, kind: Kind::Dotted };

/// How the crests of a patch are drawn.
#[derive(Clone, Copy)]
struct Look {
    selected: bool,
    /// They are as the sheet stands; else an edit waits for them to be traced anew.
    current: bool,
}

/// How one line is drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Style {
    width: f32,
    strength: f32,
    kind: Kind,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Kind {
    Plain,
    /// Two rails with light between them.
    Rail,
    Dashed,
    Dotted,
}

impl Charts {
    /// Draws the crests of every patch of the raster, those of the selected one on top.
    pub fn draw(&mut self, painter: &Painter, table: &Table<'_>) {
        let results = &table.model.session.results;
        self.kept.retain(|id, _| results.crests(*id).is_some_and(|crested| crested.finding().is_some()));
        let (top, rest): (Vec<&Patch>, Vec<&Patch>) =
            table.patches().partition(|patch| table.model.view.patch == Some(patch.id));
        for patch in rest.into_iter().chain(top) {
            let selected = table.model.view.patch == Some(patch.id);
            if selected {
                patch.crests.masks.iter().for_each(|mask| masked(painter, mask, &table.lens, &table.ink));
            }
            let look = Look { selected, current: results.crests_are_current(patch.id) };
            if let Some(crested) = results.crests(patch.id) {
                self.found(painter, table, patch, crested, look);
            }
            said(painter, table, patch, look);
        }
        pointed(painter, table);
    }

    fn found(&mut self, painter: &Painter, table: &Table<'_>, patch: &Patch, crested: &Crested, look: Look) {
        let Some(finding) = crested.finding() else { return };
        let (lens, ink) = (&table.lens, &table.ink);
        let chart = self.kept.entry(patch.id).or_insert_with(|| CrestChart::new(Arc::clone(finding)));
        if !Arc::ptr_eq(&chart.finding, finding) {
            *chart = CrestChart::new(Arc::clone(finding));
        }
        chart.fit(lens.per_col.min(lens.per_row));
        chart.choose(lens.visible(), MOST_POINTS);
        let on_screen = |points: &[Point]| points.iter().map(|p| lens.to_screen(*p)).collect::<Vec<Pos2>>();
        let lines: Vec<(Style, Vec<Pos2>)> = chart
            .chosen()
            .filter_map(|(i, points)| {
                let style = style(&finding.lines[i], &crested.boxes()[i], &patch.crests, look)?;
                Some((style, on_screen(points)))
            })
            .collect();
        // All halos first, so that none covers a neighbour's ink.
        painter.extend(lines.iter().map(|(style, on)| halo(*style, on, ink)));
        lines.iter().for_each(|(style, on)| inked(painter, *style, on, ink.line, ink));
        if look.selected {
            marks(painter, &finding.lines, &finding.junctions, lens, ink);
        }
    }
}

/// How a line is drawn; `None` when the user's own stroke is drawn in its place.
fn style(line: &CrestLine, within: &Bounds, said: &CrestEntry, look: Look) -> Option<Style> {
    let of_patch = if look.selected { 1.0 } else { 0.8 };
    let sure = line.confidence.clamp(0.0, 1.0) as f32;
    let Bounds { min, max } = within;
    let in_box = |m: &Point| m.x > min.x - 1.0 && m.x < max.x + 1.0 && m.y > min.y - 1.0 && m.y < max.y + 1.0;
    let on_it = |m: &Point| in_box(m) && crests::lies_on(*m, &line.line);
    let marked = |marks: &[Point]| !look.current && marks.iter().any(on_it);
    let by_hand = matches!(line.origin, CrestOrigin::Drawn | CrestOrigin::Imported);
    let style = match line.origin {
        _ if !look.current && by_hand => return None,
        CrestOrigin::Drawn => Style { width: 3.4, strength: 1.0, kind: Kind::Rail },
        CrestOrigin::Imported => Style { width: 1.7, strength: 1.0, kind: Kind::Dashed },
        _ if marked(&said.rejected) => REJECTED,
        _ if line.accepted || marked(&said.accepted) => {
            Style { width: 2.1, strength: 1.0, kind: Kind::Plain }
        }
        CrestOrigin::Edited => Style { width: 1.6, strength: 0.5 + 0.5 * sure, kind: Kind::Plain },
        CrestOrigin::Traced => Style { width: 1.2, strength: 0.3 + 0.7 * sure, kind: Kind::Plain },
    };
    Some(Style { width: style.width * of_patch, ..style })
}

fn halo(style: Style, on: &[Pos2], ink: &Ink) -> Shape {
    let color = ink.halo.gamma_multiply(0.7 * style.strength.max(0.5));
    Shape::line(on.to_vec(), Stroke::new(style.width + 2.2, color))
}

fn inked(painter: &Painter, style: Style, on: &[Pos2], color: Color32, ink: &Ink) {
    let stroke = Stroke::new(style.width, color.gamma_multiply(style.strength));
    match style.kind {
        Kind::Plain => {
            painter.add(Shape::line(on.to_vec(), stroke));
        }
        Kind::Rail => {
            painter.add(Shape::line(on.to_vec(), stroke));
            painter.add(Shape::line(on.to_vec(), Stroke::new(0.4 * style.width, ink.halo)));
        }
        Kind::Dashed => painter.extend(Shape::dashed_line(on, stroke, 9.0, 4.0)),
        Kind::Dotted => painter.extend(Shape::dashed_line(on, stroke, 2.0, 4.0)),
    }
}

/// Free ends as open circles, forks filled, crossings as filled squares; an end at the border has no mark.
fn marks(painter: &Painter, lines: &[CrestLine], junctions: &[Junction], lens: &Lens, ink: &Ink) {
    let in_sight = |at: &Point| {
        let at = lens.to_screen(*at);
        lens.frame.contains(at).then_some(at)
    };
    let free = lines.iter().flat_map(|line| {
        let ends = [line.line.0.first(), line.line.0.last()];
        (0..2).filter(|end| line.ends[*end] == End::Free).filter_map(move |end| ends[end])
    });
    let free: Vec<Pos2> = free.filter_map(in_sight).collect();
    let forks: Vec<(Pos2, bool)> = junctions
        .iter()
        .filter_map(|junction| Some((in_sight(&junction.at)?, junction.branches.len() == 1)))
        .collect();
    if free.len() + forks.len() > MOST_MARKS {
        return;
    }
    for at in free {
        painter.circle(at, 3.0, ink.halo, Stroke::new(1.3, ink.line));
    }
    for (at, is_fork) in forks {
        if is_fork {
            painter.circle(at, 3.0, ink.line, Stroke::new(1.2, ink.halo));
        } else {
            let square = egui::Rect::from_center_size(at, Vec2::splat(6.0));
            painter.rect_filled(square.expand(1.2), 0.0, ink.halo);
            painter.rect_filled(square, 0.0, ink.line);
        }
    }
}

/// What the user said and drew of the crests of a patch.
fn said(painter: &Painter, table: &Table<'_>, patch: &Patch, look: Look) {
    let (lens, ink, said) = (&table.lens, &table.ink, &patch.crests);
    let (visible, scale) = (lens.visible(), lens.per_col.min(lens.per_row));
    for stroke in &said.strokes {
        let style = match stroke.kind {
            // What is traced anew shows these as lines of their own.
            StrokeKind::Crest | StrokeKind::Import if look.current => continue,
            StrokeKind::Import => Style { width: 1.7, strength: 1.0, kind: Kind::Dashed },
            _ => Style { width: 3.4, strength: 1.0, kind: Kind::Rail },
        };
        let Some(points) = seen(&stroke.line, visible, scale) else { continue };
        let on: Vec<Pos2> = points.iter().map(|p| lens.to_screen(*p)).collect();
        painter.add(halo(style, &on, ink));
        inked(painter, style, &on, ink.line, ink);
    }
    if !look.selected {
        return;
    }
    let crested = table.model.session.results.crests(patch.id);
    for at in &said.rejected {
        let gone = table.model.session.results.rejected(patch.id, *at);
        if let Some(points) = gone.and_then(|line| seen(line, visible, scale)) {
            let on: Vec<Pos2> = points.iter().map(|p| lens.to_screen(*p)).collect();
            painter.add(halo(REJECTED, &on, ink));
            inked(painter, REJECTED, &on, ink.line, ink);
        }
        crossed(painter, lens.to_screen(*at), ink);
    }
    for at in &said.cuts {
        let way = crested.and_then(|crested| nearest_way(crested, *at)).unwrap_or(Vec2::RIGHT);
        let along = lens.step(f64::from(way.x), f64::from(way.y));
        cut(painter, lens.to_screen(*at), along.normalized(), ink);
    }
}

/// The way of the lines beside a place, as a step of pixels: a cut has an end on each of its sides.
fn nearest_way(crested: &Crested, at: Point) -> Option<Vec2> {
    let near = crested.near(at, 4.0)?;
    let points = &crested.lines()[near.line].line.0;
    let off = |w: &&[Point]| {
        let middle = Point::new(0.5 * (w[0].x + w[1].x), 0.5 * (w[0].y + w[1].y));
        middle.distance(at)
    };
    let pair = points.windows(2).min_by(|a, b| off(a).total_cmp(&off(b)))?;
    let way = Vec2::new((pair[1].x - pair[0].x) as f32, (pair[1].y - pair[0].y) as f32);
    (way != Vec2::ZERO).then_some(way)
}

/// A cross where a line was rejected.
fn crossed(painter: &Painter, at: Pos2, ink: &Ink) {
    for (width, color) in [(3.6, ink.halo), (1.5, ink.over_image)] {
        for arm in [Vec2::new(4.5, 4.5), Vec2::new(4.5, -4.5)] {
            painter.line_segment([at - arm, at + arm], Stroke::new(width, color));
        }
    }
}

/// Two bars across a line, where it is cut.
fn cut(painter: &Painter, at: Pos2, along: Vec2, ink: &Ink) {
    let across = along.rot90() * 6.0;
    for (width, color) in [(3.6, ink.halo), (1.5, ink.over_image)] {
        for side in [-1.0, 1.0] {
            let middle = at + along * (2.0 * side);
            painter.line_segment([middle - across, middle + across], Stroke::new(width, color));
        }
    }
}

/// Ground that is no bedform, hatched.
fn masked(painter: &Painter, mask: &Polygon, lens: &Lens, ink: &Ink) {
    let rings: Vec<Vec<Pos2>> =
        mask.rings().map(|ring| ring.iter().map(|p| lens.to_screen(*p)).collect()).collect();
    for line in hatched(&rings, lens.frame) {
        painter.line_segment(line, Stroke::new(2.6, ink.halo.gamma_multiply(0.55)));
        painter.line_segment(line, Stroke::new(1.0, ink.line.gamma_multiply(0.8)));
    }
    for ring in rings {
        painter.add(Shape::closed_line(ring.clone(), Stroke::new(3.4, ink.halo.gamma_multiply(0.8))));
        painter.add(Shape::closed_line(ring, Stroke::new(1.3, ink.line)));
    }
}

/// The line under the pointer, and the end a tool would take there.
fn pointed(painter: &Painter, table: &Table<'_>) {
    let (model, lens, ink) = (table.model, &table.lens, &table.ink);
    if let Some((_, crested, near)) = crests::pointed(model).filter(|(p, ..)| p.raster == table.entry.id) {
        let points = &crested.lines()[near.line].line;
        let on: Vec<Pos2> = shown(points, lens);
        painter.add(Shape::line(on.clone(), Stroke::new(5.4, ink.halo)));
        painter.add(Shape::line(on, Stroke::new(2.6, ink.over_image)));
    }
    if !matches!(model.session.tool, Tool::Ridge | Tool::Join) {
        return;
    }
    let end = model.crest_patch().zip(model.session.cursor);
    let end = end.and_then(|(patch, cursor)| crests::end_near(model, patch.id, cursor.pixel));
    if let Some(end) = end {
        let at = lens.to_screen(end.at);
        painter.circle_stroke(at, 7.0, Stroke::new(4.2, ink.halo));
        painter.circle_stroke(at, 7.0, Stroke::new(2.0, ink.over_image));
    }
}

fn shown(line: &Polyline, lens: &Lens) -> Vec<Pos2> {
    line.0.iter().map(|p| lens.to_screen(*p)).collect()
}
