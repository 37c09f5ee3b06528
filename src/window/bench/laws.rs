//! The threshold the user may state, and the drift under every law and threshold, on the winds page.

use egui::{Grid, RichText, Ui};

use crate::desk::{Command, Model, SettingCommand};
use crate::plate::numbers;
use crate::study::{SensitivityFinding, SettingValue, WindFinding};
use crate::window::controls::{Commands, look, optional_number};
use crate::window::theme;

/// A threshold known by other means.
pub fn threshold(ui: &mut Ui, model: &Model, out: &mut Commands) {
    ui.horizontal(|ui| {
        ui.label("Threshold u*").on_hover_text(
            "Friction velocity at which this sand starts to move, when known; empty: by the threshold law of the settings.",
        );
        let now = model.sheet.settings.wind.threshold_ustar;
        if let Some(typed) = optional_number(ui, "Threshold friction velocity, metres per second", now, 60.0) {
            let (key, value) = ("wind.threshold_ustar", SettingValue::Auto(typed));
            out.push(Command::Setting(SettingCommand::Set { key, value }));
        }
        ui.label("m/s");
    });
}

/// How the resultant spreads over laws and thresholds, with all rows on demand.
pub fn show(ui: &mut Ui, model: &Model, finding: &WindFinding) {
    let rows = &finding.sensitivity;
    if rows.len() < 2 {
        return;
    }
    let soft = theme::color(look(model).ink_soft);
    egui::CollapsingHeader::new(spread(finding)).id_salt(("laws", finding.id.0)).show(ui, |ui| {
        Grid::new(("laws table", finding.id.0)).num_columns(4).spacing([12.0, 3.0]).show(ui, |ui| {
            for title in ["law", "threshold", "toward", "resultant / total"] {
                ui.label(RichText::new(title).small().color(soft));
            }
            ui.end_row();
            for row in rows {
                self::row(ui, row);
            }
        });
    });
}

fn row(ui: &mut Ui, row: &SensitivityFinding) {
    ui.label(row.law);
    ui.label(&row.threshold).on_hover_text(format!("u* = {:.3} m/s", row.threshold_ustar));
    let toward = row.drift.toward.map(|t| numbers::azimuth_with_interval(t, None));
    ui.label(toward.unwrap_or_else(|| "–".into()));
    ui.label(row.drift.ratio.map_or_else(|| "–".into(), |ratio| numbers::fixed(ratio, 2)));
    ui.end_row();
}

/// One line: from where to where the resultant points, and its ratio.
fn spread(finding: &WindFinding) -> String {
    let drifts = || finding.sensitivity.iter().map(|s| &s.drift);
    let ratios = drifts().filter_map(|d| d.ratio);
    let (low, high) = ratios.fold((f64::INFINITY, 0.0f64), |(l, h), r| (l.min(r), h.max(r)));
    let turns = drifts().filter_map(|d| Some(d.toward?.turn_from(finding.flux.toward?)));
    let (left, right) = turns.fold((0.0f64, 0.0f64), |(l, r), turn| (l.min(turn), r.max(turn)));
    match finding.flux.toward {
        Some(toward) if high > 0.0 => format!(
            "By all laws: toward {:.0}° to {:.0}°, ratio {low:.2} to {high:.2}",
            toward.rotated(left).deg(),
            toward.rotated(right).deg()
        ),
        _ => "By all laws".to_owned(),
    }
}
