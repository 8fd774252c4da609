//! What can go wrong in linear algebra.

/// A linear system that cannot be solved.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum LinalgError {
    /// A pivot vanished.
    #[error("the matrix of {size} unknowns is singular")]
    Singular {
        /// Number of unknowns.
        size: usize,
    },
    /// The library ran out of memory.
    #[error("not enough memory to factorise {size} unknowns")]
    Memory {
        /// Number of unknowns.
        size: usize,
    },
    /// A block that is eliminated element by element has no inverse.
    #[error("the interior unknowns of element {element} cannot be eliminated")]
    Element {
        /// Element number.
        element: usize,
    },
    /// Refinement did not reach the residual promised.
    #[error("solution of {size} unknowns only good to {residual:.1e}")]
    Inaccurate {
        /// Number of unknowns.
        size: usize,
        /// Relative residual reached.
        residual: f64,
    },
}
