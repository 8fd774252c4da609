//! Layer under construction.
