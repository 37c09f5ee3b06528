//! The bodies of the sheet's own: every figure open to change, and what air follows from the gas.

use egui::{ComboBox, Context, RichText, ScrollArea, Ui, WidgetInfo};

use super::controls::{Commands, field_row, line, look, number, optional_number, overlay, quiet, rule};
use super::theme;
use crate::desk::{BodyCommand, Command, Model, ViewCommand};
use crate::ground::{Air, Body, BodyShape, Gas, GasShare, GasState};
use crate::plate::numbers;

const LABELS: f32 = 150.0;

pub fn show(ctx: &Context, model: &Model, out: &mut Commands) {
    let close = overlay(ctx, "own bodies", 600.0, |ui| {
        let soft = theme::color(look(model).ink_soft);
        ui.heading("Own bodies");
        ui.label(
            RichText::new("Saved with the sheet. A change reaches every raster and wind record on the body.")
                .color(soft),
        );
        rule(ui, &look(model));
        if model.sheet.bodies.is_empty() {
            ui.label("None yet. Add one like a body that is known, then change it.");
        }
        let height = (ctx.content_rect().height() - 260.0).max(200.0);
        ScrollArea::vertical().max_height(height).show(ui, |ui| {
            for (at, body) in model.sheet.bodies.iter().enumerate() {
                ui.push_id(at, |ui| {
                    let mut changed = body.clone();
                    figures(ui, model, &mut changed);
                    quiet(ui, model, out, Command::Body(BodyCommand::Remove(at)), "Remove");
                    rule(ui, &look(model));
                    if changed != *body {
                        out.push(Command::Body(BodyCommand::Change { at, body: Box::new(changed) }));
                    }
                });
            }
        });
        ui.horizontal(|ui| {
            if ui.button("Close").clicked() {
                out.push(Command::View(ViewCommand::Close));
            }
            add(ui, model, out);
        });
    });
    if close {
        out.push(Command::View(ViewCommand::Close));
    }
}

/// A new body starts as a copy.
fn add(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let combo = ComboBox::from_id_salt("add body").selected_text("Add a body like …").width(200.0);
    let response = combo.show_ui(ui, |ui| {
        for body in model.sheet.known_bodies() {
            if ui.selectable_label(false, &body.name).clicked() {
                out.push(Command::Body(BodyCommand::Add(Box::new(body))));
            }
        }
    });
    response.response.widget_info(|| WidgetInfo::labeled(egui::Role::ComboBox, true, "Add a body like"));
}

fn figures(ui: &mut Ui, model: &Model, body: &mut Body) {
    field_row(ui, "Name", LABELS, |ui| {
        if let Some(name) = line(ui, "Name of the body", &body.name, 260.0) {
            body.name = name;
        }
    });
    field_row(ui, "Radius, km", LABELS, |ui| {
        let BodyShape { equatorial_m, polar_m } = &mut body.shape;
        let was_sphere = equatorial_m == polar_m;
        if let Some(km) = number(ui, "Equatorial radius, kilometres", *equatorial_m / 1e3, 80.0) {
            *equatorial_m = 1e3 * km;
            if was_sphere {
                *polar_m = *equatorial_m;
            }
        }
        ui.label("at the equator,");
        if let Some(km) = number(ui, "Polar radius, kilometres", *polar_m / 1e3, 80.0) {
            *polar_m = 1e3 * km;
        }
        ui.label("at the poles");
    });
    field_row(ui, "Gravity, m/s²", LABELS, |ui| {
        if let Some(gravity) = optional_number(ui, "Gravity, metres per second squared", body.gravity, 80.0) {
            body.gravity = gravity;
        }
    });
    kind_of_air(ui, body);
    if let Some(mut gas) = body.gas.clone() {
        state(ui, &mut gas);
        if Some(&gas) != body.gas.as_ref() {
            *body = body.clone().with_gas(gas);
        }
    } else if let Some(air) = &mut body.air {
        stated(ui, air);
    }
    if let (Some(air), Some(_)) = (body.air, &body.gas) {
        let viscosity = numbers::significant(1e6 * air.viscosity, 3);
        let words = format!("makes {} kg/m³ and {viscosity} µPa s", numbers::significant(air.density, 4));
        field_row(ui, "", LABELS, |ui| {
            ui.label(RichText::new(words).color(theme::color(look(model).ink_soft)));
        });
    }
    field_row(ui, "Note", LABELS, |ui| {
        if let Some(note) = line(ui, "Where the figures are from", &body.note, 340.0) {
            body.note = note;
        }
    })
    .on_hover_text("Where you have the figures from; printed with them.");
}

/// Gas described, density and viscosity stated, or no air.
fn kind_of_air(ui: &mut Ui, body: &mut Body) {
    field_row(ui, "Air", LABELS, |ui| {
        let now = (body.air.is_some(), body.gas.is_some());
        if ui.radio(now.1, "from its gas").clicked() && !now.1 {
            *body = body.clone().with_gas(GasState::ideal(&[(Gas::Nitrogen, 1.0)], 1e5, 288.15));
        }
        if ui.radio(now == (true, false), "stated").clicked() && now != (true, false) {
            let air = body.air.or(Body::earth().air);
            *body = body.clone().with_air(air);
        }
        if ui.radio(!now.0, "none").clicked() {
            *body = body.clone().with_air(None);
        }
    });
}

fn stated(ui: &mut Ui, air: &mut Air) {
    field_row(ui, "Density, kg/m³", LABELS, |ui| {
        if let Some(density) = number(ui, "Density of the air, kilograms per cubic metre", air.density, 80.0)
        {
            air.density = density;
        }
        ui.label("viscosity, Pa s");
        if let Some(viscosity) = number(ui, "Viscosity of the air, pascal seconds", air.viscosity, 100.0) {
            air.viscosity = viscosity;
        }
    });
}

/// Gases with their shares, pressure, temperature, and how far from ideal.
fn state(ui: &mut Ui, gas: &mut GasState) {
    let mut gone = None;
    let alone = gas.mix.len() == 1;
    for (at, part) in gas.mix.iter_mut().enumerate() {
        let label = if at == 0 { "Gases" } else { "" };
        field_row(ui, label, LABELS, |ui| {
            ui.push_id(("gas", at), |ui| share(ui, part));
            if !alone && ui.small_button("Remove gas").clicked() {
                gone = Some(at);
            }
        });
    }
    if let Some(at) = gone {
        gas.mix.remove(at);
    }
    let free = Gas::ALL.into_iter().find(|free| gas.mix.iter().all(|part| part.gas != *free));
    field_row(ui, "", LABELS, |ui| {
        if let Some(free) = free.filter(|_| ui.small_button("Add gas").clicked()) {
            gas.mix.push(GasShare { gas: free, share: 0.01 });
        }
        let sum: f64 = gas.mix.iter().map(|part| part.share).sum();
        if (sum - 1.0).abs() > 5e-4 {
            ui.label(format!("together {} %, taken as 100", numbers::significant(100.0 * sum, 4)));
        }
    });
    field_row(ui, "Pressure, Pa", LABELS, |ui| {
        if let Some(pressure) = number(ui, "Pressure, pascals", gas.pressure_pa, 90.0) {
            gas.pressure_pa = pressure;
        }
        ui.label("temperature, K");
        if let Some(temperature) = number(ui, "Temperature, kelvins", gas.temperature_k, 80.0) {
            gas.temperature_k = temperature;
        }
    });
    field_row(ui, "Compressibility Z", LABELS, |ui| {
        if let Some(z) = optional_number(ui, "Compressibility", gas.compressibility, 70.0) {
            gas.compressibility = z;
        }
        ui.label("or second virial coefficient, m³/mol");
        if let Some(b) = optional_number(ui, "Second virial coefficient", gas.second_virial, 90.0) {
            gas.second_virial = b;
        }
    })
    .on_hover_text("Both empty for an ideal gas; Z stands over the coefficient.");
}

fn share(ui: &mut Ui, part: &mut GasShare) {
    let combo = ComboBox::from_id_salt("gas").selected_text(part.gas.label()).width(70.0);
    let response = combo.show_ui(ui, |ui| {
        for gas in Gas::ALL {
            ui.selectable_value(&mut part.gas, gas, gas.label());
        }
    });
    response.response.widget_info(|| WidgetInfo::labeled(egui::Role::ComboBox, true, "Gas"));
    // Percent without the last bit of 100 × 0.985.
    let percent = (1e8 * part.share).round() / 1e6;
    if let Some(percent) = number(ui, &format!("Percent of {}", part.gas.label()), percent, 70.0) {
        part.share = percent / 100.0;
    }
    ui.label("%");
}
