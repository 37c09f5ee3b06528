//! The crests page: the tools, what a crest is here, what the user said, and the numbers.

mod measures;
mod picks;
mod tracing;

use egui::Ui;

use super::say;
use crate::desk::{
    Command, CrestCommand, DrawCommand, Model, Opened, Tool, ViewCommand, crest_facts, crests,
};
use crate::study::{Patch, PatchFinding};
use crate::window::controls::{self, Commands, button, caution, heading, look, rule, toggle};

/// Room for the crest under the pointer, so that the page does not jump as the pointer moves.
const POINTED_HEIGHT: f32 = 136.0;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    let Some(patch) = model.sheet.patch(finding.id) else { return };
    tools(ui, model, out);
    pointed(ui, model, patch);
    let crested = model.session.results.crests(patch.id);
    tracing::show(ui, model, patch, crested.and_then(|crested| crested.finding()), out);
    let Some(crested) = crested else {
        picks::show(ui, model, patch, None, out);
        return say(ui, model, "Crests are traced with the exact measurement, which follows the first look.");
    };
    match &crested.outcome {
        Ok(found) => {
            picks::show(ui, model, patch, Some(crested), out);
            measures::show(ui, model, finding, found, crested.unit);
        }
        Err(why) => {
            caution(ui, &look(model), &format!("No crests: {why}."));
            picks::show(ui, model, patch, None, out);
        }
    }
}

fn tools(ui: &mut Ui, model: &Model, out: &mut Commands) {
    ui.horizontal_wrapped(|ui| {
        for tool in Tool::CRESTS {
            let command = Command::Draw(DrawCommand::Take(tool));
            let label = command.record().label;
            toggle(ui, model, out, command, label, model.session.tool == tool);
        }
        button(ui, model, out, Command::Crest(CrestCommand::AskImport));
    });
    toggle(ui, model, out, Command::View(ViewCommand::Crests), "Crests shown", model.view.layers.crests);
    rule(ui, &look(model));
}

/// The line under way, or the crest under the pointer.
fn pointed(ui: &mut Ui, model: &Model, patch: &Patch) {
    heading(ui, "Under the pointer");
    let top = ui.cursor().top();
    if let Some(tracing) = &model.session.tracing {
        controls::facts(ui, &look(model), &crest_facts::tracing(tracing));
    } else if let Some((_, crested, near)) = crests::pointed(model) {
        let place = model.session.rasters.get(&patch.raster).and_then(Opened::laid).map(|laid| &laid.place);
        let frame = place.and_then(|place| place.local_frame(near.at));
        let line = &crested.lines()[near.line];
        controls::facts(ui, &look(model), &crest_facts::line(line, frame, crested.unit));
    } else {
        say(ui, model, "Point at a crest to see its length, where it comes from and how sure it is.");
    }
    let used = ui.cursor().top() - top;
    ui.add_space((POINTED_HEIGHT - used).max(0.0));
}
