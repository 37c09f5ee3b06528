//! The ground page: what the raster is, where it lies, what the user says about it, how it is
//! shown.

use egui::{ComboBox, RichText, Slider, Ui};

use super::{body, say};
use crate::desk::{Bands, Command, DrawCommand, Model, Opened, RasterCommand, facts};
use crate::ground::Azimuth;
use crate::study::{ImageKind, Placement, RasterEntry, Tone};
use crate::window::controls::{self, Commands, caution, heading, look, optional_number};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let Some(raster) = model.shown_raster() else {
        say(ui, model, "No raster is on the table.");
        return;
    };
    if let Some(name) = controls::line(ui, "Name of the raster", &raster.name, 240.0) {
        out.push(Command::Raster(RasterCommand::Rename { id: raster.id, name }));
    }
    match model.session.rasters.get(&raster.id) {
        Some(Opened::Failed(why)) => caution(ui, &look(model), why),
        Some(Opened::Opening) | None => say(ui, model, "Opening…"),
        Some(Opened::Open(_)) => {}
    }
    if let Some(open) = model.session.sources.get(&raster.id) {
        controls::facts(ui, &look(model), &facts::ground(raster, open));
        open.cautions.iter().for_each(|c| caution(ui, &look(model), &c.text));
        bands(ui, raster, open.raster.info().bands.len(), out);
    }
    kind(ui, raster, out);
    light(ui, raster, out);
    placement(ui, raster, out);
    body::show(ui, model, raster, out);
    tone(ui, raster, out);
}

fn kind(ui: &mut Ui, raster: &RasterEntry, out: &mut Commands) {
    heading(ui, "What the pixels are");
    ui.horizontal(|ui| {
        for (kind, name, hint) in [
            (ImageKind::Optical, "Brightness", "Light from the Sun; used as it is."),
            (ImageKind::Radar, "Radar", "Backscatter with speckle; its logarithm is used."),
            (ImageKind::Elevation, "Heights", "Heights in metres."),
        ] {
            if ui.radio(raster.kind == kind, name).on_hover_text(hint).clicked() && raster.kind != kind {
                out.push(Command::Raster(RasterCommand::Kind { id: raster.id, kind }));
            }
        }
    });
}

fn light(ui: &mut Ui, raster: &RasterEntry, out: &mut Commands) {
    ui.horizontal(|ui| {
        ui.label("Light from").on_hover_text("Azimuth of the Sun, or of the radar; degrees from north.");
        let now = raster.light_from.map(Azimuth::deg);
        if let Some(typed) = optional_number(ui, "Light from, degrees", now, 70.0) {
            let from = typed.map(Azimuth::from_deg);
            out.push(Command::Raster(RasterCommand::Light { id: raster.id, from }));
        }
        ui.label("°");
    });
}

fn placement(ui: &mut Ui, raster: &RasterEntry, out: &mut Commands) {
    heading(ui, "Where the file is silent");
    let mut stated = raster.placement.clone();
    let [mut across, mut down] = [stated.pixel_m.map(|p| p[0]), stated.pixel_m.map(|p| p[1])];
    let mut changed = false;
    ui.horizontal(|ui| {
        ui.label("Pixel size").on_hover_text("Ground size of a pixel, metres. Replaces the file's own.");
        if let Some(typed) = optional_number(ui, "Pixel width, metres", across, 70.0) {
            (across, down, changed) = (typed, down.or(typed), true);
        }
        ui.label("×");
        if let Some(typed) = optional_number(ui, "Pixel height, metres", down, 70.0) {
            (across, down, changed) = (across.or(typed), typed, true);
        }
        ui.label("m");
    });
    stated.pixel_m = across.zip(down).map(|(x, y)| [x, y]);
    ui.horizontal(|ui| {
        ui.label("Image-up is")
            .on_hover_text("Azimuth of the upward direction, where the file has no place.");
        if let Some(typed) = optional_number(ui, "Azimuth of image-up, degrees", stated.north_deg, 70.0) {
            (stated.north_deg, changed) = (typed, true);
        }
        ui.label("° from north");
    });
    if changed {
        send(raster, stated, out);
    }
}

/// One band, or the mean of all.
fn bands(ui: &mut Ui, raster: &RasterEntry, count: usize, out: &mut Commands) {
    if count < 2 {
        return;
    }
    let mean = Bands::Mix((0..count).map(|band| (band, 1.0 / count as f64)).collect());
    let mut chosen = raster.bands.clone();
    let shown = match &chosen {
        Bands::One(band) => format!("band {}", band + 1),
        mix if *mix == mean => "mean of all bands".to_owned(),
        Bands::Mix(parts) => format!("mix of {} bands", parts.len()),
    };
    ui.horizontal(|ui| {
        ui.label("Measured on").on_hover_text("Which band the methods read and the table shows.");
        let combo = ComboBox::from_id_salt("bands").selected_text(shown).show_ui(ui, |ui| {
            for band in 0..count {
                ui.selectable_value(&mut chosen, Bands::One(band), format!("band {}", band + 1));
            }
            ui.selectable_value(&mut chosen, mean, "mean of all bands");
        });
        combo.response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::ComboBox, true, "Bands"));
    });
    if chosen != raster.bands {
        out.push(Command::Raster(RasterCommand::Read { id: raster.id, bands: chosen }));
    }
}

fn send(raster: &RasterEntry, placement: Placement, out: &mut Commands) {
    out.push(Command::Raster(RasterCommand::Place { id: raster.id, placement }));
}

fn tone(ui: &mut Ui, raster: &RasterEntry, out: &mut Commands) {
    heading(ui, "Tone");
    ui.label(RichText::new("How the raster is shown; no number depends on it.").small());
    let mut tone = raster.tone;
    let mut settled = false;
    let mut slide = |ui: &mut Ui, name: &str, value: &mut f64, range: std::ops::RangeInclusive<f64>| {
        ui.horizontal(|ui| {
            let response = ui.add(Slider::new(value, range).max_decimals(2).text(name));
            settled |= response.drag_stopped() || response.lost_focus();
        });
    };
    slide(ui, "black at percentile", &mut tone.low_percent, 0.0..=49.0);
    slide(ui, "white at percentile", &mut tone.high_percent, 51.0..=100.0);
    slide(ui, "gamma", &mut tone.gamma, 0.2..=4.0);
    ui.horizontal(|ui| {
        ui.checkbox(&mut tone.inverted, "Inverted");
        if ui.button("Usual tone").clicked() {
            tone = Tone::default();
        }
    });
    if tone != raster.tone {
        out.push(Command::Raster(RasterCommand::Tone { id: raster.id, tone }));
    }
    if settled {
        out.push(Command::Draw(DrawCommand::Settle));
    }
}
