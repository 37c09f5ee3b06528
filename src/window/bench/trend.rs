//! The trend page: the rose, what would have been seen, the numbers, trend by scale, the populations, the cautions.

use egui::Ui;

use super::{figure_mm, light, say};
use crate::desk::{Command, Model, PatchCommand, facts, ledger, population_facts};
use crate::plate::{modes, numbers, populations_figure, rose, scale_sweep};
use crate::study::{PatchFinding, PopulationFinding};
use crate::window::controls::{self, Commands, caution, heading, line, look, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    let look = look(model);
    let picture = rose(&finding.trend, figure_mm(ui), &look);
    let spoken = format!("Rose of {}: {}", finding.name, ledger::trend_words(finding));
    ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
    recovered(ui, model, finding);
    rule(ui, &look);
    controls::facts(ui, &look, &facts::trend(finding));
    components(ui, model, finding);
    if model.session.results.measured(finding.id).is_some_and(|measured| measured.exact) {
        scales(ui, model, finding);
        populations(ui, model, finding, out);
    }
    cautions(ui, model, finding);
}

/// Under the rose: which trends would have been seen here at all.
fn recovered(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let results = &model.session.results;
    if results.recovery(finding.id).is_none() {
        return;
    }
    heading(ui, "What would have been seen");
    let remark = results.recovery_standing(finding.id).remark();
    if !remark.is_empty() {
        caution(ui, &look(model), remark);
    }
    light::recovery::figure(ui, model, finding);
}

/// The mixture as fitted.
fn components(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    if finding.trend.modes.len() < 2 {
        return;
    }
    heading(ui, "More than one trend");
    let bars = modes(&finding.trend, figure_mm(ui), &look(model));
    figure::show(ui, &bars, theme::POINTS_PER_MM, "Components of the mixture of trends");
    for mode in &finding.trend.modes {
        let words = format!(
            "{}° with {} of the weight, κ {}",
            numbers::fixed(mode.axis.deg(), 1),
            numbers::percent(mode.weight),
            numbers::significant(mode.kappa_doubled, 2)
        );
        ui.label(words);
    }
}

/// Trend and coherence against scale.
fn scales(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    if finding.pattern.scales.is_empty() {
        return;
    }
    heading(ui, "Trend by scale");
    let sweep = scale_sweep(&finding.pattern, finding.unit, figure_mm(ui), &look(model));
    figure::show(ui, &sweep, theme::POINTS_PER_MM, "Trend and coherence against scale");
}

/// Each population with a name of its own.
fn populations(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    heading(ui, "Populations");
    let (look, found) = (look(model), &finding.pattern.populations);
    let words = population_facts::sentence(finding);
    if found.len() < 2 {
        return say(ui, model, &words);
    }
    ui.label(words);
    let drawn = populations_figure(&finding.pattern, finding.unit, figure_mm(ui), &look);
    figure::show(ui, &drawn, theme::POINTS_PER_MM, "Populations: trend, spacing, share and verdict");
    for (index, population) in found.iter().enumerate() {
        ui.add_space(8.0);
        name(ui, finding, index, population, out);
        controls::facts(ui, &look, &population_facts::population(population, finding.unit));
        population.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    }
}

fn name(ui: &mut Ui, finding: &PatchFinding, index: usize, found: &PopulationFinding, out: &mut Commands) {
    let Some(axis) = found.trend.axis else {
        ui.label(&found.name);
        return;
    };
    ui.horizontal(|ui| {
        ui.label(format!("{}", index + 1));
        let label = format!("Name of population {}", index + 1);
        if let Some(name) = line(ui, &label, &found.name, 200.0) {
            out.push(Command::Patch(PatchCommand::NamePopulation { id: finding.id, axis, name }));
        }
    });
}

/// The cautions of the whole finding.
fn cautions(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    if !finding.cautions.is_empty() {
        heading(ui, "Cautions");
        finding.cautions.iter().for_each(|c| caution(ui, &look(model), &c.text));
    }
}
