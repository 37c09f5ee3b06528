//! The table: the raster inside a printed-map margin, with everything that lies on it. It draws from
//! the model and answers with commands.

mod crest_lines;
mod crests;
mod draw;
mod fields;
mod flow;
mod hand;
mod hatch;
mod ink;
mod lens;
mod lines;
mod margin;
mod networks;
mod outcrops;
mod pick;
mod strokes;
mod tiles;
mod tone;

use egui::{Align2, FontId, Painter, Rect, Response, Role, Sense, Ui, WidgetInfo};

use crate::desk::{self, Camera, Command, Laid, Model, Opened, ViewCommand, channels};
use crate::ground::{Bounds, Point};
use crate::study::{Id, NetworkEntry, Obstacle, Patch, PatchFinding, RasterEntry};

use super::theme;
use draw::Standing;
use hand::{Drag, Hand};
use ink::Ink;
use lens::Lens;
use margin::Graticule;
use pick::Corner;

/// What the table keeps between frames; all of it can be rebuilt.
#[derive(Default)]
pub struct TableState {
    tiles: tiles::TileTextures,
    fields: fields::Fields,
    flow: flow::FlowTextures,
    charts: networks::Charts,
    crests: crests::Charts,
    drag: Option<Drag>,
    /// The corner in hand, for keys.
    corner: Option<Corner>,
    /// The keyboard's cross, pixels; there once an arrow key was pressed.
    cross: Option<Point>,
    /// Whether what scrolled last was a wheel: a wheel zooms, fingers pan.
    wheel: bool,
    /// The margin of the last frame, and what it was worked out for.
    graticule: Option<(u64, Lens, Graticule)>,
}

/// The raster on the table and how it is looked at in this frame.
struct Table<'a> {
    model: &'a Model,
    entry: &'a RasterEntry,
    laid: &'a Laid,
    camera: Camera,
    lens: Lens,
    ink: Ink,
}

impl Table<'_> {
    fn patches(&self) -> impl Iterator<Item = &Patch> + Clone {
        self.model.sheet.patches.iter().filter(|patch| patch.raster == self.entry.id)
    }

    fn obstacles(&self) -> impl Iterator<Item = &Obstacle> {
        self.model.sheet.obstacles.iter().filter(|o| o.raster == self.entry.id)
    }

    fn networks(&self) -> impl Iterator<Item = &NetworkEntry> {
        self.model.sheet.networks.iter().filter(|n| n.raster == self.entry.id)
    }

    /// The network with a reach at this place; the selected one before others.
    fn network_at(&self, at: Point) -> Option<Id> {
        let model = self.model;
        let reach = channels::pointer_reach(model);
        let near = |n: &&NetworkEntry| {
            let charted = model.session.results.charted(n.id);
            charted.is_some_and(|charted| channels::reach_near(charted, at, reach).is_some())
        };
        let here: Vec<Id> =
            self.networks().filter(|_| model.view.layers.networks).filter(near).map(|n| n.id).collect();
        model.view.network.filter(|id| here.contains(id)).or(here.first().copied())
    }

    fn selected(&self) -> Option<&Patch> {
        self.model.selected_patch().filter(|patch| patch.raster == self.entry.id)
    }

    /// The findings whose strokes are shown, and whether each is out of date.
    fn trends(&self) -> impl Iterator<Item = (&PatchFinding, bool)> {
        let results = &self.model.session.results;
        self.patches().filter_map(|patch| {
            let finding = results.patch(patch.id)?;
            Some((finding, results.standing(patch.id) == desk::Standing::OutOfDate))
        })
    }

    fn standing(&self, id: Id, hovered: Option<Id>) -> Standing {
        if self.model.view.patch == Some(id) {
            Standing::Selected
        } else if hovered == Some(id) {
            Standing::Hovered
        } else {
            Standing::Plain
        }
    }
}

/// Draws the table in all the room there is.
pub fn show(ui: &mut Ui, model: &Model, state: &mut TableState) -> Vec<Command> {
    let outer = ui.available_rect_before_wrap();
    ui.advance_cursor_after_rect(outer);
    let ink = Ink::of(&theme::of(model.view.theme));
    let response = ui.interact(outer, ui.scope_id().with("table"), Sense::click_and_drag());
    let name = model.shown_raster().map_or("Table, empty".into(), |r| format!("Table: {}", r.name));
    response.widget_info(|| WidgetInfo::labeled(Role::Canvas, true, &name));
    let painter = ui.painter_at(outer);
    let frame = outer.shrink(draw::MARGIN).round();
    if frame.width() < 40.0 || frame.height() < 40.0 {
        return Vec::new();
    }
    let Some(entry) = model.shown_raster() else {
        empty(&painter, outer, frame, &ink, "Nothing lies on the table yet");
        return Vec::new();
    };
    let laid = match model.session.rasters.get(&entry.id) {
        Some(Opened::Open(laid)) => laid,
        Some(Opened::Failed(why)) => {
            empty(&painter, outer, frame, &ink, why);
            return Vec::new();
        }
        Some(Opened::Opening) | None => {
            empty(&painter, outer, frame, &ink, &format!("Opening {}…", entry.name));
            return Vec::new();
        }
    };

    let stretch = lens::row_stretch(&laid.place, laid.size);
    // In the camera's points rows are as wide as columns.
    let viewport = [f64::from(frame.width()), f64::from(frame.height()) / stretch];
    let mut commands = Vec::new();
    if model.session.viewport != viewport {
        commands.push(Command::View(ViewCommand::Viewport(viewport)));
    }
    let whole = Bounds { min: Point::default(), max: Point::new(laid.size[0] as f64, laid.size[1] as f64) };
    let kept = model.view.cameras.get(&entry.id).copied();
    let camera = kept.unwrap_or_else(|| Camera::fitting(whole, viewport));
    let lens = Lens::new(frame, camera.centre, camera.scale, stretch);
    let table = Table { model, entry, laid, camera, lens, ink };

    let hovered = paint(&painter, &response, &table, state);
    let mut hand = Hand { ui, response: &response, table: &table, commands };
    hand.work(state, hovered);
    let commands = hand.commands;
    if !commands.is_empty() {
        ui.ctx().request_repaint();
    }
    commands
}

/// Paints everything, from the ground up; returns the patch under the pointer.
fn paint(painter: &Painter, response: &Response, table: &Table<'_>, state: &mut TableState) -> Option<Id> {
    let Table { model, laid, lens, ink, .. } = table;
    let frame = lens.frame;
    let inside = painter.with_clip_rect(frame);
    inside.rect_filled(frame, 0.0, ink.ground);
    if state.tiles.draw(&inside, &laid.tiles, &table.entry.tone, lens, ink) {
        painter.ctx().request_repaint();
    }
    let known =
        state.graticule.take().filter(|(serial, seen, _)| *serial == laid.tiles.serial() && seen == lens);
    let (serial, lens_seen, graticule) =
        known.unwrap_or_else(|| (laid.tiles.serial(), *lens, margin::graticule(&laid.place, lens)));
    let layers = model.view.layers;
    if layers.graticule {
        draw::crosses(&inside, &graticule.crosses, ink);
    }
    if layers.flow {
        state.flow.draw(&inside, table);
    } else if layers.strokes {
        draw::strokes(&inside, &state.fields.on_screen(table), ink);
    }
    if layers.crests {
        state.crests.draw(&inside, table);
    }
    if layers.networks {
        state.charts.draw(&inside, table);
    }
    let pointer = hand::pointer(response, lens);
    let hovered = pointer
        .filter(|_| !model.session.tool.draws())
        .and_then(|at| pick::patch_at(table.patches(), lens, at));
    if layers.outlines {
        // The selected one last, on top.
        let (top, rest): (Vec<&Patch>, Vec<&Patch>) =
            table.patches().partition(|p| model.view.patch == Some(p.id));
        for patch in rest.into_iter().chain(top) {
            draw::outline(&inside, &patch.outline, table.standing(patch.id, hovered), lens, ink);
        }
        for obstacle in table.obstacles() {
            outcrops::draw(&inside, obstacle, model.view.obstacle == Some(obstacle.id), lens, ink);
        }
    }
    if let Some(draft) = model.session.draft.as_ref().filter(|draft| draft.raster == table.entry.id) {
        let next = pointer.map(|at| lens.to_pixel(at)).or(state.cross);
        draw::draft(&inside, draft, next, lens, ink);
    }
    if let Some(tracing) = model.session.tracing.as_ref().filter(|t| t.raster == table.entry.id) {
        networks::tracing(&inside, tracing, lens, ink);
    }
    draw::furniture(&inside, &laid.place, lens, ink);
    draw::margin(painter, response.rect, frame, &graticule.ticks, ink);
    state.graticule = Some((serial, lens_seen, graticule));
    if response.has_focus() {
        painter.rect_stroke(frame, 0.0, egui::Stroke::new(2.0, ink.measured), egui::StrokeKind::Inside);
    }
    hovered
}

fn empty(painter: &Painter, outer: Rect, frame: Rect, ink: &Ink, text: &str) {
    painter.rect_filled(outer, 0.0, ink.paper);
    painter.rect_filled(frame, 0.0, ink.ground);
    painter.rect_stroke(frame, 0.0, egui::Stroke::new(1.2, ink.ink), egui::StrokeKind::Outside);
    let galley = painter.layout(
        text.to_owned(),
        FontId::proportional(15.0),
        ink.soft,
        (frame.width() - 40.0).max(20.0),
    );
    let place = Align2::CENTER_CENTER.anchor_size(frame.center(), galley.size());
    painter.galley(place.min, galley, ink.soft);
}

impl TableState {
    /// Whether nothing that was asked for in the background is still to come for the view last drawn.
    pub fn is_settled(&self) -> bool {
        self.flow.is_settled()
    }
}

impl std::fmt::Debug for TableState {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("TableState")
            .field("drag", &self.drag)
            .field("cross", &self.cross)
            .finish_non_exhaustive()
    }
}
