//! Injection and recovery: the curve, the sentence, how far the work is, and the settings that matter.

use egui::{ProgressBar, RichText, Ui};

use crate::desk::{Command, JobCommand, Model, Slot, Standing, light_facts};
use crate::plate::recovery_curve;
use crate::study::{PatchFinding, all_settings};
use crate::window::bench::{figures, say};
use crate::window::controls::{self, Commands, button, caution, heading, look, quiet};
use crate::window::{dialogs, theme};

/// The settings that change most, by key.
const SETTINGS: [&str; 6] = [
    "recovery.spacing",
    "recovery.steepness",
    "recovery.tone_per_slope",
    "recovery.defects",
    "recovery.trends",
    "recovery.repeats",
];

pub fn show(ui: &mut Ui, model: &Model, finding: &PatchFinding, out: &mut Commands) {
    heading(ui, "What would have been seen");
    let (look, results) = (look(model), &model.session.results);
    let running = under_way(ui, model, out);
    let standing = results.recovery_standing(finding.id);
    if standing == Standing::OutOfDate && !running {
        caution(ui, &look, "out of date");
    }
    match results.recovered(finding.id).map(|recovered| &recovered.outcome) {
        Some(Ok(found)) => {
            figure(ui, model, finding);
            controls::facts(ui, &look, &light_facts::recovery(found));
            found.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
        }
        Some(Err(why)) => caution(ui, &look, &format!("No bedforms could be laid in: {why}.")),
        None if running => {}
        None => say(ui, model, waiting(model, finding)),
    }
    if !running {
        ui.add_space(4.0);
        let command = Command::Job(JobCommand::Recover);
        if standing == Standing::Unmeasured {
            button(ui, model, out, command);
        } else {
            quiet(ui, model, out, command, "Lay in once more");
        }
    }
    settings(ui, model, out);
}

/// The curve of what was found, made once for each result.
pub fn figure(ui: &mut Ui, model: &Model, finding: &PatchFinding) {
    let Some(found) = model.session.results.recovery(finding.id) else { return };
    let spoken = format!("Bedforms found again against their trend. {}", found.sentence);
    figures::show(ui, &look(model), found, "recovery", &spoken, |found, mm, look| {
        recovery_curve(found, &finding.trend, mm, look)
    });
}

/// Why there is nothing to show yet.
fn waiting(model: &Model, finding: &PatchFinding) -> &'static str {
    let lit = model.sheet.raster(finding.raster).is_some_and(|raster| raster.light_from.is_some());
    if model.sheet.settings.recovery.trends == 0 {
        "The settings leave this out: no trend is laid in."
    } else if lit {
        "Bedforms of known trend are laid into this ground and sought again, once all is measured."
    } else {
        "Bedforms of known trend, laid into this ground and sought again, tell which would have been missed. That begins by itself once the light is known."
    }
}

/// How far the work is, with a way to stop it; says whether any is under way.
fn under_way(ui: &mut Ui, model: &Model, out: &mut Commands) -> bool {
    let running = model.session.jobs.running();
    let Some(job) = running.iter().find(|job| job.slot == Slot::Recovery) else { return false };
    let progress = &job.progress;
    let share = if progress.total > 0 { progress.done as f32 / progress.total as f32 } else { 0.0 };
    ui.horizontal(|ui| {
        ui.add(ProgressBar::new(share.min(1.0)).desired_width(140.0).desired_height(6.0));
        let words = if job.stopping { "stopping" } else { job.label.as_str() };
        ui.label(RichText::new(words).small().color(theme::color(look(model).ink_soft)));
    });
    quiet(ui, model, out, Command::Job(JobCommand::Stop(Slot::Recovery)), "Stop laying in");
    true
}

fn settings(ui: &mut Ui, model: &Model, out: &mut Commands) {
    egui::CollapsingHeader::new("What is laid in").default_open(false).show(ui, |ui| {
        for key in SETTINGS {
            if let Some(setting) = all_settings().find(|setting| setting.key == key) {
                dialogs::narrow_row(ui, model, setting, out);
            }
        }
    });
}
