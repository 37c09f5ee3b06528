//! The sand on the winds page, as a table of thresholds and what follows; whether a spacing is new, on the
//! spacing page; and the body of a record.

use egui::{Grid, Label, RichText, Ui};

use super::body::pick;
use crate::desk::{Command, Model, WindCommand, sand};
use crate::ground::Body;
use crate::study::{Birth, PatchFinding, SandThreshold, WindEntry, WindFinding};
use crate::window::controls::{self, Commands, caution, heading, look};
use crate::window::theme;

/// Thresholds by each law, then settling and first dunes.
pub fn show(ui: &mut Ui, model: &Model, finding: &WindFinding) {
    let Some(sand) = &finding.sand else { return };
    let look = look(model);
    heading(ui, "Sand");
    let soft = theme::color(look.ink_soft);
    let grain = 1e6 * model.sheet.settings.wind.grain_m;
    ui.label(
        RichText::new(format!(
            "{}: wind that starts grains of {grain:.0} µm, and how far in doubt.",
            sand.body
        ))
        .small()
        .color(soft),
    );
    Grid::new("sand").num_columns(4).spacing([18.0, 6.0]).show(ui, |ui| {
        for title in ["threshold, m/s", "u*", "at the mast", "at 10 m"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for threshold in &sand.thresholds {
            row(ui, threshold, soft);
        }
    });
    ui.add_space(4.0);
    controls::facts(ui, &look, &sand::sand(sand));
}

fn row(ui: &mut Ui, threshold: &SandThreshold, soft: egui::Color32) {
    let record = crate::science::methods().into_iter().find(|m| m.id == threshold.method);
    let label = ui.label(threshold.law);
    if let Some(record) = record {
        label.on_hover_text(format!("{}\n{}", record.formula, record.limits.join("; ")));
    }
    for figure in [threshold.ustar, threshold.speed_at_mast, threshold.speed_at_10_m] {
        let [value, range] = sand::doubtful(figure);
        ui.vertical(|ui| {
            ui.spacing_mut().item_spacing.y = 0.0;
            ui.add(Label::new(value).extend());
            ui.add(Label::new(RichText::new(range).small().color(soft)).extend());
        });
    }
    ui.end_row();
}

/// Whether the spacing of the patch can be one that dunes start with.
pub fn birth(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    if finding.birth.is_empty() {
        return;
    }
    heading(ui, "New or grown");
    for birth in &finding.birth {
        let words = format!("{}: {}", birth.winds_name, birth.sentence);
        match birth.standing {
            Birth::TooShort => caution(ui, &look(model), &words),
            Birth::Grown | Birth::FirstBorn | Birth::Short => {
                ui.label(words);
            }
        }
    }
}

/// The body whose air and gravity apply to a record.
pub fn of_record(ui: &mut Ui, model: &Model, wind: &WindEntry, out: &mut Commands) {
    let earth = Body::earth().name;
    if let Some(body) = pick(ui, model, "Body of the winds", wind.body.as_ref(), &earth) {
        out.push(Command::Wind(WindCommand::Body { id: wind.id, body }));
    }
}
