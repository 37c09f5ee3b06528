//! The light page: where the light or the radar look comes from, what it may fake or hide, and what bedforms laid
//! into the patch say of that.

mod compare;
mod look;
pub mod recovery;

use egui::Ui;

use crate::desk::Model;
use crate::study::PatchFinding;
use crate::window::controls::Commands;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    look::show(ui, model, finding, out);
    recovery::show(ui, model, finding, out);
    compare::show(ui, model, finding, out);
}
