//! Elements of order k: quadrature, tabulated functions, curved maps, element systems with condensed
//! interiors, and Newton's method.

pub mod condense;
pub mod error;
pub mod layout;
pub mod map;
pub mod newton;
pub mod parallel;
pub mod quadrature;
pub mod table;

pub use condense::Linearised;
pub use error::FemError;
pub use layout::Layout;
pub use map::PointMap;
pub use table::{EdgeTable, Table};
