//! Mesh motion: a linear map from the displacement of the insert contours' nodes to all geometry nodes, and its
//! exact transpose.
//!
//! Vertices follow plane linear elasticity on the straight cells (Poisson ratio 0.3, stiffness area^-0.5: soft
//! cells far away take the deformation; stronger stiffening inverts the cells in a gap); edge and interior nodes
//! follow linearly, plus the change of the curved edges' displacement, blended inwards. The outline stays.

use super::curved::{Bends, Blending, spread_linear};
use super::{CurvedMesh, TriMesh, reference};
use crate::base::{Vec2, vec2};
use crate::geometry::BoundaryTag;
use crate::linalg::{Direct, Factor, LinalgError, Pattern, Sparse, Symbolic};
use std::collections::BTreeMap;
use std::sync::Arc;

/// Poisson ratio of the elastic extension.
const POISSON: f64 = 0.3;
/// Exponent of the cell area in the stiffness.
const STIFFENING: f64 = -0.5;

/// The map for one mesh.
pub struct Motion {
    mesh: Arc<TriMesh>,
    order: usize,
    numbers: Arc<Vec<u32>>,
    blending: Blending,
    /// Moving contour nodes: (node, its place in the displacement list).
    moving: Vec<u32>,
    /// Row of each free vertex, or none.
    row: Vec<Option<u32>>,
    stiffness: Vec<CellStiffness>,
    factor: Option<Box<dyn Factor>>,
    free: usize,
}

struct CellStiffness {
    corners: [u32; 3],
    /// 6 by 6, unknowns (x, y) of each corner, row-major.
    entries: [[f64; 6]; 6],
}

impl Motion {
    /// Set up and factorise.
    ///
    /// # Errors
    /// From the factorisation.
    pub fn new(mesh: &CurvedMesh) -> Result<Self, LinalgError> {
        let topology = &mesh.mesh;
        let mut fixed = vec![false; topology.points.len()];
        for edge in &topology.edges_of_boundary() {
            for &v in edge {
                fixed[v as usize] = true;
            }
        }
        let mut row = vec![None; topology.points.len()];
        let mut free = 0;
        for (r, &fixed) in row.iter_mut().zip(&fixed) {
            if !fixed {
                *r = Some(free);
                free += 1;
            }
        }
        let stiffness: Vec<CellStiffness> = topology
            .triangles
            .iter()
            .map(|&t| CellStiffness::new(&mesh.nodes, t))
            .collect();
        let free = free as usize;
        let factor = if free > 0 {
            Some(factorise(&stiffness, &row, 2 * free)?)
        } else {
            None
        };
        Ok(Self {
            mesh: topology.clone(),
            order: mesh.order,
            numbers: mesh.element_nodes.clone(),
            blending: Blending::new(mesh.order),
            moving: insert_nodes(mesh).map(|n| n.node).collect(),
            row,
            stiffness,
            factor,
            free,
        })
    }

    /// Displacement of all nodes from that of the contour nodes (in the order of [`insert_nodes`]), m.
    pub fn extend(&self, contour: &[Vec2]) -> Vec<Vec2> {
        let mut given = vec![Vec2::ZERO; CurvedMesh::node_count(&self.mesh, self.order)];
        for (&node, &d) in self.moving.iter().zip(contour) {
            given[node as usize] = d;
        }
        let vertices = self.vertices_from(&given[..self.mesh.points.len()]);
        let mut nodes = vec![Vec2::ZERO; given.len()];
        spread_linear(&self.mesh, &self.numbers, self.order, &vertices, &mut nodes);
        let mut bends = Bends::new(&self.mesh, self.order);
        self.each_moving_edge_node(|node, edge, place| {
            bends.set(edge, place, given[node] - nodes[node])
        });
        self.blending
            .add(&self.mesh, &self.numbers, &bends, &mut nodes);
        nodes
    }

    /// The transpose: from derivatives by all nodes to derivatives by the contour nodes.
    pub fn restrict(&self, by_nodes: &[Vec2]) -> Vec<Vec2> {
        let mut bends = Bends::new(&self.mesh, self.order);
        self.blending
            .collect(&self.mesh, &self.numbers, &mut bends, by_nodes);
        let mut linear = by_nodes.to_vec();
        let mut given = vec![Vec2::ZERO; by_nodes.len()];
        self.each_moving_edge_node(|node, edge, place| {
            given[node] += bends.get(edge, place);
            linear[node] -= bends.get(edge, place);
        });
        let places = reference::nodes(self.order);
        let mut by_vertices = vec![Vec2::ZERO; self.mesh.points.len()];
        let mut seen = vec![false; by_nodes.len()];
        for (triangle, element) in self
            .mesh
            .triangles
            .iter()
            .zip(self.numbers.chunks(places.len()))
        {
            for (&n, [x, y]) in element.iter().zip(&places) {
                let n = n as usize;
                if !std::mem::replace(&mut seen[n], true) {
                    for (&v, l) in triangle.iter().zip([1.0 - x - y, *x, *y]) {
                        by_vertices[v as usize] += linear[n] * l;
                    }
                }
            }
        }
        let by_given = self.vertices_transposed(&by_vertices);
        for (g, b) in given.iter_mut().zip(by_given) {
            *g += b;
        }
        self.moving.iter().map(|&n| given[n as usize]).collect()
    }

    /// Free vertices from fixed ones: K_ff u_f = -K_fc u_c.
    fn vertices_from(&self, given: &[Vec2]) -> Vec<Vec2> {
        let mut right = vec![0.0; 2 * self.free];
        for cell in &self.stiffness {
            cell.each(&self.row, |row, (vertex, d), k| {
                if self.row[vertex].is_none() {
                    right[row] -= k * [given[vertex].x, given[vertex].y][d];
                }
            });
        }
        if let Some(factor) = &self.factor {
            factor.solve(&mut right);
        }
        let place = |v: usize| match self.row[v] {
            Some(r) => vec2(right[2 * r as usize], right[2 * r as usize + 1]),
            None => given[v],
        };
        (0..given.len()).map(place).collect()
    }

    fn vertices_transposed(&self, by_vertices: &[Vec2]) -> Vec<Vec2> {
        let mut right = vec![0.0; 2 * self.free];
        let mut by_given = by_vertices.to_vec();
        for (v, row) in self.row.iter().enumerate() {
            if let Some(r) = row {
                right[2 * *r as usize] = by_vertices[v].x;
                right[2 * *r as usize + 1] = by_vertices[v].y;
                by_given[v] = Vec2::ZERO;
            }
        }
        if let Some(factor) = &self.factor {
            factor.solve_transposed(&mut right);
        }
        for cell in &self.stiffness {
            cell.each(&self.row, |row, (vertex, d), k| {
                if self.row[vertex].is_none() {
                    let slot = if d == 0 {
                        &mut by_given[vertex].x
                    } else {
                        &mut by_given[vertex].y
                    };
                    *slot -= k * right[row];
                }
            });
        }
        by_given
    }

    /// Inner nodes of the contours' edges: (node, edge, place on the edge).
    fn each_moving_edge_node(&self, mut call: impl FnMut(usize, u32, usize)) {
        for edge in &self.mesh.boundary {
            if matches!(edge.tag, BoundaryTag::Insert(_)) {
                for place in 0..self.order - 1 {
                    let node =
                        self.mesh.points.len() + (self.order - 1) * edge.edge as usize + place;
                    call(node, edge.edge, place);
                }
            }
        }
    }
}

/// Nodes on insert contours, in the order of [`CurvedMesh::boundary_nodes`].
pub fn insert_nodes(mesh: &CurvedMesh) -> impl Iterator<Item = &super::BoundaryNode> {
    mesh.boundary_nodes
        .iter()
        .filter(|n| matches!(n.tag, BoundaryTag::Insert(_)))
}

impl TriMesh {
    /// Vertex pairs of all edges on curves.
    pub fn edges_of_boundary(&self) -> Vec<[u32; 2]> {
        self.boundary
            .iter()
            .map(|b| self.edges[b.edge as usize])
            .collect()
    }
}

impl CellStiffness {
    /// Constant-strain triangle in plane strain (Zienkiewicz and Taylor, The Finite Element Method, volume 1).
    fn new(nodes: &[Vec2], corners: [u32; 3]) -> Self {
        let [a, b, c] = corners.map(|v| nodes[v as usize]);
        let area = 0.5 * (b - a).cross(c - a);
        let gradients = [
            (c - b).left() / (2.0 * area),
            (a - c).left() / (2.0 * area),
            (b - a).left() / (2.0 * area),
        ];
        let young = area.powf(STIFFENING);
        let lambda = young * POISSON / ((1.0 + POISSON) * (1.0 - 2.0 * POISSON));
        let mu = young / (2.0 * (1.0 + POISSON));
        let mut entries = [[0.0; 6]; 6];
        for i in 0..3 {
            for j in 0..3 {
                let (g, h) = (
                    [gradients[i].x, gradients[i].y],
                    [gradients[j].x, gradients[j].y],
                );
                for p in 0..2 {
                    for q in 0..2 {
                        let same = if p == q {
                            g[0] * h[0] + g[1] * h[1]
                        } else {
                            0.0
                        };
                        entries[2 * i + p][2 * j + q] =
                            area * (lambda * g[p] * h[q] + mu * (g[q] * h[p] + same));
                    }
                }
            }
        }
        Self { corners, entries }
    }

    /// Calls `(free row, (vertex, component), entry)` for the entries in rows of free vertices.
    fn each(&self, row: &[Option<u32>], mut call: impl FnMut(usize, (usize, usize), f64)) {
        for i in 0..6 {
            let Some(r) = row[self.corners[i / 2] as usize] else {
                continue;
            };
            for j in 0..6 {
                call(
                    2 * r as usize + i % 2,
                    (self.corners[j / 2] as usize, j % 2),
                    self.entries[i][j],
                );
            }
        }
    }
}

fn factorise(
    stiffness: &[CellStiffness],
    row: &[Option<u32>],
    size: usize,
) -> Result<Box<dyn Factor>, LinalgError> {
    let mut columns: Vec<BTreeMap<usize, f64>> = vec![BTreeMap::new(); size];
    for cell in stiffness {
        cell.each(row, |r, (vertex, d), k| {
            if let Some(c) = row[vertex] {
                *columns[2 * c as usize + d].entry(r).or_insert(0.0) += k;
            }
        });
    }
    let mut pattern = Pattern {
        size,
        column_starts: vec![0],
        rows: Vec::new(),
    };
    let mut values = Vec::new();
    for column in columns {
        for (r, value) in column {
            pattern.rows.push(r);
            values.push(value);
        }
        pattern.column_starts.push(pattern.rows.len());
    }
    Direct::analyse(&pattern)?.factor(&Sparse {
        pattern: Arc::new(pattern),
        values,
    })
}
