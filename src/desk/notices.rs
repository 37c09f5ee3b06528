//! Short messages that stay until read or until they have been seen long enough.

use super::SheetCommand;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoticeKind {
    /// Something was done.
    Done,
    /// Something could not be done; stays until dismissed.
    Problem,
}

/// One message.
#[derive(Clone, Debug, PartialEq)]
pub struct Notice {
    /// Counts up within a session.
    pub number: u64,
    pub kind: NoticeKind,
    pub text: String,
    /// What a button beside the text offers.
    pub offer: Option<SheetCommand>,
}

/// The messages on show, oldest first.
#[derive(Debug, Default)]
pub struct Notices {
    shown: Vec<Notice>,
    next: u64,
}

/// More than this and the oldest goes.
const MOST_SHOWN: usize = 5;

impl Notices {
    pub fn done(&mut self, text: impl Into<String>) {
        self.push(NoticeKind::Done, text.into(), None);
    }

    /// Says what was done and offers to take it back.
    pub fn done_with_undo(&mut self, text: impl Into<String>) {
        self.push(NoticeKind::Done, text.into(), Some(SheetCommand::Undo));
    }

    pub fn problem(&mut self, text: impl Into<String>) {
        self.push(NoticeKind::Problem, text.into(), None);
    }

    pub fn shown(&self) -> &[Notice] {
        &self.shown
    }

    pub fn dismiss(&mut self, number: u64) {
        self.shown.retain(|notice| notice.number != number);
    }

    fn push(&mut self, kind: NoticeKind, text: String, offer: Option<SheetCommand>) {
        self.shown.retain(|notice| notice.text != text);
        self.shown.push(Notice { number: self.next, kind, text, offer });
        self.next += 1;
        if self.shown.len() > MOST_SHOWN {
            self.shown.remove(0);
        }
    }
}
