//! The trend of the patches in sight as a flow texture, in place of strokes: drawn out on a thread of its own for
//! the view as it is, and until that has come shown as it was made for the last one. No frame ever waits for it.

use std::collections::BTreeMap;
use std::sync::mpsc::{Receiver, TryRecvError, channel};
use std::thread;

use egui::{Color32, ColorImage, Context, Painter, Rect, TextureHandle, TextureOptions, pos2};

use crate::ground::{Bounds, Place, Point, Polygon, Work};
use crate::plate::Theme;
use crate::plate::map::{FlowField, Picture, flow};
use crate::study::{Id, Node, PatchFinding};

use super::Table;

/// The textures at hand and the one being made.
#[derive(Default)]
pub struct FlowTextures {
    kept: BTreeMap<Id, Kept>,
    making: Option<Making>,
    /// One whose thread broke down, so that it is not tried in every frame.
    broken: Option<Wanted>,
}

struct Kept {
    of: Wanted,
    texture: TextureHandle,
}

/// What a texture shows: of which finding, which ground, how finely.
#[derive(Clone, Debug, PartialEq)]
struct Wanted {
    id: Id,
    fingerprint: String,
    /// Full-resolution pixels.
    covers: Bounds,
    /// A texel is a point of the screen.
    size: [usize; 2],
}

struct Making {
    of: Wanted,
    work: Work,
    answer: Receiver<Picture>,
}

/// What a thread needs for one texture.
struct Ground {
    nodes: Vec<Node>,
    coherence_floor: f64,
    node_step_px: f64,
    outline: Polygon,
    place: Place,
}

impl FlowTextures {
    /// Draws what is at hand, each within its patch, and sees to what is not as the view would have it.
    pub fn draw(&mut self, painter: &Painter, table: &Table<'_>) {
        self.collect(painter.ctx());
        let findings: Vec<_> = table.trends().collect();
        self.kept.retain(|id, _| findings.iter().any(|(finding, _)| finding.id == *id));
        for (finding, faded) in findings {
            let Some(wanted) = wanted(finding, table) else { continue };
            let current = self.kept.get(&finding.id).is_some_and(|kept| kept.of == wanted);
            // One at a time and to its end, so that a moving view is followed and never starved.
            if !current && self.making.is_none() && self.broken.as_ref() != Some(&wanted) {
                self.making = Making::start(wanted, finding, table, painter.ctx().clone());
            }
            if let Some(kept) = self.kept.get(&finding.id) {
                let whole = Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0));
                let tint = if faded { Color32::WHITE.gamma_multiply(0.38) } else { Color32::WHITE };
                painter.image(kept.texture.id(), table.lens.rect(kept.of.covers), whole, tint);
            }
        }
    }

    /// Whether nothing more is to come for the view last drawn.
    pub fn is_settled(&self) -> bool {
        self.making.is_none()
    }

    fn collect(&mut self, ctx: &Context) {
        let Some(making) = &self.making else { return };
        match making.answer.try_recv() {
            Ok(picture) => {
                let image =
                    ColorImage::from_rgba_unmultiplied([picture.width, picture.height], &picture.rgba);
                let texture = ctx.load_texture("flow", image, TextureOptions::LINEAR);
                let of = making.of.clone();
                self.kept.insert(of.id, Kept { of, texture });
                self.making = None;
            }
            Err(TryRecvError::Disconnected) => {
                self.broken = Some(making.of.clone());
                self.making = None;
            }
            Err(TryRecvError::Empty) => {}
        }
    }
}

/// The patch as far as it is in sight, in whole points of the screen; `None` out of sight.
fn wanted(finding: &PatchFinding, table: &Table<'_>) -> Option<Wanted> {
    let outline = &table.patches().find(|patch| patch.id == finding.id)?.outline;
    let (own, seen) = (outline.bounds()?, table.lens.visible_raster(table.laid.size)?);
    let per = [table.lens.per_col, table.lens.per_row];
    let span = |min: f64, max: f64, per: f64| {
        let (from, to) = ((min * per).floor(), (max * per).ceil());
        (to > from).then_some((from / per, to / per, (to - from) as usize))
    };
    let (left, right, width) = span(own.min.x.max(seen.min.x), own.max.x.min(seen.max.x), per[0])?;
    let (top, bottom, height) = span(own.min.y.max(seen.min.y), own.max.y.min(seen.max.y), per[1])?;
    Some(Wanted {
        id: finding.id,
        fingerprint: finding.fingerprint.clone(),
        covers: Bounds { min: Point::new(left, top), max: Point::new(right, bottom) },
        size: [width, height],
    })
}

impl Making {
    fn start(of: Wanted, finding: &PatchFinding, table: &Table<'_>, ctx: Context) -> Option<Self> {
        let outline = table.patches().find(|patch| patch.id == of.id)?.outline.clone();
        let field = FlowField::of(&finding.trend, &outline, &table.laid.place);
        let ground = Ground {
            nodes: field.near(of.covers).copied().collect(),
            coherence_floor: field.coherence_floor,
            node_step_px: field.node_step_px,
            place: table.laid.place.clone(),
            outline: outline.clone(),
        };
        let (work, (sender, answer)) = (Work::default(), channel());
        let (covers, size, own) = (of.covers, of.size, work.clone());
        thread::spawn(move || {
            // Over a raster ink and halo are the same in either look.
            if let Ok(picture) = flow(&ground.field(), covers, size, &Theme::light(), &own) {
                // A table that is gone no longer listens.
                let _ = sender.send(picture);
            }
            drop(sender);
            ctx.request_repaint();
        });
        Some(Self { of, work, answer })
    }
}

impl Drop for Making {
    fn drop(&mut self) {
        self.work.stop();
    }
}

impl Ground {
    fn field(&self) -> FlowField<'_> {
        FlowField {
            nodes: &self.nodes,
            coherence_floor: self.coherence_floor,
            node_step_px: self.node_step_px,
            outline: &self.outline,
            place: &self.place,
        }
    }
}
