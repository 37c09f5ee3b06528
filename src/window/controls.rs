//! The few controls all panels share: a button that is a command, a line of text, a number, a row
//! of label and value, a thin rule.

use egui::{
    Align, Button, Color32, Label, Layout, Response, RichText, Stroke, TextEdit, Ui, WidgetInfo, vec2,
};

use super::theme;
use crate::desk::facts::Fact;
use crate::desk::{Command, Model};
use crate::ground::LonLat;
use crate::plate::Theme;

/// What a panel answers with.
pub type Commands = Vec<Command>;

/// The look of the model.
pub fn look(model: &Model) -> Theme {
    theme::of(model.view.theme)
}

/// A button for `command`: its label, its hint and key on hover, grey with the reason when it is
/// not allowed.
pub fn button(ui: &mut Ui, model: &Model, out: &mut Commands, command: Command) -> Response {
    let label = command.record().label;
    place(ui, model, out, command, Button::new(label))
}

/// The same without a frame, for rows of words.
pub fn quiet(ui: &mut Ui, model: &Model, out: &mut Commands, command: Command, label: &str) -> Response {
    let ink = theme::color(look(model).ink_soft);
    place(ui, model, out, command, Button::new(RichText::new(label).color(ink)).frame(false))
}

/// The one thing to do next.
pub fn main_button(ui: &mut Ui, model: &Model, out: &mut Commands, command: Command) -> Response {
    let look = look(model);
    let label = RichText::new(command.record().label).color(theme::color(look.paper));
    place(ui, model, out, command, Button::new(label).fill(theme::color(look.ink)))
}

/// A word that is on or off, underlined when on.
pub fn toggle(
    ui: &mut Ui,
    model: &Model,
    out: &mut Commands,
    command: Command,
    label: &str,
    on: bool,
) -> Response {
    let look = look(model);
    let ink = theme::color(if on { look.ink } else { look.ink_soft });
    let response = place(ui, model, out, command, Button::new(RichText::new(label).color(ink)).frame(false));
    if on {
        let line = response.rect.shrink2(vec2(2.0, 0.0));
        ui.painter().hline(
            line.x_range(),
            line.bottom() - 1.0,
            Stroke::new(1.5, theme::color(look.measured)),
        );
    }
    response.widget_info(|| WidgetInfo::selected(egui::Role::Button, ui.is_enabled(), on, label));
    response
}

fn place(ui: &mut Ui, model: &Model, out: &mut Commands, command: Command, button: Button<'_>) -> Response {
    let record = command.record();
    let refusal = command.refusal(model);
    let key = record.key.map(|chord| format!("  ({chord})")).unwrap_or_default();
    let response = ui.add_enabled(refusal.is_none(), button);
    if response.clicked() {
        out.push(command);
    }
    let hover = format!("{}{key}", record.hint);
    response.on_hover_text(hover).on_disabled_hover_text(refusal.unwrap_or_default())
}

/// A line of text named `label`. Edits a copy; gives the new text when the user leaves the line or
/// presses Enter, if it differs.
pub fn line(ui: &mut Ui, label: &str, value: &str, width: f32) -> Option<String> {
    let id = ui.make_persistent_id(("line", label));
    let mut text = ui.data(|data| data.get_temp::<String>(id)).unwrap_or_else(|| value.to_owned());
    let response = ui.add(TextEdit::singleline(&mut text).id(id).desired_width(width));
    response.widget_info(|| WidgetInfo {
        label: Some(label.to_owned()),
        ..WidgetInfo::text_edit(ui.is_enabled(), value, text.as_str(), "")
    });
    if response.has_focus() {
        ui.data_mut(|data| data.insert_temp(id, text));
        return None;
    }
    ui.data_mut(|data| data.remove_temp::<String>(id));
    (response.lost_focus() && text != value).then_some(text)
}

/// A number named `label`, typed; gives the new one when it parses and differs.
pub fn number(ui: &mut Ui, label: &str, value: f64, width: f32) -> Option<f64> {
    let text = line(ui, label, &format!("{value}"), width)?;
    parse(&text).filter(|typed| *typed != value)
}

/// A number that may be left to the program: an empty line is `None`.
pub fn optional_number(ui: &mut Ui, label: &str, value: Option<f64>, width: f32) -> Option<Option<f64>> {
    let text = line(ui, label, &value.map(|v| v.to_string()).unwrap_or_default(), width)?;
    let typed = if text.trim().is_empty() { Some(None) } else { parse(&text).map(Some) };
    typed.filter(|typed| *typed != value)
}

/// A decimal number with a point or a comma.
fn parse(text: &str) -> Option<f64> {
    text.trim().replace(',', ".").replace('−', "-").parse().ok().filter(|v: &f64| v.is_finite())
}

/// Longitude and latitude in degrees, divided by blanks or a semicolon; `None` when they are no place.
pub fn lonlat(text: &str) -> Option<LonLat> {
    let parts: Vec<&str> = text.split([' ', ';']).filter(|part| !part.is_empty()).collect();
    let [lon, lat] = parts[..] else { return None };
    let (lon, lat) = (parse(lon.trim_end_matches(','))?, parse(lat)?);
    (lon.abs() <= 360.0 && lat.abs() <= 90.0).then(|| LonLat { lon, lat }.folded())
}

/// Rows of label and value; the label explains itself on hover.
pub fn facts(ui: &mut Ui, look: &Theme, facts: &[Fact]) {
    let width = (0.4 * ui.available_width()).min(150.0);
    for fact in facts {
        ui.horizontal_top(|ui| {
            let label = RichText::new(fact.label).color(theme::color(look.ink_soft));
            let label = column(ui, width, |ui| ui.add(Label::new(label).wrap()));
            label.on_hover_ui(|ui| explain(ui, look, fact));
            let value = rest(ui, |ui| ui.add(Label::new(&fact.value).wrap()));
            let value = value.on_hover_ui(|ui| explain(ui, look, fact));
            value.widget_info(|| {
                WidgetInfo::labeled(egui::Role::Label, true, format!("{}: {}", fact.label, fact.value))
            });
        });
    }
}

/// What a number is, and which published method made it.
fn explain(ui: &mut Ui, look: &Theme, fact: &Fact) {
    ui.label(fact.hint);
    let Some(method) = fact.record() else { return };
    let soft = theme::color(look.ink_soft);
    rule(ui, look);
    ui.label(RichText::new(method.name).family(theme::bold()));
    ui.label(method.formula);
    for source in method.sources {
        let remark = source.read.remark();
        let remark = if remark.is_empty() { String::new() } else { format!(" ({remark})") };
        let words = format!("{} {}. {}{remark}", source.authors, source.year, source.title);
        ui.label(RichText::new(words).small().color(soft));
    }
}

/// A column of fixed width inside a row, its text wrapped and set from the left.
pub fn column<R>(ui: &mut Ui, width: f32, content: impl FnOnce(&mut Ui) -> R) -> R {
    ui.allocate_ui_with_layout(vec2(width, 0.0), Layout::top_down(Align::LEFT), |ui| {
        ui.set_width(width);
        content(ui)
    })
    .inner
}

/// What is left of a row, as a column.
pub fn rest<R>(ui: &mut Ui, content: impl FnOnce(&mut Ui) -> R) -> R {
    let width = ui.available_width();
    column(ui, width, content)
}

/// A label of fixed width and the field beside it.
pub fn field_row(ui: &mut Ui, label: &str, width: f32, field: impl FnOnce(&mut Ui)) -> egui::Response {
    ui.horizontal(|ui| {
        let size = vec2(width, ui.spacing().interact_size.y);
        let response = ui.allocate_ui_with_layout(size, Layout::left_to_right(Align::Center), |ui| {
            ui.set_min_width(width);
            ui.label(label)
        });
        field(ui);
        response.inner
    })
    .inner
}

/// What lies over the window, `width` points wide; says whether the user wants it closed.
pub fn overlay(ctx: &egui::Context, name: &str, width: f32, content: impl FnOnce(&mut Ui)) -> bool {
    let frame = egui::Frame::popup(&ctx.global_style()).inner_margin(egui::Margin::symmetric(24, 20));
    let modal = egui::Modal::new(egui::Id::unique(name)).frame(frame).show(ctx, |ui| {
        ui.set_width(width);
        content(ui);
    });
    modal.should_close()
}

/// A heading inside a page.
pub fn heading(ui: &mut Ui, text: &str) {
    ui.add_space(10.0);
    ui.label(RichText::new(text).family(theme::bold()).size(15.0));
    ui.add_space(2.0);
}

/// A thin rule across.
pub fn rule(ui: &mut Ui, look: &Theme) {
    let (rect, _) = ui.allocate_exact_size(vec2(ui.available_width(), 9.0), egui::Sense::hover());
    ui.painter().hline(rect.x_range(), rect.center().y, Stroke::new(1.0, theme::color(look.rule)));
}

/// A weakness of the result: a mark and the sentence.
pub fn caution(ui: &mut Ui, look: &Theme, text: &str) {
    let ink = theme::color(look.caution);
    ui.horizontal_top(|ui| {
        mark(ui, ink);
        let words = Label::new(RichText::new(text).color(ink)).wrap();
        rest(ui, |ui| ui.add(words)).on_hover_text("A caution: printed wherever the result is.");
    });
}

/// A small triangle, so that a caution is seen without colour.
fn mark(ui: &mut Ui, ink: Color32) {
    let (rect, _) = ui.allocate_exact_size(vec2(14.0, 18.0), egui::Sense::hover());
    let c = rect.center();
    let corners = vec![c + vec2(0.0, -5.0), c + vec2(5.5, 4.5), c + vec2(-5.5, 4.5)];
    ui.painter().add(egui::Shape::closed_line(corners, Stroke::new(1.3, ink)));
    ui.painter().vline(c.x, c.y - 2.0..=c.y + 2.0, Stroke::new(1.3, ink));
}

#[cfg(test)]
mod tests {
    use super::{lonlat, parse};
    use crate::ground::LonLat;

    #[test]
    fn numbers_may_carry_a_comma_and_a_true_minus() {
        assert_eq!(parse(" 0,25 "), Some(0.25));
        assert_eq!(parse("−3e-4"), Some(-3e-4));
        assert_eq!(parse("inf"), None);
        assert_eq!(parse("ten"), None);
    }

    #[test]
    fn a_place_is_longitude_then_latitude() {
        assert_eq!(lonlat("−103.2, 31.8"), Some(LonLat { lon: -103.2, lat: 31.8 }));
        assert_eq!(lonlat("256.8 31,8"), Some(LonLat { lon: 256.8 - 360.0, lat: 31.8 }));
        assert_eq!(lonlat("31.8"), None);
        assert_eq!(lonlat("0 91"), None);
    }
}
