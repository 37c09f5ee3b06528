//! What is measured on the crests: lines, spacing three ways, ends and forks.

use std::sync::Arc;

use egui::Ui;

use crate::desk::{Model, crest_facts};
use crate::ground::LengthUnit;
use crate::study::{CrestsFinding, PatchFinding};
use crate::window::bench::say;
use crate::window::controls::{self, caution, heading, look};

pub fn show(
    ui: &mut Ui,
    model: &Model,
    finding: &PatchFinding,
    found: &Arc<CrestsFinding>,
    unit: LengthUnit,
) {
    let look = look(model);
    heading(ui, "Lines");
    controls::facts(ui, &look, &crest_facts::lines(found, &finding.trend, unit));
    heading(ui, "Spacing three ways");
    controls::facts(ui, &look, &crest_facts::spacing(found, unit));
    heading(ui, "Ends and forks");
    controls::facts(ui, &look, &crest_facts::defects(found, unit));
    let forks = crest_facts::forks(found);
    if forks.is_empty() {
        say(ui, model, "No fork tells which way the sand went.");
    }
    controls::facts(ui, &look, &forks);
    found.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
}
