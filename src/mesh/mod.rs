//! Triangulation to size, curved elements, quality, motion and location.

pub mod curved;
pub mod reference;
pub mod structured;
pub mod tri_mesh;

pub use curved::{BoundaryNode, CurvedMesh};
pub use tri_mesh::{BoundaryEdge, TriMesh};
