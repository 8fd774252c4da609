//! Triangulation to size, curved elements, quality, motion and location.

pub mod audit;
pub mod curved;
pub mod error;
pub mod generate;
pub mod jacobian;
pub mod locate;
pub mod motion;
pub mod quality;
pub mod reference;
mod rim;
mod search;
pub mod sizing;
pub mod structured;
pub mod tri_mesh;
mod triangulate;

pub use audit::{AuditFault, audit};
pub use curved::{BoundaryNode, CurvedMesh};
pub use error::MeshError;
pub use generate::generate;
pub use jacobian::JacobianProof;
pub use locate::Locator;
pub use motion::Motion;
pub use quality::Quality;
pub use sizing::{Fineness, MeshSettings};
pub use tri_mesh::{BoundaryEdge, TriMesh};
