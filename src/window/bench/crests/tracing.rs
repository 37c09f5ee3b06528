//! What a crest is here: the model with the fit of each, and ground that is left out by its tone.

use std::sync::Arc;

use egui::{ComboBox, Ui};

use crate::desk::{Command, CrestCommand, Dialog, Model, ViewCommand, crest_facts};
use crate::science::crest::CrestModel;
use crate::study::{CrestsFinding, Patch};
use crate::window::controls::{self, Commands, heading, look, optional_number, quiet};

const MODELS: [CrestModel; 4] =
    [CrestModel::BrightRidge, CrestModel::DarkRidge, CrestModel::BothRidges, CrestModel::SlipFace];

pub fn show(
    ui: &mut Ui,
    model: &Model,
    patch: &Patch,
    found: Option<&Arc<CrestsFinding>>,
    out: &mut Commands,
) {
    heading(ui, "What a crest is here");
    let (id, said) = (patch.id, &patch.crests);
    ui.horizontal(|ui| {
        ui.label("Traced as").on_hover_text("Whether crests are ridges of tone here or steps of it.");
        let left_open = match (model.sheet.settings.crest.model, found) {
            (Some(wanted), _) => format!("as in the settings: {}", wanted.name()),
            (None, Some(found)) => format!("what fits best: {}", found.model.name()),
            (None, None) => "what fits best".to_owned(),
        };
        let mut chosen = said.model;
        let shown = chosen.map_or(left_open.clone(), |model| model.name().to_owned());
        let combo = ComboBox::from_id_salt("model of a crest").width(200.0).selected_text(shown);
        let combo = combo.show_ui(ui, |ui| {
            ui.selectable_value(&mut chosen, None, &left_open);
            for choice in MODELS {
                ui.selectable_value(&mut chosen, Some(choice), choice.name());
            }
        });
        let label = "Model of a crest";
        combo.response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::ComboBox, true, label));
        if chosen != said.model {
            out.push(Command::Crest(CrestCommand::SetModel { id, model: chosen }));
        }
        quiet(ui, model, out, Command::View(ViewCommand::Open(Dialog::Settings)), "Settings…");
    });
    if let Some(found) = found {
        let mut facts = crest_facts::fits(found);
        facts.push(crest_facts::scale(found));
        controls::facts(ui, &look(model), &facts);
    }
    let mut traced = !said.drawn_only;
    let words = "Trace crests, beside those drawn and imported";
    if ui.checkbox(&mut traced, words).on_hover_text("Off: only what you draw or import counts.").changed() {
        out.push(Command::Crest(CrestCommand::SetDrawnOnly { id, drawn_only: !traced }));
    }
    tone(ui, patch, out);
}

/// Limits of tone; an open side is kept as the largest number there is.
fn tone(ui: &mut Ui, patch: &Patch, out: &mut Commands) {
    let kept = patch.crests.tone_limits;
    let stated = |value: f64| (value.abs() < f64::MAX).then_some(value);
    let [low, high] = [0, 1].map(|side| kept.and_then(|limits| stated(limits[side])));
    ui.horizontal(|ui| {
        let hint = "Ground darker or brighter than this is not traced on: water, bare rock. In the raster's own numbers; empty: no limit.";
        ui.label("Tone from").on_hover_text(hint);
        let least = optional_number(ui, "Lowest tone of a crest", low, 70.0);
        ui.label("to").on_hover_text(hint);
        let most = optional_number(ui, "Highest tone of a crest", high, 70.0);
        if least.is_some() || most.is_some() {
            let limits = match (least.unwrap_or(low), most.unwrap_or(high)) {
                (None, None) => None,
                (low, high) => Some([low.unwrap_or(f64::MIN), high.unwrap_or(f64::MAX)]),
            };
            out.push(Command::Crest(CrestCommand::SetToneLimits { id: patch.id, limits }));
        }
    });
}
