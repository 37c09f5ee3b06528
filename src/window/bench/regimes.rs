//! The regimes page: with no wind record, which two winds would make this trend; the map to point at
//! and click, and what the picked regime would make.

use std::sync::Arc;

use egui::{ComboBox, RichText, Sense as Reach, Ui, vec2};

use super::figure_mm;
use crate::desk::regimes::{facts, laid, readout};
use crate::desk::{Command, Model, PatchCommand, PickedRegime, ViewCommand};
use crate::ground::{Azimuth, Point};
use crate::plate::{Figure, implied_rose, regime_at, regime_map};
use crate::science::alignment::backwards::{Cover, Sense, SenseKind};
use crate::study::{BackwardsFinding, Patch, PatchFinding};
use crate::window::controls::{
    self, Commands, caution, field_row, heading, look, number, optional_number, quiet, rule,
};
use crate::window::{figure, theme};

const LABEL: f32 = 92.0;

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    let Some(patch) = model.selected_patch() else { return };
    let look = look(model);
    match &finding.backwards {
        None => {
            super::say(ui, model, "The patch has no preferred trend, so any winds could have blown over it.")
        }
        Some(found) => {
            map(ui, model, found, out);
            picked(ui, model, found, out);
            rule(ui, &look);
            controls::facts(ui, &look, &facts(found));
            found.regimes.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
        }
    }
    heading(ui, "Seen on the ground");
    cover(ui, patch, out);
    sense(ui, patch, finding, out);
    with_others(ui, model, finding);
}

/// The regimes that would make the trends of several patches, this one among them.
fn with_others(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let Some(together) = model.session.results.together() else { return };
    let look = look(model);
    for found in together.regimes.iter().filter(|r| r.patches.contains(&finding.id)) {
        heading(ui, &format!("By the trends together: {}", found.name));
        let mm = figure_mm(ui);
        let picture = map_picture(ui, model, found, mm);
        let spoken = format!("Map of two-wind regimes of {} patches together", found.patches.len());
        figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken);
        controls::facts(ui, &look, &facts(found));
        found.regimes.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    }
}

/// The map's figure, kept while nothing it shows has changed, so that its shades are uploaded once.
fn map_picture(ui: &mut Ui, model: &Model, found: &BackwardsFinding, mm: f64) -> Arc<Figure> {
    let view = &model.view;
    let key = format!("{:?} {:?} {mm} {:?} {:?}", view.regime, view.theme, found.trends, found.settings);
    let id = ui.make_persistent_id(("regime map", found.name.as_str(), found.patches.len()));
    let known = ui.data(|data| data.get_temp::<(String, Arc<Figure>)>(id));
    if let Some((_, picture)) = known.filter(|(of, _)| *of == key) {
        return picture;
    }
    let picture = Arc::new(regime_map(found, view.regime.map(PickedRegime::on_map), mm, &look(model)));
    ui.data_mut(|data| data.insert_temp(id, (key, Arc::clone(&picture))));
    picture
}

/// The map: pointing reads it out, a click picks a regime.
fn map(ui: &mut Ui, model: &Model, found: &BackwardsFinding, out: &mut Commands) {
    let (look, mm) = (look(model), figure_mm(ui));
    let picture = map_picture(ui, model, found, mm);
    let scale = theme::POINTS_PER_MM;
    let size = vec2(picture.width_mm as f32, picture.height_mm as f32) * scale;
    let (rect, response) = ui.allocate_exact_size(size, Reach::click());
    let spoken = format!("Map of two-wind regimes of {}", found.name);
    response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Image, true, &spoken));
    if ui.is_rect_visible(rect) {
        figure::paint(&ui.painter_at(rect.expand(2.0)), &picture, rect.min, scale);
    }
    let under = |at: egui::Pos2| {
        let p = (at - rect.min) / scale;
        regime_at(mm, Point::new(f64::from(p.x), f64::from(p.y))).map(PickedRegime::from_map)
    };
    if let Some(at) = response.interact_pointer_pos().filter(|_| response.clicked()).and_then(under) {
        out.push(Command::View(ViewCommand::Regime(Some(at))));
    }
    let pointed = response.hover_pos().and_then(under);
    let words = pointed.map_or_else(
        || "Point at the map to read it, click to pick a regime.".to_owned(),
        |at| readout(found, &model.sheet.settings, at),
    );
    ui.label(RichText::new(words).small().color(theme::color(look.ink_soft)));
}

/// The picked regime, by numbers too, and what it would make.
fn picked(ui: &mut Ui, model: &Model, found: &BackwardsFinding, out: &mut Commands) {
    heading(ui, "Picked regime");
    let now = model.view.regime;
    let start = now.unwrap_or_default();
    let mut typed = None;
    ui.horizontal(|ui| {
        ui.label("Divergence");
        if let Some(divergence_deg) = number(ui, "Divergence, degrees", tidy(start.divergence_deg), 52.0) {
            typed = Some(PickedRegime { divergence_deg, ..start });
        }
        ui.label("°   ratio N");
        if let Some(ratio) = number(ui, "Strength ratio", tidy(start.ratio), 52.0) {
            typed = Some(PickedRegime { ratio, ..start });
        }
        if now.is_some() {
            quiet(ui, model, out, Command::View(ViewCommand::Regime(None)), "None");
        }
    });
    if let Some(regime) = typed {
        out.push(Command::View(ViewCommand::Regime(Some(regime.within_map()))));
    }
    let Some(regime) = now else { return };
    let laid = laid(found, &model.sheet.settings, regime);
    let picture = implied_rose(&laid.implied, &found.observed(), 0.8 * figure_mm(ui), &look(model));
    let spoken = format!("What the picked regime would make of {}", found.name);
    ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
    let words = format!(
        "Laid as fits best: dominant wind toward {:.0}°, the other {} of it; chance of this lie {:.0} %.",
        laid.lie.dominant.deg(),
        if laid.lie.clockwise { "clockwise" } else { "anticlockwise" },
        100.0 * laid.lie.chance
    );
    ui.label(RichText::new(words).small().color(theme::color(look(model).ink_soft)));
}

/// Two decimals are as fine as the map can be read.
fn tidy(value: f64) -> f64 {
    (100.0 * value).round() / 100.0
}

fn cover(ui: &mut Ui, patch: &Patch, out: &mut Commands) {
    field_row(ui, "Sand", LABEL, |ui| {
        let mut chosen = patch.cover;
        ComboBox::from_id_salt("cover").selected_text(chosen.label()).width(150.0).show_ui(ui, |ui| {
            for cover in Cover::ALL {
                ui.selectable_value(&mut chosen, cover, cover.label());
            }
        });
        if chosen != patch.cover {
            out.push(Command::Patch(PatchCommand::Cover { id: patch.id, cover: chosen }));
        }
    })
    .on_hover_text("Full cover grows the fastest trend of the bed; on bare ground dunes extend as fingers.");
}

fn sense(ui: &mut Ui, patch: &Patch, finding: &PatchFinding, out: &mut Commands) {
    let fresh = || Sense {
        toward: finding.trend.axis.map_or(Azimuth::from_deg(0.0), |axis| axis.azimuth()),
        evidence: SenseKind::default(),
        chance_right: Sense::LIKELY,
        forks: None,
    };
    let mut sense = patch.sense;
    field_row(ui, "Sense toward", LABEL, |ui| {
        let shown = sense.map(|s| tidy(s.toward.deg()));
        if let Some(typed) = optional_number(ui, "Sense toward, degrees", shown, 60.0) {
            sense = typed.map(|deg| Sense { toward: Azimuth::from_deg(deg), ..sense.unwrap_or_else(fresh) });
        }
        ui.label("°");
    })
    .on_hover_text("Where the sand goes as forks, tapering or obstacles show it; empty when nothing does.");
    if let Some(stated) = &mut sense {
        field_row(ui, "Read from", LABEL, |ui| {
            let text = stated.evidence.label();
            ComboBox::from_id_salt("evidence").selected_text(text).width(110.0).show_ui(ui, |ui| {
                for kind in SenseKind::ALL {
                    ui.selectable_value(&mut stated.evidence, kind, kind.label());
                }
            });
            ui.label("chance right");
            if let Some(typed) = number(ui, "Chance that the sense is right", stated.chance_right, 48.0) {
                stated.chance_right = typed.clamp(0.5, 1.0);
            }
        });
        if stated.evidence == SenseKind::Forks {
            forks(ui, stated);
        }
    }
    if sense != patch.sense {
        out.push(Command::Patch(PatchCommand::Sense { id: patch.id, sense }));
    }
}

/// Forks counted for and against the sense.
fn forks(ui: &mut Ui, stated: &mut Sense) {
    field_row(ui, "Forks for it", LABEL, |ui| {
        let [mut with, mut against] = stated.forks.unwrap_or_default().map(f64::from);
        let mut changed = false;
        for (label, count) in [("Forks for the sense", &mut with), ("Forks against the sense", &mut against)]
        {
            if let Some(typed) = number(ui, label, *count, 44.0) {
                (*count, changed) = (typed.clamp(0.0, 1000.0).round(), true);
            }
            if label == "Forks for the sense" {
                ui.label("against");
            }
        }
        if changed {
            stated.forks = (with + against > 0.0).then_some([with as u32, against as u32]);
        }
    });
}
