//! The winds page: the sand rose, the drift, what was set aside, the seasons, the mast.

use egui::{Grid, RichText, Ui};

use super::{calendar, figure_mm, judges, sand, say};
use crate::desk::{Command, Model, WindCommand, facts};
use crate::plate::{numbers, sand_rose};
use crate::study::{WindEntry, WindFinding};
use crate::window::controls::{self, Commands, button, caution, heading, look, number, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let Some(wind) = model.shown_wind() else {
        say(ui, model, "No wind record is on the sheet. Without one there is a trend, but no verdict.");
        ui.add_space(8.0);
        button(ui, model, out, Command::Wind(WindCommand::AskImport));
        return;
    };
    if let Some(name) = controls::line(ui, "Name of the winds", &wind.name, 240.0) {
        out.push(Command::Wind(WindCommand::Rename { id: wind.id, name }));
    }
    match model.session.results.wind(wind.id).map(|r| &r.outcome) {
        None => say(ui, model, "Not worked out yet."),
        Some(Err(why)) => caution(ui, &look(model), why),
        Some(Ok(finding)) => record(ui, model, finding),
    }
    mast(ui, wind, out);
    sand::of_record(ui, model, wind, out);
    judges::show(ui, model, out);
    rule(ui, &look(model));
    ui.horizontal_wrapped(|ui| {
        button(ui, model, out, Command::Wind(WindCommand::Review(wind.id)));
        button(ui, model, out, Command::Wind(WindCommand::AskImport));
        button(ui, model, out, Command::Wind(WindCommand::Remove(wind.id)));
    });
}

fn record(ui: &mut Ui, model: &Model, finding: &WindFinding) {
    let look = look(model);
    let picture = sand_rose(&finding.rose, &finding.flux, figure_mm(ui), &look);
    let spoken = format!("Sand rose of {}", finding.name);
    ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
    rule(ui, &look);
    controls::facts(ui, &look, &facts::winds(finding));
    sand::show(ui, model, finding);
    finding.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    if !finding.set_aside.is_empty() {
        heading(ui, "Set aside");
        for aside in &finding.set_aside {
            ui.label(format!("{} × {}", aside.count, aside.text));
        }
    }
    seasons(ui, model, finding);
    calendar::show(ui, model, finding);
}

fn seasons(ui: &mut Ui, model: &Model, finding: &WindFinding) {
    if finding.seasons.is_empty() {
        return;
    }
    heading(ui, "Seasons");
    let soft = theme::color(look(model).ink_soft);
    Grid::new("seasons").num_columns(4).spacing([14.0, 4.0]).show(ui, |ui| {
        for title in ["", "flux", "toward", "resultant / total"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for season in &finding.seasons {
            let drift = &season.drift;
            ui.label(season.name);
            ui.label(numbers::significant(drift.total, 3)).on_hover_text(drift.unit);
            let toward = drift.toward.map(|toward| numbers::azimuth_with_interval(toward, None));
            ui.label(toward.unwrap_or_else(|| "–".into()));
            ui.label(drift.ratio.map_or_else(|| "–".into(), |ratio| numbers::fixed(ratio, 2)));
            ui.end_row();
        }
    });
}

fn mast(ui: &mut Ui, wind: &WindEntry, out: &mut Commands) {
    heading(ui, "Mast");
    let (mut height_m, mut roughness_m, mut changed) = (wind.height_m, wind.roughness_m, false);
    ui.horizontal(|ui| {
        ui.label("Height").on_hover_text("Of the anemometer above the ground.");
        if let Some(typed) = number(ui, "Height of the mast, metres", height_m, 60.0) {
            (height_m, changed) = (typed, true);
        }
        ui.label("m   roughness").on_hover_text("Aerodynamic roughness of the ground; sand about 0.001 m.");
        if let Some(typed) = number(ui, "Roughness of the ground, metres", roughness_m, 70.0) {
            (roughness_m, changed) = (typed, true);
        }
        ui.label("m");
    });
    if changed {
        out.push(Command::Wind(WindCommand::Mast { id: wind.id, height_m, roughness_m }));
    }
    place(ui, wind, out);
}

/// Longitude and latitude; an empty field takes the place away.
fn place(ui: &mut Ui, wind: &WindEntry, out: &mut Commands) {
    let hint =
        "Where the mast stands or the model's cell lies: lets a patch be judged by the nearest record.";
    let now = wind.at.map(|at| format!("{} {}", at.lon, at.lat)).unwrap_or_default();
    ui.horizontal(|ui| {
        ui.label("Longitude, latitude").on_hover_text(hint);
        let Some(typed) = controls::line(ui, "Longitude and latitude of the record", &now, 150.0) else {
            return;
        };
        if typed.trim().is_empty() {
            out.push(Command::Wind(WindCommand::Place { id: wind.id, at: None }));
        } else if let Some(at) = controls::lonlat(&typed) {
            out.push(Command::Wind(WindCommand::Place { id: wind.id, at: Some(at) }));
        }
    });
}
