//! The spacing page: the spectrum and its profile across the crests.

use egui::Ui;

use super::figure_mm;
use crate::desk::{Model, facts};
use crate::study::PatchFinding;
use crate::window::controls::{self, look, rule};
use crate::window::theme;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let look = look(model);
    let _ = (figure_mm(ui), theme::POINTS_PER_MM);
    rule(ui, &look);
    controls::facts(ui, &look, &facts::spacing(finding));
}
