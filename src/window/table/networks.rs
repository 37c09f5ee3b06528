//! Channel networks on the raster: lines by order in one hue on a halo, with what the user said of them.

use std::collections::BTreeMap;
use std::sync::Arc;

use egui::{Color32, Painter, Pos2, Rect, Shape, Stroke, TextureHandle, TextureOptions, Vec2, pos2};

use crate::desk::{self, Leg, Tracing, channels};
use crate::ground::{Bounds, Grid, Point, Polygon, ReachOrigin};
use crate::study::{
    DrainageFinding, FromElevation, FromImage, Id, NetworkEntry, NetworkFinding, NetworkSource,
};

use super::Table;
use super::draw::handle;
use super::ink::Ink;
use super::lens::Lens;
use super::lines::{Chart, Line};

/// Points of all lines on the screen; when there are more, the lowest orders are left out.
const MOST_POINTS: usize = 30_000;
/// Most marks of heads and outlets.
const MOST_MARKS: usize = 250;
/// A reach this long on the screen has room for an arrowhead.
const ARROW_ROOM: f32 = 54.0;
/// A sense at least this sure is drawn.
const SURE: f64 = 0.8;

/// What is kept from frame to frame, by network.
#[derive(Default)]
pub struct Charts {
    kept: BTreeMap<Id, Kept>,
}

struct Kept {
    chart: Chart,
    /// The change map, once it was asked for.
    changes: Option<TextureHandle>,
}

/// How a network is drawn.
#[derive(Clone, Copy)]
struct Look {
    selected: bool,
    /// The finding is of an older sheet.
    faded: bool,
}

impl Charts {
    /// Draws every network of the raster, the selected one on top.
    pub fn draw(&mut self, painter: &Painter, table: &Table<'_>) {
        let (model, results) = (table.model, &table.model.session.results);
        self.kept.retain(|id, _| results.network(*id).is_some());
        let (top, rest): (Vec<&NetworkEntry>, Vec<&NetworkEntry>) =
            table.networks().partition(|n| model.view.network == Some(n.id));
        for entry in rest.into_iter().chain(top) {
            let selected = model.view.network == Some(entry.id);
            if let Some(finding) = results.network(entry.id) {
                let faded = results.network_standing(entry.id) == desk::Standing::OutOfDate;
                self.found(painter, table, finding, Look { selected, faded });
            }
            if selected {
                said(painter, entry, &table.lens, &table.ink);
            }
        }
        if let Some((_, reach)) = channels::pointed_reach(model).filter(|(f, _)| f.raster == table.entry.id) {
            let line: Vec<Pos2> = reach.line.0.iter().map(|p| table.lens.to_screen(*p)).collect();
            painter.add(Shape::line(line.clone(), Stroke::new(5.0, table.ink.halo)));
            painter.add(Shape::line(line, Stroke::new(2.6, table.ink.over_image)));
        }
    }

    fn found(&mut self, painter: &Painter, table: &Table<'_>, finding: &Arc<NetworkFinding>, look: Look) {
        let (lens, ink, layers) = (&table.lens, &table.ink, table.model.view.layers);
        let kept = self.kept.entry(finding.id).or_insert_with(|| Kept::new(finding));
        if !Arc::ptr_eq(&kept.chart.finding, finding) {
            *kept = Kept::new(finding);
        }
        if let Some(drainage) = finding.drainage.as_ref().filter(|_| look.selected && layers.changes) {
            kept.changes(painter, drainage, lens, ink);
        }
        kept.chart.fit(lens.per_col.min(lens.per_row));
        if layers.divides && look.selected {
            for ring in kept.chart.divides_in(lens.visible()) {
                divide(painter, ring, lens, ink);
            }
        }
        kept.chart.choose(lens.visible(), MOST_POINTS);
        let seen: Vec<&Line> = kept.chart.chosen().collect();
        lines(painter, &seen, look, lens, ink);
        if look.selected {
            seen.iter().for_each(|line| arrowhead(painter, line, lens, ink));
            let marks = |nodes: &[usize]| {
                let at = nodes.iter().map(|n| lens.to_screen(finding.network.nodes[*n].at));
                let seen: Vec<Pos2> = at.filter(|at| lens.frame.contains(*at)).collect();
                if seen.len() <= MOST_MARKS { seen } else { Vec::new() }
            };
            for at in marks(&kept.chart.heads) {
                painter.circle(at, 2.4, ink.halo, Stroke::new(1.2, ink.water));
            }
            for at in marks(&kept.chart.outlets) {
                let half = Vec2::splat(3.2);
                let square = Rect::from_min_max(at - half, at + half);
                painter.rect_filled(square.expand(1.4), 0.0, ink.halo);
                painter.rect_filled(square, 0.0, ink.water);
            }
        }
    }
}

impl Kept {
    fn new(finding: &Arc<NetworkFinding>) -> Self {
        Self { chart: Chart::new(Arc::clone(finding)), changes: None }
    }

    /// The tint of raised and cut ground.
    fn changes(&mut self, painter: &Painter, drainage: &DrainageFinding, lens: &Lens, ink: &Ink) {
        let map = &drainage.change_map;
        if map.width() == 0 || map.height() == 0 {
            return;
        }
        let texture = self.changes.get_or_insert_with(|| {
            painter.ctx().load_texture("changed ground", tinted(map, ink), TextureOptions::NEAREST)
        });
        let (at, px) = (drainage.change_map_at, drainage.change_map_px);
        let far = Point::new(at.x + px * map.width() as f64, at.y + px * map.height() as f64);
        let whole = Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0));
        painter.image(texture.id(), lens.rect(Bounds { min: at, max: far }), whole, Color32::WHITE);
    }
}

/// Raised and cut ground in their hues, the stronger the more of metres: half way at the root mean square.
fn tinted(map: &Grid<f32>, ink: &Ink) -> egui::ColorImage {
    let changed = || map.valid_values().filter(|v| v.is_finite() && *v != 0.0);
    let count = changed().count().max(1);
    let typical = (changed().map(|v| f64::from(v) * f64::from(v)).sum::<f64>() / count as f64).sqrt();
    let color = |value: Option<f32>| match value.filter(|v| v.is_finite() && *v != 0.0) {
        None => Color32::TRANSPARENT,
        Some(v) => {
            let depth = f64::from(v).abs();
            let strength = 0.25 + 0.65 * depth / (depth + typical.max(f64::MIN_POSITIVE));
            (if v > 0.0 { ink.raised } else { ink.cut }).gamma_multiply(strength as f32)
        }
    };
    let cells = (0..map.height()).flat_map(|row| (0..map.width()).map(move |col| (col, row)));
    let pixels = cells.map(|(col, row)| color(map.get(col, row))).collect();
    egui::ColorImage::new([map.width(), map.height()], pixels)
}

/// All halos first, so that none covers a neighbour's ink.
fn lines(painter: &Painter, seen: &[&Line], look: Look, lens: &Lens, ink: &Ink) {
    let screen: Vec<Vec<Pos2>> =
        seen.iter().map(|line| line.points.iter().map(|p| lens.to_screen(*p)).collect()).collect();
    let fade = if look.faded { 0.45 } else { 1.0 };
    let width = |line: &Line| (if look.selected { 1.0 } else { 0.75 }) * weight(line.rank);
    let halo = ink.halo.gamma_multiply(0.75 * fade);
    let halos = seen.iter().zip(&screen);
    painter.extend(halos.map(|(line, on)| Shape::line(on.clone(), Stroke::new(width(line) + 2.0, halo))));
    for (line, on) in seen.iter().zip(screen) {
        let sure = 0.4 + 0.6 * line.confidence as f32;
        let stroke = Stroke::new(width(line), ink.water.gamma_multiply(fade * sure));
        if line.origin == ReachOrigin::Bridged {
            painter.extend(Shape::dashed_line(&on, stroke, 5.0, 3.5));
        } else {
            painter.add(Shape::line(on, stroke));
        }
    }
}

/// Line width by rank, points.
fn weight(rank: u32) -> f32 {
    (0.55 + 0.65 * rank as f32).min(5.5)
}

/// Which way the water went, in the middle of a reach that has room for it and tells.
fn arrowhead(painter: &Painter, line: &Line, lens: &Lens, ink: &Ink) {
    let down = if line.sense >= SURE {
        1.0
    } else if line.sense <= 1.0 - SURE {
        -1.0
    } else {
        return;
    };
    let on: Vec<Pos2> = line.points.iter().map(|p| lens.to_screen(*p)).collect();
    let total: f32 = on.windows(2).map(|w| w[0].distance(w[1])).sum();
    if total < ARROW_ROOM {
        return;
    }
    let mut left = 0.5 * total;
    for pair in on.windows(2) {
        let step = pair[0].distance(pair[1]);
        if step > 0.0 && left <= step {
            let at = pair[0] + (pair[1] - pair[0]) * (left / step);
            head(painter, at, (pair[1] - pair[0]).normalized() * down, weight(line.rank), ink.water, ink);
            return;
        }
        left -= step;
    }
}

/// A filled head on a halo, its middle at `at`.
pub fn head(painter: &Painter, at: Pos2, along: Vec2, line_width: f32, color: Color32, ink: &Ink) {
    if !painter.clip_rect().contains(at) {
        return;
    }
    let size = 4.2 + line_width;
    let shape = |size: f32| {
        let side = along.rot90() * (0.62 * size);
        vec![at + along * size, at - along * (0.6 * size) + side, at - along * (0.6 * size) - side]
    };
    painter.add(Shape::convex_polygon(shape(size + 1.8), ink.halo, Stroke::NONE));
    painter.add(Shape::convex_polygon(shape(size), color, Stroke::NONE));
}

/// The outline of a basin.
fn divide(painter: &Painter, ring: &[Point], lens: &Lens, ink: &Ink) {
    let mut on: Vec<Pos2> = ring.iter().map(|p| lens.to_screen(*p)).collect();
    on.extend(on.first().copied());
    painter.add(Shape::line(on.clone(), Stroke::new(2.6, ink.halo.gamma_multiply(0.7))));
    painter.extend(Shape::dashed_line(&on, Stroke::new(1.2, ink.line), 7.0, 4.0));
}

/// The channel under way: the legs that stand, the way to the pointer dashed, and the picks.
pub fn tracing(painter: &Painter, tracing: &Tracing, lens: &Lens, ink: &Ink) {
    let screen = |leg: &Leg| leg.line().iter().map(|p| lens.to_screen(*p)).collect::<Vec<Pos2>>();
    for leg in tracing.legs.iter().flatten() {
        let on = screen(leg);
        painter.add(Shape::line(on.clone(), Stroke::new(4.6, ink.halo.gamma_multiply(0.85))));
        painter.add(Shape::line(on, Stroke::new(2.2, ink.over_image)));
    }
    if let Some(live) = &tracing.live {
        let on = screen(live);
        painter.add(Shape::line(on.clone(), Stroke::new(4.2, ink.halo.gamma_multiply(0.7))));
        painter.extend(Shape::dashed_line(&on, Stroke::new(2.0, ink.over_image), 6.0, 4.0));
    }
    for (i, pick) in tracing.picks.iter().enumerate() {
        handle(painter, lens.to_screen(*pick), i + 1 == tracing.picks.len(), ink);
    }
}

/// What the user said and drew of a network.
fn said(painter: &Painter, entry: &NetworkEntry, lens: &Lens, ink: &Ink) {
    match &entry.source {
        NetworkSource::Elevation(it) => of_elevation(painter, it, lens, ink),
        NetworkSource::Image(it) => of_image(painter, it, lens, ink),
    }
}

fn of_elevation(painter: &Painter, it: &FromElevation, lens: &Lens, ink: &Ink) {
    for basin in &it.closed {
        lake(painter, basin, lens, ink);
    }
    for outlet in &it.outlets {
        let at = lens.to_screen(*outlet);
        painter.circle_stroke(at, 8.0, Stroke::new(4.2, ink.halo));
        painter.circle_stroke(at, 8.0, Stroke::new(2.0, ink.over_image));
        painter.circle_filled(at, 2.0, ink.over_image);
    }
}

/// A closed basin: its outline and a light wash.
fn lake(painter: &Painter, basin: &Polygon, lens: &Lens, ink: &Ink) {
    for ring in basin.rings() {
        let on: Vec<Pos2> = ring.iter().map(|p| lens.to_screen(*p)).collect();
        painter.add(Shape::closed_line(on.clone(), Stroke::new(4.0, ink.halo.gamma_multiply(0.8))));
        painter.add(Shape::closed_line(on, Stroke::new(1.8, ink.water)));
    }
    if let Some(bounds) = basin.bounds() {
        let at = lens.to_screen(bounds.centre());
        for row in [-4.0f32, 0.0, 4.0] {
            let half = 9.0 - row.abs();
            let [a, b] = [at + Vec2::new(-half, row), at + Vec2::new(half, row)];
            painter.line_segment([a, b], Stroke::new(3.4, ink.halo));
            painter.line_segment([a, b], Stroke::new(1.4, ink.water));
        }
    }
}

fn of_image(painter: &Painter, it: &FromImage, lens: &Lens, ink: &Ink) {
    for channel in &it.traced {
        for pick in &channel.picks {
            painter.circle(lens.to_screen(*pick), 2.6, ink.halo, Stroke::new(1.3, ink.water));
        }
    }
    for struck in &it.struck {
        let at = lens.to_screen(*struck);
        for (width, color) in [(4.0, ink.halo), (1.8, ink.over_image)] {
            for arm in [Vec2::new(5.0, 5.0), Vec2::new(5.0, -5.0)] {
                painter.line_segment([at - arm, at + arm], Stroke::new(width, color));
            }
        }
    }
    for [from, to] in &it.flows {
        let (a, b) = (lens.to_screen(*from), lens.to_screen(*to));
        painter.line_segment([a, b], Stroke::new(4.2, ink.halo));
        painter.line_segment([a, b], Stroke::new(1.8, ink.over_image));
        if a != b {
            head(painter, b, (b - a).normalized(), 2.0, ink.over_image, ink);
        }
    }
}
