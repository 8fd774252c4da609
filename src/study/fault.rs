//! A fault of the input: where in the file, what, how to mend it, and the place on the drawing.

use crate::base::Vec2;

/// One thing that keeps a study from being computed.
#[derive(Clone, Debug, PartialEq)]
pub struct Fault {
    /// Path of the key, such as `design.duct[2].flow`.
    pub key: String,
    /// One sentence: what and how to mend it.
    pub sentence: String,
    /// Where on the drawing, m.
    pub place_m: Option<Vec2>,
}

impl Fault {
    /// A fault without a place on the drawing.
    pub fn new(key: impl Into<String>, sentence: impl Into<String>) -> Self {
        Self {
            key: key.into(),
            sentence: sentence.into(),
            place_m: None,
        }
    }

    /// The same with its place, m.
    pub fn at(self, place_m: Vec2) -> Self {
        Self {
            place_m: Some(place_m),
            ..self
        }
    }
}

impl std::fmt::Display for Fault {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}: {}", self.key, self.sentence)
    }
}
