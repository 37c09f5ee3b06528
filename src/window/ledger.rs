//! The ledger: a small rose, the trend with its interval, the spacing and the verdict of each
//! patch; below them the rasters and the wind records of the sheet.

use egui::{
    Align, Label, Layout, Rect, Response, RichText, ScrollArea, Sense, Stroke, Ui, UiBuilder, WidgetInfo,
    vec2,
};

use super::controls::{Commands, button, look, rule};
use super::{figure, ledger_networks, theme};
use crate::desk::ledger::{Entry, entries};
use crate::desk::{Command, Model, PatchCommand, RasterCommand, Standing, ViewCommand, WindCommand};
use crate::ground::Axis;
use crate::plate::{Theme, small_rose, small_rose_of_populations, verdict_bar};
use crate::study::Id;

const ENTRY_HEIGHT: f32 = 78.0;
/// Of the small rose, millimetres.
const ROSE_MM: f64 = 11.0;

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let look = look(model);
    ui.horizontal(|ui| {
        ui.label(RichText::new("Ledger").family(theme::bold()).size(15.0));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let count = model.sheet.patches.len();
            let words = if count == 1 { "1 patch".to_owned() } else { format!("{count} patches") };
            ui.label(RichText::new(words).color(theme::color(look.ink_soft)));
        });
    });
    rule(ui, &look);
    ScrollArea::vertical().auto_shrink([false, false]).show(ui, |ui| {
        let entries = entries(model);
        if entries.is_empty() {
            ui.label(
                RichText::new("Outline a region of the raster. Its trend and spacing appear here.")
                    .color(theme::color(look.ink_soft)),
            );
        }
        for entry in &entries {
            if entry_row(ui, &look, entry) {
                out.push(Command::Patch(PatchCommand::Select(Some(entry.id))));
            }
        }
        ledger_networks::show(ui, model, out, &look);
        rasters(ui, model, out, &look);
        winds(ui, model, out, &look);
    });
}

/// One patch; says whether it was chosen.
fn entry_row(ui: &mut Ui, look: &Theme, entry: &Entry<'_>) -> bool {
    let (rect, response) = row(ui, look, entry.selected, &entry.spoken(), ENTRY_HEIGHT);
    if ui.is_rect_visible(rect) {
        picture(ui, look, entry, rect);
        words(ui, look, entry, rect);
    }
    response.clicked()
}

/// The ground of an entry: a bar when it is selected, a rule below it.
pub(super) fn row(ui: &mut Ui, look: &Theme, selected: bool, spoken: &str, height: f32) -> (Rect, Response) {
    let (rect, response) = ui.allocate_exact_size(vec2(ui.available_width(), height), Sense::click());
    response.widget_info(|| WidgetInfo::selected(egui::Role::ListItem, true, selected, spoken));
    if selected || response.hovered() {
        ui.painter().rect_filled(rect, 2.0, theme::color(look.panel));
    }
    if selected {
        let bar = Rect::from_min_size(rect.min, vec2(3.0, rect.height()));
        ui.painter().rect_filled(bar, 0.0, theme::color(look.measured));
    }
    if response.has_focus() {
        ui.painter().rect_stroke(
            rect,
            2.0,
            Stroke::new(1.0, theme::color(look.ink_soft)),
            egui::StrokeKind::Inside,
        );
    }
    let line = rect.left_bottom() + vec2(8.0, 0.0);
    ui.painter().hline(line.x..=rect.right(), line.y, Stroke::new(1.0, theme::color(look.rule)));
    (rect, response)
}

fn picture(ui: &Ui, look: &Theme, entry: &Entry<'_>, rect: Rect) {
    if let Some(finding) = entry.finding {
        let axes: Vec<Axis> = finding.pattern.populations.iter().filter_map(|p| p.trend.axis).collect();
        let rose = if axes.len() > 1 {
            small_rose_of_populations(&finding.trend, &axes, ROSE_MM, look)
        } else {
            small_rose(&finding.trend, ROSE_MM, look)
        };
        let scale = (ENTRY_HEIGHT - 18.0) / rose.height_mm as f32;
        figure::paint(ui.painter(), &rose, rect.min + vec2(12.0, 9.0), scale);
    }
}

fn words(ui: &mut Ui, look: &Theme, entry: &Entry<'_>, rect: Rect) {
    let inner = Rect::from_min_max(rect.min + vec2(80.0, 7.0), rect.max - vec2(6.0, 5.0));
    let mut ui = ui.new_child(UiBuilder::new().max_rect(inner).layout(Layout::top_down(Align::LEFT)));
    ui.spacing_mut().item_spacing.y = 1.0;
    let soft = theme::color(look.ink_soft);
    let stale = !matches!(entry.standing, Standing::Current | Standing::Coarse);
    let number_ink = if stale { soft } else { theme::color(look.measured) };
    let say = |ui: &mut Ui, text: RichText| {
        ui.add(Label::new(text).selectable(false).truncate());
    };
    say(&mut ui, RichText::new(entry.name).family(theme::bold()));
    if !entry.trend.is_empty() {
        say(&mut ui, RichText::new(&entry.trend).color(number_ink));
    }
    let second: Vec<&str> =
        [entry.spacing.as_str(), entry.standing.remark()].into_iter().filter(|s| !s.is_empty()).collect();
    say(&mut ui, RichText::new(second.join(" · ")).small().color(soft));
    if entry.verdict.is_some() {
        let width_mm = f64::from(inner.width() / theme::POINTS_PER_MM);
        let bar = verdict_bar(entry.verdict, [width_mm.min(34.0), 1.6], look);
        let at = ui.cursor().min + vec2(0.0, 2.0);
        figure::paint(ui.painter(), &bar, at, theme::POINTS_PER_MM);
    }
}

fn rasters(ui: &mut Ui, model: &Model, out: &mut Commands, look: &Theme) {
    section(ui, look, "Rasters");
    let shown = model.shown_raster().map(|r| r.id);
    for raster in &model.sheet.rasters {
        if word_row(ui, look, &raster.name, shown == Some(raster.id), "Raster") {
            out.push(Command::View(ViewCommand::ShowRaster(raster.id)));
        }
    }
    button(ui, model, out, Command::Raster(RasterCommand::AskOpen));
}

fn winds(ui: &mut Ui, model: &Model, out: &mut Commands, look: &Theme) {
    section(ui, look, "Winds");
    let shown: Option<Id> = model.shown_wind().map(|w| w.id);
    for wind in &model.sheet.winds {
        if word_row(ui, look, &wind.name, shown == Some(wind.id), "Winds") {
            out.push(Command::View(ViewCommand::ShowWind(wind.id)));
        }
    }
    button(ui, model, out, Command::Wind(WindCommand::AskImport));
}

pub(super) fn section(ui: &mut Ui, look: &Theme, title: &str) {
    ui.add_space(14.0);
    ui.label(RichText::new(title).family(theme::bold()).size(13.0).color(theme::color(look.ink_soft)));
}

/// A name that can be chosen.
fn word_row(ui: &mut Ui, look: &Theme, name: &str, chosen: bool, kind: &str) -> bool {
    let ink = theme::color(if chosen { look.ink } else { look.ink_soft });
    let text = RichText::new(name).color(ink);
    let response = ui.add(egui::Button::new(text).frame(false).truncate());
    if chosen {
        let rect = response.rect;
        ui.painter().vline(
            rect.left() - 4.0,
            rect.y_range().shrink(3.0),
            Stroke::new(2.0, theme::color(look.measured)),
        );
    }
    response
        .widget_info(|| WidgetInfo::selected(egui::Role::ListItem, true, chosen, format!("{kind} {name}")));
    response.clicked()
}
