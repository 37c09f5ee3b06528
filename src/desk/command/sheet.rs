//! The sheet as a whole: new, open, save, undo, its title and notes, leaving.

use std::path::PathBuf;

use crate::desk::engine;
use crate::desk::{Ask, Dialog, Model, Purpose};
use crate::ground::Seed;

use super::{Command, Record, apply};

#[derive(Clone, Debug, PartialEq)]
pub enum SheetCommand {
    New,
    AskOpen,
    Open(PathBuf),
    Save,
    AskSaveAs,
    SaveAs(PathBuf),
    Undo,
    Redo,
    Retitle(String),
    Note(String),
    Reseed(Seed),
    Quit,
    /// Goes on with the guarded command and loses the changes.
    Discard,
    /// Saves, then goes on with the guarded command.
    SaveFirst,
}

impl SheetCommand {
    pub(super) const LISTED: &[Self] =
        &[Self::New, Self::AskOpen, Self::Save, Self::AskSaveAs, Self::Undo, Self::Redo, Self::Quit];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::New => Record::new("sheet.new", "New sheet", "Starts an empty sheet.").ctrl("N"),
            Self::AskOpen => Record::new("sheet.open", "Open sheet…", "Opens a saved sheet.").ctrl("O"),
            Self::Open(_) => Record::new("sheet.open-path", "Open this sheet", "Opens the sheet at a path."),
            Self::Save => {
                Record::new("sheet.save", "Save sheet", "Writes the sheet, keeping one backup.").ctrl("S")
            }
            Self::AskSaveAs => {
                Record::new("sheet.save-as", "Save sheet as…", "Writes the sheet under another name.")
                    .ctrl_shift("S")
            }
            Self::SaveAs(_) => {
                Record::new("sheet.save-path", "Save sheet here", "Writes the sheet to a path.")
            }
            Self::Undo => Record::new("sheet.undo", "Undo", "Takes back the last change.").ctrl("Z"),
            Self::Redo => {
                Record::new("sheet.redo", "Redo", "Does again what was taken back.").ctrl_shift("Z")
            }
            Self::Retitle(_) => {
                Record::new("sheet.retitle", "Change title", "Titles the sheet; plates print it.").editing()
            }
            Self::Note(_) => {
                Record::new("sheet.note", "Change notes", "Notes saved with the sheet.").editing()
            }
            Self::Reseed(_) => {
                Record::new("sheet.reseed", "Change seed", "Other random draws for every bootstrap.")
                    .editing()
            }
            Self::Quit => Record::new("sheet.quit", "Quit", "Closes the window.").ctrl("Q"),
            Self::Discard => {
                Record::new("sheet.discard", "Discard changes", "Goes on; unsaved changes are lost.")
            }
            Self::SaveFirst => Record::new("sheet.save-first", "Save and go on", "Saves, then goes on."),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Undo if !model.session.history.can_undo() => Some("nothing to take back"),
            Self::Redo if !model.session.history.can_redo() => Some("nothing was taken back"),
            Self::Discard | Self::SaveFirst if !matches!(model.session.dialog, Some(Dialog::Unsaved(_))) => {
                Some("no change is in danger")
            }
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::New | Self::Open(_) | Self::Quit if model.is_dirty() => {
                model.session.dialog = Some(Dialog::Unsaved(Box::new(Command::Sheet(self))));
            }
            Self::New => model.replace(crate::study::Sheet::empty("Untitled"), Default::default(), None),
            Self::Open(path) => open(model, path),
            Self::Quit => model.session.leaving = true,
            Self::AskOpen => model.session.ask = Some(Ask::new(Purpose::OpenSheet, "")),
            Self::AskSaveAs => ask_save(model),
            Self::Save => match model.session.path.clone() {
                Some(path) => save(model, path),
                None => ask_save(model),
            },
            Self::SaveAs(path) => save(model, path),
            Self::Undo => {
                if let Some(label) = model.session.history.undo(&mut model.sheet) {
                    model.session.notices.done(format!("Taken back: {}", label.to_lowercase()));
                }
                model.drop_lost_selection();
            }
            Self::Redo => {
                model.session.history.redo(&mut model.sheet);
                model.drop_lost_selection();
            }
            Self::Retitle(title) => model.sheet.title = title,
            Self::Note(notes) => model.sheet.notes = notes,
            Self::Reseed(seed) => model.sheet.seed = seed,
            Self::Discard => {
                if let Some(Dialog::Unsaved(next)) = model.session.dialog.take() {
                    model.session.saved = model.sheet.clone();
                    apply(model, *next);
                }
            }
            Self::SaveFirst => {
                if let Some(Dialog::Unsaved(next)) = model.session.dialog.take() {
                    model.session.after_save = Some(next);
                    apply(model, Command::Sheet(Self::Save));
                }
            }
        }
    }
}

fn ask_save(model: &mut Model) {
    let stem: String = model.sheet.title.chars().map(|c| if c.is_alphanumeric() { c } else { '-' }).collect();
    model.session.ask = Some(Ask::new(Purpose::SaveSheet, format!("{}.sheet.json", stem.to_lowercase())));
}

fn open(model: &mut Model, path: PathBuf) {
    match engine::read_sheet(&path) {
        Ok((sheet, view)) => {
            model.replace(sheet, view, Some(path.clone()));
            model.remember_recent(path);
        }
        Err(why) => model.session.notices.problem(format!("Cannot open {}: {why}", path.display())),
    }
}

fn save(model: &mut Model, path: PathBuf) {
    match engine::write_sheet(&path, &model.sheet, &model.view) {
        Ok(()) => {
            model.session.saved = model.sheet.clone();
            model.session.path = Some(path.clone());
            model.session.notices.done(format!("Saved {}", path.display()));
            model.remember_recent(path);
            if let Some(next) = model.session.after_save.take() {
                apply(model, *next);
            }
        }
        Err(why) => {
            model.session.after_save = None;
            model.session.notices.problem(format!("Cannot save {}: {why}", path.display()));
        }
    }
}
