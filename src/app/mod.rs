//! The window: draws, edits shapes, asks the worker. The only layer that knows egui.

pub mod words;
