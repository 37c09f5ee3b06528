//! The foot of the window: the finding in words, what is running, where the pointer is.

use egui::{Align, Layout, ProgressBar, RichText, Ui};

use super::controls::{Commands, caution, look};
use super::theme;
use crate::desk::{Command, JobCommand, Model, Page, Running, Slot, Standing, readout};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    finding(ui, model);
    ui.add_space(2.0);
    ui.horizontal(|ui| {
        // The pen's own steps are too short to be read.
        for running in model.session.jobs.running().iter().filter(|running| running.slot != Slot::Pen) {
            job(ui, model, out, running);
        }
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let ink = theme::color(look(model).ink_soft);
            ui.label(RichText::new(readout::of_cursor(model).unwrap_or_default()).small().color(ink));
        });
    });
}

fn finding(ui: &mut Ui, model: &Model) {
    let look = look(model);
    let soft = theme::color(look.ink_soft);
    let channels = model.view.page == Page::Channels || model.selected_patch().is_none();
    if let Some(network) = model.selected_network().filter(|_| channels) {
        let results = &model.session.results;
        let found = results.network(network.id).map(|finding| finding.sentence.as_str());
        return said(ui, model, &network.name, results.network_standing(network.id), found);
    }
    let Some(patch) = model.selected_patch() else {
        let text = if model.sheet.patches.is_empty() { "No patch yet." } else { "No patch is selected." };
        ui.label(RichText::new(text).size(15.0).color(soft));
        return;
    };
    let results = &model.session.results;
    let standing = results.standing(patch.id);
    let sentence = results.patch(patch.id).map(|finding| finding.sentence.as_str());
    said(ui, model, &patch.name, standing, sentence);
}

/// A finding in words, or how far it is.
fn said(ui: &mut Ui, model: &Model, name: &str, standing: Standing, sentence: Option<&str>) {
    let look = look(model);
    let soft = theme::color(look.ink_soft);
    let Some(sentence) = sentence else {
        let text = format!("{name}: {}.", standing.remark());
        ui.label(RichText::new(text).size(15.0).color(soft));
        return;
    };
    let current = standing == Standing::Current;
    let sentence = RichText::new(sentence).size(15.0);
    ui.label(if current { sentence } else { sentence.color(soft) });
    if !current {
        caution(ui, &look, &format!("This finding is {}.", standing.remark()));
    }
}

fn job(ui: &mut Ui, model: &Model, out: &mut Commands, running: &Running) {
    let progress = &running.progress;
    let share = (progress.total > 0).then(|| progress.done as f32 / progress.total as f32);
    let phase = if progress.phase.is_empty() { &running.label } else { &progress.phase };
    ui.add(ProgressBar::new(share.unwrap_or(0.0).min(1.0)).desired_width(110.0).desired_height(6.0));
    let words = if running.stopping { "stopping".to_owned() } else { phase.clone() };
    ui.label(RichText::new(words).small().color(theme::color(look(model).ink_soft)))
        .on_hover_text(&running.label);
    let stop = ui.small_button("Stop").on_hover_text("Ends this work; what is done stays.");
    stop.widget_info(|| {
        egui::WidgetInfo::labeled(egui::Role::Button, true, format!("Stop: {}", running.label))
    });
    if stop.clicked() {
        out.push(Command::Job(JobCommand::Stop(running.slot)));
    }
}
