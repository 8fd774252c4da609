//! Which cell holds a place, and where in it: for probes and field transfer.

use super::CurvedMesh;
use super::reference::Reference;
use super::search::{Bounds, BoxTree};
use crate::base::{Vec2, vec2};

/// Newton steps on the curved map; two or three are usual.
const MOST_STEPS: usize = 20;
/// A place this far outside in reference coordinates still counts as on the cell's rim.
const RIM: f64 = 1e-9;

/// Search structure for one mesh.
pub struct Locator<'a> {
    mesh: &'a CurvedMesh,
    basis: Reference,
    /// Boxes around the cells, m.
    boxes: BoxTree,
}

impl<'a> Locator<'a> {
    /// Boxes around all cells.
    pub fn new(mesh: &'a CurvedMesh) -> Self {
        let boxes: Vec<Bounds> = (0..mesh.mesh.triangles.len())
            .map(|t| {
                let mut low = vec2(f64::INFINITY, f64::INFINITY);
                let mut high = vec2(f64::NEG_INFINITY, f64::NEG_INFINITY);
                for &n in mesh.element(t) {
                    let p = mesh.nodes[n as usize];
                    low = vec2(low.x.min(p.x), low.y.min(p.y));
                    high = vec2(high.x.max(p.x), high.y.max(p.y));
                }
                // A curved side may bulge past its nodes by a small part of the cell.
                let margin = (high - low) * 0.1;
                [low - margin, high + margin]
            })
            .collect();
        Self {
            mesh,
            basis: Reference::new(mesh.order),
            boxes: BoxTree::new(&boxes),
        }
    }

    /// Cell and reference coordinates of a place, or none outside the mesh.
    pub fn find(&self, place: Vec2) -> Option<(usize, [f64; 2])> {
        let mut near = self.boxes.holding(place).into_iter();
        near.find_map(|t| Some((t, self.invert(t, place)?)))
    }

    /// Values of the nodal functions of the mesh's order at reference coordinates.
    pub fn values(&self, at: [f64; 2]) -> Vec<f64> {
        self.basis.values(at)
    }

    fn invert(&self, triangle: usize, place: Vec2) -> Option<[f64; 2]> {
        let element = self.mesh.element(triangle);
        let mut at = [1.0 / 3.0; 2];
        for _ in 0..MOST_STEPS {
            let (values, gradients) = (self.basis.values(at), self.basis.gradients(at));
            let (mut x, mut f) = (Vec2::ZERO, [[0.0; 2]; 2]);
            for (i, &n) in element.iter().enumerate() {
                let p = self.mesh.nodes[n as usize];
                x += p * values[i];
                for c in 0..2 {
                    f[0][c] += p.x * gradients[i][c];
                    f[1][c] += p.y * gradients[i][c];
                }
            }
            let r = place - x;
            let det = f[0][0] * f[1][1] - f[0][1] * f[1][0];
            let step = [
                (f[1][1] * r.x - f[0][1] * r.y) / det,
                (f[0][0] * r.y - f[1][0] * r.x) / det,
            ];
            at = [at[0] + step[0], at[1] + step[1]];
            if step[0].abs() + step[1].abs() < 1e-13 {
                break;
            }
            if !(at[0].abs() < 5.0 && at[1].abs() < 5.0) {
                return None;
            }
        }
        let inside = at[0] >= -RIM && at[1] >= -RIM && at[0] + at[1] <= 1.0 + RIM;
        inside.then_some(at)
    }
}
