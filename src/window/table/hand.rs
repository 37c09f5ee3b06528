//! What pointer and keys do on the table, as commands. One drag is one undo step: its end is
//! announced by `Settle`.

use egui::{CursorIcon, Sense, Ui, Vec2, WidgetInfo};
use egui::{
    Event, EventFilter, Key, Modifiers, MouseWheelSource, MouseWheelUnit, PointerButton, Pos2, Response, Role,
};

use crate::desk::{
    Camera, Command, Cursor, Draft, DrawCommand, NetworkCommand, PatchCommand, Tool, Tracing, ViewCommand,
};
use crate::ground::{Point, Polygon};
use crate::study::{Id, Patch};

use super::draw::{self, Standing};
use super::lens::Lens;
use super::outcrops;
use super::pick::{self, Corner};
use super::{Table, TableState};

/// Points of one press of an arrow key; with Shift one point.
const NUDGE: f32 = 12.0;
/// The same for corners and whole patches, which are near their place already.
const FINE: f32 = 3.0;
/// Points the raster moves at one press.
const PAN: f32 = 60.0;
/// Points of wheel travel that make the raster e times larger.
const WHEEL: f32 = 220.0;

/// A drag under way.
#[derive(Clone, Debug)]
pub enum Drag {
    /// The raster, held at this pixel.
    Pan(Point),
    /// The second corner of a rectangle or ellipse is being sought.
    Box,
    /// A corner, held this far from the pointer on the screen.
    Corner(Corner, Vec2),
    /// The whole patch, as it was, from where it was taken up.
    Whole { outline: Polygon, from: Point },
}

/// The pointer while it is within the frame, also over the names and handles that lie on it.
pub fn pointer(response: &Response, lens: &Lens) -> Option<Pos2> {
    let at = response.contains_pointer().then(|| response.ctx.pointer_hover_pos()).flatten();
    at.filter(|at| lens.frame.contains(*at))
}

/// Turns what the user does in one frame into commands.
pub struct Hand<'a> {
    pub ui: &'a mut Ui,
    pub response: &'a Response,
    pub table: &'a Table<'a>,
    pub commands: Vec<Command>,
}

impl Hand<'_> {
    pub fn work(&mut self, state: &mut TableState, hovered: Option<Id>) {
        self.drags(state, hovered);
        let camera = self.looked(state);
        self.clicks(state, hovered);
        self.names(hovered);
        outcrops::names(self.ui, self.response, self.table, &mut self.commands);
        self.corners(state);
        let camera = self.keys(state, camera);
        if camera != self.table.camera {
            let raster = self.table.entry.id;
            self.commands.push(Command::View(ViewCommand::Look { raster, camera }));
        }
        self.point_out(state);
        self.cursor_icon(state, hovered);
    }

    fn tool(&self) -> Tool {
        self.table.model.session.tool
    }

    fn draw(&mut self, command: DrawCommand) {
        self.commands.push(Command::Draw(command));
    }

    fn reshape(&mut self, id: Id, outline: Polygon) {
        self.commands.push(Command::Patch(PatchCommand::Reshape { id, outline }));
    }

    /// The pointer while it is within the frame.
    fn pointer(&self) -> Option<Pos2> {
        pointer(self.response, &self.table.lens)
    }

    /// The camera after wheel, pinch and a panning drag.
    fn looked(&mut self, state: &mut TableState) -> Camera {
        let lens = &self.table.lens;
        let mut camera = self.table.camera;
        if let Some(at) = self.pointer() {
            let (scroll, pinch) = self.ui.input(|input| {
                for event in &input.events {
                    if let Event::MouseWheel { unit, source, .. } = event {
                        state.wheel = match source {
                            MouseWheelSource::Wheel => true,
                            MouseWheelSource::Unknown => *unit != MouseWheelUnit::Point,
                            _ => false,
                        };
                    }
                }
                (input.smooth_scroll_delta(), input.zoom_delta())
            });
            let wheel = if state.wheel { (scroll.y / WHEEL).exp() } else { 1.0 };
            let factor = f64::from(wheel * pinch);
            if factor != 1.0 {
                camera = camera.zoomed(factor, lens.anchor(at));
            }
            if !state.wheel && scroll != Vec2::ZERO {
                camera = camera.panned(lens.unstretched(scroll));
            }
        }
        if self.response.dragged_by(PointerButton::Middle)
            || self.response.dragged_by(PointerButton::Secondary)
        {
            camera = camera.panned(lens.unstretched(self.response.drag_delta()));
        }
        if let (Some(Drag::Pan(held)), Some(at)) = (&state.drag, self.response.interact_pointer_pos()) {
            camera = camera.panned(lens.unstretched(at - lens.to_screen(*held)));
        }
        camera
    }

    /// Drags that begin on the raster; those on a corner begin at its handle.
    fn drags(&mut self, state: &mut TableState, hovered: Option<Id>) {
        let lens = self.table.lens;
        if self.response.drag_started_by(PointerButton::Primary)
            && let Some(origin) = self.ui.input(|input| input.pointer.press_origin())
        {
            let from = lens.to_pixel(origin);
            state.drag = Some(match (self.tool(), self.table.selected()) {
                (tool, _) if tool.takes_two() => {
                    if self.table.model.session.draft.is_none() {
                        self.draw(DrawCommand::Lay(from));
                    }
                    Drag::Box
                }
                (Tool::Corners, Some(patch)) if hovered == Some(patch.id) => {
                    Drag::Whole { outline: patch.outline.clone(), from }
                }
                _ => Drag::Pan(from),
            });
        }
        let Some(at) = self.response.interact_pointer_pos().map(|at| lens.to_pixel(at)) else { return };
        match &state.drag {
            Some(Drag::Whole { outline, from }) => {
                if let Some(id) = self.table.selected().map(|patch| patch.id) {
                    let moved = pick::shifted(outline, at.x - from.x, at.y - from.y);
                    self.reshape(id, moved);
                }
            }
            Some(Drag::Box) if self.response.drag_stopped() => self.draw(DrawCommand::Lay(at)),
            _ => {}
        }
        if self.response.drag_stopped() {
            if matches!(state.drag, Some(Drag::Whole { .. })) {
                self.draw(DrawCommand::Settle);
            }
            state.drag = None;
        }
    }

    fn clicks(&mut self, state: &mut TableState, hovered: Option<Id>) {
        let lens = self.table.lens;
        let Some(at) = self.response.interact_pointer_pos().filter(|_| self.response.clicked()) else {
            return;
        };
        self.response.request_focus();
        state.cross = None;
        let double = self.response.double_clicked();
        let alt = self.ui.input(|input| input.modifiers.alt);
        match (self.tool(), self.table.selected()) {
            (tool, _) if tool.draws() => self.lay(at, double),
            (Tool::Corners, Some(patch)) if double || alt => {
                if let Some((corner, place)) = pick::edge_at(&patch.outline, &lens, at) {
                    state.corner = Some(corner);
                    self.reshape(patch.id, pick::with_corner_added(&patch.outline, corner, place));
                    self.draw(DrawCommand::Settle);
                }
            }
            _ => {
                state.corner = None;
                let network = self.table.network_at(lens.to_pixel(at));
                if let Some(id) = network.filter(|_| self.tool() == Tool::Hand) {
                    self.commands.push(Command::Network(NetworkCommand::Select(Some(id))));
                } else if self.table.model.view.patch != hovered {
                    self.commands.push(Command::Patch(PatchCommand::Select(hovered)));
                }
            }
        }
    }

    /// A click of an outlining tool: another corner, or the end of the outline.
    fn lay(&mut self, at: Pos2, double: bool) {
        let tracing = self.table.model.session.tracing.as_ref();
        let draft = self.table.model.session.draft.as_ref();
        let closes = draft.is_some_and(|draft| {
            let on_first = draft
                .points
                .first()
                .is_some_and(|p| pick::handle_rect(self.table.lens.to_screen(*p)).contains(at));
            !draft.tool.takes_two() && draft.points.len() >= 3 && (double || on_first)
        });
        if closes || (double && tracing.is_some_and(Tracing::is_whole)) {
            self.draw(DrawCommand::Finish);
        } else if !double {
            self.draw(DrawCommand::Lay(self.table.lens.to_pixel(at)));
        }
    }

    /// The names on the raster: buttons that select, for screen readers and keys too.
    fn names(&mut self, hovered: Option<Id>) {
        let layers = self.table.model.view.layers;
        if !(layers.names && layers.outlines) {
            return;
        }
        let painter = self.ui.painter_at(self.table.lens.frame);
        for patch in self.table.patches() {
            let standing = self.table.standing(patch.id, hovered);
            let named = draw::name(&painter, patch, standing, &self.table.lens, &self.table.ink);
            let Some(rect) = named.filter(|_| !self.tool().draws()) else { continue };
            let rect = rect.intersect(self.table.lens.frame);
            if !rect.is_positive() {
                continue;
            }
            let id = self.response.id.with(("name", patch.id.0));
            let response = self.ui.interact(rect, id, Sense::click());
            let is_selected = standing == Standing::Selected;
            response.widget_info(|| {
                WidgetInfo::selected(
                    Role::ListItem,
                    true,
                    is_selected,
                    format!("Patch {} on the table", patch.name),
                )
            });
            if response.clicked() {
                self.commands.push(Command::Patch(PatchCommand::Select(Some(patch.id))));
            }
        }
    }

    /// Handles of the selected patch's corners, when that tool is in hand.
    fn corners(&mut self, state: &mut TableState) {
        let Some(patch) = self.table.selected().filter(|_| self.tool() == Tool::Corners) else {
            state.corner = None;
            return;
        };
        let painter = self.ui.painter_at(self.table.lens.frame);
        for (number, (corner, place)) in (1..).zip(pick::corners(&patch.outline)) {
            let at = self.table.lens.to_screen(place);
            if !self.table.lens.frame.contains(at)
                && !matches!(state.drag, Some(Drag::Corner(held, _)) if held == corner)
            {
                continue;
            }
            let id = self.response.id.with(("corner", corner));
            let response = self.ui.interact(pick::handle_rect(at), id, Sense::click_and_drag());
            response.widget_info(|| {
                WidgetInfo::labeled(Role::Button, true, format!("Corner {number} of {}", patch.name))
            });
            draw::handle(&painter, at, state.corner == Some(corner) || response.hovered(), &self.table.ink);
            self.corner(state, &response, patch, corner);
        }
    }

    /// One corner: drag, or keys while it has the focus.
    fn corner(&mut self, state: &mut TableState, response: &Response, patch: &Patch, corner: Corner) {
        if response.clicked() || response.drag_started() {
            response.request_focus();
        }
        if response.has_focus() {
            state.corner = Some(corner);
        }
        if response.drag_started()
            && let Some(origin) = self.ui.input(|input| input.pointer.press_origin())
        {
            state.drag = Some(Drag::Corner(corner, response.rect.center() - origin));
        }
        if let (Some(Drag::Corner(held, grip)), Some(at)) = (&state.drag, response.interact_pointer_pos())
            && *held == corner
        {
            let to = self.table.lens.to_pixel(at + *grip);
            self.reshape(patch.id, pick::with_corner_moved(&patch.outline, corner, to));
        }
        if response.drag_stopped() {
            state.drag = None;
            self.draw(DrawCommand::Settle);
        }
        if response.secondary_clicked() || (response.has_focus() && self.pressed(Key::Delete)) {
            self.remove(patch, corner);
        }
        if !response.has_focus() {
            return;
        }
        self.keep_arrows(response);
        if self.pressed(Key::Insert) {
            let ring = patch.outline.rings().nth(corner.ring).unwrap_or_default();
            let (a, b) = (ring[corner.index], ring[(corner.index + 1) % ring.len()]);
            let middle = Point::new(0.5 * (a.x + b.x), 0.5 * (a.y + b.y));
            let next = Corner { index: corner.index + 1, ..corner };
            self.reshape(patch.id, pick::with_corner_added(&patch.outline, next, middle));
            self.draw(DrawCommand::Settle);
        }
        let step = self.arrows(false, FINE);
        if step != Vec2::ZERO {
            let ring = patch.outline.rings().nth(corner.ring).unwrap_or_default();
            let (dcol, drow) = self.table.lens.pixel_step(step);
            let to = Point::new(ring[corner.index].x + dcol, ring[corner.index].y + drow);
            self.reshape(patch.id, pick::with_corner_moved(&patch.outline, corner, to));
        }
    }

    fn remove(&mut self, patch: &Patch, corner: Corner) {
        if let Some(outline) = pick::with_corner_removed(&patch.outline, corner) {
            self.reshape(patch.id, outline);
            self.draw(DrawCommand::Settle);
        }
    }

    /// Keys while the table has the focus: arrows move the raster, or the cross when a tool is in
    /// hand, with Ctrl the selected patch; Space does at the cross what a click does.
    fn keys(&mut self, state: &mut TableState, camera: Camera) -> Camera {
        if !self.response.has_focus() {
            return camera;
        }
        self.keep_arrows(self.response);
        let lens = self.table.lens;
        if self.tool() == Tool::Hand {
            let step = self.arrows(false, PAN);
            return camera.panned(lens.unstretched(-step));
        }
        let mut camera = camera;
        if let Some(patch) = self.table.selected().filter(|_| self.tool() == Tool::Corners) {
            let step = self.arrows(true, FINE);
            if step != Vec2::ZERO {
                let (dcol, drow) = lens.pixel_step(step);
                self.reshape(patch.id, pick::shifted(&patch.outline, dcol, drow));
            }
        }
        let step = self.arrows(false, NUDGE);
        if step != Vec2::ZERO {
            let from = state.cross.map_or(lens.frame.center(), |p| lens.to_screen(p));
            let to = from + step;
            let room = lens.frame.shrink(20.0);
            // The raster follows when the cross would leave the frame.
            camera = camera.panned(lens.unstretched(room.clamp(to) - to));
            state.cross = Some(lens.to_pixel(to));
        }
        if let Some(cross) = state.cross {
            draw::cross(&self.ui.painter_at(lens.frame), lens.to_screen(cross), &self.table.ink);
            let draft = self.table.model.session.draft.as_ref();
            let tracing = self.table.model.session.tracing.as_ref();
            let is_whole =
                draft.and_then(Draft::finished).is_some() || tracing.is_some_and(Tracing::is_whole);
            // Enter closes an outline that can be closed; until then it lays corners too.
            if self.pressed(Key::Space) || (!is_whole && self.pressed(Key::Enter)) {
                let at = lens.to_screen(cross);
                match self.tool() {
                    tool if tool.draws() => self.lay(at, false),
                    _ => {
                        let id = pick::patch_at(self.table.patches(), &lens, at);
                        self.commands.push(Command::Patch(PatchCommand::Select(id)));
                    }
                }
            }
        }
        camera
    }

    /// Tells the desk where pointer or cross is, when that has changed.
    fn point_out(&mut self, state: &TableState) {
        let raster = self.table.entry.id;
        let pixel = self.pointer().map(|at| self.table.lens.to_pixel(at)).or(state.cross);
        let cursor = pixel.map(|pixel| Cursor { raster, pixel });
        if cursor != self.table.model.session.cursor {
            self.commands.push(Command::View(ViewCommand::Point(cursor)));
        }
    }

    fn cursor_icon(&self, state: &TableState, hovered: Option<Id>) {
        if self.pointer().is_none() || !self.response.hovered() {
            return;
        }
        let over_selected = hovered.is_some() && hovered == self.table.model.view.patch;
        let icon = match (self.tool(), &state.drag) {
            (_, Some(Drag::Pan(_))) => CursorIcon::Grabbing,
            (_, Some(Drag::Whole { .. })) => CursorIcon::Move,
            (tool, _) if tool.draws() => CursorIcon::Crosshair,
            (Tool::Corners, _) if over_selected => CursorIcon::Move,
            (_, _) if hovered.is_some() => CursorIcon::PointingHand,
            _ => CursorIcon::Grab,
        };
        self.ui.ctx().set_cursor_icon(icon);
    }

    /// Arrow keys belong to the widget in hand, not to the walk from widget to widget.
    fn keep_arrows(&self, response: &Response) {
        let filter = EventFilter { horizontal_arrows: true, vertical_arrows: true, ..EventFilter::default() };
        self.ui.memory_mut(|memory| memory.set_focus_lock_filter(response.id, filter));
    }

    fn pressed(&self, key: Key) -> bool {
        self.ui.input_mut(|input| input.consume_key(Modifiers::NONE, key))
    }

    /// Screen step of the arrow keys pressed in this frame, with or without Ctrl: `far` points, with
    /// Shift one. Those with Alt belong to the desk.
    fn arrows(&self, command: bool, far: f32) -> Vec2 {
        let mut sum = Vec2::ZERO;
        self.ui.input_mut(|input| {
            input.events.retain(|event| {
                let Event::Key { key, pressed: true, modifiers, .. } = event else { return true };
                let step = match key {
                    Key::ArrowLeft => Vec2::LEFT,
                    Key::ArrowRight => Vec2::RIGHT,
                    Key::ArrowUp => Vec2::UP,
                    Key::ArrowDown => Vec2::DOWN,
                    _ => return true,
                };
                if modifiers.alt || modifiers.command != command {
                    return true;
                }
                sum += step * if modifiers.shift { 1.0 } else { far };
                false
            });
        });
        sum
    }
}
