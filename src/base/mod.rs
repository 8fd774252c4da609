//! Vectors, dual numbers, units of text, and the watch that carries cancellation and progress.

pub mod dual;
pub mod units;
pub mod vec2;
pub mod watch;

pub use dual::{Dual, Real};
pub use vec2::{Vec2, vec2};
pub use watch::{Cancelled, Watch};
