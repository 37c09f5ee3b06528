//! The crests page: what was traced, what the user said of it, and the numbers.

use egui::Ui;

use super::say;
use crate::desk::Model;
use crate::study::PatchFinding;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    match &finding.crests {
        Ok(crests) => say(ui, model, &format!("{} crests.", crests.numbers.count)),
        Err(why) => say(ui, model, why),
    }
}
