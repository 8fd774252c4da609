//! Words that the canvas and the panels share.

pub use super::canvas::flow_words;
