//! From control points to contour nodes and back: node = sum of spline weights times control points, as each
//! node keeps its curve parameter.

use crate::base::Vec2;
use crate::geometry::{BoundaryTag, ClosedSpline};
use crate::mesh::{CurvedMesh, motion};

/// The linear map of one mesh.
pub struct ControlChain {
    /// Insert of each contour node and the weights of that insert's control points.
    nodes: Vec<(usize, Vec<f64>)>,
    counts: Vec<usize>,
}

impl ControlChain {
    /// For the contours a mesh was made of, in the order of the inserts.
    pub fn new<'a>(
        mesh: &CurvedMesh,
        contours: impl IntoIterator<Item = &'a ClosedSpline>,
    ) -> Self {
        let contours: Vec<&ClosedSpline> = contours.into_iter().collect();
        let nodes = motion::insert_nodes(mesh)
            .filter_map(|n| match n.tag {
                BoundaryTag::Insert(i) => Some((i as usize, contours[i as usize].weights(n.t))),
                BoundaryTag::Piece(_) => None,
            })
            .collect();
        Self {
            nodes,
            counts: contours.iter().map(|c| c.len()).collect(),
        }
    }

    /// Displacement of the contour nodes from that of the control points (`[insert][control]`, m).
    pub fn extend(&self, controls: &[Vec<Vec2>]) -> Vec<Vec2> {
        self.nodes
            .iter()
            .map(|(i, weights)| {
                weights
                    .iter()
                    .zip(&controls[*i])
                    .fold(Vec2::ZERO, |sum, (&w, &d)| sum + d * w)
            })
            .collect()
    }

    /// The transpose: derivatives by control points from those by contour nodes.
    pub fn restrict(&self, by_nodes: &[Vec2]) -> Vec<Vec<Vec2>> {
        let mut sums: Vec<Vec<Vec2>> = self.counts.iter().map(|&n| vec![Vec2::ZERO; n]).collect();
        for ((i, weights), &d) in self.nodes.iter().zip(by_nodes) {
            for (sum, &w) in sums[*i].iter_mut().zip(weights) {
                *sum += d * w;
            }
        }
        sums
    }
}
