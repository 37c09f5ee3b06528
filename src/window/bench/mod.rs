//! The bench: the evidence for the selected patch, page by page, in the order of the reasoning.

mod body;
mod calendar;
mod channels;
mod crests;
mod figures;
mod ground;
mod judges;
mod laws;
mod light;
mod obstacles;
mod plate;
mod regimes;
mod sand;
mod spacing;
mod trend;
mod verdict;
mod winds;

use egui::{RichText, ScrollArea, Ui};

use super::controls::{Commands, caution, line, look, quiet, rule, toggle};
use super::theme;
use crate::desk::{Command, Model, Page, PatchCommand, ViewCommand};
use crate::study::{Patch, PatchFinding};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 10.0;
        for page in Page::ALL {
            let command = Command::View(ViewCommand::Page(page));
            toggle(ui, model, out, command, page.label(), model.view.page == page);
        }
    });
    rule(ui, &look(model));
    ScrollArea::vertical().id_salt(model.view.page.label()).auto_shrink([false, false]).show(ui, |ui| {
        match model.view.page {
            Page::Ground => ground::show(ui, model, out),
            Page::Winds => winds::show(ui, model, out),
            Page::Plate => plate::show(ui, model, out),
            Page::Channels => channels::show(ui, model, out),
            Page::Obstacles => {
                let finding = subject(ui, model, out);
                obstacles::show(ui, model, finding, out);
            }
            Page::Trend | Page::Light | Page::Spacing | Page::Crests | Page::Verdict | Page::Regimes => {
                let Some(finding) = subject(ui, model, out) else { return };
                match model.view.page {
                    Page::Trend => trend::show(ui, model, finding, out),
                    Page::Light => light::show(ui, model, finding, out),
                    Page::Spacing => spacing::show(ui, model, finding),
                    Page::Crests => crests::show(ui, model, finding, out),
                    Page::Regimes => regimes::show(ui, model, finding, out),
                    _ => verdict::show(ui, model, finding, out),
                }
            }
        }
    });
}

/// The selected patch's head and its finding; says why there is none.
fn subject<'a>(ui: &mut Ui, model: &'a Model, out: &mut Commands) -> Option<&'a PatchFinding> {
    let Some(patch) = model.selected_patch() else {
        say(ui, model, "Select a patch in the ledger, or outline one on the table.");
        return None;
    };
    patch_head(ui, model, patch, out);
    let (look, results) = (look(model), &model.session.results);
    let standing = results.standing(patch.id);
    if !standing.remark().is_empty() {
        caution(ui, &look, standing.remark());
    }
    match &results.measured(patch.id)?.outcome {
        Ok(finding) => Some(finding),
        Err(why) => {
            caution(ui, &look, why);
            None
        }
    }
}

/// The patch's name and tags, and what can be done with it.
fn patch_head(ui: &mut Ui, model: &Model, patch: &Patch, out: &mut Commands) {
    ui.horizontal(|ui| {
        if let Some(name) = line(ui, "Name of the patch", &patch.name, 170.0) {
            out.push(Command::Patch(PatchCommand::Rename { id: patch.id, name }));
        }
        ui.label(RichText::new("tags").small().color(theme::color(look(model).ink_soft)));
        if let Some(tags) = line(ui, "Tags of the patch", &patch.tags.join(" "), 90.0) {
            let tags = tags.split_whitespace().map(str::to_owned).collect();
            out.push(Command::Patch(PatchCommand::Tag { id: patch.id, tags }));
        }
    });
    ui.horizontal(|ui| {
        quiet(ui, model, out, Command::View(ViewCommand::WholePatch), "Show large");
        quiet(ui, model, out, Command::Patch(PatchCommand::Duplicate), "Duplicate");
        quiet(ui, model, out, Command::Patch(PatchCommand::Delete), "Delete");
    });
}

/// A quiet sentence where there is nothing to show yet.
fn say(ui: &mut Ui, model: &Model, text: &str) {
    ui.add_space(8.0);
    ui.label(RichText::new(text).color(theme::color(look(model).ink_soft)));
}

/// The figure's width on the page, millimetres.
fn figure_mm(ui: &Ui) -> f64 {
    f64::from(ui.available_width().min(340.0) / theme::POINTS_PER_MM)
}
