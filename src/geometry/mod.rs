//! Curves, contours and the duct: exact, cheap, answers inside one frame. Lengths in metres.

pub mod check;
pub mod contour;
pub mod coordinate_list;
pub mod curve;
pub mod domain;
pub mod duct;
pub mod fit;
pub mod h1;
pub mod limits;
pub mod measure;
mod open_spline;
pub mod spline;
pub mod starters;

pub use check::{GeometryFault, check};
pub use curve::{Curve, PieceShape, Segment};
pub use domain::{BoundaryTag, Domain, DomainInsert, Outline, OutlinePiece};
pub use measure::{InsertMeasures, insert_measures};
pub use spline::ClosedSpline;
pub use starters::Starter;
