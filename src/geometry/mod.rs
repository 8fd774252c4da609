//! Curves, contours and the duct: exact, cheap, answers inside one frame. Lengths in metres.

pub mod curve;
pub mod domain;
mod open_spline;
pub mod spline;

pub use curve::{Curve, PieceShape, Segment};
pub use domain::{BoundaryTag, Domain, DomainInsert, Outline, OutlinePiece};
pub use spline::ClosedSpline;
