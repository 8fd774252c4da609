//! Sparse matrices, factorisations behind one trait, and small dense kernels.

pub mod dense;
pub mod error;
pub mod factor;
pub mod multifrontal;
pub mod sparse;

pub use error::LinalgError;
pub use factor::{Direct, Factor, Symbolic};
pub use multifrontal::{Multifrontal, Role, Unknowns};
pub use sparse::{Pattern, Sparse};
