//! What the user said of a network, entry by entry, each with the way to take it back.

use egui::{ComboBox, Ui};

use crate::desk::{Command, Model, NetworkCommand};
use crate::ground::Point;
use crate::plate::numbers;
use crate::study::{FromElevation, FromImage, Id, ImageKind, NetworkEntry, NetworkSource};
use crate::window::controls::{Commands, heading, quiet};

pub fn show(ui: &mut Ui, model: &Model, network: &NetworkEntry, out: &mut Commands) {
    match &network.source {
        NetworkSource::Elevation(it) => elevation(ui, model, network.id, it, out),
        NetworkSource::Image(it) => image(ui, model, network.id, it, out),
    }
}

fn elevation(ui: &mut Ui, model: &Model, id: Id, it: &FromElevation, out: &mut Commands) {
    if it.outlets.is_empty() && it.closed.is_empty() {
        return;
    }
    heading(ui, "Said by you");
    for (index, at) in it.outlets.iter().enumerate() {
        let remove = NetworkCommand::RemoveOutlet { id, index };
        row(ui, model, out, format!("Outlet {} at {}", index + 1, place(*at)), remove, "Remove");
    }
    for (index, basin) in it.closed.iter().enumerate() {
        let at = basin.bounds().map_or(String::new(), |b| format!(" at {}", place(b.centre())));
        let remove = NetworkCommand::RemoveClosed { id, index };
        row(ui, model, out, format!("Closed basin {}{at}", index + 1), remove, "Let drain");
    }
}

fn image(ui: &mut Ui, model: &Model, id: Id, it: &FromImage, out: &mut Commands) {
    heading(ui, "Said by you");
    let mut proposed = it.proposed;
    let words = "Propose channels, beside those traced";
    if ui.checkbox(&mut proposed, words).on_hover_text("Off: only what you trace counts.").changed() {
        out.push(Command::Network(NetworkCommand::SetProposed { id, proposed }));
    }
    heights(ui, model, id, it, out);
    for (index, channel) in it.traced.iter().enumerate() {
        let words = format!("Traced channel {}, {} picks", index + 1, channel.picks.len());
        row(ui, model, out, words, NetworkCommand::RemoveTrace { id, index }, "Remove");
    }
    for (index, at) in it.struck.iter().enumerate() {
        let words = format!("Struck reach at {}", place(*at));
        row(ui, model, out, words, NetworkCommand::Unstrike { id, index }, "Bring back");
    }
    for (index, [from, to]) in it.flows.iter().enumerate() {
        let words = format!("Flow from {} to {}", place(*from), place(*to));
        row(ui, model, out, words, NetworkCommand::RemoveFlow { id, index }, "Remove");
    }
}

/// Which elevation raster tells how the channels fall.
fn heights(ui: &mut Ui, model: &Model, id: Id, it: &FromImage, out: &mut Commands) {
    let rasters: Vec<_> = model.sheet.rasters.iter().filter(|r| r.kind == ImageKind::Elevation).collect();
    let none = "none";
    let shown = it.elevation.and_then(|id| model.sheet.raster(id)).map_or(none, |r| r.name.as_str());
    let mut chosen = it.elevation;
    ui.horizontal(|ui| {
        ui.label("Heights")
            .on_hover_text("An elevation raster of the same ground tells which way channels fall.");
        let combo = ComboBox::from_id_salt("heights").selected_text(shown).show_ui(ui, |ui| {
            ui.selectable_value(&mut chosen, None, none);
            for raster in rasters {
                ui.selectable_value(&mut chosen, Some(raster.id), &raster.name);
            }
        });
        let label = "Heights that tell the sense";
        combo.response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::ComboBox, true, label));
    });
    if chosen != it.elevation {
        out.push(Command::Network(NetworkCommand::SetElevation { id, raster: chosen }));
    }
}

fn row(ui: &mut Ui, model: &Model, out: &mut Commands, words: String, command: NetworkCommand, verb: &str) {
    ui.horizontal(|ui| {
        ui.label(&words);
        let response = quiet(ui, model, out, Command::Network(command), verb);
        response
            .widget_info(|| egui::WidgetInfo::labeled(egui::Role::Button, true, format!("{verb}: {words}")));
    });
}

fn place(at: Point) -> String {
    format!("column {}, row {}", numbers::fixed(at.x, 0), numbers::fixed(at.y, 0))
}
