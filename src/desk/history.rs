//! Undo as snapshots of the small sheet, taken before each editing command.

use crate::study::{Id, Sheet};

/// Commands with the same key that follow one another are one step: a drag, a slider.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum MergeKey {
    Outline(Id),
    Tone(Id),
    Setting(&'static str),
    Mast(Id),
    Threshold(Id),
}

/// The sheets before and after now.
#[derive(Debug, Default)]
pub struct History {
    past: Vec<Step>,
    future: Vec<Step>,
    merging: Option<MergeKey>,
}

#[derive(Debug)]
struct Step {
    sheet: Sheet,
    label: &'static str,
}

/// Enough for a long day; a sheet is some kilobytes.
const MOST_STEPS: usize = 200;

impl History {
    /// Keeps `sheet` as it is before the command called `label`; not when the command continues
    /// the drag that `merge` names.
    pub fn remember(&mut self, sheet: &Sheet, label: &'static str, merge: Option<MergeKey>) {
        if merge.is_some() && merge == self.merging {
            return;
        }
        self.merging = merge;
        self.future.clear();
        self.past.push(Step { sheet: sheet.clone(), label });
        if self.past.len() > MOST_STEPS {
            self.past.remove(0);
        }
    }

    /// Drops the last snapshot when the command that made it changed nothing.
    pub fn forget_if_unchanged(&mut self, sheet: &Sheet) {
        if self.past.last().is_some_and(|step| step.sheet == *sheet) {
            self.past.pop();
            self.merging = None;
        }
    }

    /// Ends the drag: the next command is a step of its own.
    pub fn settle(&mut self) {
        self.merging = None;
    }

    /// Whether an outline is being dragged. A number typed twice is one step too, but the hand is off it.
    pub fn is_dragging(&self) -> bool {
        matches!(self.merging, Some(MergeKey::Outline(_)))
    }

    /// Whether a threshold is being dragged.
    pub fn is_sliding(&self) -> bool {
        matches!(self.merging, Some(MergeKey::Threshold(_)))
    }

    /// Puts the previous sheet in place and says what was taken back.
    pub fn undo(&mut self, sheet: &mut Sheet) -> Option<&'static str> {
        let step = self.past.pop()?;
        self.merging = None;
        let now = std::mem::replace(sheet, step.sheet);
        self.future.push(Step { sheet: now, label: step.label });
        Some(step.label)
    }

    /// Puts the sheet that was undone last in place again.
    pub fn redo(&mut self, sheet: &mut Sheet) -> Option<&'static str> {
        let step = self.future.pop()?;
        self.merging = None;
        let now = std::mem::replace(sheet, step.sheet);
        self.past.push(Step { sheet: now, label: step.label });
        Some(step.label)
    }

    pub fn can_undo(&self) -> bool {
        !self.past.is_empty()
    }

    pub fn can_redo(&self) -> bool {
        !self.future.is_empty()
    }
}

#[cfg(test)]
mod tests {
    use super::{History, MergeKey};
    use crate::study::{Id, Sheet};

    #[test]
    fn one_drag_is_one_step_and_the_next_drag_another() {
        let (mut history, mut sheet) = (History::default(), Sheet::empty("start"));
        let drag = Some(MergeKey::Outline(Id(1)));
        for title in ["a", "b", "c"] {
            history.remember(&sheet, "Reshape patch", drag);
            sheet.title = title.into();
        }
        history.settle();
        history.remember(&sheet, "Reshape patch", drag);
        sheet.title = "d".into();
        assert_eq!(history.undo(&mut sheet), Some("Reshape patch"));
        assert_eq!(sheet.title, "c");
        history.undo(&mut sheet);
        assert_eq!(sheet.title, "start");
        assert!(!history.can_undo());
        history.redo(&mut sheet);
        history.redo(&mut sheet);
        assert_eq!(sheet.title, "d");
    }

    #[test]
    fn a_command_that_changed_nothing_leaves_no_step() {
        let (mut history, sheet) = (History::default(), Sheet::empty("same"));
        history.remember(&sheet, "Rename", None);
        history.forget_if_unchanged(&sheet);
        assert!(!history.can_undo());
    }
}
