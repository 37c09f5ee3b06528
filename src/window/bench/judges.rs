//! Which wind records judge the selected patch.

use egui::Ui;

use crate::desk::{Command, Model, PatchCommand};
use crate::study::{Id, Patch, WindChoice};
use crate::window::controls::{Commands, caution, heading, look};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let Some(patch) = model.selected_patch() else { return };
    heading(ui, &format!("Judges of {}", patch.name));
    let judges = model.judges(patch);
    let chosen = || WindChoice::Chosen(judges.records.clone());
    let mut give = |winds| out.push(Command::Patch(PatchCommand::JudgeBy { id: patch.id, winds }));
    ui.horizontal_wrapped(|ui| {
        let is_chosen = matches!(patch.winds, WindChoice::Chosen(_));
        if ui.radio(patch.winds == WindChoice::All, "every record").clicked() {
            give(WindChoice::All);
        }
        if ui.radio(patch.winds == WindChoice::Nearest, "the nearest record").clicked() {
            give(WindChoice::Nearest);
        }
        if ui.radio(is_chosen, "chosen records").clicked() && !is_chosen {
            give(chosen());
        }
    });
    each(ui, model, patch, &judges.records, &mut give);
    judges.cautions.iter().for_each(|c| caution(ui, &look(model), &c.text));
}

/// A box a record; ticking one makes the choice the user's own.
fn each(ui: &mut Ui, model: &Model, patch: &Patch, judges: &[Id], give: &mut impl FnMut(WindChoice)) {
    for wind in &model.sheet.winds {
        let mut judges_it = judges.contains(&wind.id);
        let words = format!("{} judges {}", wind.name, patch.name);
        if ui.checkbox(&mut judges_it, words).changed() {
            let mut ids: Vec<Id> = judges.iter().copied().filter(|id| *id != wind.id).collect();
            if judges_it {
                ids.push(wind.id);
            }
            if !ids.is_empty() {
                ids.sort_unstable();
                give(WindChoice::Chosen(ids));
            }
        }
    }
}
