//! The plate page: the figure as it will be printed, and how it is written.

use egui::{RichText, Ui};

use super::say;
use crate::desk::{Command, Format, Model, Motif, PlateChoice, PlateCommand};
use crate::window::controls::{Commands, button, caution, look, main_button, number, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let mut choice = model.view.plate.clone();
    options(ui, model, &mut choice);
    if choice != model.view.plate {
        out.push(Command::Plate(PlateCommand::Choose(choice)));
    }
    ui.horizontal_wrapped(|ui| {
        main_button(ui, model, out, Command::Plate(PlateCommand::AskExport));
        button(ui, model, out, Command::Plate(PlateCommand::AskHandOver));
    });
    rule(ui, &look(model));
    match &model.session.preview.outcome {
        None => say(ui, model, "Composing…"),
        Some(Err(why)) => caution(ui, &look(model), &format!("No plate: {why}.")),
        Some(Ok(plate)) => {
            let scale = ui.available_width() / plate.width_mm as f32;
            figure::show(ui, plate, scale, "The plate as it will be printed");
        }
    }
}

fn options(ui: &mut Ui, model: &Model, choice: &mut PlateChoice) {
    ui.horizontal_wrapped(|ui| {
        ui.radio_value(&mut choice.motif, Motif::Patch, "Selected patch");
        ui.radio_value(&mut choice.motif, Motif::Crests, "Its crests");
        ui.radio_value(&mut choice.motif, Motif::Network, "Selected network");
        ui.radio_value(&mut choice.motif, Motif::Overview, "Whole raster");
    });
    if choice.motif == Motif::Patch {
        ui.checkbox(&mut choice.flow, "Trend as a flow texture")
            .on_hover_text("Noise drawn out along the trend, in place of strokes.");
    }
    ui.horizontal(|ui| {
        for format in Format::ALL {
            ui.radio_value(&mut choice.format, format, format.ending().to_uppercase());
        }
    });
    let soft = theme::color(look(model).ink_soft);
    ui.horizontal(|ui| {
        ui.label("Width");
        if let Some(typed) = number(ui, "Width of the plate, millimetres", choice.width_mm, 50.0) {
            choice.width_mm = typed;
        }
        ui.label("mm");
        if choice.format == Format::Png {
            ui.label("at");
            if let Some(typed) = number(ui, "Resolution of the plate, dots an inch", choice.dpi, 50.0) {
                choice.dpi = typed;
            }
            let pixels = choice.width_mm / 25.4 * choice.dpi;
            ui.label(RichText::new(format!("dpi = {pixels:.0} pixels wide")).color(soft));
        }
    });
}
