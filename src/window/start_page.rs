//! What an empty table says: how to begin.

use egui::{RichText, Ui};

use super::controls::{Commands, button, look, main_button, quiet};
use super::theme;
use crate::desk::{Command, Model, RasterCommand, SheetCommand};

const STEPS: [(&str, &str); 4] = [
    (
        "Lay a raster on the table.",
        "An image or radar mosaic, or an elevation raster, with or without a place.",
    ),
    ("Outline a patch.", "P for a polygon, R for a rectangle. Its trend and spacing appear as you close it."),
    ("Import a wind record.", "Then the verdict weighs the theories against each other and against chance."),
    ("Take the plate.", "A figure, a table and a layer, with the record that reproduces them."),
];

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let soft = theme::color(look(model).ink_soft);
    ui.add_space(0.14 * ui.available_height());
    ui.horizontal(|ui| {
        ui.add_space((0.5 * (ui.available_width() - 520.0)).max(24.0));
        ui.vertical(|ui| {
            ui.set_max_width(520.0);
            ui.label(RichText::new("An empty table").family(theme::bold()).size(26.0));
            ui.add_space(10.0);
            for (number, (what, how)) in STEPS.iter().enumerate() {
                ui.horizontal_top(|ui| {
                    ui.label(RichText::new((number + 1).to_string()).size(20.0).color(soft));
                    ui.add_space(8.0);
                    ui.vertical(|ui| {
                        ui.label(RichText::new(*what).family(theme::bold()).size(15.0));
                        ui.label(RichText::new(*how).color(soft));
                    });
                });
                ui.add_space(4.0);
            }
            ui.add_space(14.0);
            ui.horizontal(|ui| {
                main_button(ui, model, out, Command::Raster(RasterCommand::AskOpen));
                button(ui, model, out, Command::Sheet(SheetCommand::Demo));
                button(ui, model, out, Command::Sheet(SheetCommand::AskOpen));
            });
            recent(ui, model, out);
        });
    });
}

fn recent(ui: &mut Ui, model: &Model, out: &mut Commands) {
    if model.session.recent.is_empty() {
        return;
    }
    ui.add_space(18.0);
    ui.label(RichText::new("Recent sheets").family(theme::bold()));
    for path in model.session.recent.iter().take(6) {
        let name = path.to_string_lossy();
        quiet(ui, model, out, Command::Sheet(SheetCommand::Open(path.clone())), &name);
    }
}
