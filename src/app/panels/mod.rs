//! Panels: they read the state and return what the user asked for.

pub mod cautions;
pub mod field;
pub mod figures;
pub mod goals;
pub mod plots;
pub mod properties;
pub mod sketch;
