//! Which file? The system's dialog where one answers, else a line to type the path in.

use std::path::PathBuf;
use std::sync::mpsc::{Receiver, TryRecvError, channel};
use std::thread;
use std::time::{Duration, Instant};

use egui::{Context, Key, Modifiers, RichText, TextEdit, WidgetInfo};

use super::controls::{Commands, button, look, overlay};
use super::theme;
use crate::desk::{Ask, AskCommand, Command, Model};

/// A dialog that is gone sooner than a person could close it was never there.
const NO_DIALOG: Duration = Duration::from_millis(400);

/// The dialog under way, and what is typed.
#[derive(Debug)]
pub struct AskPath {
    /// Whether system dialogs are tried at all.
    native: bool,
    waiting: Option<Waiting>,
    typed: Option<String>,
}

#[derive(Debug)]
struct Waiting {
    answers: Receiver<Option<PathBuf>>,
    since: Instant,
}

impl AskPath {
    pub fn new(native: bool) -> Self {
        Self { native, waiting: None, typed: None }
    }

    /// Follows the question of the session, if there is one.
    pub fn show(&mut self, ctx: &Context, model: &Model, out: &mut Commands) {
        let Some(ask) = &model.session.ask else {
            self.waiting = None;
            self.typed = None;
            return;
        };
        if ask.typed || !self.native {
            self.type_path(ctx, model, ask, out);
            return;
        }
        let waiting = self.waiting.get_or_insert_with(|| Waiting::start(ctx, ask));
        out.extend(waiting.answer());
        egui::Window::new("Waiting for the system's file dialog")
            .collapsible(false)
            .resizable(false)
            .anchor(egui::Align2::CENTER_TOP, [0.0, 60.0])
            .show(ctx, |ui| {
                button(ui, model, out, Command::Ask(AskCommand::Type));
            });
    }

    fn type_path(&mut self, ctx: &Context, model: &Model, ask: &Ask, out: &mut Commands) {
        let typed = self.typed.get_or_insert_with(|| ask.suggested.clone());
        let soft = theme::color(look(model).ink_soft);
        let mut go = false;
        let close = overlay(ctx, "ask path", 540.0, |ui| {
            ui.heading(ask.purpose.title());
            ui.label(RichText::new(ask.purpose.hint()).color(soft));
            ui.add_space(6.0);
            let field = ui.add(TextEdit::singleline(typed).hint_text("Path").desired_width(f32::INFINITY));
            field.widget_info(|| WidgetInfo {
                label: Some("Path".into()),
                ..WidgetInfo::text_edit(true, "", typed.as_str(), "Path")
            });
            if !field.has_focus() && !field.lost_focus() {
                field.request_focus();
            }
            let entered = ui.input_mut(|input| input.consume_key(Modifiers::NONE, Key::Enter));
            go = entered || (field.lost_focus() && ui.input(|input| input.key_pressed(Key::Enter)));
            ui.add_space(8.0);
            ui.horizontal(|ui| {
                let ready = !typed.trim().is_empty();
                go |= ui.add_enabled(ready, egui::Button::new(ask.purpose.verb())).clicked();
                if ui.button("Cancel").clicked() {
                    out.push(Command::Ask(AskCommand::Cancel));
                }
            });
        });
        if go && !typed.trim().is_empty() {
            out.push(Command::Ask(AskCommand::Answer(PathBuf::from(typed.trim()))));
        } else if close {
            out.push(Command::Ask(AskCommand::Cancel));
        }
    }
}

impl Waiting {
    /// Opens the system's dialog on a thread of its own.
    fn start(ctx: &Context, ask: &Ask) -> Self {
        let (sender, answers) = channel();
        let (ctx, ask) = (ctx.clone(), ask.clone());
        thread::spawn(move || {
            let mut dialog = rfd::FileDialog::new().set_title(ask.purpose.title());
            for (name, endings) in ask.purpose.filters() {
                dialog = dialog.add_filter(*name, endings);
            }
            if !ask.suggested.is_empty() {
                dialog = dialog.set_file_name(&ask.suggested);
            }
            let chosen = match (ask.purpose.is_folder(), ask.purpose.saves()) {
                (true, _) => dialog.pick_folder(),
                (false, true) => dialog.save_file(),
                (false, false) => dialog.pick_file(),
            };
            // A window closed meanwhile no longer listens.
            if sender.send(chosen).is_ok() {
                ctx.request_repaint();
            }
        });
        Self { answers, since: Instant::now() }
    }

    fn answer(&self) -> Option<Command> {
        let ask = match self.answers.try_recv() {
            Ok(Some(path)) => AskCommand::Answer(path),
            Ok(None) if self.since.elapsed() < NO_DIALOG => AskCommand::Type,
            Ok(None) => AskCommand::Cancel,
            Err(TryRecvError::Disconnected) => AskCommand::Type,
            Err(TryRecvError::Empty) => return None,
        };
        Some(Command::Ask(ask))
    }
}
