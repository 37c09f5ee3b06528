//! The same ground on another picture: what is compared, what came of it, and with which raster to go on.

use egui::{ComboBox, Ui};

use crate::desk::{Command, ComparisonCommand, Model, comparison_facts};
use crate::plate::comparison_figure;
use crate::study::{Comparison, Id, PatchFinding};
use crate::window::bench::{figure_mm, say};
use crate::window::controls::{
    self, Commands, button, caution, heading, line, look, optional_number, quiet, rule,
};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    heading(ui, "Another picture of this ground");
    let mine: Vec<&Comparison> = model.sheet.comparisons.iter().filter(|c| c.patch == finding.id).collect();
    if mine.is_empty() {
        say(
            ui,
            model,
            "A second picture under another look tells the ground’s trend from the light’s; one of another time tells how crests moved.",
        );
    }
    for entry in &mine {
        one(ui, model, entry, out);
    }
    add(ui, model, finding.raster, out);
}

/// Each raster the patch may be held against.
fn add(ui: &mut Ui, model: &Model, own: Id, out: &mut Commands) {
    ui.add_space(4.0);
    let others: Vec<_> = model.sheet.rasters.iter().filter(|r| r.id != own).collect();
    if others.len() < 2 {
        button(ui, model, out, Command::Comparison(ComparisonCommand::Add { raster: None }));
        return;
    }
    ComboBox::from_id_salt("compare with").selected_text("Compare with …").show_ui(ui, |ui| {
        for raster in others {
            let command = Command::Comparison(ComparisonCommand::Add { raster: Some(raster.id) });
            quiet(ui, model, out, command, &raster.name);
        }
    });
}

fn one(ui: &mut Ui, model: &Model, entry: &Comparison, out: &mut Commands) {
    let (look, results) = (look(model), &model.session.results);
    let id = entry.id;
    ui.horizontal(|ui| {
        if let Some(name) = line(ui, &format!("Name of comparison {}", id.0), &entry.name, 170.0) {
            out.push(Command::Comparison(ComparisonCommand::Rename { id, name }));
        }
        ui.label("years").on_hover_text(
            "From the first picture to the second; below 0 when the second is older. Empty: not known.",
        );
        if let Some(years) = optional_number(ui, &format!("Years of comparison {}", id.0), entry.years, 50.0)
        {
            out.push(Command::Comparison(ComparisonCommand::SetYears { id, years }));
        }
        quiet(ui, model, out, Command::Comparison(ComparisonCommand::Delete(id)), "Delete");
    });
    let standing = results.comparison_standing(id);
    if !standing.remark().is_empty() {
        caution(ui, &look, standing.remark());
    }
    match results.compared(id).map(|compared| &compared.outcome) {
        Some(Ok(found)) => {
            ui.label(&found.sentence);
            ui.add_space(4.0);
            let picture = comparison_figure(found, figure_mm(ui), &look);
            figure::show(ui, &picture, theme::POINTS_PER_MM, &found.sentence);
            controls::facts(ui, &look, &comparison_facts::comparison(found));
            found.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
        }
        Some(Err(why)) => caution(ui, &look, &format!("They could not be compared: {why}.")),
        None => {}
    }
    rule(ui, &look);
}
