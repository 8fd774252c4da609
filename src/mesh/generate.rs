//! A curved mesh of a domain, every cell proved valid.

use super::curved::CurvedMesh;
use super::error::MeshError;
use super::sizing::MeshSettings;
use super::triangulate::triangulate;
use crate::base::{Vec2, Watch};
use crate::geometry::Domain;
use std::sync::Arc;

/// Rounds of local refinement where a curved cell is inverted.
const MOST_ROUNDS: usize = 6;

/// Mesh a domain.
///
/// # Errors
/// [`MeshError::Budget`], [`MeshError::Crossing`], [`MeshError::Inverted`] where refinement does not help.
pub fn generate(
    domain: &Domain,
    settings: &MeshSettings,
    watch: &Watch,
) -> Result<CurvedMesh, MeshError> {
    let mut settings = settings.clone();
    let mut last = Vec2::ZERO;
    for _ in 0..MOST_ROUNDS {
        let mesh = CurvedMesh::new(
            Arc::new(triangulate(domain, &settings, watch)?),
            domain,
            settings.order,
        );
        let Some(bad) = mesh.first_invalid() else {
            return Ok(mesh);
        };
        let [a, b, c] = mesh.mesh.triangles[bad].map(|v| mesh.mesh.points[v as usize]);
        last = (a + b + c) / 3.0;
        let size = a.distance(b).min(b.distance(c)).min(c.distance(a));
        settings.extra.push((last, 0.5 * size));
    }
    Err(MeshError::Inverted { place: last })
}
