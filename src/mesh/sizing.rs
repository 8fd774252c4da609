//! How large cells may be where: h(x) = min(h_max, min over seeds of (h_i + growth |x - x_i|)).
//!
//! The field has slope at most `growth`, so neighbouring cells differ little. Seeds stand along every curve
//! (curvature, gaps) and at single points (corners).

use super::search::Seeds;
use crate::base::Vec2;
use crate::geometry::contour::distance_to_chord;
use crate::geometry::{BoundaryTag, Curve, Domain};

/// Fineness of a mesh. Sizes are relative, so that one rule serves every scale.
#[derive(Clone, Debug, PartialEq)]
pub struct MeshSettings {
    /// Order of the cells' geometry and of the fields, 1 to 5.
    pub order: usize,
    /// Cells across the narrowest port, far from everything.
    pub cells_across: f64,
    /// Fewest cells around an insert.
    pub cells_around: f64,
    /// Largest turn of a curve within one cell, rad.
    pub turn_rad: f64,
    /// Cells across a gap.
    pub cells_in_gap: f64,
    /// Growth of the cell size with distance.
    pub growth: f64,
    /// Size at corners where a port meets a wall, relative to the far size.
    pub port_corner: f64,
    /// Size at re-entrant corners of the outline, relative to the far size.
    pub reentrant_corner: f64,
    /// Size at the places in `jumps`, relative to the far size.
    pub jump: f64,
    /// Places where a condition jumps along a wall, m.
    pub jumps: Vec<Vec2>,
    /// Growth around corners (geometric grading towards a point).
    pub corner_growth: f64,
    /// Size along insert contours relative to what `cells_around` gives.
    pub insert_factor: f64,
    /// Extra places with a cell size, m.
    pub extra: Vec<(Vec2, f64)>,
    /// Most triangles.
    pub most_triangles: usize,
}

/// Three fixed rules.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Fineness {
    /// Coarse.
    Draft,
    /// Usual.
    Design,
    /// Fine.
    Final,
}

impl MeshSettings {
    /// The fixed rule of a fineness for an order: sizes at order 4 measured on channel flows past inserts, other
    /// orders scaled so that the points across stay about alike.
    pub fn preset(fineness: Fineness, order: usize) -> Self {
        let factor = match fineness {
            Fineness::Draft => 0.62,
            Fineness::Design => 1.0,
            Fineness::Final => 1.6,
        };
        // Cells of order k hold k points along a side; low orders also need more of them for the same error.
        let by_order = [0.0, 8.0, 4.0, 1.7, 1.0, 0.85][order.clamp(1, 5)];
        let f = factor * by_order;
        Self {
            order,
            cells_across: 3.4 * f,
            cells_around: 28.0 * f.max(0.5),
            turn_rad: 0.45 / f.max(0.7),
            cells_in_gap: 1.6 * f,
            growth: 0.28 / f.clamp(0.8, 1.5),
            port_corner: 0.16 / f,
            reentrant_corner: 0.05 / f,
            jump: 0.03 / f,
            jumps: Vec::new(),
            corner_growth: 0.45,
            insert_factor: 1.0,
            extra: Vec::new(),
            most_triangles: 20_000,
        }
    }
}

/// Seeds of the size field.
#[derive(Clone, Debug)]
pub struct Sizing {
    largest: f64,
    growth: f64,
    seeds: Seeds,
}

/// Samples along each curve for the size rules.
const CURVE_SAMPLES: usize = 96;

impl Sizing {
    /// Seeds of a domain.
    pub fn new(domain: &Domain, settings: &MeshSettings) -> Self {
        let far = far_size(domain, settings);
        // (place, size, growth)
        let mut seeds: Vec<(Vec2, f64, f64)> = Vec::new();
        let curves = sampled_curves(domain);
        for (index, curve) in curves.iter().enumerate() {
            let around = match curve.tag {
                BoundaryTag::Insert(i) => {
                    let asked = domain.inserts[i as usize]
                        .cell_size_m
                        .unwrap_or(f64::INFINITY);
                    (curve.length / settings.cells_around).min(asked) * settings.insert_factor
                }
                BoundaryTag::Piece(_) => far,
            };
            for (place, curvature) in curve.points.iter().zip(&curve.curvatures) {
                let by_curvature = settings.turn_rad / curvature.abs().max(1e-300);
                let size = around.min(by_curvature);
                let gap = nearest_other(&curves, index, *place);
                let size = size.min((gap / settings.cells_in_gap).max(size * SMALLEST_GAP_FACTOR));
                if size < far {
                    seeds.push((*place, size, settings.growth));
                }
            }
        }
        corner_seeds(&mut seeds, domain, settings, far);
        for &place in &settings.jumps {
            seeds.push((place, far * settings.jump, settings.corner_growth));
        }
        for &(place, size) in &settings.extra {
            seeds.push((place, size, settings.corner_growth));
        }
        // No rule asks for less; a size of zero or none would never end.
        for (_, size, _) in &mut seeds {
            *size = size.max(far * SMALLEST_SIZE);
        }
        Self {
            largest: far,
            growth: settings.growth,
            seeds: Seeds::new(seeds),
        }
    }

    /// Size at a place, m.
    pub fn at(&self, place: Vec2) -> f64 {
        self.seeds.at(place, self.largest)
    }

    /// Growth of the field.
    pub fn growth(&self) -> f64 {
        self.growth
    }
}

fn corner_seeds(
    seeds: &mut Vec<(Vec2, f64, f64)>,
    domain: &Domain,
    settings: &MeshSettings,
    far: f64,
) {
    let pieces = &domain.outline.pieces;
    for (i, piece) in pieces.iter().enumerate() {
        let next = &pieces[(i + 1) % pieces.len()];
        let corner = piece.segment.point(1.0);
        let (a, b) = (piece.segment.derivative(1.0), next.segment.derivative(0.0));
        let turn = a.cross(b).atan2(a.dot(b));
        if piece.is_port != next.is_port {
            seeds.push((corner, far * settings.port_corner, settings.corner_growth));
        } else if turn < -REENTRANT_TURN {
            seeds.push((
                corner,
                far * settings.reentrant_corner,
                settings.corner_growth,
            ));
        }
    }
}

/// Cells are never asked smaller than this part of the far size: a guard against sizes of zero.
const SMALLEST_SIZE: f64 = 1e-6;
/// A corner that turns right by more than this is re-entrant, rad: less is a kink that needs no grading.
const REENTRANT_TURN: f64 = 0.2;
/// A gap makes cells no smaller than this part of what the other rules ask.
const SMALLEST_GAP_FACTOR: f64 = 0.15;

/// Far cell size from the narrowest port (or the outline's area, where there is none), m.
fn far_size(domain: &Domain, settings: &MeshSettings) -> f64 {
    let width = domain
        .outline
        .pieces
        .iter()
        .filter(|p| p.is_port)
        .map(|p| p.segment.point(0.0).distance(p.segment.point(1.0)))
        .fold(f64::INFINITY, f64::min);
    let corners: Vec<Vec2> = domain
        .outline
        .pieces
        .iter()
        .map(|p| p.segment.point(0.0))
        .collect();
    let area: f64 = (0..corners.len())
        .map(|i| corners[i].cross(corners[(i + 1) % corners.len()]))
        .sum::<f64>()
        / 2.0;
    width.min(area.abs().sqrt()) / settings.cells_across
}

struct Sampled {
    tag: BoundaryTag,
    length: f64,
    points: Vec<Vec2>,
    curvatures: Vec<f64>,
}

fn sampled_curves(domain: &Domain) -> Vec<Sampled> {
    let pieces = (0..domain.outline.pieces.len()).map(|i| BoundaryTag::Piece(i as u32));
    let inserts = (0..domain.inserts.len()).map(|i| BoundaryTag::Insert(i as u32));
    pieces
        .chain(inserts)
        .map(|tag| {
            let curve = domain.curve(tag);
            let at = |i: usize| i as f64 / CURVE_SAMPLES as f64;
            let points: Vec<Vec2> = (0..=CURVE_SAMPLES).map(|i| curve.point(at(i))).collect();
            let length = points.windows(2).map(|p| p[0].distance(p[1])).sum();
            let curvatures = (0..=CURVE_SAMPLES)
                .map(|i| curve.curvature(at(i)))
                .collect();
            Sampled {
                tag,
                length,
                points,
                curvatures,
            }
        })
        .collect()
}

/// Distance to the nearest other curve; pieces of the outline do not count against one another (a corner is no
/// gap), so this finds gaps of inserts only.
fn nearest_other(curves: &[Sampled], index: usize, place: Vec2) -> f64 {
    let is_piece = |c: &Sampled| matches!(c.tag, BoundaryTag::Piece(_));
    curves
        .iter()
        .enumerate()
        .filter(|(i, c)| *i != index && !(is_piece(c) && is_piece(&curves[index])))
        .flat_map(|(_, c)| c.points.windows(2))
        .map(|w| distance_to_chord(place, w[0], w[1]))
        .fold(f64::INFINITY, f64::min)
}
