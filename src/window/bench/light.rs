//! The light page: what the light or the radar look may fake or hide.

use egui::Ui;

use super::say;
use crate::desk::Model;
use crate::study::PatchFinding;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    match &finding.pattern.light {
        Some(light) => say(ui, model, &format!("Light from {:.0}°.", light.from.deg())),
        None => say(ui, model, "Say on the page Ground where the light or the radar look comes from."),
    }
}
