//! Paints a plate's figure with egui, so that a rose looks the same on screen and in print.

use std::collections::BTreeMap;
use std::sync::Arc;

use egui::epaint::{Mesh, PathShape, PathStroke, TextShape};
use egui::{
    Color32, ColorImage, Context, FontFamily, FontId, Painter, Pos2, Rect, Shape, TextureHandle, Ui, pos2,
    vec2,
};

use super::theme::{bold, color};
use crate::ground::Point;
use crate::plate::{Figure, HALO, Item, Stroke, TextAnchor};

/// Shows `figure` at `scale` points a millimetre and gives it `label` for screen readers.
pub fn show(ui: &mut Ui, figure: &Figure, scale: f32, label: &str) -> egui::Response {
    let size = vec2(figure.width_mm as f32, figure.height_mm as f32) * scale;
    let (rect, response) = ui.allocate_exact_size(size, egui::Sense::hover());
    response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Image, true, label));
    if ui.is_rect_visible(rect) {
        paint(&ui.painter_at(rect.expand(2.0)), figure, rect.min, scale);
    }
    response
}

/// Paints `figure` with its upper left corner at `origin`, `scale` points a millimetre.
pub fn paint(painter: &Painter, figure: &Figure, origin: Pos2, scale: f32) {
    Brush { origin, scale }.items(painter, &figure.items);
}

/// Millimetres to points.
#[derive(Clone, Copy)]
struct Brush {
    origin: Pos2,
    scale: f32,
}

impl Brush {
    fn at(self, p: Point) -> Pos2 {
        self.origin + vec2(p.x as f32, p.y as f32) * self.scale
    }

    fn length(self, mm: f64) -> f32 {
        mm as f32 * self.scale
    }

    fn rect(self, min: Point, max: Point) -> Rect {
        Rect::from_min_max(self.at(min), self.at(max))
    }

    /// Lines thinner than a screen pixel would fade.
    fn width(self, stroke: &Stroke) -> f32 {
        self.length(stroke.width_mm).max(0.7)
    }

    fn items(self, painter: &Painter, items: &[Item]) {
        for item in items {
            self.item(painter, item);
        }
    }

    fn item(self, painter: &Painter, item: &Item) {
        match item {
            Item::Path { points, closed, fill, stroke } => {
                let points: Vec<Pos2> = points.iter().map(|p| self.at(*p)).collect();
                if let Some(fill) = fill {
                    painter.extend(filled(&points, color(*fill)));
                }
                if let Some(stroke) = stroke {
                    self.line(painter, points, *closed, stroke);
                }
            }
            Item::Circle { centre, radius_mm, fill, stroke } => {
                let (centre, radius) = (self.at(*centre), self.length(*radius_mm));
                if let Some(fill) = fill {
                    painter.circle_filled(centre, radius, color(*fill));
                }
                if let Some(stroke) = stroke {
                    if stroke.dash_mm.is_some() {
                        self.line(painter, ring(centre, radius), true, stroke);
                    } else {
                        painter.circle_stroke(centre, radius, (self.width(stroke), color(stroke.color)));
                    }
                }
            }
            Item::Text { .. } => self.text(painter, item),
            Item::Image { min, max, width, height, rgba } => {
                let texture = texture(painter.ctx(), [*width, *height], rgba);
                let whole = Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0));
                painter.image(texture.id(), self.rect(*min, *max), whole, Color32::WHITE);
            }
            Item::Clip { min, max, items } => {
                let clip = self.rect(*min, *max).intersect(painter.clip_rect());
                self.items(&painter.with_clip_rect(clip), items);
            }
        }
    }

    fn line(self, painter: &Painter, mut points: Vec<Pos2>, closed: bool, stroke: &Stroke) {
        let (width, ink) = (self.width(stroke), color(stroke.color));
        match stroke.dash_mm {
            Some([on, off]) => {
                if closed {
                    points.extend(points.first().copied());
                }
                let stroke = egui::Stroke::new(width, ink);
                painter.extend(Shape::dashed_line(&points, stroke, self.length(on), self.length(off)));
            }
            None => {
                let stroke = PathStroke::new(width, ink);
                painter.add(PathShape { points, closed, fill: Color32::TRANSPARENT, stroke });
            }
        }
    }

    fn text(self, painter: &Painter, item: &Item) {
        let Item::Text { at, text, size_mm, bold: heavy, color: ink, anchor, turn_deg, halo } = item else {
            return;
        };
        let family = if *heavy { bold() } else { FontFamily::Proportional };
        let font = FontId::new(self.length(*size_mm), family);
        let galley = painter.layout_no_wrap(text.clone(), font, color(*ink));
        let baseline =
            galley.rows.first().and_then(|row| row.glyphs.first()).map_or(0.0, |glyph| glyph.pos.y);
        let across = match anchor {
            TextAnchor::Start => 0.0,
            TextAnchor::Middle => 0.5 * galley.size().x,
            TextAnchor::End => galley.size().x,
        };
        let angle = turn_deg.to_radians() as f32;
        let turn = egui::emath::Rot2::from_angle(angle);
        let place = self.at(*at) - turn * vec2(across, baseline);
        if let Some(halo) = halo {
            let reach = self.length(HALO * size_mm);
            for step in 0..8 {
                let by = egui::Vec2::angled(step as f32 * std::f32::consts::FRAC_PI_4) * reach;
                let shape = TextShape::new(place + by, Arc::clone(&galley), color(*halo))
                    .with_override_text_color(color(*halo));
                painter.add(shape.with_angle(angle));
            }
        }
        painter.add(TextShape::new(place, galley, color(*ink)).with_angle(angle));
    }
}

fn ring(centre: Pos2, radius: f32) -> Vec<Pos2> {
    (0..72).map(|i| centre + egui::Vec2::angled(i as f32 * std::f32::consts::TAU / 72.0) * radius).collect()
}

/// A filled ring: smooth-edged when convex, triangles when not; nothing when it has no area.
///
/// egui smooths an edge along its corners' normals; equal neighbours have none, and a sliver's
/// shoot far out. So equal neighbours become one, and slivers are left sharp.
fn filled(points: &[Pos2], fill: Color32) -> Option<Shape> {
    let mut points = points.to_vec();
    points.dedup_by(|a, b| a.distance(*b) < 0.01);
    while points.len() > 1 && points[0].distance(points[points.len() - 1]) < 0.01 {
        points.pop();
    }
    if points.len() < 3 || ring_area(&points) < 1e-3 {
        return None;
    }
    if is_convex(&points) && thickness(&points) > 1.0 {
        return Some(Shape::convex_polygon(points, fill, egui::Stroke::NONE));
    }
    let points = points.as_slice();
    let mut mesh = Mesh::default();
    for point in points {
        mesh.colored_vertex(*point, fill);
    }
    for [a, b, c] in ears(points) {
        mesh.add_triangle(a as u32, b as u32, c as u32);
    }
    Some(Shape::mesh(mesh))
}

fn ring_area(points: &[Pos2]) -> f32 {
    let n = points.len();
    0.5 * (0..n).map(|i| turn(points[0], points[i], points[(i + 1) % n])).sum::<f32>().abs()
}

/// Area over the longest reach: about the width of a sliver.
fn thickness(points: &[Pos2]) -> f32 {
    let reach = points.iter().map(|p| p.distance(points[0])).fold(0.0, f32::max);
    ring_area(points) / reach.max(1e-3)
}

/// Twice the signed area of a triangle.
fn turn(a: Pos2, b: Pos2, c: Pos2) -> f32 {
    (b.x - a.x) * (c.y - a.y) - (b.y - a.y) * (c.x - a.x)
}

/// All turns one way, and once round.
fn is_convex(points: &[Pos2]) -> bool {
    let n = points.len();
    let corner = |i: usize| turn(points[i], points[(i + 1) % n], points[(i + 2) % n]);
    let (left, right) =
        (0..n).map(corner).fold((false, false), |(l, r), t| (l | (t > 1e-3), r | (t < -1e-3)));
    let bearing = |i: usize| (points[(i + 1) % n] - points[i]).angle();
    let total: f32 = (0..n)
        .map(|i| {
            let turn = bearing((i + 1) % n) - bearing(i);
            (turn + std::f32::consts::PI).rem_euclid(std::f32::consts::TAU) - std::f32::consts::PI
        })
        .sum();
    !(left && right) && total.abs() < 1.5 * std::f32::consts::TAU
}

/// Cuts a simple ring into triangles by ears (indices of its points).
fn ears(points: &[Pos2]) -> Vec<[usize; 3]> {
    let n = points.len();
    let area: f32 = (0..n).map(|i| turn(Pos2::ZERO, points[i], points[(i + 1) % n])).sum();
    let sense = if area < 0.0 { -1.0 } else { 1.0 };
    let mut left: Vec<usize> = (0..n).collect();
    let mut triangles = Vec::with_capacity(n);
    while left.len() > 3 {
        let m = left.len();
        let corner = |i: usize| [left[(i + m - 1) % m], left[i], left[(i + 1) % m]];
        let is_ear = |i: usize| {
            let [a, b, c] = corner(i);
            let (pa, pb, pc) = (points[a], points[b], points[c]);
            let inside =
                |p: Pos2| [turn(pa, pb, p), turn(pb, pc, p), turn(pc, pa, p)].iter().all(|t| t * sense > 0.0);
            turn(pa, pb, pc) * sense >= 0.0
                && !left.iter().any(|k| ![a, b, c].contains(k) && inside(points[*k]))
        };
        // A ring that crosses itself may have no ear; then any corner is cut off.
        let at = (0..m).find(|i| is_ear(*i)).unwrap_or(0);
        triangles.push(corner(at));
        left.remove(at);
    }
    triangles.extend(<[usize; 3]>::try_from(left).ok());
    triangles
}

/// Pictures of figures as textures, found again by their shared pixels.
#[derive(Clone, Default)]
struct Pictures(BTreeMap<usize, (Arc<[u8]>, TextureHandle)>);

/// More pictures than a plate has; then all are dropped and uploaded again as needed.
const MOST_PICTURES: usize = 24;

fn texture(ctx: &Context, size: [usize; 2], rgba: &Arc<[u8]>) -> TextureHandle {
    let key = egui::Id::unique("figure pictures");
    let name = Arc::as_ptr(rgba).cast::<u8>() as usize;
    let known = ctx.data(|data| data.get_temp::<Pictures>(key)).unwrap_or_default();
    if let Some((_, texture)) = known.0.get(&name) {
        return texture.clone();
    }
    let image = ColorImage::from_rgba_unmultiplied(size, rgba);
    let texture = ctx.load_texture("figure", image, egui::TextureOptions::LINEAR);
    let mut pictures = if known.0.len() < MOST_PICTURES { known } else { Pictures::default() };
    pictures.0.insert(name, (Arc::clone(rgba), texture.clone()));
    ctx.data_mut(|data| data.insert_temp(key, pictures));
    texture
}

#[cfg(test)]
mod tests {
    use super::{ears, filled, is_convex, turn};
    use egui::{Color32, Pos2, Shape, pos2};

    #[test]
    fn a_bar_of_no_width_is_not_drawn_and_a_sliver_stays_within_itself() {
        let bar =
            |width: f32| [pos2(5.0, 0.0), pos2(5.0 + width, 0.0), pos2(5.0 + width, 8.0), pos2(5.0, 8.0)];
        assert!(filled(&bar(0.0), Color32::RED).is_none());
        assert!(matches!(filled(&bar(0.2), Color32::RED), Some(Shape::Mesh(_))));
        assert!(matches!(filled(&bar(20.0), Color32::RED), Some(Shape::Path(_))));
    }

    fn area(points: &[Pos2], triangles: &[[usize; 3]]) -> f64 {
        triangles
            .iter()
            .map(|[a, b, c]| f64::from(0.5 * turn(points[*a], points[*b], points[*c]).abs()))
            .sum()
    }

    #[test]
    fn a_dented_ring_is_cut_into_triangles_of_its_own_area() {
        let arrow = [pos2(0.0, 0.0), pos2(10.0, 5.0), pos2(0.0, 10.0), pos2(3.0, 5.0)];
        assert!(!is_convex(&arrow));
        crate::assert_close!(area(&arrow, &ears(&arrow)), 35.0, 1e-4, "arrow head");
        let reversed: Vec<_> = arrow.iter().rev().copied().collect();
        crate::assert_close!(area(&reversed, &ears(&reversed)), 35.0, 1e-4, "the other way round");
    }

    #[test]
    fn a_five_pointed_star_drawn_in_one_line_is_not_convex() {
        let star: Vec<_> = (0..5)
            .map(|i| Pos2::ZERO + 10.0 * egui::Vec2::angled(i as f32 * 2.0 * std::f32::consts::TAU / 5.0))
            .collect();
        assert!(!is_convex(&star));
        let ring: Vec<_> = (0..5)
            .map(|i| Pos2::ZERO + 10.0 * egui::Vec2::angled(i as f32 * std::f32::consts::TAU / 5.0))
            .collect();
        assert!(is_convex(&ring));
    }
}
