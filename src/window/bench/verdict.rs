//! The verdict page: the dial, the classes, the theories with their priors, and why there may be
//! no verdict.

use egui::{Grid, RichText, Ui};

use super::{figure_mm, say};
use crate::desk::{Command, Model, SettingCommand, facts};
use crate::plate::{dial, numbers, posterior_bars};
use crate::study::{PatchFinding, VerdictFinding};
use crate::window::controls::{self, Commands, caution, column, heading, look, number, rule};
use crate::window::{figure, theme};

/// The theories in the order of their priors.
const THEORIES: [&str; 4] =
    ["across the resultant", "along the resultant", "gross bedform-normal", "random axis"];

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    if finding.verdicts.is_empty() {
        say(ui, model, "No wind record is on the sheet. Import winds to judge this patch by them.");
    }
    for verdict in &finding.verdicts {
        one(ui, model, verdict);
    }
    if !finding.verdicts.is_empty() {
        priors(ui, model, out);
    }
}

fn one(ui: &mut Ui, model: &Model, verdict: &VerdictFinding) {
    let look = look(model);
    heading(ui, &format!("By {}", verdict.winds_name));
    if let Some(why) = &verdict.refused {
        ui.label(format!("No verdict: {why}"));
    } else {
        let mm = figure_mm(ui);
        let picture = dial(verdict, mm, &look);
        let spoken = format!("Dial of obliquity by {}", verdict.winds_name);
        ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
        rule(ui, &look);
        controls::facts(ui, &look, &facts::verdict(verdict));
        heading(ui, "Theories against chance");
        let bars = posterior_bars(verdict, mm, &look);
        figure::show(ui, &bars, theme::POINTS_PER_MM, "Posterior of each theory beside its prior");
        theories(ui, model, verdict);
    }
    verdict.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
}

/// What was believed before the ground was looked at; weights, only their ratios count.
fn priors(ui: &mut Ui, model: &Model, out: &mut Commands) {
    heading(ui, "Priors");
    let mut weights = model.sheet.settings.verdict.priors;
    Grid::new("priors").num_columns(2).spacing([12.0, 4.0]).show(ui, |ui| {
        for (name, weight) in THEORIES.iter().zip(&mut weights) {
            ui.label(*name);
            if let Some(typed) = number(ui, &format!("Prior weight of {name}"), *weight, 60.0) {
                *weight = typed;
            }
            ui.end_row();
        }
    });
    if weights != model.sheet.settings.verdict.priors {
        out.push(Command::Setting(SettingCommand::Priors(weights)));
    }
}

fn theories(ui: &mut Ui, model: &Model, verdict: &VerdictFinding) {
    let soft = theme::color(look(model).ink_soft);
    ui.add_space(6.0);
    Grid::new(("theories", verdict.winds.0)).num_columns(4).spacing([12.0, 4.0]).show(ui, |ui| {
        for title in ["theory", "axis", "posterior", "ln B"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for theory in &verdict.theories {
            column(ui, 130.0, |ui| ui.label(theory.name)).on_hover_text(theory.method);
            let axis = theory.axis.map(|axis| numbers::axis_with_interval(axis, theory.spread_deg));
            ui.label(axis.unwrap_or_else(|| "any".into()));
            let prior = format!("Before the data: {}.", numbers::percent(theory.prior));
            ui.label(numbers::percent(theory.posterior)).on_hover_text(prior);
            ui.label(numbers::fixed(theory.ln_bayes_factor, 1))
                .on_hover_text("Natural logarithm of the Bayes factor against a random axis.");
            ui.end_row();
        }
    });
}
