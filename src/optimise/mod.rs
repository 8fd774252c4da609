//! (layer)
