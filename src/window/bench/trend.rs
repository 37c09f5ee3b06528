//! The trend page: the rose, the modes, the numbers, the cautions.

use egui::Ui;

use super::figure_mm;
use crate::desk::{Model, facts, ledger};
use crate::plate::{modes, numbers, rose};
use crate::study::PatchFinding;
use crate::window::controls::{self, caution, heading, look, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let look = look(model);
    let picture = rose(&finding.trend, figure_mm(ui), &look);
    let spoken = format!("Rose of {}: {}", finding.name, ledger::trend_words(finding));
    ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
    rule(ui, &look);
    controls::facts(ui, &look, &facts::trend(finding));
    if finding.trend.modes.len() > 1 {
        heading(ui, "More than one trend");
        let bars = modes(&finding.trend, figure_mm(ui), &look);
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
    cautions(ui, model, finding);
}

/// The cautions of the whole finding.
fn cautions(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    if !finding.cautions.is_empty() {
        heading(ui, "Cautions");
        finding.cautions.iter().for_each(|c| caution(ui, &look(model), &c.text));
    }
}
