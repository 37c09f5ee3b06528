//! The spacing page: the spectrum and its profile across the crests.

use egui::Ui;

use super::{figure_mm, sand};
use crate::desk::{Model, facts, population_facts};
use crate::plate;
use crate::study::PatchFinding;
use crate::window::controls::{self, caution, heading, look, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let look = look(model);
    let (mm, spectrum) = (figure_mm(ui), &finding.spectrum);
    let picture = plate::spectrum(spectrum, finding.unit, mm, &look);
    ui.vertical_centered(|ui| {
        figure::show(ui, &picture, theme::POINTS_PER_MM, "Mean spectrum of the patch, north up");
    });
    let across = plate::profile(spectrum, finding.unit, mm, &look);
    figure::show(ui, &across, theme::POINTS_PER_MM, "Power over background across the crests");
    rule(ui, &look);
    controls::facts(ui, &look, &facts::spacing(finding));
    side_by_side(ui, model, finding);
    sand::birth(ui, model, finding);
}

/// The three spacings, and whether they agree.
fn side_by_side(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let Ok(crests) = &finding.crests else { return };
    let look = look(model);
    heading(ui, "Three ways");
    controls::facts(ui, &look, &population_facts::spacings(crests, finding.unit));
    let disagree = crests.cautions.iter().filter(|c| c.code == "spacings-disagree");
    disagree.for_each(|c| caution(ui, &look, &c.text));
}
