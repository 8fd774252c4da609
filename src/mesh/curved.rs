//! The mesh with geometry nodes of order `k`: triangles curved along curves.
//!
//! Nodes are numbered once for the whole mesh: first the vertices of the triangulation (same numbers), then
//! the `k - 1` nodes of each edge (edge by edge, from its lower to its higher vertex), then the interior
//! nodes of each triangle. Scalar finite-element unknowns of order `k` use the same numbering.

use super::TriMesh;
use crate::base::Vec2;
use crate::geometry::BoundaryTag;
use std::sync::Arc;

/// A node that lies on a curve at a fixed parameter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BoundaryNode {
    /// Number in [`CurvedMesh::nodes`].
    pub node: u32,
    /// Curve.
    pub tag: BoundaryTag,
    /// Parameter on the curve, brought into `0..1` on closed contours.
    pub t: f64,
}

/// Triangles of order `k`.
#[derive(Clone, Debug)]
pub struct CurvedMesh {
    /// Topology.
    pub mesh: Arc<TriMesh>,
    /// Order of the geometry, 1 to 5.
    pub order: usize,
    /// Node positions, m, numbering as above.
    pub nodes: Vec<Vec2>,
    /// Node numbers of each triangle in the order of [`super::reference::nodes`], shape
    /// `(n_triangles, nodes_per_triangle)` row-major.
    pub element_nodes: Arc<Vec<u32>>,
    /// Nodes on curves; a corner of the outline is listed once for each of the two pieces.
    pub boundary_nodes: Arc<Vec<BoundaryNode>>,
}

impl CurvedMesh {
    /// Nodes of one triangle, shape `(nodes_per_triangle,)`.
    pub fn element(&self, triangle: usize) -> &[u32] {
        let n = super::reference::count(self.order);
        &self.element_nodes[triangle * n..(triangle + 1) * n]
    }

    /// Global scalar node numbers of order `k` for every triangle of a mesh, row-major; see the module's
    /// numbering. Also used for spaces whose order differs from the geometry's.
    pub fn number_nodes(mesh: &TriMesh, order: usize) -> Vec<u32> {
        let k = order as u32;
        let per_edge = k - 1;
        let interior = (k - 1) * (k.max(2) - 2) / 2;
        let first_edge = mesh.points.len() as u32;
        let first_interior = first_edge + per_edge * mesh.edges.len() as u32;
        let mut numbers = Vec::with_capacity(mesh.triangles.len() * super::reference::count(order));
        for (index, (triangle, edges)) in
            mesh.triangles.iter().zip(&mesh.triangle_edges).enumerate()
        {
            numbers.extend(triangle);
            for e in 0..3 {
                let start = first_edge + per_edge * edges[e];
                if triangle[e] < triangle[(e + 1) % 3] {
                    numbers.extend(start..start + per_edge);
                } else {
                    numbers.extend((start..start + per_edge).rev());
                }
            }
            let start = first_interior + interior * index as u32;
            numbers.extend(start..start + interior);
        }
        numbers
    }

    /// Number of scalar nodes of order `k` on a mesh.
    pub fn node_count(mesh: &TriMesh, order: usize) -> usize {
        let k = order;
        mesh.points.len()
            + (k - 1) * mesh.edges.len()
            + (k - 1) * (k.max(2) - 2) / 2 * mesh.triangles.len()
    }
}
