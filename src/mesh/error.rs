//! Why a mesh could not be made.

use crate::base::{Cancelled, Vec2};

/// A domain that could not be meshed.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum MeshError {
    /// Too many cells would be needed.
    #[error(
        "the mesh would need about {predicted} triangles, more than the {budget} allowed; \
         widen the smallest gap or radius, choose a coarser accuracy, or raise the limit"
    )]
    Budget {
        /// Predicted count.
        predicted: usize,
        /// Allowed count.
        budget: usize,
    },
    /// Curves cross or touch.
    #[error("curves cross or touch near ({:.4} m, {:.4} m); move them apart", place.x, place.y)]
    Crossing {
        /// Where.
        place: Vec2,
    },
    /// A curved cell is inside out.
    #[error("the curved cell near ({:.4} m, {:.4} m) is inverted; use a finer mesh or a smoother contour there", place.x, place.y)]
    Inverted {
        /// Where.
        place: Vec2,
    },
    /// Coordinates that are not finite, or a domain without area.
    #[error("the outline has no area to mesh; check its corners")]
    Empty,
    /// Stopped.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
}
