//! The mesh with geometry nodes of order `k`: triangles curved along curves.
//!
//! Nodes are numbered once for the whole mesh: first the vertices of the triangulation (same numbers), then
//! the `k - 1` nodes of each edge (edge by edge, from its lower to its higher vertex), then the interior
//! nodes of each triangle. Scalar finite-element unknowns of order `k` use the same numbering.

use super::TriMesh;
use super::reference;
use crate::base::Vec2;
use crate::geometry::{BoundaryTag, Curve, Domain};
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

impl CurvedMesh {
    /// Curve the boundary cells of a triangulation to order `order`.
    ///
    /// An edge's nodes stand on the curve straight above its chord's nodes, so that the spacing along the curve
    /// is as smooth as along the chord; the displacement from the chord is carried inward by [`Blending`].
    pub fn new(mesh: Arc<TriMesh>, domain: &Domain, order: usize) -> Self {
        let numbers = Self::number_nodes(&mesh, order);
        let mut nodes = straight_nodes(&mesh, &numbers, order);
        let mut boundary_nodes = Vec::new();
        let along = reference::edge_nodes(order);
        let mut bends = Bends::new(&mesh, order);
        for edge in &mesh.boundary {
            let curve = domain.curve(edge.tag);
            let closed = matches!(edge.tag, BoundaryTag::Insert(_));
            let period = |t: f64| if closed { t.rem_euclid(1.0) } else { t };
            let corners = mesh.triangles[edge.triangle as usize];
            let e = edge.local_edge as usize;
            let (from, to) = (corners[e], corners[(e + 1) % 3]);
            let (a, b) = (mesh.points[from as usize], mesh.points[to as usize]);
            boundary_nodes.push(BoundaryNode {
                node: from,
                tag: edge.tag,
                t: period(edge.t[0]),
            });
            boundary_nodes.push(BoundaryNode {
                node: to,
                tag: edge.tag,
                t: period(edge.t[1]),
            });
            for (m, &s) in along[1..order].iter().enumerate() {
                let t = above(curve, a, b, edge.t, s);
                let forward = from < to;
                let place = if forward { m } else { order - 2 - m };
                bends.set(edge.edge, place, curve.point(t) - a.lerp(b, s));
                let node = mesh.points.len() as u32 + (order as u32 - 1) * edge.edge + place as u32;
                boundary_nodes.push(BoundaryNode {
                    node,
                    tag: edge.tag,
                    t: period(t),
                });
            }
        }
        boundary_nodes.sort_by_key(|b| (b.tag, b.node));
        boundary_nodes.dedup_by(|a, b| a.tag == b.tag && a.node == b.node);
        Blending::new(order).add(&mesh, &numbers, &bends, &mut nodes);
        Self {
            mesh,
            order,
            nodes,
            element_nodes: Arc::new(numbers),
            boundary_nodes: Arc::new(boundary_nodes),
        }
    }

    /// The same topology with displaced nodes.
    pub fn moved(&self, displacement: &[Vec2]) -> Self {
        let nodes = self
            .nodes
            .iter()
            .zip(displacement)
            .map(|(&x, &d)| x + d)
            .collect();
        Self {
            nodes,
            ..self.clone()
        }
    }
}

/// Nodes of the straight-sided cells.
fn straight_nodes(mesh: &TriMesh, numbers: &[u32], order: usize) -> Vec<Vec2> {
    let vertex_values: Vec<Vec2> = mesh.points.clone();
    let mut nodes = vec![Vec2::ZERO; CurvedMesh::node_count(mesh, order)];
    spread_linear(mesh, numbers, order, &vertex_values, &mut nodes);
    nodes
}

/// Linear interpolation of vertex values to all nodes.
pub(super) fn spread_linear(
    mesh: &TriMesh,
    numbers: &[u32],
    order: usize,
    vertices: &[Vec2],
    nodes: &mut [Vec2],
) {
    let places = reference::nodes(order);
    for (triangle, element) in mesh.triangles.iter().zip(numbers.chunks(places.len())) {
        let [a, b, c] = triangle.map(|v| vertices[v as usize]);
        for (&n, [x, y]) in element.iter().zip(&places) {
            nodes[n as usize] = a * (1.0 - x - y) + b * *x + c * *y;
        }
    }
}

/// Curve parameter between `t[0]` and `t[1]` whose point stands above the fraction `s` of the chord `a b`.
fn above(curve: &dyn Curve, a: Vec2, b: Vec2, t: [f64; 2], s: f64) -> f64 {
    let chord = b - a;
    let fraction = |t: f64| (curve.point(t) - a).dot(chord) / chord.norm_squared();
    let (mut low, mut high) = (t[0], t[1]);
    let mut now = low + s * (high - low);
    // Newton kept inside a bracket by bisection; the fraction grows from 0 to 1 along the span.
    for _ in 0..60 {
        let error = fraction(now) - s;
        if error > 0.0 {
            high = now;
        } else {
            low = now;
        }
        let slope = curve.derivative(now).dot(chord) / chord.norm_squared();
        let newton = now - error / slope;
        let between = (newton - low) * (newton - high) < 0.0;
        let next = if between { newton } else { 0.5 * (low + high) };
        if next == now || error.abs() < 1e-15 {
            break;
        }
        now = next;
    }
    now
}

/// Displacements of edge nodes from their chords, by edge, from its lower to its higher vertex.
pub(super) struct Bends {
    inner: usize,
    /// Place of each edge in `values`, or none.
    index: Vec<Option<u32>>,
    values: Vec<Vec2>,
}

impl Bends {
    pub(super) fn new(mesh: &TriMesh, order: usize) -> Self {
        let mut index = vec![None; mesh.edges.len()];
        for (i, edge) in mesh.boundary.iter().enumerate() {
            index[edge.edge as usize] = Some(i as u32);
        }
        let inner = order - 1;
        Self {
            inner,
            index,
            values: vec![Vec2::ZERO; inner * mesh.boundary.len()],
        }
    }

    pub(super) fn set(&mut self, edge: u32, place: usize, value: Vec2) {
        if let Some(i) = self.index[edge as usize] {
            self.values[i as usize * self.inner + place] = value;
        }
    }

    pub(super) fn get(&self, edge: u32, place: usize) -> Vec2 {
        self.index[edge as usize]
            .map_or(Vec2::ZERO, |i| self.values[i as usize * self.inner + place])
    }
}

/// Carries the displacement d(s) of a curved edge (a, b) into its triangles:
///   d(s) l_a l_b / (s (1 - s)),   s = (1 + l_b - l_a)/2
/// (Szabo and Babuska, Finite Element Analysis, Wiley 1991, section 6.1): a polynomial of order k again, zero on
/// the other edges, smooth enough to keep the order of convergence.
pub(super) struct Blending {
    order: usize,
    /// Weight of inner edge node `m` of edge `e` at interior node `i`: `[e][i][m]`.
    weights: [Vec<Vec<f64>>; 3],
}

impl Blending {
    pub(super) fn new(order: usize) -> Self {
        let along = reference::edge_nodes(order);
        let interior = &reference::nodes(order)[3 * order..];
        let weights = std::array::from_fn(|e| {
            interior
                .iter()
                .map(|&[x, y]| {
                    let l = [1.0 - x - y, x, y];
                    let (a, b) = (l[e], l[(e + 1) % 3]);
                    let s = 0.5 * (1.0 + b - a);
                    (1..order)
                        .map(|m| {
                            let lagrange: f64 = (0..=order)
                                .filter(|&j| j != m)
                                .map(|j| (s - along[j]) / (along[m] - along[j]))
                                .product();
                            lagrange * a * b / (s * (1.0 - s))
                        })
                        .collect()
                })
                .collect()
        });
        Self { order, weights }
    }

    /// Add bends to edge nodes and interior nodes.
    pub(super) fn add(&self, mesh: &TriMesh, numbers: &[u32], bends: &Bends, nodes: &mut [Vec2]) {
        let first_edge = mesh.points.len();
        for (edge, _) in bends.index.iter().enumerate().filter(|(_, i)| i.is_some()) {
            for m in 0..self.order - 1 {
                nodes[first_edge + edge * (self.order - 1) + m] += bends.get(edge as u32, m);
            }
        }
        self.visit(mesh, numbers, bends, |node, weight, edge, m| {
            nodes[node] += bends.get(edge, m) * weight
        });
    }

    /// The transpose: from node values to the bends.
    pub(super) fn collect(
        &self,
        mesh: &TriMesh,
        numbers: &[u32],
        bends: &mut Bends,
        nodes: &[Vec2],
    ) {
        let first_edge = mesh.points.len();
        let mut sums: Vec<(u32, usize, Vec2)> = Vec::new();
        for (edge, _) in bends.index.iter().enumerate().filter(|(_, i)| i.is_some()) {
            for m in 0..self.order - 1 {
                sums.push((
                    edge as u32,
                    m,
                    nodes[first_edge + edge * (self.order - 1) + m],
                ));
            }
        }
        self.visit(mesh, numbers, bends, |node, weight, edge, m| {
            sums.push((edge, m, nodes[node] * weight))
        });
        for (edge, m, value) in sums {
            bends.set(edge, m, bends.get(edge, m) + value);
        }
    }

    /// Calls `(interior node, weight, edge, edge node)` for all cells beside curved edges.
    fn visit(
        &self,
        mesh: &TriMesh,
        numbers: &[u32],
        bends: &Bends,
        mut call: impl FnMut(usize, f64, u32, usize),
    ) {
        let per_cell = reference::count(self.order);
        for (t, (triangle, edges)) in mesh.triangles.iter().zip(&mesh.triangle_edges).enumerate() {
            for e in 0..3 {
                if bends.index[edges[e] as usize].is_none() {
                    continue;
                }
                let forward = triangle[e] < triangle[(e + 1) % 3];
                for (i, weights) in self.weights[e].iter().enumerate() {
                    let node = numbers[t * per_cell + 3 * self.order + i] as usize;
                    for (m, &weight) in weights.iter().enumerate() {
                        let place = if forward { m } else { self.order - 2 - m };
                        call(node, weight, edges[e], place);
                    }
                }
            }
        }
    }
}
