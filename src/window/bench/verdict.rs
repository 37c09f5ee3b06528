//! The verdict page: the dial, the classes, the theories with their priors, what would change the
//! verdict, and why there may be none.

use egui::{Grid, RichText, Ui};

use super::{figure_mm, say};
use crate::desk::{Command, Model, PatchCommand, SettingCommand, facts};
use crate::ground::Axis;
use crate::plate::{dial, numbers, posterior_bars};
use crate::study::{
    Flip, JointFinding, PatchFinding, SettingValue, TheoryFinding, VerdictFinding, all_settings,
};
use crate::window::controls::{
    self, Commands, caution, column, heading, look, number, optional_number, rule,
};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    if finding.verdicts.is_empty() {
        say(ui, model, "No wind record is on the sheet. Import winds to judge this patch by them.");
    }
    for verdict in &finding.verdicts {
        one(ui, model, verdict);
    }
    together(ui, model, finding);
    stated(ui, model, out);
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
        flips(ui, model, &verdict.flips);
    }
    verdict.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
}

fn theories(ui: &mut Ui, model: &Model, verdict: &VerdictFinding) {
    let soft = theme::color(look(model).ink_soft);
    ui.add_space(6.0);
    Grid::new(("theories", verdict.winds.0)).num_columns(4).spacing([12.0, 4.0]).show(ui, |ui| {
        for title in ["theory", "axis", "agrees", "ln B"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for theory in &verdict.theories {
            column(ui, 130.0, |ui| ui.label(theory.name)).on_hover_text(theory.method);
            let axis = theory.axis.map(|axis| numbers::axis_with_interval(axis, theory.spread_deg));
            ui.label(axis.unwrap_or_else(|| "–".into())).on_hover_text(spoken_axis(theory));
            let (word, why) = agreement(theory);
            ui.label(word).on_hover_text(why);
            ui.label(numbers::fixed(theory.ln_bayes_factor, 1))
                .on_hover_text("Natural logarithm of the Bayes factor against a random axis.");
            ui.end_row();
        }
    });
}

fn spoken_axis(theory: &TheoryFinding) -> String {
    let mut parts = Vec::new();
    parts.extend(theory.toward.map(|t| format!("Grows toward {:.0}°.", t.deg())));
    if !theory.ties.is_empty() {
        let ties: Vec<String> = theory.ties.iter().map(|a| format!("{:.0}°", a.deg())).collect();
        parts.push(format!("Also possible: {}.", ties.join(", ")));
    }
    parts.extend(theory.strength.map(|s| format!("Strength {s:.2}.")));
    if parts.is_empty() { "It predicts no trend here.".into() } else { parts.join(" ") }
}

/// A word on the two one-sided tests, and the interval behind it.
fn agreement(theory: &TheoryFinding) -> (&'static str, String) {
    let Some(e) = &theory.equivalence else { return ("–", "It predicts no trend here.".into()) };
    let [low, high] = e.ci90;
    let word = if e.equivalent {
        "yes"
    } else if low > 0.0 || high < 0.0 {
        "no"
    } else {
        "open"
    };
    let turn = format!("The trend is turned from it by {low:.0}° to {high:.0}° (90 %).");
    (word, format!("{turn} “yes” means shown to lie within the margin of agreement."))
}

/// The nearest changes of the verdict.
fn flips(ui: &mut Ui, model: &Model, flips: &[Flip]) {
    heading(ui, "What would change it");
    if flips.is_empty() {
        say(ui, model, "Nothing between a third and three times the stated values, and no other law.");
    }
    let soft = theme::color(look(model).ink_soft);
    for flip in flips {
        ui.horizontal_wrapped(|ui| {
            ui.spacing_mut().item_spacing.x = 4.0;
            ui.label(RichText::new(flip.parameter).family(theme::bold()));
            ui.label(format!("at {}", flip.at));
            ui.label(RichText::new(format!("(now {}): {}", flip.now, flip.change)).color(soft));
        })
        .response
        .on_hover_text(match flip.reach {
            Some(reach) if reach < 1.0 => "Within the doubt about this parameter.".to_owned(),
            Some(reach) => format!("{reach:.1} times the doubt about this parameter away."),
            None => "Another choice.".to_owned(),
        });
    }
}

/// What the patches under the same record say together.
fn together(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let Some(together) = model.session.results.together() else { return };
    let shared = |joint: &&JointFinding| finding.verdicts.iter().any(|v| v.winds == joint.winds);
    for joint in together.joint.iter().filter(shared) {
        heading(ui, "Together");
        ui.label(&joint.sentence);
        Grid::new(("together", joint.winds.0)).num_columns(3).spacing([12.0, 4.0]).show(ui, |ui| {
            for trend in &joint.trends {
                column(ui, 150.0, |ui| ui.label(&trend.name));
                ui.label(format!("{:.0}°", trend.axis.deg()));
                ui.label(numbers::fixed(trend.supply_ln, 1)).on_hover_text(
                    "ln of the factor by which bed instability is better than fingering: above 0 speaks for full sand cover, below for starved ground.",
                );
                ui.end_row();
            }
        });
    }
    if let Some(d) = together.discoveries.iter().find(|d| d.patch == finding.id)
        && together.discoveries.len() > 1
    {
        ui.label(format!(
            "Among {} patches tested, the preferred trend has q {}.",
            together.discoveries.len(),
            numbers::p_value(d.q)
        ))
        .on_hover_text("Benjamini–Hochberg: the share of false claims to expect if all patches with a q this small are claimed.");
    }
}

/// An axis known from elsewhere.
fn stated(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let Some(patch) = model.selected_patch() else { return };
    ui.add_space(8.0);
    ui.horizontal(|ui| {
        ui.label("Stated axis")
            .on_hover_text("An axis known from elsewhere, weighed like a theory; empty for none.");
        let now = patch.stated_axis.map(Axis::deg);
        if let Some(typed) = optional_number(ui, "Stated axis, degrees", now, 60.0) {
            let axis = typed.map(Axis::from_deg);
            out.push(Command::Patch(PatchCommand::StateAxis { id: patch.id, axis }));
        }
        ui.label("°");
    });
}

/// What was believed before the ground was looked at; weights, only their ratios count.
fn priors(ui: &mut Ui, model: &Model, out: &mut Commands) {
    egui::CollapsingHeader::new("Priors").show(ui, |ui| {
        Grid::new("priors").num_columns(2).spacing([12.0, 4.0]).show(ui, |ui| {
            for setting in all_settings().filter(|s| s.key.starts_with("verdict.priors.")) {
                let SettingValue::Number(weight) = (setting.get)(&model.sheet.settings) else { continue };
                ui.label(setting.label.trim_start_matches("Prior of ")).on_hover_text(setting.help);
                if let Some(typed) = number(ui, setting.label, weight, 60.0) {
                    let value = SettingValue::Number(typed);
                    out.push(Command::Setting(SettingCommand::Set { key: setting.key, value }));
                }
                ui.end_row();
            }
        });
    });
}
