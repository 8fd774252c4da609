//! How well shaped the cells are.

use super::{CurvedMesh, JacobianProof};
use crate::base::Vec2;

/// Measures of a mesh. Shape is judged on the straight cells, curving by the determinant of the map.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quality {
    /// Number of triangles.
    pub triangles: usize,
    /// Smallest angle of a straight cell, degrees (60 at best).
    pub smallest_angle_deg: f64,
    /// Worst shape, 2 x inradius / circumradius (1 for the equilateral triangle, 0 for a sliver).
    pub worst_shape: f64,
    /// Mean shape, as above.
    pub mean_shape: f64,
    /// Worst proved bound of least over greatest determinant in a cell (1 for a straight cell; not positive
    /// where a cell is not proved valid).
    pub worst_jacobian: f64,
    /// Centre of the cell of the worst shape, m.
    pub worst_place: Vec2,
}

/// Shape of a triangle: twice its inradius over its circumradius, with sides a, b, c
///   q = 2 r / R = (b + c - a)(c + a - b)(a + b - c) / (a b c).
pub fn shape(corners: [Vec2; 3]) -> f64 {
    let [a, b, c] = sides(corners);
    (b + c - a) * (c + a - b) * (a + b - c) / (a * b * c)
}

/// Smallest angle of a triangle, degrees: opposite the shortest side.
pub fn smallest_angle_deg(corners: [Vec2; 3]) -> f64 {
    let [p, q, r] = corners;
    let angle = |at: Vec2, to: Vec2, and: Vec2| {
        let (u, v) = (to - at, and - at);
        u.cross(v).abs().atan2(u.dot(v)).to_degrees()
    };
    angle(p, q, r).min(angle(q, r, p)).min(angle(r, p, q))
}

fn sides([p, q, r]: [Vec2; 3]) -> [f64; 3] {
    [q.distance(r), r.distance(p), p.distance(q)]
}

impl Quality {
    /// Look at every cell. A mesh without cells has the measures of nothing: infinite worst, NaN mean.
    pub fn of(mesh: &CurvedMesh) -> Self {
        let proof = JacobianProof::new(mesh.order);
        let mut quality = Self {
            triangles: mesh.mesh.triangles.len(),
            smallest_angle_deg: f64::INFINITY,
            worst_shape: f64::INFINITY,
            mean_shape: 0.0,
            worst_jacobian: f64::INFINITY,
            worst_place: Vec2::ZERO,
        };
        for (t, triangle) in mesh.mesh.triangles.iter().enumerate() {
            // Vertices come first among the nodes, and follow the motion.
            let corners = triangle.map(|v| mesh.nodes[v as usize]);
            let q = shape(corners);
            quality.mean_shape += q / quality.triangles as f64;
            if q < quality.worst_shape {
                quality.worst_shape = q;
                quality.worst_place = (corners[0] + corners[1] + corners[2]) / 3.0;
            }
            let angle = smallest_angle_deg(corners);
            quality.smallest_angle_deg = quality.smallest_angle_deg.min(angle);
            let [least, most] = mesh.jacobian_bounds(t, &proof);
            quality.worst_jacobian = quality.worst_jacobian.min(least / most);
        }
        if quality.triangles == 0 {
            quality.mean_shape = f64::NAN;
        }
        quality
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::vec2;

    #[test]
    fn known_triangles_have_their_known_shapes() {
        let height = 3f64.sqrt() / 2.0;
        let equal = [vec2(0.0, 0.0), vec2(1.0, 0.0), vec2(0.5, height)];
        assert!((shape(equal) - 1.0).abs() < 1e-14);
        assert!((smallest_angle_deg(equal) - 60.0).abs() < 1e-12);
        // Sides 3, 4, 5: inradius 1, circumradius 5/2 (Euclid IV, propositions 4 and 5).
        let right = [vec2(0.0, 0.0), vec2(4.0, 0.0), vec2(0.0, 3.0)];
        assert!((shape(right) - 0.8).abs() < 1e-14);
        assert!((smallest_angle_deg(right) - 0.75f64.atan().to_degrees()).abs() < 1e-12);
        // The flawed twin: inradius over circumradius without its factor two.
        assert!((0.5 * shape(right) - 0.8).abs() > 0.1);
    }
}
