//! The window: draws, edits shapes, asks the worker. The only layer that knows egui.

pub mod canvas;
pub mod command;
pub mod edits;
pub mod history;
pub mod theme;
pub mod words;
