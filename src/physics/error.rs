//! Why a state could not be computed.

use crate::base::Cancelled;
use crate::fem::FemError;

/// A flow or temperature field that could not be computed.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum PhysicsError {
    /// Newton and continuation came to a halt.
    #[error(
        "no steady laminar flow found: the computation stopped at {:.0} % of the fluid's inertia with the residual at {residual:.1e}; \
         lower the pressure or flow rate, use a finer mesh, or expect that the flow does not stay steady",
        fraction * 100.0
    )]
    Stalled {
        /// Fraction of the density reached.
        fraction: f64,
        /// Relative residual there.
        residual: f64,
    },
    /// A state with numbers that are not finite.
    #[error(
        "the solution holds numbers that are not finite; check the fluid's properties and the ports"
    )]
    NotFinite,
    /// From the element systems.
    #[error(transparent)]
    Fem(FemError),
    /// Stopped.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
}

impl From<FemError> for PhysicsError {
    fn from(error: FemError) -> Self {
        match error {
            FemError::Cancelled(c) => Self::Cancelled(c),
            other => Self::Fem(other),
        }
    }
}
