//! The sand by months and years, and what the record's sampling hides.

use egui::{Grid, RichText, Ui};

use super::figure_mm;
use crate::desk::Model;
use crate::plate::{drift_calendar, numbers};
use crate::study::{ThinningFinding, WindFinding};
use crate::window::controls::{heading, look};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: &WindFinding) {
    let look = look(model);
    if let Some(calendar) = &finding.calendar {
        heading(ui, "By the calendar");
        let picture = drift_calendar(calendar, figure_mm(ui), &look);
        let spoken = format!("Sand by months of {}", finding.name);
        ui.vertical_centered(|ui| figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken));
        if let Some(s) = calendar.spread {
            let words = format!(
                "{} complete years: total {} ± {} (standard deviation), resultant/total {:.2} to {:.2}, direction ± {:.0}°",
                s.years,
                numbers::significant(s.total_mean, 3),
                numbers::significant(s.total_sd, 2),
                s.ratio[0],
                s.ratio[1],
                s.toward_sd_deg
            );
            ui.label(words);
        }
        let part: Vec<&str> =
            calendar.years.iter().filter(|y| !y.is_complete()).map(|y| y.name.as_str()).collect();
        if !part.is_empty() {
            ui.label(format!("Incomplete years: {}", part.join(", ")));
        }
    }
    if let Some(thinning) = &finding.thinning {
        thinned(ui, model, thinning);
    }
    rounded(ui, finding);
    if let Some(gusts) = &finding.gusts {
        ui.label(format!(
            "Gusts in {} rows{}: had each blown for its whole interval, the total would be {} {}, a bound and no law.",
            gusts.rows,
            gusts.factor.map(|f| format!(", {f:.2} times the mean")).unwrap_or_default(),
            numbers::significant(gusts.drift.total, 3),
            gusts.drift.unit
        ));
    }
}

fn thinned(ui: &mut Ui, model: &Model, thinning: &ThinningFinding) {
    if thinning.thinned.is_empty() {
        return;
    }
    heading(ui, "Had it been read more seldom");
    let soft = theme::color(look(model).ink_soft);
    Grid::new("thinned").num_columns(4).spacing([14.0, 4.0]).show(ui, |ui| {
        for title in ["every", "total, %", "resultant / total", "turned"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for t in &thinning.thinned {
            let percent = |share: f64| numbers::fixed(100.0 * (share - 1.0), 0);
            ui.label(format!("{} h", t.hours))
                .on_hover_text(format!("{} ways to begin; least to greatest of them.", t.phases));
            ui.label(format!("{} to {}", percent(t.total.low), percent(t.total.high))).on_hover_text(
                format!("Winds averaged over the time instead: {} %.", percent(t.averaged.total)),
            );
            let ratio = t.ratio.map(|r| format!("{:.3} to {:.3}", r.low, r.high));
            ui.label(ratio.unwrap_or_else(|| "–".into()));
            let turn = t
                .turn_deg
                .map(|r| format!("{}° to {}°", numbers::fixed(r.low, 0), numbers::fixed(r.high, 0)));
            ui.label(turn.unwrap_or_else(|| "–".into()));
            ui.end_row();
        }
    });
    if let Some(sentence) = thinning.six_hourly() {
        ui.label(RichText::new(sentence).small().color(soft));
    }
}

fn rounded(ui: &mut Ui, finding: &WindFinding) {
    let r = &finding.rounding;
    if let Some(step) = r.direction_deg {
        let gain = 100.0 * (r.grouping_factor() - 1.0);
        ui.label(format!(
            "Directions in steps of {}°: resultant and ratio are {:.2} % too short on that account.",
            numbers::plain(step, 1),
            gain
        ));
    }
    if let (Some(_), Some(gain)) = (r.speed, r.speed_gain) {
        ui.label(format!(
            "Speeds in whole {}: spread over their steps they would move {} % more sand.",
            r.speed_unit,
            numbers::fixed(100.0 * gain, 1)
        ));
    }
}
