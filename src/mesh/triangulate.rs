//! From a domain and a size field to a conforming triangulation: boundary points evenly in the integral of ds/h,
//! interior points by a front of smallest sizes first, constrained Delaunay by the library `spade`, and sweeps
//! that move each interior point to the weighted centre of its triangles.

use super::MeshSettings;
use super::error::MeshError;
use super::rim::{Inside, Rim};
use super::search::Crowd;
use super::sizing::Sizing;
use super::tri_mesh::{BoundaryEdge, TriMesh};
use crate::base::{Vec2, Watch};
use crate::geometry::Domain;
use spade::{ConstrainedDelaunayTriangulation, Point2, Triangulation};
use std::collections::{BTreeMap, BinaryHeap};

/// Points closer than this part of the size are not added.
const CLOSEST: f64 = 0.72;
/// Interior points keep this part of the size from the boundary's chords.
const FROM_BOUNDARY: f64 = 0.55;
/// Smoothing sweeps; more give nothing.
const SWEEPS: usize = 8;
/// The straight-sided mesh.
///
/// # Errors
/// [`MeshError::Budget`] before any work; [`MeshError::Crossing`] where curves cross.
pub fn triangulate(
    domain: &Domain,
    settings: &MeshSettings,
    watch: &Watch,
) -> Result<TriMesh, MeshError> {
    let sizing = Sizing::new(domain, settings);
    let rim = Rim::new(domain, &sizing, settings)?;
    if rim.points.iter().any(|p| !p.is_finite()) {
        return Err(MeshError::Empty);
    }
    let inside = Inside::new(domain, &rim);
    predict(&rim, &inside, &sizing, settings)?;
    let mut interior = front(&rim, &inside, &sizing, settings, watch)?;
    let mut triangles = connect(&rim, &interior, &inside)?;
    for _ in 0..SWEEPS {
        watch.check()?;
        smooth(&rim, &mut interior, &triangles, &sizing, &inside);
        triangles = connect(&rim, &interior, &inside)?;
    }
    split_corners(&rim, &mut interior, &mut triangles);
    build(rim, interior, triangles)
}

/// Refuse before any work: an ideal triangle of side h has area 0.433 h^2.
fn predict(
    rim: &Rim,
    inside: &Inside,
    sizing: &Sizing,
    settings: &MeshSettings,
) -> Result<(), MeshError> {
    let [low, high] = rim.bounds();
    let box_area = (high.x - low.x) * (high.y - low.y);
    if !(box_area > 0.0 && box_area.is_finite()) {
        return Err(MeshError::Empty);
    }
    const GRID: usize = 60;
    let mut predicted = 0.0;
    for i in 0..GRID {
        for j in 0..GRID {
            let p = Vec2 {
                x: low.x + (high.x - low.x) * (i as f64 + 0.5) / GRID as f64,
                y: low.y + (high.y - low.y) * (j as f64 + 0.5) / GRID as f64,
            };
            if inside.region(p).is_some() {
                predicted += 2.31 * box_area / (GRID * GRID) as f64 / sizing.at(p).powi(2);
            }
        }
    }
    let predicted = predicted as usize + inside.outline.all().len();
    if predicted > settings.most_triangles {
        return Err(MeshError::Budget {
            predicted,
            budget: settings.most_triangles,
        });
    }
    Ok(())
}

/// A candidate of the front, smallest size first.
struct Candidate {
    size: f64,
    order: usize,
    place: Vec2,
}

impl PartialEq for Candidate {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other).is_eq()
    }
}
impl Eq for Candidate {}
impl PartialOrd for Candidate {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Candidate {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        other
            .size
            .total_cmp(&self.size)
            .then(other.order.cmp(&self.order))
    }
}

/// Interior points: from each rim edge inwards, then around each accepted point.
fn front(
    rim: &Rim,
    inside: &Inside,
    sizing: &Sizing,
    settings: &MeshSettings,
    watch: &Watch,
) -> Result<Vec<Vec2>, MeshError> {
    let mut heap = BinaryHeap::new();
    let mut order = 0;
    let mut push = |heap: &mut BinaryHeap<Candidate>, place: Vec2| {
        order += 1;
        heap.push(Candidate {
            size: sizing.at(place),
            order,
            place,
        });
    };
    let apex = 3f64.sqrt() / 2.0;
    for (a, b, ..) in &rim.edges {
        let (a, b) = (rim.points[*a as usize], rim.points[*b as usize]);
        let middle = a.lerp(b, 0.5);
        for side in [1.0, -1.0] {
            push(&mut heap, middle + (b - a).left() * (apex * side));
        }
    }
    let mut crowd = Crowd::new(rim.bounds());
    for &p in &rim.points {
        crowd.add(p);
    }
    let mut interior: Vec<Vec2> = Vec::new();
    let mut looked = 0usize;
    while let Some(Candidate { size, place, .. }) = heap.pop() {
        looked += 1;
        if looked.is_multiple_of(1000) {
            watch.check()?;
        }
        if inside.region(place).is_none()
            || !crowd.all_at_least(place, CLOSEST * size)
            || inside.clearance(place, size) < FROM_BOUNDARY * size
        {
            continue;
        }
        interior.push(place);
        crowd.add(place);
        if interior.len() > settings.most_triangles {
            return Err(MeshError::Budget {
                predicted: 2 * interior.len(),
                budget: settings.most_triangles,
            });
        }
        for i in 0..6 {
            let angle = std::f64::consts::PI * (i as f64 / 3.0 + 0.1);
            push(&mut heap, place + Vec2::from_angle(angle) * size);
        }
    }
    Ok(interior)
}

/// Constrained Delaunay of rim and interior points; triangles with their regions.
fn connect(
    rim: &Rim,
    interior: &[Vec2],
    inside: &Inside,
) -> Result<Vec<([u32; 3], u16)>, MeshError> {
    let all: Vec<Point2<f64>> = rim
        .points
        .iter()
        .chain(interior)
        .map(|p| Point2::new(p.x, p.y))
        .collect();
    let edges: Vec<[usize; 2]> = rim
        .edges
        .iter()
        .map(|e| [e.0 as usize, e.1 as usize])
        .collect();
    let count = all.len();
    let mut conflict = None;
    let mesh: ConstrainedDelaunayTriangulation<Point2<f64>> =
        ConstrainedDelaunayTriangulation::try_bulk_load_cdt(all, edges.clone(), |edge| {
            conflict = Some(edge)
        })
        .map_err(|_| MeshError::Empty)?;
    if let Some([a, _]) = conflict {
        return Err(MeshError::Crossing {
            place: rim.points.get(a).copied().unwrap_or(Vec2::ZERO),
        });
    }
    if mesh.num_vertices() != count {
        return Err(MeshError::Crossing {
            place: doubled(rim, interior),
        });
    }
    let place = |v: u32| {
        let v = v as usize;
        if v < rim.points.len() {
            rim.points[v]
        } else {
            interior[v - rim.points.len()]
        }
    };
    let mut triangles = Vec::new();
    for face in mesh.inner_faces() {
        let corners = face.vertices().map(|v| v.fix().index() as u32);
        let [a, b, c] = corners.map(place);
        if let Some(region) = inside.region((a + b + c) / 3.0) {
            triangles.push((corners, region));
        }
    }
    Ok(triangles)
}

fn doubled(rim: &Rim, interior: &[Vec2]) -> Vec2 {
    let all: Vec<Vec2> = rim.points.iter().chain(interior).copied().collect();
    for (i, a) in all.iter().enumerate() {
        if all[..i].contains(a) {
            return *a;
        }
    }
    Vec2::ZERO
}

/// Move interior points to the centre of their triangles weighted with area/h^2.
fn smooth(
    rim: &Rim,
    interior: &mut [Vec2],
    triangles: &[([u32; 3], u16)],
    sizing: &Sizing,
    inside: &Inside,
) {
    let fixed = rim.points.len();
    let mut sums = vec![(Vec2::ZERO, 0.0); interior.len()];
    for (corners, _) in triangles {
        let [a, b, c] = corners.map(|v| {
            let v = v as usize;
            if v < fixed {
                rim.points[v]
            } else {
                interior[v - fixed]
            }
        });
        let centre = (a + b + c) / 3.0;
        let weight = (b - a).cross(c - a) / sizing.at(centre).powi(2);
        for &v in corners {
            if v as usize >= fixed {
                let sum = &mut sums[v as usize - fixed];
                sum.0 += centre * weight;
                sum.1 += weight;
            }
        }
    }
    for (p, (sum, weight)) in interior.iter_mut().zip(sums) {
        let moved = sum / weight;
        let size = sizing.at(moved);
        if moved.is_finite() && inside.clearance(moved, size) > 0.3 * size {
            *p = moved;
        }
    }
}

/// A triangle with two rim edges leaves its corner's pressure poorly tested: give it a point of its own.
fn split_corners(rim: &Rim, interior: &mut Vec<Vec2>, triangles: &mut Vec<([u32; 3], u16)>) {
    let rim_edges: std::collections::BTreeSet<[u32; 2]> = rim
        .edges
        .iter()
        .map(|e| [e.0.min(e.1), e.0.max(e.1)])
        .collect();
    let fixed = rim.points.len();
    let mut index = 0;
    while index < triangles.len() {
        let (t, region) = triangles[index];
        let on_rim = (0..3)
            .filter(|&e| rim_edges.contains(&sorted(t[e], t[(e + 1) % 3])))
            .count();
        if on_rim >= 2 {
            let place = |v: u32| {
                let v = v as usize;
                if v < fixed {
                    rim.points[v]
                } else {
                    interior[v - fixed]
                }
            };
            let centre = t.iter().fold(Vec2::ZERO, |s, &v| s + place(v)) / 3.0;
            let new = (fixed + interior.len()) as u32;
            interior.push(centre);
            triangles[index] = ([t[0], t[1], new], region);
            triangles.push(([t[1], t[2], new], region));
            triangles.push(([t[2], t[0], new], region));
        }
        index += 1;
    }
}

fn sorted(a: u32, b: u32) -> [u32; 2] {
    [a.min(b), a.max(b)]
}

/// Number the edges, tag the boundary.
fn build(
    rim: Rim,
    interior: Vec<Vec2>,
    triangles: Vec<([u32; 3], u16)>,
) -> Result<TriMesh, MeshError> {
    let mut points = rim.points;
    points.extend(interior);
    let mut sides: BTreeMap<[u32; 2], Vec<(u32, u8)>> = BTreeMap::new();
    for (t, (corners, _)) in triangles.iter().enumerate() {
        for e in 0..3 {
            sides
                .entry(sorted(corners[e], corners[(e + 1) % 3]))
                .or_default()
                .push((t as u32, e as u8));
        }
    }
    let keys: Vec<[u32; 2]> = sides.keys().copied().collect();
    let mut triangle_edges = vec![[0; 3]; triangles.len()];
    for (index, edge_sides) in sides.values().enumerate() {
        for &(t, e) in edge_sides {
            triangle_edges[t as usize][e as usize] = index as u32;
        }
    }
    let mut boundary = Vec::with_capacity(rim.edges.len());
    for (a, b, tag, t) in rim.edges {
        let key = sorted(a, b);
        let Ok(edge) = keys.binary_search(&key) else {
            return Err(MeshError::Crossing {
                place: points[a as usize],
            });
        };
        let fluid = sides[&key]
            .iter()
            .find(|s| triangles[s.0 as usize].1 == super::tri_mesh::FLUID);
        let Some(&(triangle, local_edge)) = fluid else {
            return Err(MeshError::Crossing {
                place: points[a as usize],
            });
        };
        let forward = triangles[triangle as usize].0[local_edge as usize] == a;
        let t = if forward { t } else { [t[1], t[0]] };
        boundary.push(BoundaryEdge {
            edge: edge as u32,
            triangle,
            local_edge,
            tag,
            t,
        });
    }
    Ok(TriMesh {
        points,
        edges: keys,
        triangle_edges,
        boundary,
        regions: triangles.iter().map(|t| t.1).collect(),
        triangles: triangles.into_iter().map(|t| t.0).collect(),
    })
}
