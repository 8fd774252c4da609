//! A mapped rectangle cut into triangles in rows and columns: for verification, where the mesh must be known.

use super::tri_mesh::{BoundaryEdge, FLUID, TriMesh};
use super::{BoundaryNode, CurvedMesh, reference};
use crate::base::{Vec2, vec2};
use crate::geometry::BoundaryTag;
use std::collections::BTreeMap;
use std::sync::Arc;

/// The unit square in `columns` by `rows` cells of two triangles each, mapped by `map`, with nodes of order
/// `order`. Pieces: 0 bottom (y = 0), 1 right, 2 top, 3 left, each run counter-clockwise. Diagonals turn at
/// two corners so that no triangle has two boundary edges.
pub fn mapped_square(
    columns: usize,
    rows: usize,
    order: usize,
    map: impl Fn(Vec2) -> Vec2,
) -> CurvedMesh {
    mapped_channel([0, columns], rows, order, map)
}

/// As [`mapped_square`], with bottom and top cut after the first columns: those before have pieces 4 (bottom)
/// and 5 (top), those behind pieces 0 and 2.
pub fn mapped_channel(
    columns: [usize; 2],
    rows: usize,
    order: usize,
    map: impl Fn(Vec2) -> Vec2,
) -> CurvedMesh {
    let cut = columns[0] as f64 / (columns[0] + columns[1]) as f64;
    let columns = columns[0] + columns[1];
    let number = |i: usize, j: usize| (j * (columns + 1) + i) as u32;
    let unit = |i: usize, j: usize| vec2(i as f64 / columns as f64, j as f64 / rows as f64);
    let mut flat = Vec::with_capacity((columns + 1) * (rows + 1));
    for j in 0..=rows {
        for i in 0..=columns {
            flat.push(unit(i, j));
        }
    }
    let mut triangles = Vec::new();
    for j in 0..rows {
        for i in 0..columns {
            let (a, b, c, d) = (
                number(i, j),
                number(i + 1, j),
                number(i + 1, j + 1),
                number(i, j + 1),
            );
            let corner = (i + 1 == columns && j == 0) || (i == 0 && j + 1 == rows);
            if corner {
                triangles.extend([[a, b, d], [b, c, d]]);
            } else {
                triangles.extend([[a, b, c], [a, c, d]]);
            }
        }
    }
    let piece = |a: Vec2, b: Vec2| -> Option<(u32, [f64; 2])> {
        if a.y == 0.0 && b.y == 0.0 {
            Some((if a.x.max(b.x) <= cut { 4 } else { 0 }, [a.x, b.x]))
        } else if a.x == 1.0 && b.x == 1.0 {
            Some((1, [a.y, b.y]))
        } else if a.y == 1.0 && b.y == 1.0 {
            Some((
                if a.x.max(b.x) <= cut { 5 } else { 2 },
                [1.0 - a.x, 1.0 - b.x],
            ))
        } else if a.x == 0.0 && b.x == 0.0 {
            Some((3, [1.0 - a.y, 1.0 - b.y]))
        } else {
            None
        }
    };
    let mesh = with_edges(flat, triangles, piece);
    let numbers = CurvedMesh::number_nodes(&mesh, order);
    let mut nodes = vec![Vec2::ZERO; CurvedMesh::node_count(&mesh, order)];
    let places = reference::nodes(order);
    let mut boundary_nodes = BTreeMap::new();
    let flat_of = |t: usize, [x, y]: [f64; 2]| {
        let [a, b, c] = mesh.triangles[t].map(|v| mesh.points[v as usize]);
        a * (1.0 - x - y) + b * x + c * y
    };
    for (t, element) in numbers.chunks(places.len()).enumerate() {
        for (&node, &place) in element.iter().zip(&places) {
            nodes[node as usize] = map(flat_of(t, place));
        }
    }
    for edge in &mesh.boundary {
        let (t, e) = (edge.triangle as usize, edge.local_edge as usize);
        let along = reference::edge_nodes(order);
        let mut locals = vec![e];
        locals.extend((0..order - 1).map(|i| 3 + e * (order - 1) + i));
        locals.push((e + 1) % 3);
        for (local, s) in locals.into_iter().zip(along) {
            let node = numbers[t * places.len() + local];
            boundary_nodes.insert((edge.tag, node), edge.t[0] + s * (edge.t[1] - edge.t[0]));
        }
    }
    let points = mesh.points.iter().map(|&p| map(p)).collect();
    CurvedMesh {
        mesh: Arc::new(TriMesh { points, ..mesh }),
        order,
        nodes,
        element_nodes: Arc::new(numbers),
        boundary_nodes: Arc::new(
            boundary_nodes
                .into_iter()
                .map(|((tag, node), t)| BoundaryNode { node, tag, t })
                .collect(),
        ),
    }
}

/// Number the edges and tag those on the boundary by the piece that both ends lie on.
fn with_edges(
    points: Vec<Vec2>,
    triangles: Vec<[u32; 3]>,
    piece: impl Fn(Vec2, Vec2) -> Option<(u32, [f64; 2])>,
) -> TriMesh {
    let mut numbers: BTreeMap<[u32; 2], Vec<(u32, u8)>> = BTreeMap::new();
    for (t, triangle) in triangles.iter().enumerate() {
        for e in 0..3 {
            let (a, b) = (triangle[e], triangle[(e + 1) % 3]);
            numbers
                .entry([a.min(b), a.max(b)])
                .or_default()
                .push((t as u32, e as u8));
        }
    }
    let mut triangle_edges = vec![[0; 3]; triangles.len()];
    let mut boundary = Vec::new();
    for (index, sides) in numbers.values().enumerate() {
        for &(t, e) in sides {
            triangle_edges[t as usize][e as usize] = index as u32;
        }
        if let [(triangle, local_edge)] = sides[..] {
            let corners = triangles[triangle as usize];
            let a = points[corners[local_edge as usize] as usize];
            let b = points[corners[(local_edge as usize + 1) % 3] as usize];
            if let Some((i, t)) = piece(a, b) {
                let tag = BoundaryTag::Piece(i);
                boundary.push(BoundaryEdge {
                    edge: index as u32,
                    triangle,
                    local_edge,
                    tag,
                    t,
                });
            }
        }
    }
    boundary.sort_by(|a, b| {
        (a.tag, a.t[0])
            .partial_cmp(&(b.tag, b.t[0]))
            .unwrap_or(std::cmp::Ordering::Equal)
    });
    let regions = vec![FLUID; triangles.len()];
    TriMesh {
        points,
        edges: numbers.keys().copied().collect(),
        triangles,
        regions,
        triangle_edges,
        boundary,
    }
}
