//! The sheet as a whole: new, open, save, undo, its title and notes, leaving.

use std::path::PathBuf;

use crate::desk::engine;
use crate::desk::{Answer, Ask, Dialog, Model, Purpose, Slot};
use crate::ground::Seed;

use super::{Command, Record, apply};

#[derive(Clone, Debug, PartialEq)]
pub enum SheetCommand {
    New,
    AskOpen,
    Open(PathBuf),
    /// Lays out Sorrel Reach on disk and opens it.
    Demo,
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
    pub(super) const LISTED: &[Self] = &[
        Self::New,
        Self::AskOpen,
        Self::Demo,
        Self::Save,
        Self::AskSaveAs,
        Self::Undo,
        Self::Redo,
        Self::Quit,
    ];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::New => Record::new("sheet.new", "New sheet", "Starts an empty sheet.").ctrl("N"),
            Self::AskOpen => Record::new("sheet.open", "Open sheet…", "Opens a saved sheet.").ctrl("O"),
            Self::Open(_) => Record::new("sheet.open-path", "Open this sheet", "Opens the sheet at a path."),
            Self::Demo => Record::new(
                "sheet.demo",
                "Open the demo",
                "Sorrel Reach: an invented sand sea with known truth.",
            ),
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
            Self::Demo => model.session.jobs.start(Slot::Demo, "Laying out Sorrel Reach", |_, post| {
                post.answer(Answer::Demo(engine::lay_out_demo()));
            }),
            Self::Quit => model.session.leaving = true,
            Self::AskOpen => model.session.ask = Some(Ask::new(Purpose::OpenSheet, "")),
            Self::AskSaveAs => ask_save(model),
            Self::Save => match model.session.path.clone() {
                Some(path) => save(model, path),
                None => ask_save(model),
            },
            Self::SaveAs(path) => save(model, with_ending(path)),
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

/// `path` with the ending of sheets, when it has none.
fn with_ending(path: PathBuf) -> PathBuf {
    if path.extension().is_some() { path } else { path.with_extension("sheet.json") }
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

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::SheetCommand;
    use crate::desk::{Command, Dialog, Model, Theme, ViewCommand, apply};

    fn give(model: &mut Model, command: SheetCommand) {
        apply(model, Command::Sheet(command));
    }

    #[test]
    fn changes_are_not_lost_without_a_word() {
        let mut model = Model::new(Arc::new(|| ()));
        give(&mut model, SheetCommand::Retitle("North plain".into()));
        give(&mut model, SheetCommand::Quit);
        assert!(!model.session.leaving);
        assert!(matches!(model.session.dialog, Some(Dialog::Unsaved(_))));
        apply(&mut model, Command::View(ViewCommand::Close));
        assert!(!model.session.leaving, "closing the question stays here");
        give(&mut model, SheetCommand::Quit);
        give(&mut model, SheetCommand::Discard);
        assert!(model.session.leaving);
    }

    #[test]
    fn a_saved_sheet_reopens_the_same_with_its_view() {
        let folder = tempfile::tempdir().unwrap();
        let mut model = Model::new(Arc::new(|| ()));
        give(&mut model, SheetCommand::Retitle("North plain".into()));
        apply(&mut model, Command::View(ViewCommand::Page(crate::desk::Page::Verdict)));
        give(&mut model, SheetCommand::SaveAs(folder.path().join("north")));
        assert!(!model.is_dirty());
        let (sheet, view) = (model.sheet.clone(), model.view.clone());
        give(&mut model, SheetCommand::New);
        assert_eq!(model.sheet.title, "Untitled");
        give(&mut model, SheetCommand::Open(folder.path().join("north.sheet.json")));
        assert_eq!((&model.sheet, &model.view), (&sheet, &view));
        assert_eq!(model.view.theme, Theme::Light);
        assert!(!model.is_dirty() && !model.session.history.can_undo());
    }

    #[test]
    fn saving_first_goes_on_with_what_was_asked() {
        let folder = tempfile::tempdir().unwrap();
        let mut model = Model::new(Arc::new(|| ()));
        give(&mut model, SheetCommand::SaveAs(folder.path().join("a.sheet.json")));
        give(&mut model, SheetCommand::Retitle("changed".into()));
        give(&mut model, SheetCommand::New);
        give(&mut model, SheetCommand::SaveFirst);
        assert_eq!(model.sheet.title, "Untitled");
        let text = std::fs::read_to_string(folder.path().join("a.sheet.json")).unwrap();
        assert!(text.contains("changed"), "{text}");
    }
}
