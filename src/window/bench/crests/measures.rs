//! What is measured on the crests: lines, spacing three ways, ends and forks.

use std::sync::Arc;

use egui::Ui;

use crate::desk::{Model, crest_facts};
use crate::ground::LengthUnit;
use crate::plate;
use crate::study::{CrestsFinding, PatchFinding};
use crate::window::bench::{figures, say};
use crate::window::controls::{self, caution, heading, look};

pub fn show(
    ui: &mut Ui,
    model: &Model,
    finding: &PatchFinding,
    found: &Arc<CrestsFinding>,
    unit: LengthUnit,
) {
    let look = look(model);
    let (trend, spectrum) = (&finding.trend, &finding.spectrum);
    found.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    heading(ui, "Lines");
    let spoken = "Rose of crest length beside that of nodes";
    figures::show(ui, &look, found, "crest-rose", spoken, |found, mm, look| {
        plate::crest_rose(found, trend, unit, mm, look)
    });
    controls::facts(ui, &look, &crest_facts::lines(found, trend, unit));
    heading(ui, "Spacing three ways");
    let spoken = "Curve of spacings square to the crests, with spectrum and area over length";
    figures::show(ui, &look, found, "crest-spacing", spoken, |found, mm, look| {
        plate::spacing_survival(found, spectrum, unit, mm, look)
    });
    controls::facts(ui, &look, &crest_facts::spacing(found, unit));
    heading(ui, "Lengths");
    let spoken = "Curve of crest lengths, cut ones allowed for";
    figures::show(ui, &look, found, "crest-lengths", spoken, |found, mm, look| {
        plate::crest_lengths(found, unit, mm, look)
    });
    heading(ui, "Ends and forks");
    controls::facts(ui, &look, &crest_facts::defects(found, unit));
    let forks = crest_facts::forks(found);
    if forks.is_empty() {
        say(ui, model, "No fork tells which way the sand went.");
    }
    controls::facts(ui, &look, &forks);
    populations(ui, model, finding);
}

/// What the crests of each population come to, where there is more than one.
fn populations(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    for population in &finding.pattern.populations {
        heading(ui, &format!("Crests of {}", population.name));
        match &population.crests {
            Ok(found) => {
                let facts = crest_facts::lines(found, &population.trend, finding.unit);
                controls::facts(ui, &look(model), &facts);
            }
            Err(why) => say(ui, model, &format!("None: {why}.")),
        }
    }
}
