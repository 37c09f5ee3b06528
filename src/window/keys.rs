//! Keys: every listed command by its chord, and the overlay that lists them.

use egui::{Context, Event, InputState, Key, Modifiers, RichText, ScrollArea, Ui};

use super::controls::{Commands, column, look, overlay, rule};
use super::theme;
use crate::desk::{Chord, Command, Model, ViewCommand, listed};

/// Turns the keys of this frame into commands. Keys without Ctrl or Alt belong to whoever has the
/// keyboard first: a text line being edited, or what lies over the window.
pub fn commands(ctx: &Context, model: &Model, out: &mut Commands) {
    if model.session.is_covered() {
        return;
    }
    let typing = ctx.text_edit_focused();
    for command in listed() {
        let Some(chord) = command.record().key else { continue };
        let plain = !chord.command && !chord.alt;
        if plain && (typing || command.refusal(model).is_some()) {
            continue;
        }
        if ctx.input_mut(|input| take(input, chord)) {
            out.push(command);
        }
    }
}

/// Whether the chord was pressed in this frame; then nobody else sees the key.
fn take(input: &mut InputState, chord: Chord) -> bool {
    let Some(wanted) = Key::from_name(chord.key) else { return false };
    // Where + sits on the keyboard decides whether Shift is held with it.
    let any_shift = matches!(wanted, Key::Plus | Key::Minus | Key::Comma);
    let fits = |m: &Modifiers| {
        m.command == chord.command && m.alt == chord.alt && (any_shift || m.shift == chord.shift)
    };
    let before = input.events.len();
    input.events.retain(|event| {
        !matches!(event, Event::Key { key, modifiers, pressed: true, .. } if *key == wanted && fits(modifiers))
    });
    input.events.len() < before
}

/// All keys, in two columns.
pub fn show(ctx: &Context, model: &Model, out: &mut Commands) {
    let close = overlay(ctx, "keys", 680.0, |ui| {
        ui.heading("Keys");
        rule(ui, &look(model));
        let keyed: Vec<_> = listed().into_iter().filter(|c| c.record().key.is_some()).collect();
        let half = keyed.len().div_ceil(2);
        let height = (ctx.content_rect().height() - 220.0).max(200.0);
        ScrollArea::vertical().max_height(height).show(ui, |ui| {
            ui.spacing_mut().item_spacing.y = 3.0;
            ui.columns(2, |columns| {
                for (ui, part) in columns.iter_mut().zip(keyed.chunks(half)) {
                    part.iter().for_each(|command| row(ui, model, command));
                }
            });
        });
        rule(ui, &look(model));
        ui.label("On the table: arrows move, + and − zoom, Space lays a corner at the cross.");
        ui.add_space(8.0);
        if ui.button("Close").clicked() {
            out.push(Command::View(ViewCommand::Close));
        }
    });
    if close {
        out.push(Command::View(ViewCommand::Close));
    }
}

fn row(ui: &mut Ui, model: &Model, command: &Command) {
    let record = command.record();
    ui.horizontal_top(|ui| {
        let key = record.key.map(|chord| chord.to_string()).unwrap_or_default();
        let key = RichText::new(key).color(theme::color(look(model).ink_soft));
        column(ui, 120.0, |ui| ui.label(key));
        ui.label(record.label).on_hover_text(record.hint);
    });
}

#[cfg(test)]
mod tests {
    use crate::desk::listed;

    #[test]
    fn every_key_exists() {
        for command in listed() {
            if let Some(chord) = command.record().key {
                let known = egui::Key::from_name(chord.key).is_some();
                assert!(known, "{} has no such key: {chord}", command.record().id);
            }
        }
    }
}
