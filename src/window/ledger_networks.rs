//! The networks in the ledger: the network in small, its order and length, density and pattern.

use egui::{Align, Label, Layout, Painter, Pos2, Rect, RichText, Shape, Stroke, Ui, UiBuilder, vec2};

use super::controls::{Commands, button};
use super::ledger::{row, section};
use super::theme;
use crate::desk::channels::{Entry, entries};
use crate::desk::{Command, Model, NetworkCommand, Standing, Stick};
use crate::plate::Theme;
use crate::study::ImageKind;

const ENTRY_HEIGHT: f32 = 70.0;
/// Side of the small network, points.
const SKETCH: f32 = 50.0;

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands, look: &Theme) {
    let Some(raster) = model.shown_raster() else { return };
    section(ui, look, "Networks");
    for entry in &entries(model) {
        let (rect, response) = row(ui, look, entry.selected, &entry.spoken(), ENTRY_HEIGHT);
        if ui.is_rect_visible(rect) {
            let sketch = model.session.results.charted(entry.id).map(|charted| charted.sketch.as_slice());
            let square = Rect::from_min_size(rect.min + vec2(14.0, 10.0), vec2(SKETCH, SKETCH));
            draw(ui.painter(), sketch.unwrap_or_default(), square, look);
            words(ui, look, entry, rect);
        }
        if response.clicked() {
            out.push(Command::Network(NetworkCommand::Select(Some(entry.id))));
        }
    }
    button(
        ui,
        model,
        out,
        Command::Network(match raster.kind {
            ImageKind::Elevation => NetworkCommand::AddFromElevation,
            ImageKind::Optical | ImageKind::Radar => NetworkCommand::AddFromImage,
        }),
    );
}

/// The thin ones first.
fn draw(painter: &Painter, sticks: &[Stick], square: Rect, look: &Theme) {
    let ink = theme::color(look.water);
    let greatest = sticks.iter().map(|stick| stick.order).max().unwrap_or(1);
    for stick in sticks.iter().rev() {
        let points: Vec<Pos2> =
            stick.line.iter().map(|[x, y]| square.min + vec2(*x, *y) * square.size()).collect();
        let width = 0.7 + 1.6 * stick.order as f32 / greatest.max(2) as f32;
        painter.add(Shape::line(points, Stroke::new(width, ink)));
    }
}

fn words(ui: &mut Ui, look: &Theme, entry: &Entry<'_>, rect: Rect) {
    let inner = Rect::from_min_max(rect.min + vec2(80.0, 7.0), rect.max - vec2(6.0, 5.0));
    let mut ui = ui.new_child(UiBuilder::new().max_rect(inner).layout(Layout::top_down(Align::LEFT)));
    ui.spacing_mut().item_spacing.y = 1.0;
    let soft = theme::color(look.ink_soft);
    let number_ink = if entry.standing == Standing::Current { theme::color(look.measured) } else { soft };
    let say = |ui: &mut Ui, text: RichText| {
        ui.add(Label::new(text).selectable(false).truncate());
    };
    say(&mut ui, RichText::new(entry.name).family(theme::bold()));
    if !entry.size.is_empty() {
        say(&mut ui, RichText::new(&entry.size).color(number_ink));
    }
    let parts = [entry.character.as_str(), entry.standing.remark()];
    let rest: Vec<&str> = parts.into_iter().filter(|s| !s.is_empty()).collect();
    say(&mut ui, RichText::new(rest.join(" · ")).small().color(soft));
}
