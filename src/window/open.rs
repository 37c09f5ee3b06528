//! Opens the window on the screen.

use std::path::PathBuf;
use std::sync::Arc;

use super::App;
use super::software::{self, SoftwareError};
use crate::desk::{Command, Model, SheetCommand};

/// What the window begins with.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub enum Start {
    /// The sheet opened last, or the demo at first start.
    #[default]
    Last,
    /// The sheet (or raster, or wind record) at a path.
    File(PathBuf),
    Empty,
}

/// Set to `cpu` to draw without OpenGL.
const RENDERER: &str = "VENTIFACT_RENDERER";

impl From<Option<PathBuf>> for Start {
    /// The file at a path, or where the last session ended.
    fn from(path: Option<PathBuf>) -> Self {
        path.map_or(Self::Last, Self::File)
    }
}

/// The window cannot be opened.
#[derive(Debug, thiserror::Error)]
pub enum WindowError {
    #[error(transparent)]
    Software(#[from] SoftwareError),
    #[error("no window could be opened: {opengl}; nor without OpenGL: {without}")]
    Screen { opengl: String, without: String },
}

/// Opens the window and returns when it is closed. Where OpenGL fails, the program is started once
/// more to draw on the processor: a process can have only one event loop in its life.
///
/// # Errors
/// [`WindowError`] when there is no display.
pub fn open(start: impl Into<Start>) -> Result<(), WindowError> {
    let start = start.into();
    let viewport = egui::ViewportBuilder::default()
        .with_title("Ventifact")
        .with_app_id("ventifact")
        .with_inner_size([1440.0, 900.0])
        .with_min_inner_size([960.0, 600.0]);
    if std::env::var_os(RENDERER).is_some_and(|renderer| renderer == "cpu") {
        return Ok(software::run(viewport, |ctx| begin(ctx, start))?);
    }
    let again = start.clone();
    let options = eframe::NativeOptions { viewport, ..Default::default() };
    let begin = move |cc: &eframe::CreationContext<'_>| -> Result<Box<dyn eframe::App>, _> {
        Ok(Box::new(begin(&cc.egui_ctx, start)))
    };
    eframe::run_native("ventifact", options, Box::new(begin)).or_else(|opengl| {
        let opengl = opengl.to_string();
        eprintln!("The window is drawn without OpenGL ({opengl}).");
        open_on_processor(again).map_err(|without| WindowError::Screen { opengl, without })
    })
}

/// Starts the program again with the CPU renderer and waits for it to end.
fn open_on_processor(start: Start) -> Result<(), String> {
    let program = std::env::current_exe().map_err(|e| e.to_string())?;
    let mut command = std::process::Command::new(program);
    command.env(RENDERER, "cpu");
    if let Start::File(path) = start {
        command.arg(path);
    }
    let status = command.status().map_err(|e| e.to_string())?;
    if status.success() { Ok(()) } else { Err(format!("it ended with {status}")) }
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
        (Start::Last, None) => app.give(Command::Sheet(SheetCommand::Demo)),
        (Start::Empty, _) => {}
    }
    app
}
