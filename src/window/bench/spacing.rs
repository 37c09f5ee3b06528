//! The spacing page: the spectrum and its profile across the crests.

use egui::Ui;

use super::{figure_mm, sand};
use crate::desk::{Model, facts};
use crate::plate;
use crate::study::PatchFinding;
use crate::window::controls::{self, look, rule};
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
    sand::birth(ui, model, finding);
}
