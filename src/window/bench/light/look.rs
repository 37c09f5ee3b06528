//! Where the light comes from, and the trend held against it.

use egui::Ui;

use crate::desk::{Command, Model, RasterCommand, light_facts};
use crate::ground::Azimuth;
use crate::study::{ImageKind, PatchFinding};
use crate::window::bench::say;
use crate::window::controls::{self, Commands, caution, heading, look, optional_number};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    let Some(raster) = model.sheet.raster(finding.raster) else { return };
    heading(ui, if raster.kind == ImageKind::Radar { "Radar look" } else { "Light" });
    ui.horizontal(|ui| {
        ui.label("Comes from").on_hover_text(
            "Azimuth of the Sun, or the side the radar stands on; degrees from true north. Empty: not known.",
        );
        let now = raster.light_from.map(Azimuth::deg);
        if let Some(typed) = optional_number(ui, "Light of this patch from, degrees", now, 70.0) {
            let from = typed.map(Azimuth::from_deg);
            out.push(Command::Raster(RasterCommand::Light { id: raster.id, from }));
        }
        ui.label("°");
    });
    let Some(light) = &finding.pattern.light else {
        let words = if raster.light_from.is_some() {
            "The trend is held against the light with the exact measurement."
        } else {
            "Light shows crests square to it and hides those along it. Say where it comes from, and the trend is held against it."
        };
        return say(ui, model, words);
    };
    let look = look(model);
    let words = light_facts::sentence(&finding.trend, light);
    if light.suspect {
        caution(ui, &look, &words);
    } else {
        ui.label(words);
    }
    ui.add_space(4.0);
    controls::facts(ui, &look, &light_facts::light(&finding.trend, light));
}
