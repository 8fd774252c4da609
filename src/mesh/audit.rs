//! Every invariant of a mesh in one check: what the tests hit with random domains.

use super::{CurvedMesh, JacobianProof};
use crate::base::Vec2;
use crate::geometry::{BoundaryTag, Domain};
use std::collections::BTreeMap;

/// A broken invariant, with the place to look at.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum AuditFault {
    /// A straight cell without positive area.
    #[error("triangle {triangle} is clockwise or flat (area {area_m2:.2e} m2)")]
    Clockwise {
        /// Which.
        triangle: usize,
        /// Signed area, m^2.
        area_m2: f64,
    },
    /// A curved cell whose determinant is not proved positive.
    #[error("cell {triangle} near ({:.4} m, {:.4} m) is not proved valid (determinant at least {least_m2:.2e} m2)", place.x, place.y)]
    Inverted {
        /// Which.
        triangle: usize,
        /// Proved lower bound of the determinant, m^2.
        least_m2: f64,
        /// Centre of its corners, m.
        place: Vec2,
    },
    /// An edge number that does not join the triangle's corners.
    #[error("triangle {triangle} names edge {edge}, which joins other vertices")]
    WrongEdge {
        /// Triangle.
        triangle: usize,
        /// Edge.
        edge: u32,
    },
    /// An edge beside too many or too few triangles, or between two regions without lying on a contour.
    #[error("edge {edge} lies beside {triangles} triangles and is {} a curve", if *on_curve { "on" } else { "not on" })]
    NotConforming {
        /// Edge.
        edge: usize,
        /// Triangles beside it.
        triangles: usize,
        /// Whether it is listed as an edge on a curve.
        on_curve: bool,
    },
    /// A boundary edge that its own triangle does not have, or that does not see the fluid.
    #[error("boundary edge {boundary} does not see the fluid from its triangle")]
    WrongSide {
        /// Index into the list of boundary edges.
        boundary: usize,
    },
    /// Pieces and holes do not add up.
    #[error("Euler number {found} where the domain has {expected}")]
    Euler {
        /// Vertices - edges + triangles.
        found: i64,
        /// One minus the holes.
        expected: i64,
    },
    /// A curve covered not once.
    #[error("{tag:?} is covered {covered:.6} times by boundary edges")]
    Cover {
        /// Curve.
        tag: BoundaryTag,
        /// Sum of the edges' parameter spans.
        covered: f64,
    },
    /// A node off its curve.
    #[error("node {node} lies {off_m:.2e} m off {tag:?}")]
    OffCurve {
        /// Node.
        node: u32,
        /// Curve.
        tag: BoundaryTag,
        /// Distance, m.
        off_m: f64,
    },
    /// Area of the cells against that inside the curves.
    #[error("the cells' area is off by {relative:.1e}, more than {allowed:.1e}")]
    Area {
        /// Mesh area over exact area, minus one.
        relative: f64,
        /// Allowed.
        allowed: f64,
    },
}

/// A node may lie this part of the mesh's extent off its curve: a few roundings of the coordinates.
const ON_CURVE: f64 = 1e-12;
/// A curve's spans add up to one within roundings of some hundred additions.
const COVERED: f64 = 1e-9;

/// Check every invariant: orientation, conformity, boundary edges and their sides, the Euler number, curves
/// covered once, nodes on their curves, proved determinants, and the area against the curves' own within
/// `area_tolerance` (relative; the error of a sound mesh of order k falls with h^2k).
///
/// # Errors
/// The first [`AuditFault`].
pub fn audit(mesh: &CurvedMesh, domain: &Domain, area_tolerance: f64) -> Result<(), AuditFault> {
    orientation(mesh)?;
    conformity(mesh)?;
    euler(mesh, domain)?;
    curves(mesh, domain)?;
    area(mesh, domain, area_tolerance)
}

fn orientation(mesh: &CurvedMesh) -> Result<(), AuditFault> {
    let proof = JacobianProof::new(mesh.order);
    for (triangle, &corners) in mesh.mesh.triangles.iter().enumerate() {
        let [a, b, c] = corners.map(|v| mesh.nodes[v as usize]);
        let area_m2 = 0.5 * (b - a).cross(c - a);
        if area_m2.is_nan() || area_m2 <= 0.0 {
            return Err(AuditFault::Clockwise { triangle, area_m2 });
        }
        let [least_m2, _] = mesh.jacobian_bounds(triangle, &proof);
        if least_m2.is_nan() || least_m2 <= 0.0 {
            let place = (a + b + c) / 3.0;
            return Err(AuditFault::Inverted {
                triangle,
                least_m2,
                place,
            });
        }
    }
    Ok(())
}

fn conformity(mesh: &CurvedMesh) -> Result<(), AuditFault> {
    let m = &mesh.mesh;
    // Beside each edge: the triangles, by their regions.
    let mut beside: Vec<Vec<u16>> = vec![Vec::new(); m.edges.len()];
    for (triangle, edges) in m.triangle_edges.iter().enumerate() {
        for (e, &edge) in edges.iter().enumerate() {
            let (p, q) = (m.triangles[triangle][e], m.triangles[triangle][(e + 1) % 3]);
            if m.edges.get(edge as usize) != Some(&[p.min(q), p.max(q)]) {
                return Err(AuditFault::WrongEdge { triangle, edge });
            }
            beside[edge as usize].push(m.regions[triangle]);
        }
    }
    let mut on_curve = vec![false; m.edges.len()];
    for (boundary, b) in m.boundary.iter().enumerate() {
        let sees_fluid = m.regions.get(b.triangle as usize) == Some(&super::tri_mesh::FLUID)
            && m.triangle_edges[b.triangle as usize].get(b.local_edge as usize) == Some(&b.edge);
        if !sees_fluid || std::mem::replace(&mut on_curve[b.edge as usize], true) {
            return Err(AuditFault::WrongSide { boundary });
        }
    }
    for (edge, regions) in beside.iter().enumerate() {
        let sound = match regions[..] {
            [_] => on_curve[edge],
            [a, b] => (a != b) == on_curve[edge],
            _ => false,
        };
        if !sound {
            return Err(AuditFault::NotConforming {
                edge,
                triangles: regions.len(),
                on_curve: on_curve[edge],
            });
        }
    }
    Ok(())
}

fn euler(mesh: &CurvedMesh, domain: &Domain) -> Result<(), AuditFault> {
    let m = &mesh.mesh;
    let holes = domain.inserts.iter().filter(|i| !i.solid).count() as i64;
    let found = m.points.len() as i64 - m.edges.len() as i64 + m.triangles.len() as i64;
    let expected = 1 - holes;
    if found == expected {
        Ok(())
    } else {
        Err(AuditFault::Euler { found, expected })
    }
}

fn curves(mesh: &CurvedMesh, domain: &Domain) -> Result<(), AuditFault> {
    let mut covered: BTreeMap<BoundaryTag, f64> = BTreeMap::new();
    for b in &mesh.mesh.boundary {
        *covered.entry(b.tag).or_default() += (b.t[1] - b.t[0]).abs();
    }
    let pieces = (0..domain.outline.pieces.len()).map(|i| BoundaryTag::Piece(i as u32));
    for tag in pieces.chain((0..domain.inserts.len()).map(|i| BoundaryTag::Insert(i as u32))) {
        let covered = covered.get(&tag).copied().unwrap_or(0.0);
        if (covered - 1.0).abs() > COVERED {
            return Err(AuditFault::Cover { tag, covered });
        }
    }
    let extent = mesh.nodes.iter().fold(0.0, |e: f64, p| e.max(p.norm()));
    for n in mesh.boundary_nodes.iter() {
        let off_m = domain
            .point(n.tag, n.t)
            .distance(mesh.nodes[n.node as usize]);
        if off_m.is_nan() || off_m > ON_CURVE * extent {
            return Err(AuditFault::OffCurve {
                node: n.node,
                tag: n.tag,
                off_m,
            });
        }
    }
    Ok(())
}

fn area(mesh: &CurvedMesh, domain: &Domain, allowed: f64) -> Result<(), AuditFault> {
    let holes = domain.inserts.iter().filter(|i| !i.solid);
    let exact = domain.outline.area() - holes.map(|i| i.contour.area()).sum::<f64>();
    let relative = mesh.area() / exact - 1.0;
    if relative.abs() <= allowed {
        Ok(())
    } else {
        Err(AuditFault::Area { relative, allowed })
    }
}
