//! The command finder: every command, narrowed by typing, given with Enter.

use egui::{
    Align, Context, Key, Layout, Modifiers, RichText, ScrollArea, Sense, TextEdit, Ui, WidgetInfo, vec2,
};

use super::controls::{Commands, look, overlay, rule};
use super::theme;
use crate::desk::{Command, Model, ViewCommand, listed};

/// What is typed and which row is marked, while the finder is open.
#[derive(Debug, Default)]
pub struct Finder {
    typed: String,
    marked: usize,
}

impl Finder {
    /// Shows the finder and answers with the chosen command.
    pub fn show(&mut self, ctx: &Context, model: &Model, out: &mut Commands) {
        let found = matching(&self.typed);
        let mut chosen = None;
        let close = overlay(ctx, "finder", 540.0, |ui| {
            self.keys(ui, &found, &mut chosen);
            let field = ui.add(
                TextEdit::singleline(&mut self.typed)
                    .hint_text("Find a command")
                    .desired_width(f32::INFINITY),
            );
            field.widget_info(|| WidgetInfo {
                label: Some("Find a command".into()),
                ..WidgetInfo::text_edit(true, "", self.typed.as_str(), "Find a command")
            });
            field.request_focus();
            if field.changed() {
                self.marked = 0;
            }
            rule(ui, &look(model));
            ScrollArea::vertical().max_height(420.0).auto_shrink([false, true]).show(ui, |ui| {
                for (at, command) in found.iter().enumerate() {
                    if row(ui, model, command, at == self.marked) {
                        chosen = Some(command.clone());
                    }
                }
                if found.is_empty() {
                    ui.label("No command has these words.");
                }
            });
        });
        if chosen.is_some() || close {
            *self = Self::default();
            out.push(Command::View(ViewCommand::Close));
        }
        out.extend(chosen);
    }

    fn keys(&mut self, ui: &Ui, found: &[Command], chosen: &mut Option<Command>) {
        let pressed = |key| ui.input_mut(|input| input.consume_key(Modifiers::NONE, key));
        let last = found.len().saturating_sub(1);
        if pressed(Key::ArrowDown) {
            self.marked = (self.marked + 1).min(last);
        }
        if pressed(Key::ArrowUp) {
            self.marked = self.marked.saturating_sub(1);
        }
        if pressed(Key::Enter) {
            *chosen = found.get(self.marked.min(last)).cloned();
        }
    }
}

/// Commands whose label or hint has every typed word, those whose label has them first.
fn matching(typed: &str) -> Vec<Command> {
    let words: Vec<String> = typed.split_whitespace().map(str::to_lowercase).collect();
    let holds = |text: &str| words.iter().all(|word| text.contains(word.as_str()));
    let (mut first, mut then) = (Vec::new(), Vec::new());
    for command in listed() {
        let record = command.record();
        let label = record.label.to_lowercase();
        if holds(&label) {
            first.push(command);
        } else if holds(&format!("{label} {}", record.hint.to_lowercase())) {
            then.push(command);
        }
    }
    first.append(&mut then);
    first
}

fn row(ui: &mut Ui, model: &Model, command: &Command, marked: bool) -> bool {
    let (record, refusal, look) = (command.record(), command.refusal(model), look(model));
    let (rect, response) = ui.allocate_exact_size(vec2(ui.available_width(), 44.0), Sense::click());
    response
        .widget_info(|| WidgetInfo::selected(egui::Role::MenuItem, refusal.is_none(), marked, record.label));
    if marked || response.hovered() {
        ui.painter().rect_filled(rect, 3.0, theme::color(look.panel));
    }
    if marked {
        response.scroll_to_me(None);
    }
    let ink = if refusal.is_some() { look.ink_soft } else { look.ink };
    let mut inner = ui.new_child(
        egui::UiBuilder::new().max_rect(rect.shrink2(vec2(8.0, 3.0))).layout(Layout::top_down(Align::LEFT)),
    );
    inner.spacing_mut().item_spacing.y = 2.0;
    inner.spacing_mut().interact_size.y = 18.0;
    inner.horizontal(|ui| {
        ui.add(egui::Label::new(RichText::new(record.label).color(theme::color(ink))).selectable(false));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            if let Some(chord) = record.key {
                let key = RichText::new(chord.to_string()).small().color(theme::color(look.ink_soft));
                ui.add(egui::Label::new(key).selectable(false));
            }
        });
    });
    let below = refusal.map_or_else(|| record.hint.to_owned(), |why| format!("Not now: {why}."));
    let small = RichText::new(below).small().color(theme::color(look.ink_soft));
    inner.add(egui::Label::new(small).selectable(false).truncate());
    response.clicked()
}

#[cfg(test)]
mod tests {
    use super::matching;

    #[test]
    fn words_in_the_label_come_before_words_in_the_hint() {
        let found = matching("patch");
        let label = |i: usize| found[i].record().label.to_lowercase();
        assert!(label(0).contains("patch"));
        assert!(found.len() > 5 && !label(found.len() - 1).contains("patch"));
        assert!(matching("zzz").is_empty());
        assert_eq!(matching("").len(), crate::desk::listed().len());
    }
}
