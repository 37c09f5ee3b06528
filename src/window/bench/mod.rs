//! The bench: the evidence for the selected patch, page by page, in the order of the reasoning.

mod ground;
mod spacing;
mod trend;
mod verdict;

use egui::{RichText, ScrollArea, Ui};

use super::controls::{Commands, caution, look, rule, toggle};
use super::theme;
use crate::desk::{Command, Model, Page, ViewCommand};
use crate::study::PatchFinding;

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 4.0;
        for page in Page::ALL {
            let command = Command::View(ViewCommand::Page(page));
            toggle(ui, model, out, command, page.label(), model.view.page == page);
        }
    });
    rule(ui, &look(model));
    ScrollArea::vertical().id_salt(model.view.page.label()).auto_shrink([false, false]).show(ui, |ui| {
        match model.view.page {
            Page::Ground => ground::show(ui, model, out),
            Page::Trend => with_finding(ui, model, trend::show),
            Page::Spacing => with_finding(ui, model, spacing::show),
            Page::Winds => {}
            Page::Verdict => with_finding(ui, model, verdict::show),
            Page::Plate => {}
        }
    });
}

/// Shows a page of the selected patch's finding, or says why there is none.
fn with_finding(ui: &mut Ui, model: &Model, page: impl Fn(&mut Ui, &Model, &PatchFinding)) {
    let look = look(model);
    let Some(patch) = model.selected_patch() else {
        say(ui, model, "Select a patch in the ledger, or outline one on the table.");
        return;
    };
    ui.label(RichText::new(&patch.name).family(theme::bold()).size(17.0));
    let results = &model.session.results;
    let standing = results.standing(patch.id);
    if !standing.remark().is_empty() {
        caution(ui, &look, standing.remark());
    }
    match results.measured(patch.id).map(|m| &m.outcome) {
        Some(Ok(finding)) => page(ui, model, finding),
        Some(Err(why)) => caution(ui, &look, why),
        None => {}
    }
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
