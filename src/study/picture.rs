//! From a state to plain arrays for drawing.

use super::{FieldSnapshot, LineProfile};
use crate::base::Vec2;
use crate::fem::table::EDGE_DIRECTION;
use crate::fem::{PointMap, Table};
use crate::geometry::BoundaryTag;
use crate::mesh::tri_mesh::FLUID;
use crate::physics::{Quantities, State};

/// Samples along each cell edge for profiles.
const PROFILE_SAMPLES: usize = 8;

/// Fields of a state on cells cut in k^2 flat triangles, and profiles along contours and ports.
pub fn picture(state: &State, figures: &Quantities, names: &Names) -> FieldSnapshot {
    let cells = &state.discretisation.cells;
    let k = cells.order;
    let lattice = Lattice::new(k);
    let table = Table::at(k, &lattice.places);
    let mut shot = FieldSnapshot::default();
    let solid = |t: &usize| cells.mesh.regions[*t] != FLUID;
    let count = cells.mesh.triangles.len();
    let fluid_first = (0..count)
        .filter(|t| !solid(t))
        .chain((0..count).filter(solid));
    for t in fluid_first {
        let first = shot.points_m.len() as u32;
        for q in 0..table.points {
            let at = Sample::new(state, t, &table, q);
            let speed_squared = at.velocity[0].powi(2) + at.velocity[1].powi(2);
            let total = at.pressure + 0.5 * state.discretisation.flow.density * speed_squared;
            let wet = !solid(&t);
            shot.points_m.push([at.place.x as f32, at.place.y as f32]);
            shot.temperature_k.push(at.temperature as f32);
            shot.velocity_m_s
                .push(at.velocity.map(|u| if wet { u as f32 } else { 0.0 }));
            shot.pressure_pa
                .push(if wet { at.pressure as f32 } else { 0.0 });
            shot.total_pressure_pa
                .push(if wet { total as f32 } else { 0.0 });
        }
        shot.triangles
            .extend(lattice.triangles.iter().map(|c| c.map(|i| first + i)));
        shot.cell_lines
            .extend(lattice.rim.iter().map(|c| c.map(|i| first + i)));
        if !solid(&t) {
            shot.fluid_triangles = shot.triangles.len();
        }
    }
    for (i, name) in names.inserts.iter().enumerate() {
        let tag = BoundaryTag::Insert(i as u32);
        shot.insert_flux
            .push(profile(state, tag, name, |at| at.flux));
        shot.insert_temperature
            .push(profile(state, tag, name, |at| at.temperature));
    }
    for &tag in figures.inlets.iter().chain(&figures.outlets) {
        let BoundaryTag::Piece(i) = tag else { continue };
        let name = &names.pieces[i as usize];
        shot.port_velocity
            .push(profile(state, tag, name, |at| at.inflow));
        shot.port_temperature
            .push(profile(state, tag, name, |at| at.temperature));
    }
    shot
}

/// Names for the profiles.
pub struct Names {
    /// Of the pieces.
    pub pieces: Vec<String>,
    /// Of the inserts.
    pub inserts: Vec<String>,
}

/// Evenly spaced points of a triangle, its k^2 triangles and its rim.
struct Lattice {
    places: Vec<([f64; 2], f64)>,
    triangles: Vec<[u32; 3]>,
    rim: Vec<[u32; 2]>,
}

impl Lattice {
    fn new(k: usize) -> Self {
        let mut places = Vec::new();
        let mut row_starts = Vec::new();
        for j in 0..=k {
            row_starts.push(places.len() as u32);
            for i in 0..=k - j {
                places.push(([i as f64 / k as f64, j as f64 / k as f64], 0.0));
            }
        }
        let at = |i: usize, j: usize| row_starts[j] + i as u32;
        let (mut triangles, mut rim) = (Vec::new(), Vec::new());
        for j in 0..k {
            for i in 0..k - j {
                triangles.push([at(i, j), at(i + 1, j), at(i, j + 1)]);
                if i + j + 2 <= k {
                    triangles.push([at(i + 1, j), at(i + 1, j + 1), at(i, j + 1)]);
                }
            }
            rim.push([at(j, 0), at(j + 1, 0)]);
            rim.push([at(k - j, j), at(k - j - 1, j + 1)]);
            rim.push([at(0, j), at(0, j + 1)]);
        }
        Self {
            places,
            triangles,
            rim,
        }
    }
}

/// Fields at a point of a cell.
struct Sample {
    place: Vec2,
    velocity: [f64; 2],
    temperature: f64,
    grad_t: [f64; 2],
    pressure: f64,
}

impl Sample {
    fn new(state: &State, triangle: usize, table: &Table, q: usize) -> Self {
        let cells = &state.discretisation.cells;
        let map = PointMap::new(&state.mesh, triangle, table, q);
        let (by_x, by_y) = table.derivative_rows(q);
        let values = table.value_row(q);
        let (mut velocity, mut temperature, mut slope) = ([0.0; 2], 0.0, [0.0; 2]);
        for (i, &node) in cells.element(triangle).iter().enumerate() {
            let node = node as usize;
            velocity[0] += values[i] * state.velocity[node][0];
            velocity[1] += values[i] * state.velocity[node][1];
            temperature += values[i] * state.temperature[node];
            slope[0] += by_x[i] * state.temperature[node];
            slope[1] += by_y[i] * state.temperature[node];
        }
        let pressure = cells
            .pressure_element(triangle)
            .iter()
            .zip(table.pressure_row(q))
            .map(|(&n, v)| v * state.discretisation.flow.pressure(&state.flow, n as usize))
            .sum();
        let grad_t = map.gradient(slope[0], slope[1]);
        Self {
            place: map.place,
            velocity,
            temperature,
            grad_t,
            pressure,
        }
    }
}

/// What a profile can show at a point of a boundary.
struct EdgeSample {
    temperature: f64,
    /// Heat flux into the fluid by differentiation, W/m^2: for pictures, not for reported figures.
    flux: f64,
    /// Normal velocity into the duct, m/s.
    inflow: f64,
}

fn profile(
    state: &State,
    tag: BoundaryTag,
    name: &str,
    value: impl Fn(&EdgeSample) -> f64,
) -> LineProfile {
    let cells = &state.discretisation.cells;
    let conductivity = state.discretisation.heat.media[0].conductivity_w_m_k;
    let mut line = LineProfile {
        name: name.into(),
        ..LineProfile::default()
    };
    let starts = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];
    let mut last: Option<Vec2> = None;
    let mut along = 0.0;
    for (triangle, edge) in cells.edges_on(tag) {
        let direction = EDGE_DIRECTION[edge];
        let places: Vec<([f64; 2], f64)> = (0..=PROFILE_SAMPLES)
            .map(|i| {
                let s = i as f64 / PROFILE_SAMPLES as f64;
                (
                    [
                        starts[edge][0] + s * direction[0],
                        starts[edge][1] + s * direction[1],
                    ],
                    0.0,
                )
            })
            .collect();
        let table = Table::at(cells.order, &places);
        for q in 0..table.points {
            let at = Sample::new(state, triangle, &table, q);
            let outward = PointMap::new(&state.mesh, triangle, &table, q)
                .along(direction)
                .right()
                .normalized();
            along += last.map_or(0.0, |l| l.distance(at.place));
            last = Some(at.place);
            line.along_m.push(along);
            line.place_m.push([at.place.x, at.place.y]);
            line.value.push(value(&EdgeSample {
                temperature: at.temperature,
                flux: conductivity * (at.grad_t[0] * outward.x + at.grad_t[1] * outward.y),
                inflow: -(at.velocity[0] * outward.x + at.velocity[1] * outward.y),
            }));
        }
    }
    line
}
