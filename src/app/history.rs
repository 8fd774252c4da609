//! Named undo and redo: a gesture is one entry.

use crate::study::{Design, RunSettings};

/// What undo restores.
#[derive(Clone, Debug, PartialEq)]
pub struct Kept {
    /// Design.
    pub design: Design,
    /// Settings.
    pub run: RunSettings,
}

/// Most entries kept; a design is a few kB.
const MOST_ENTRIES: usize = 200;

/// Two stacks of named states.
#[derive(Debug, Default)]
pub struct History {
    undo: Vec<(String, Kept)>,
    redo: Vec<(String, Kept)>,
    /// State before the gesture in progress.
    open: Option<Kept>,
}

impl History {
    /// Before an edit of a gesture: remembers the state the gesture started from.
    pub fn begin(&mut self, now: &Kept) {
        if self.open.is_none() {
            self.open = Some(now.clone());
        }
    }

    /// Whether a gesture is in progress.
    pub fn is_open(&self) -> bool {
        self.open.is_some()
    }

    /// At the end of a gesture: one entry, unless nothing changed.
    pub fn finish(&mut self, name: String, now: &Kept) {
        if let Some(before) = self.open.take()
            && before != *now
        {
            self.undo.push((name, before));
            if self.undo.len() > MOST_ENTRIES {
                self.undo.remove(0);
            }
            self.redo.clear();
        }
    }

    /// Name of what undo takes back.
    pub fn undo_name(&self) -> Option<&str> {
        self.undo.last().map(|e| e.0.as_str())
    }

    /// Name of what redo brings back.
    pub fn redo_name(&self) -> Option<&str> {
        self.redo.last().map(|e| e.0.as_str())
    }

    /// State before the last entry.
    pub fn undo(&mut self, now: Kept) -> Option<Kept> {
        let (name, before) = self.undo.pop()?;
        self.redo.push((name, now));
        Some(before)
    }

    /// State after the last undone entry.
    pub fn redo(&mut self, now: Kept) -> Option<Kept> {
        let (name, after) = self.redo.pop()?;
        self.undo.push((name, now));
        Some(after)
    }
}
