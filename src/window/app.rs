//! The frame, in order: take in what jobs answered, turn keys into commands, draw, apply.

use std::time::Duration;

use egui::{CentralPanel, Context, Frame, Margin, Panel, Ui, ViewportCommand};

use super::ask::AskPath;
use super::controls::{Commands, look};
use super::finder::Finder;
use super::software::Face;
use super::table::{self, TableState};
use super::{bench, bodies, dialogs, foot, head, keys, ledger, notices, start_page, theme, winds_import};
use crate::desk::{Command, Dialog, Model, SheetCommand, absorb, apply};

/// The window: the model and the little that only drawing needs.
#[derive(Debug)]
pub struct App {
    model: Model,
    finder: Finder,
    ask: AskPath,
    table: TableState,
    /// As the window bears it.
    title: String,
}

/// How often running work is drawn anew.
const PROGRESS_STEP: Duration = Duration::from_millis(100);

impl App {
    /// A window on `model`. `native` says whether system dialogs are tried.
    pub fn new(ctx: &Context, model: Model, native: bool) -> Self {
        theme::install_fonts(ctx);
        let (finder, ask) = (Finder::default(), AskPath::new(native));
        Self { model, finder, ask, table: TableState::default(), title: String::new() }
    }

    pub fn model(&self) -> &Model {
        &self.model
    }

    /// Whether no picture is still being made in the background for the table as last drawn.
    pub fn is_settled(&self) -> bool {
        self.table.is_settled()
    }

    /// Gives a command, as a key or a button would.
    pub fn give(&mut self, command: Command) {
        apply(&mut self.model, command);
    }

    /// Takes in what background jobs have answered.
    pub fn take_in(&mut self, ctx: &Context) {
        if absorb(&mut self.model) {
            ctx.request_repaint();
        }
    }

    /// Draws one frame and does what the user asked in it.
    pub fn show(&mut self, ui: &mut Ui) {
        let ctx = ui.ctx().clone();
        theme::dress(&ctx, self.model.view.theme);
        let mut out = Commands::new();
        self.closing(&ctx, &mut out);
        dropped_files(&ctx, &mut out);
        self.panels(ui, &mut out);
        // Last, so that what has the keyboard takes its own keys first.
        keys::commands(&ctx, &self.model, &mut out);
        self.overlays(&ctx, &mut out);
        for command in out {
            apply(&mut self.model, command);
            ctx.request_repaint();
        }
        if self.model.session.leaving {
            ctx.send_viewport_cmd(ViewportCommand::Close);
        }
        self.follow_title(&ctx);
        if !self.model.session.jobs.is_idle() {
            ctx.request_repaint_after(PROGRESS_STEP);
        }
    }

    fn panels(&mut self, ui: &mut Ui, out: &mut Commands) {
        let look = look(&self.model);
        let frame = |x, y| Frame::new().fill(theme::color(look.paper)).inner_margin(Margin::symmetric(x, y));
        let model = &self.model;
        Panel::top("head").frame(frame(16, 8)).show(ui, |ui| head::show(ui, model, out));
        Panel::bottom("foot").frame(frame(16, 8)).show(ui, |ui| foot::show(ui, model, out));
        Panel::left("ledger")
            .frame(frame(16, 12))
            .default_size(290.0)
            .size_range(230.0..=420.0)
            .show(ui, |ui| ledger::show(ui, model, out));
        Panel::right("bench")
            .frame(frame(16, 12))
            .default_size(380.0)
            .size_range(320.0..=560.0)
            .show(ui, |ui| bench::show(ui, model, out));
        CentralPanel::default().frame(frame(0, 0)).show(ui, |ui| {
            if model.sheet.rasters.is_empty() {
                start_page::show(ui, model, out);
            } else {
                out.extend(table::show(ui, model, &mut self.table));
            }
            notices::show(ui.ctx(), model, out, ui.max_rect().right_bottom());
        });
    }

    fn overlays(&mut self, ctx: &Context, out: &mut Commands) {
        match &self.model.session.dialog {
            Some(Dialog::Finder) => self.finder.show(ctx, &self.model, out),
            Some(Dialog::Keys) => keys::show(ctx, &self.model, out),
            Some(Dialog::Settings) => dialogs::settings(ctx, &self.model, out),
            Some(Dialog::Bodies) => bodies::show(ctx, &self.model, out),
            Some(Dialog::Unsaved(_)) => dialogs::unsaved(ctx, &self.model, out),
            None => {}
        }
        if let Some(import) = &self.model.session.import {
            winds_import::show(ctx, &self.model, import, out);
        }
        self.ask.show(ctx, &self.model, out);
    }

    /// Only when it has changed: a window that is told something draws again.
    fn follow_title(&mut self, ctx: &Context) {
        let title = title(&self.model);
        if title != self.title {
            ctx.send_viewport_cmd(ViewportCommand::Title(title.clone()));
            self.title = title;
        }
    }

    /// The window's own close button goes through the same door as Quit.
    fn closing(&self, ctx: &Context, out: &mut Commands) {
        let asked = ctx.input(|input| input.viewport().close_requested());
        if asked && !self.model.session.leaving {
            if self.model.is_dirty() {
                ctx.send_viewport_cmd(ViewportCommand::CancelClose);
            }
            out.push(Command::Sheet(SheetCommand::Quit));
        }
    }
}

impl Face for App {
    fn take_in(&mut self, ctx: &Context) {
        Self::take_in(self, ctx);
    }

    fn show(&mut self, ui: &mut Ui) {
        Self::show(self, ui);
    }
}

impl eframe::App for App {
    fn logic(&mut self, ctx: &Context, _: &mut eframe::Frame) {
        self.take_in(ctx);
    }

    fn ui(&mut self, ui: &mut Ui, _: &mut eframe::Frame) {
        self.show(ui);
    }
}

fn title(model: &Model) -> String {
    let mark = if model.is_dirty() { " •" } else { "" };
    format!("{}{mark} – Ventifact", model.name())
}

/// Files dropped on the window are opened as what their ending says.
fn dropped_files(ctx: &Context, out: &mut Commands) {
    let paths =
        ctx.input(|input| input.raw.dropped_files.iter().map(|f| f.path().to_owned()).collect::<Vec<_>>());
    out.extend(paths.into_iter().map(Command::of_file));
}
