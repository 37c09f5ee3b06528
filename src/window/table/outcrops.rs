//! Outcrops on the raster: dotted and hatched, so that nobody takes one for a patch, with names that
//! select them.

use egui::{Align2, Color32, FontId, Painter, Pos2, Response, Role, Sense, Shape, Stroke, Ui, WidgetInfo};

use crate::desk::{Command, ObstacleCommand};
use crate::ground::{Bounds, Point};
use crate::study::Obstacle;

use super::Table;
use super::draw::halo_text;
use super::ink::Ink;
use super::lens::Lens;

/// Distance of hatching lines, points; wider on outcrops that fill the screen.
const HATCH: f32 = 8.0;
const MOST_LINES: f32 = 80.0;

/// Dots along the outline over faint hatching; both in the accent when selected.
pub fn draw(painter: &Painter, obstacle: &Obstacle, selected: bool, lens: &Lens, ink: &Ink) {
    let ring: Vec<Pos2> = obstacle.outline.outer.iter().map(|p| lens.to_screen(*p)).collect();
    let Some(first) = ring.first().copied() else { return };
    let color = if selected { ink.over_image } else { ink.line };
    for line in hatching(&ring) {
        painter.line_segment(line, Stroke::new(2.2, ink.halo.gamma_multiply(0.45)));
        painter.line_segment(line, Stroke::new(0.9, color.gamma_multiply(0.8)));
    }
    let closed: Vec<Pos2> = ring.into_iter().chain([first]).collect();
    painter.extend(Shape::dotted_line(&closed, ink.halo, 6.0, 3.0));
    painter.extend(Shape::dotted_line(&closed, color, 6.0, 1.8));
}

/// Lines falling to the right at half a right angle, cut to the ring (even–odd).
fn hatching(ring: &[Pos2]) -> Vec<[Pos2; 2]> {
    // Along a line x + y is constant; x − y runs along it.
    let turned: Vec<(f32, f32)> = ring.iter().map(|p| (p.x + p.y, p.x - p.y)).collect();
    let (low, high) = turned.iter().fold((f32::MAX, f32::MIN), |(l, h), (s, _)| (l.min(*s), h.max(*s)));
    let step = (HATCH * std::f32::consts::SQRT_2).max((high - low) / MOST_LINES);
    let count = ((high - low) / step).max(0.0) as usize;
    let mut lines = Vec::new();
    for k in 1..=count {
        let at = low + (k as f32 - 0.5) * step;
        let mut cuts: Vec<f32> = Vec::new();
        for (i, a) in turned.iter().enumerate() {
            let b = turned[(i + 1) % turned.len()];
            if (a.0 > at) != (b.0 > at) {
                cuts.push(a.1 + (at - a.0) / (b.0 - a.0) * (b.1 - a.1));
            }
        }
        cuts.sort_by(f32::total_cmp);
        let point = |d: f32| Pos2::new(0.5 * (at + d), 0.5 * (at - d));
        lines.extend(cuts.as_chunks::<2>().0.iter().map(|[from, to]| [point(*from), point(*to)]));
    }
    lines
}

/// The names: buttons that select, for screen readers and keys too.
pub fn names(ui: &mut Ui, table_response: &Response, table: &Table<'_>, out: &mut Vec<Command>) {
    let (model, lens, ink) = (table.model, &table.lens, &table.ink);
    if !(model.view.layers.names && model.view.layers.outlines) {
        return;
    }
    let painter = ui.painter_at(lens.frame);
    for obstacle in table.obstacles() {
        let selected = model.view.obstacle == Some(obstacle.id);
        let Some(bounds) = Bounds::of(obstacle.outline.outer.iter().copied()) else { continue };
        let below = lens.to_screen(Point::new(bounds.centre().x, bounds.max.y)) + egui::vec2(0.0, 4.0);
        let galley =
            painter.layout_no_wrap(obstacle.name.clone(), FontId::proportional(12.5), Color32::PLACEHOLDER);
        let rect = Align2::CENTER_TOP.anchor_size(below, galley.size());
        let color = if selected { ink.over_image } else { ink.line };
        halo_text(&painter, rect.min, &galley, color, ink.halo);
        let rect = rect.intersect(lens.frame);
        if model.session.tool.draws() || !rect.is_positive() {
            continue;
        }
        let response = ui.interact(rect, table_response.id.with(("outcrop", obstacle.id.0)), Sense::click());
        response.widget_info(|| {
            WidgetInfo::selected(
                Role::ListItem,
                true,
                selected,
                format!("Outcrop {} on the table", obstacle.name),
            )
        });
        if response.clicked() {
            out.push(Command::Obstacle(ObstacleCommand::Select(Some(obstacle.id))));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::hatching;
    use egui::pos2;

    #[test]
    fn hatching_stays_within_the_ring() {
        let ring = [pos2(10.0, 10.0), pos2(110.0, 10.0), pos2(110.0, 60.0), pos2(10.0, 60.0)];
        let lines = hatching(&ring);
        assert!(lines.len() > 8, "{} lines", lines.len());
        for p in lines.iter().flatten() {
            assert!((9.9..=110.1).contains(&p.x) && (9.9..=60.1).contains(&p.y), "{p:?}");
        }
    }
}
