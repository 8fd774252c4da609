//! The rim of a mesh: points along every curve, and which side of them a place lies on.

use super::MeshSettings;
use super::error::MeshError;
use super::search::Chords;
use super::sizing::Sizing;
use crate::base::{Vec2, vec2};
use crate::geometry::{BoundaryTag, Domain};

/// Steps of the arc-length quadrature for the boundary points.
const ARC_STEPS: usize = 400;

/// A rim of more points than this is refused at once (each is beside a triangle, so it is beyond any sensible budget):
/// a cell size far too small must not fill the memory.
const MOST_POINTS: usize = 200_000;

/// Boundary points and edges before triangulation.
pub(super) struct Rim {
    pub(super) points: Vec<Vec2>,
    /// (from, to, tag, parameters)
    pub(super) edges: Vec<(u32, u32, BoundaryTag, [f64; 2])>,
}

fn tags(domain: &Domain) -> Vec<BoundaryTag> {
    let pieces = (0..domain.outline.pieces.len()).map(|i| BoundaryTag::Piece(i as u32));
    pieces
        .chain((0..domain.inserts.len()).map(|i| BoundaryTag::Insert(i as u32)))
        .collect()
}

/// Parameters of the points along a curve, both ends included; or how many spans it would take, if more than `most`.
fn parameters(
    domain: &Domain,
    tag: BoundaryTag,
    sizing: &Sizing,
    most: usize,
) -> Result<Vec<f64>, usize> {
    let curve = domain.curve(tag);
    let mut sums = vec![0.0];
    for i in 0..ARC_STEPS {
        let t = (i as f64 + 0.5) / ARC_STEPS as f64;
        let rate = curve.derivative(t).norm() / sizing.at(curve.point(t));
        sums.push(sums[i] + rate / ARC_STEPS as f64);
    }
    let total = sums[ARC_STEPS];
    let fewest = if matches!(tag, BoundaryTag::Insert(_)) {
        8
    } else {
        1
    };
    let count = (total.ceil() as usize).max(fewest);
    if count > most {
        return Err(count);
    }
    Ok((0..=count)
        .map(|i| {
            if i == 0 || i == count {
                return if i == 0 { 0.0 } else { 1.0 };
            }
            let wanted = total * i as f64 / count as f64;
            let k = sums.partition_point(|&s| s <= wanted).clamp(1, ARC_STEPS);
            ((k - 1) as f64 + (wanted - sums[k - 1]) / (sums[k] - sums[k - 1])) / ARC_STEPS as f64
        })
        .collect())
}

impl Rim {
    /// Boundary points evenly in the integral of ds/h.
    ///
    /// # Errors
    /// [`MeshError::Budget`] where the rim alone takes more than [`MOST_POINTS`] points.
    pub(super) fn new(
        domain: &Domain,
        sizing: &Sizing,
        settings: &MeshSettings,
    ) -> Result<Self, MeshError> {
        let mut rim = Self {
            points: Vec::new(),
            edges: Vec::new(),
        };
        let pieces = domain.outline.pieces.len();
        for tag in tags(domain) {
            let most = MOST_POINTS.saturating_sub(rim.points.len());
            let t =
                parameters(domain, tag, sizing, most).map_err(|predicted| MeshError::Budget {
                    predicted: predicted.saturating_add(rim.points.len()),
                    budget: settings.most_triangles,
                })?;
            let first = rim.points.len() as u32;
            let spans = t.len() - 1;
            rim.points
                .extend(t[..spans].iter().map(|&t| domain.point(tag, t)));
            for i in 0..spans {
                let closes = i + 1 == spans;
                let to = match tag {
                    BoundaryTag::Piece(p) if closes && p as usize + 1 == pieces => 0,
                    BoundaryTag::Insert(_) if closes => first,
                    _ => first + i as u32 + 1,
                };
                rim.edges
                    .push((first + i as u32, to, tag, [t[i], t[i + 1]]));
            }
        }
        Ok(rim)
    }

    /// Lower left and upper right of all points, m.
    pub(super) fn bounds(&self) -> [Vec2; 2] {
        let first = self.points.first().copied().unwrap_or(Vec2::ZERO);
        self.points.iter().fold([first; 2], |[l, h], p| {
            [
                vec2(l.x.min(p.x), l.y.min(p.y)),
                vec2(h.x.max(p.x), h.y.max(p.y)),
            ]
        })
    }
}

/// Which region a place is in, by the rim's polygons.
pub(super) struct Inside {
    pub(super) outline: Chords,
    inserts: Vec<(bool, Chords)>,
}

impl Inside {
    pub(super) fn new(domain: &Domain, rim: &Rim) -> Self {
        let chords = |wanted: &dyn Fn(BoundaryTag) -> bool| {
            let edges = rim.edges.iter().filter(|e| wanted(e.2));
            Chords::new(
                edges
                    .map(|e| [rim.points[e.0 as usize], rim.points[e.1 as usize]])
                    .collect(),
            )
        };
        let inserts = domain.inserts.iter().enumerate();
        Self {
            outline: chords(&|t| matches!(t, BoundaryTag::Piece(_))),
            inserts: inserts
                .map(|(i, insert)| {
                    (
                        insert.solid,
                        chords(&|t| t == BoundaryTag::Insert(i as u32)),
                    )
                })
                .collect(),
        }
    }

    /// Region of a place: fluid, a meshed solid, or none.
    pub(super) fn region(&self, p: Vec2) -> Option<u16> {
        if !self.outline.contains(p) {
            return None;
        }
        for (i, (solid, chords)) in self.inserts.iter().enumerate() {
            if chords.contains(p) {
                return solid.then_some(i as u16 + 1);
            }
        }
        Some(super::tri_mesh::FLUID)
    }

    /// Distance to the nearest chord, or `limit` where none is nearer, m.
    pub(super) fn clearance(&self, p: Vec2, limit: f64) -> f64 {
        let inserts = self.inserts.iter().map(|i| &i.1);
        inserts.fold(self.outline.distance(p, limit), |d, chords| {
            chords.distance(p, d)
        })
    }
}
