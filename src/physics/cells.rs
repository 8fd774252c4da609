//! Tables, numbering and edges that flow and heat share on one topology.

use crate::fem::{EdgeTable, Table};
use crate::geometry::BoundaryTag;
use crate::mesh::tri_mesh::FLUID;
use crate::mesh::{CurvedMesh, TriMesh, reference};
use std::sync::Arc;

/// Discrete spaces of order k / k - 1 / k on one topology.
pub struct Cells {
    /// Topology.
    pub mesh: Arc<TriMesh>,
    /// Order k of velocity, temperature and geometry.
    pub order: usize,
    /// Functions at the cells' quadrature points.
    pub table: Table,
    /// Functions at the edges' quadrature points.
    pub edge_table: EdgeTable,
    /// Functions at the nodes' own places (for normals at nodes and sampling).
    pub node_table: Table,
    /// Nodes of order k of each triangle (the geometry's own).
    pub nodes: Arc<Vec<u32>>,
    /// Number of nodes of order k.
    pub node_count: usize,
    /// Nodes of order k - 1 of each triangle.
    pub pressure_nodes: Vec<u32>,
    /// Number of nodes of order k - 1.
    pub pressure_node_count: usize,
    /// Triangles that carry fluid.
    pub fluid: Vec<u32>,
}

impl Cells {
    /// Spaces for a mesh whose geometry has order k.
    pub fn new(mesh: &CurvedMesh) -> Self {
        let order = mesh.order;
        let places: Vec<([f64; 2], f64)> = reference::nodes(order)
            .into_iter()
            .map(|n| (n, 0.0))
            .collect();
        Self {
            mesh: mesh.mesh.clone(),
            order,
            table: Table::cells(order),
            edge_table: EdgeTable::new(order),
            node_table: Table::at(order, &places),
            nodes: mesh.element_nodes.clone(),
            node_count: CurvedMesh::node_count(&mesh.mesh, order),
            pressure_nodes: CurvedMesh::number_nodes(&mesh.mesh, order - 1),
            pressure_node_count: CurvedMesh::node_count(&mesh.mesh, order - 1),
            fluid: (0..mesh.mesh.triangles.len() as u32)
                .filter(|&t| mesh.mesh.regions[t as usize] == FLUID)
                .collect(),
        }
    }

    /// Nodes of order k of a triangle.
    pub fn element(&self, triangle: usize) -> &[u32] {
        let n = self.table.functions;
        &self.nodes[triangle * n..(triangle + 1) * n]
    }

    /// Nodes of order k - 1 of a triangle.
    pub fn pressure_element(&self, triangle: usize) -> &[u32] {
        let n = self.table.pressure_functions;
        &self.pressure_nodes[triangle * n..(triangle + 1) * n]
    }

    /// Boundary edges on a curve, in order along it: (triangle, local edge).
    pub fn edges_on(&self, tag: BoundaryTag) -> impl Iterator<Item = (usize, usize)> + '_ {
        self.mesh
            .boundary
            .iter()
            .filter(move |b| b.tag == tag)
            .map(|b| (b.triangle as usize, b.local_edge as usize))
    }

    /// Local numbers of the k + 1 nodes on a local edge, from its first to its second vertex.
    pub fn edge_locals(&self, local_edge: usize) -> Vec<usize> {
        let k = self.order;
        let mut locals = vec![local_edge];
        locals.extend((0..k - 1).map(|i| 3 + local_edge * (k - 1) + i));
        locals.push((local_edge + 1) % 3);
        locals
    }
}
