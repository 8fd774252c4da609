//! What can go wrong while assembling and solving.

use crate::base::Cancelled;
use crate::linalg::LinalgError;

/// A discrete system that could not be set up or solved.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum FemError {
    /// The linear solver failed.
    #[error(transparent)]
    Linear(#[from] LinalgError),
    /// Newton's method did not converge.
    #[error("residual still {residual:.1e} of its start after {steps} steps")]
    Stalled {
        /// Steps taken.
        steps: usize,
        /// Residual relative to the largest seen.
        residual: f64,
    },
    /// A cell is turned inside out.
    #[error("cell {element} is inverted")]
    Inverted {
        /// Element number.
        element: usize,
    },
    /// Stopped.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
}
