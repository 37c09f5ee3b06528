//! Opens the window on the screen.

use std::path::PathBuf;
use std::sync::Arc;

use super::App;
use crate::desk::{Command, Model, SheetCommand};

/// What the window begins with.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub enum Start {
    /// The sheet opened last, or an empty table at first start.
    #[default]
    Last,
    /// The sheet (or raster, or wind record) at a path.
    File(PathBuf),
    Empty,
}

/// The window cannot be opened.
#[derive(Debug, thiserror::Error)]
pub enum WindowError {
    #[error("no window could be opened: {0}")]
    Screen(String),
}

/// Opens the window and returns when it is closed.
///
/// # Errors
/// [`WindowError::Screen`] when there is no display or no OpenGL.
pub fn open(start: Start) -> Result<(), WindowError> {
    let viewport = egui::ViewportBuilder::default()
        .with_title("Ventifact")
        .with_app_id("ventifact")
        .with_inner_size([1440.0, 900.0])
        .with_min_inner_size([960.0, 600.0]);
    let options = eframe::NativeOptions { viewport, ..Default::default() };
    let begin = move |cc: &eframe::CreationContext<'_>| -> Result<Box<dyn eframe::App>, _> {
        Ok(Box::new(begin(&cc.egui_ctx, start)))
    };
    eframe::run_native("ventifact", options, Box::new(begin)).map_err(|e| WindowError::Screen(e.to_string()))
}

/// The application as it starts: its jobs wake the window, its recent sheets are kept.
pub(super) fn begin(ctx: &egui::Context, start: Start) -> App {
    let waker = ctx.clone();
    let model = Model::new(Arc::new(move || waker.request_repaint())).keeping_recent();
    let last = model.session.recent.first().cloned();
    let mut app = App::new(ctx, model, true);
    match (start, last) {
        (Start::File(path), _) => app.give(Command::of_file(path)),
        (Start::Last, Some(path)) => app.give(Command::Sheet(SheetCommand::Open(path))),
        (Start::Last | Start::Empty, _) => {}
    }
    app
}
