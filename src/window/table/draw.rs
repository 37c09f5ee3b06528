//! Painting what lies on the raster and round it: strokes, outlines, names, the outline under way,
//! handles, the margin with its ticks, north arrow and scale bar.

use egui::epaint::{PathShape, PathStroke, TextShape};
use egui::{Align2, Color32, FontId, Painter, Pos2, Rect, Shape, Stroke, StrokeKind, Vec2, vec2};

use crate::desk::{Draft, Tool};
use crate::ground::{Place, Point, Polygon};
use crate::study::Patch;

use super::ink::Ink;
use super::lens::Lens;
use super::margin::{self, Cross, Tick};
use super::networks;
use super::pick;

/// Width of the margin, points.
pub const MARGIN: f32 = 24.0;
const TICK: f32 = 5.0;
/// How far a graticule cross reaches.
const CROSS: f32 = 4.0;

/// How a patch is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    Plain,
    Hovered,
    Selected,
}

/// A trend stroke on the screen.
#[derive(Clone, Copy, Debug)]
pub struct ScreenStroke {
    pub from: Pos2,
    pub to: Pos2,
    /// The finding is of an older sheet.
    pub faded: bool,
}

/// Ink strokes on a light halo; all halos first, so that none covers a neighbour's ink.
pub fn strokes(painter: &Painter, strokes: &[ScreenStroke], ink: &Ink) {
    let fade = |color: Color32, faded: bool| if faded { color.gamma_multiply(0.38) } else { color };
    let layer = |width: f32, color: Color32| {
        strokes.iter().map(move |s| Shape::LineSegment {
            points: [s.from, s.to],
            stroke: Stroke::new(width, fade(color, s.faded)),
        })
    };
    painter.extend(layer(3.6, ink.halo.gamma_multiply(0.85)));
    painter.extend(layer(1.7, ink.line));
}

/// Outline and holes of a patch.
pub fn outline(painter: &Painter, polygon: &Polygon, standing: Standing, lens: &Lens, ink: &Ink) {
    let (width, color) = match standing {
        Standing::Plain => (1.5, ink.line),
        Standing::Hovered => (2.2, ink.line),
        Standing::Selected => (2.4, ink.over_image),
    };
    for ring in polygon.rings() {
        let points: Vec<Pos2> = ring.iter().map(|p| lens.to_screen(*p)).collect();
        let line = |width: f32, color: Color32| {
            Shape::Path(PathShape::closed_line(points.clone(), PathStroke::new(width, color)))
        };
        painter.extend([line(width + 2.4, ink.halo.gamma_multiply(0.8)), line(width, color)]);
    }
}

/// The name of a patch, ink on a paper halo, and its box on the screen.
pub fn name(painter: &Painter, patch: &Patch, standing: Standing, lens: &Lens, ink: &Ink) -> Option<Rect> {
    let at = lens.to_screen(pick::name_place(&patch.outline)?);
    let bounds = lens.rect(patch.outline.bounds()?);
    let galley = painter.layout_no_wrap(patch.name.clone(), FontId::proportional(14.0), Color32::PLACEHOLDER);
    let rect = Align2::CENTER_CENTER.anchor_size(at, galley.size());
    // A name much larger than its patch would hide it.
    if bounds.width() < 0.5 * rect.width() && standing == Standing::Plain {
        return None;
    }
    let color = if standing == Standing::Selected { ink.over_image } else { ink.line };
    halo_text(painter, rect.min, &galley, color, ink.halo);
    Some(rect)
}

/// Letters on a halo.
pub fn halo_text(
    painter: &Painter,
    at: Pos2,
    galley: &std::sync::Arc<egui::Galley>,
    color: Color32,
    halo: Color32,
) {
    for step in 0..12 {
        let (sin, cos) = (std::f32::consts::TAU * step as f32 / 12.0).sin_cos();
        let around = at + vec2(cos, sin) * 1.8;
        painter.galley_with_override_text_color(around, galley.clone(), halo);
    }
    painter.galley_with_override_text_color(at, galley.clone(), color);
}

/// The outline under way: laid corners, the ring to the pointer dashed.
pub fn draft(painter: &Painter, draft: &Draft, next: Option<Point>, lens: &Lens, ink: &Ink) {
    let ring: Vec<Pos2> = draft.ring(next).into_iter().map(|p| lens.to_screen(p)).collect();
    let Some(first) = ring.first() else { return };
    let open = if draft.tool.takes_two() { ring.len() } else { draft.points.len() };
    let color = ink.over_image;
    let halo = Stroke::new(4.2, ink.halo.gamma_multiply(0.8));
    let mut closed = ring.clone();
    closed.push(*first);
    painter.add(Shape::line(closed.clone(), halo));
    painter.add(Shape::line(ring[..open].to_vec(), Stroke::new(1.8, color)));
    let rest = &closed[open.saturating_sub(1)..];
    painter.extend(Shape::dashed_line(rest, Stroke::new(1.8, color), 6.0, 4.0));
    if let (Tool::Arrow, [from, to]) = (draft.tool, ring.as_slice())
        && from != to
    {
        networks::head(painter, *to, (*to - *from).normalized(), 2.0, ink.over_image, ink);
    }
    if !draft.tool.takes_two() {
        for (index, p) in draft.points.iter().enumerate() {
            handle(painter, lens.to_screen(*p), index == 0, ink);
        }
    }
}

/// A corner handle: a small square of paper; filled when it is the one in hand.
pub fn handle(painter: &Painter, at: Pos2, active: bool, ink: &Ink) {
    let rect = Rect::from_center_size(at, Vec2::splat(if active { 9.0 } else { 6.5 }));
    let fill = if active { ink.over_image } else { ink.halo };
    painter.rect(rect, 1.0, fill, Stroke::new(1.4, ink.over_image), StrokeKind::Middle);
}

/// The keyboard's cross.
pub fn cross(painter: &Painter, at: Pos2, ink: &Ink) {
    for (width, color) in [(4.0, ink.halo.gamma_multiply(0.8)), (1.6, ink.over_image)] {
        let stroke = Stroke::new(width, color);
        for arm in [Vec2::RIGHT, Vec2::DOWN, Vec2::LEFT, Vec2::UP] {
            painter.line_segment([at + arm * 4.0, at + arm * 14.0], stroke);
        }
    }
}

/// Small crosses where labelled lines meet: enough to carry the eye across the map.
pub fn crosses(painter: &Painter, crosses: &[Cross], ink: &Ink) {
    for Cross { at, arms } in crosses {
        for (width, color) in [(2.6, ink.halo.gamma_multiply(0.55)), (1.0, ink.line)] {
            for arm in arms {
                painter.line_segment([*at - *arm * CROSS, *at + *arm * CROSS], Stroke::new(width, color));
            }
        }
    }
}

/// The margin: paper round the frame, a rule, ticks and labels.
pub fn margin(painter: &Painter, outer: Rect, frame: Rect, ticks: &[Tick], ink: &Ink) {
    let strips = [
        Rect::from_min_max(outer.min, egui::pos2(outer.max.x, frame.min.y)),
        Rect::from_min_max(egui::pos2(outer.min.x, frame.max.y), outer.max),
        Rect::from_min_max(egui::pos2(outer.min.x, frame.min.y), egui::pos2(frame.min.x, frame.max.y)),
        Rect::from_min_max(egui::pos2(frame.max.x, frame.min.y), egui::pos2(outer.max.x, frame.max.y)),
    ];
    for strip in strips {
        painter.rect_filled(strip, 0.0, ink.paper);
    }
    painter.rect_stroke(frame, 0.0, Stroke::new(1.2, ink.ink), StrokeKind::Outside);
    for tick in ticks {
        // As long across the margin whatever its lean.
        let lean = tick.inward / -tick.inward.dot(tick.side.outward()).min(-0.3);
        painter.line_segment([tick.at, tick.at - lean * TICK], Stroke::new(1.2, ink.ink));
        label(painter, tick, frame, ink);
    }
}

fn label(painter: &Painter, tick: &Tick, frame: Rect, ink: &Ink) {
    let galley = painter.layout_no_wrap(tick.label.clone(), FontId::proportional(11.0), ink.soft);
    let size = galley.size();
    let middle = tick.at + tick.side.outward() * (0.5 * (MARGIN + TICK) - 0.5);
    let half = 0.5 * size.x;
    let (along, low, high) = if tick.side.is_level() {
        (middle.x, frame.min.x, frame.max.x)
    } else {
        (middle.y, frame.min.y, frame.max.y)
    };
    // A label that would run into the corner is left out; its tick still stands.
    if along - half < low || along + half > high {
        return;
    }
    if tick.side.is_level() {
        painter.galley(middle - 0.5 * size, galley, ink.soft);
    } else {
        let turned = middle + vec2(-0.5 * size.y, half);
        let shape = TextShape::new(turned, galley, ink.soft).with_angle(-std::f32::consts::FRAC_PI_2);
        painter.add(shape);
    }
}

/// North arrow and scale bar on slips of paper in the frame's lower corners.
pub fn furniture(painter: &Painter, place: &Place, lens: &Lens, ink: &Ink) {
    let frame = lens.frame;
    if frame.width() < 260.0 || frame.height() < 160.0 {
        return;
    }
    if let Some(bar) = margin::scale_bar(place, lens) {
        let slip =
            Rect::from_min_size(frame.left_bottom() + vec2(10.0, -46.0), vec2(bar.length + 28.0, 36.0));
        paper_slip(painter, slip, ink);
        let left = slip.min + vec2(14.0, 25.0);
        let stroke = Stroke::new(1.4, ink.ink);
        painter.line_segment([left, left + vec2(bar.length, 0.0)], stroke);
        for part in [0.0, 0.5, 1.0] {
            let at = left + vec2(bar.length * part, 0.0);
            let height = if part == 0.5 { 3.0 } else { 5.0 };
            painter.line_segment([at, at - vec2(0.0, height)], stroke);
        }
        let text = slip.center_top() + vec2(0.0, 4.0);
        painter.text(text, Align2::CENTER_TOP, bar.label, FontId::proportional(12.0), ink.ink);
    }
    if let Some(north) = margin::north(place, lens) {
        let slip = Rect::from_min_size(frame.right_bottom() - vec2(54.0, 54.0), vec2(44.0, 44.0));
        paper_slip(painter, slip, ink);
        north_arrow(painter, slip.center(), north, ink);
    }
}

fn paper_slip(painter: &Painter, rect: Rect, ink: &Ink) {
    painter.rect(rect, 3.0, ink.paper.gamma_multiply(0.92), Stroke::new(1.0, ink.rule), StrokeKind::Inside);
}

/// A needle, dark on one side, with the letter at its tip.
fn north_arrow(painter: &Painter, centre: Pos2, north: Vec2, ink: &Ink) {
    let side = north.rot90();
    let at = |along: f32, across: f32| centre + north * along + side * across;
    let (tip, tail, notch) = (at(9.0, 0.0), [at(-14.0, -5.5), at(-14.0, 5.5)], at(-10.0, 0.0));
    painter.add(Shape::convex_polygon(vec![tip, tail[0], notch], ink.ink, Stroke::NONE));
    let outline = vec![tip, tail[1], notch];
    painter.add(Shape::convex_polygon(outline, Color32::TRANSPARENT, Stroke::new(1.0, ink.ink)));
    painter.text(at(15.0, 0.0), Align2::CENTER_CENTER, "N", FontId::proportional(11.0), ink.ink);
}
