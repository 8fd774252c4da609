//! The straight-sided triangulation: topology and tags.

use crate::base::Vec2;
use crate::geometry::BoundaryTag;

/// Region of triangles that carry fluid; the inside of insert `i` has region `i + 1`.
pub const FLUID: u16 = 0;

/// An edge on the outline or on a contour.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BoundaryEdge {
    /// Index into [`TriMesh::edges`].
    pub edge: u32,
    /// The fluid-side triangle.
    pub triangle: u32,
    /// Its local edge number (local edge `e` runs from local vertex `e` to `e + 1`); in this direction the
    /// fluid lies on the left.
    pub local_edge: u8,
    /// Curve it lies on.
    pub tag: BoundaryTag,
    /// Curve parameters of its first and last vertex in the direction of the local edge. On a closed
    /// contour the span never wraps: `t[1] - t[0]` is the short way (values may lie outside `0..=1`).
    pub t: [f64; 2],
}

/// Conforming triangulation; triangles counter-clockwise.
#[derive(Clone, Debug, PartialEq)]
pub struct TriMesh {
    /// Vertices, m, shape `(n_vertices,)`.
    pub points: Vec<Vec2>,
    /// Vertex numbers, shape `(n_triangles, 3)`.
    pub triangles: Vec<[u32; 3]>,
    /// Region of each triangle: [`FLUID`], or `i + 1` inside insert `i`.
    pub regions: Vec<u16>,
    /// Edges as (lower vertex, higher vertex), sorted, shape `(n_edges,)`.
    pub edges: Vec<[u32; 2]>,
    /// Edge numbers of each triangle: local edge `e` runs from local vertex `e` to `(e + 1) % 3`.
    pub triangle_edges: Vec<[u32; 3]>,
    /// All edges on curves (contour edges once, seen from the fluid side), ordered by tag, then along the curve.
    pub boundary: Vec<BoundaryEdge>,
}
