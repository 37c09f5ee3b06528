//! The settings form, made from the records, and the question before changes are lost.

use egui::{ComboBox, Context, RichText, ScrollArea, Ui};

use super::controls::{
    Commands, button, field_row, look, main_button, number, optional_number, overlay, rule,
};
use super::theme;
use crate::desk::{Command, Model, SettingCommand, SheetCommand, ViewCommand};
use crate::study::{Setting, SettingKind, SettingValue, Settings, all_settings};

pub fn settings(ctx: &Context, model: &Model, out: &mut Commands) {
    let close = overlay(ctx, "settings", 640.0, |ui| {
        ui.heading("Settings");
        ui.label(
            RichText::new("Saved with the sheet. A change makes findings out of date until measured again.")
                .color(theme::color(look(model).ink_soft)),
        );
        rule(ui, &look(model));
        let height = (ctx.content_rect().height() - 260.0).max(200.0);
        ScrollArea::vertical().max_height(height).show(ui, |ui| {
            let mut area = "";
            for setting in all_settings() {
                let this = setting.key.split('.').next().unwrap_or_default();
                if this != area {
                    area = this;
                    ui.add_space(8.0);
                    ui.label(RichText::new(title_of(area)).family(theme::bold()));
                }
                row(ui, model, setting, out);
            }
        });
        rule(ui, &look(model));
        ui.horizontal(|ui| {
            if ui.button("Close").clicked() {
                out.push(Command::View(ViewCommand::Close));
            }
            button(ui, model, out, Command::Setting(SettingCommand::ResetAll));
        });
    });
    if close {
        out.push(Command::View(ViewCommand::Close));
    }
}

fn title_of(area: &str) -> &str {
    match area {
        "trend" => "Trend",
        "spectrum" => "Spacing",
        "statistics" => "Statistics of axes",
        "wind" => "Winds and sand",
        "verdict" => "Verdict",
        "obstacle" => "Obstacles",
        "crest" => "Crests",
        "recovery" => "Injection and recovery",
        "compare" => "Two pictures",
        other => other,
    }
}

fn row(ui: &mut Ui, model: &Model, setting: &'static Setting, out: &mut Commands) {
    let soft = theme::color(look(model).ink_soft);
    let name = field_row(ui, setting.label, 210.0, |ui| {
        value(ui, model, setting, out);
        ui.label(RichText::new(range(setting)).small().color(soft));
    });
    name.on_hover_text(setting.help);
}

/// One setting on a page of the bench: its range is in what hovers over its name.
pub(super) fn narrow_row(ui: &mut Ui, model: &Model, setting: &'static Setting, out: &mut Commands) {
    let name = field_row(ui, setting.label, 130.0, |ui| value(ui, model, setting, out));
    name.on_hover_text(format!("{} ({})", setting.help, range(setting)));
}

/// The field, its unit, and the way back to the default.
fn value(ui: &mut Ui, model: &Model, setting: &'static Setting, out: &mut Commands) {
    let soft = theme::color(look(model).ink_soft);
    if let Some(value) = field(ui, model, setting) {
        out.push(Command::Setting(SettingCommand::Set { key: setting.key, value }));
    }
    if setting.unit != "1" {
        ui.label(RichText::new(setting.unit).color(soft));
    }
    let now = (setting.get)(&model.sheet.settings);
    if now != (setting.get)(&Settings::default()) && ui.small_button("Reset").clicked() {
        out.push(Command::Setting(SettingCommand::Reset(setting.key)));
    }
}

fn field(ui: &mut Ui, model: &Model, setting: &'static Setting) -> Option<SettingValue> {
    match (setting.get)(&model.sheet.settings) {
        SettingValue::Number(value) => number(ui, setting.label, value, 110.0).map(SettingValue::Number),
        SettingValue::Auto(value) => optional_number(ui, setting.label, value, 110.0).map(SettingValue::Auto),
        SettingValue::Whole(value) => number(ui, setting.label, f64::from(value), 110.0)
            .filter(|typed| (0.0..=f64::from(u32::MAX)).contains(typed))
            .map(|typed| SettingValue::Whole(typed.round() as u32)),
        SettingValue::Choice(value) => choice(ui, setting, value),
    }
}

fn choice(ui: &mut Ui, setting: &'static Setting, value: &'static str) -> Option<SettingValue> {
    let SettingKind::Choice(options) = setting.kind else { return None };
    let shown = options.iter().find(|(key, _)| *key == value).map_or(value, |(_, label)| label);
    let mut chosen = value;
    ComboBox::from_id_salt(setting.key).selected_text(shown).width(240.0).show_ui(ui, |ui| {
        for (key, label) in options {
            ui.selectable_value(&mut chosen, *key, *label);
        }
    });
    (chosen != value).then_some(SettingValue::Choice(chosen))
}

fn range(setting: &Setting) -> String {
    match setting.kind {
        SettingKind::Number { least, greatest } => format!("{least} to {greatest}"),
        SettingKind::Auto { least, greatest } => format!("empty = from the data; {least} to {greatest}"),
        SettingKind::Whole { least, greatest } => format!("{least} to {greatest}"),
        SettingKind::Choice(_) => String::new(),
    }
}

/// Before changes are lost.
pub fn unsaved(ctx: &Context, model: &Model, out: &mut Commands) {
    let close = overlay(ctx, "unsaved", 420.0, |ui| {
        ui.heading("Unsaved changes");
        ui.label(format!("“{}” has changes that are not on disk.", model.name()));
        ui.add_space(10.0);
        ui.horizontal(|ui| {
            main_button(ui, model, out, Command::Sheet(SheetCommand::SaveFirst));
            button(ui, model, out, Command::Sheet(SheetCommand::Discard));
            if ui.button("Stay here").clicked() {
                out.push(Command::View(ViewCommand::Close));
            }
        });
    });
    if close {
        out.push(Command::View(ViewCommand::Close));
    }
}
