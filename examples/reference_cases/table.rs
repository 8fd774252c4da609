//! Solve a reference case and set its figures and shape derivatives beside the reference values.

use super::case::ReferenceCase;
use flumeloft::base::{Vec2, Watch};
use flumeloft::geometry::{BoundaryTag, ClosedSpline, Curve};
use flumeloft::mesh::{Fineness, Locator, MeshSettings, Motion, generate};
use flumeloft::physics::figures::{self, Ports};
use flumeloft::physics::measures::{self, Measured};
use flumeloft::physics::{Discretisation, Quantities, State, solve};
use flumeloft::sensitivity::{ControlChain, shape_gradient};
use serde::Serialize;
use serde_json::Value;
use std::sync::Arc;

/// A row of the table.
#[derive(Clone, Debug, Serialize)]
pub struct Row {
    /// Case.
    pub case: String,
    /// Figure.
    pub figure: String,
    /// Reference value, SI.
    pub reference: Option<f64>,
    /// Its absolute uncertainty.
    pub uncertainty: Option<f64>,
    /// Ours.
    pub value: Option<f64>,
    /// Difference over the natural size of the figure.
    pub relative_error: Option<f64>,
    /// Seconds of the whole state.
    pub seconds: f64,
    /// `supported`, or why not.
    pub supported: String,
}

/// A figure with its derivative's ingredients, if there are any.
enum Value2 {
    Measured(Measured),
    Plain(f64),
}

struct Solved<'a> {
    case: &'a ReferenceCase,
    state: State,
    quantities: Quantities,
    inlet_k: f64,
}

/// All rows of a case.
pub fn rows(
    case: &ReferenceCase,
    fineness: Fineness,
    order: usize,
) -> Result<(Vec<Row>, usize, usize), String> {
    let start = std::time::Instant::now();
    let mut settings = MeshSettings::preset(fineness, order);
    settings.jumps = flumeloft::physics::hints::thermal_jumps(&case.problem, &case.domain.outline);
    let mesh = generate(&case.domain, &settings, &Watch::idle()).map_err(|e| e.to_string())?;
    let triangles = mesh.mesh.triangles.len();
    let discretisation =
        Arc::new(Discretisation::new(&mesh, case.problem.clone()).map_err(|e| e.to_string())?);
    let unknowns = discretisation.flow.layout.condensed();
    let state = solve(&discretisation, mesh, None, &Watch::idle()).map_err(|e| e.to_string())?;
    let quantities = Quantities::new(&state);
    let seconds = start.elapsed().as_secs_f64();
    let inlet_k = case.json["thermal"]["inlet"]["T"]
        .as_f64()
        .unwrap_or(quantities.inlet_temperature_k);
    let solved = Solved {
        case,
        state,
        quantities,
        inlet_k,
    };
    let mut rows = Vec::new();
    let row = |figure: String, reference: &Value, value: Option<f64>, scale: f64| {
        let target = reference["value"].as_f64();
        let supported = if value.is_some() {
            "supported"
        } else {
            "not supported"
        };
        Row {
            case: case.name.clone(),
            figure,
            reference: target,
            uncertainty: reference["unc"].as_f64(),
            value,
            relative_error: value.zip(target).map(|(v, t)| (v - t) / scale),
            seconds,
            supported: supported.into(),
        }
    };
    let empty = serde_json::Map::new();
    for (name, reference) in case.json["reference"].as_object().unwrap_or(&empty) {
        let value = solved.figure(name).map(|v| match v {
            Value2::Measured(m) => m.value,
            Value2::Plain(v) => v,
        });
        rows.push(row(name.clone(), reference, value, solved.scale(name)));
    }
    let locator = Locator::new(&solved.state.mesh);
    for (i, probe) in case.json["probes"]
        .as_array()
        .unwrap_or(&Vec::new())
        .iter()
        .enumerate()
    {
        let place = Vec2 {
            x: probe["x"].as_f64().unwrap_or(0.0),
            y: probe["y"].as_f64().unwrap_or(0.0),
        };
        for (key, value) in ["T", "ux", "uy", "p"]
            .iter()
            .zip(solved.probe(&locator, place))
        {
            if probe[*key].is_object() {
                let scale = solved.probe_scale(key);
                rows.push(row(format!("probe{i}.{key}"), &probe[*key], value, scale));
            }
        }
    }
    for (name, modes) in case.json["shape_derivative"].as_object().unwrap_or(&empty) {
        let Some(insert) = case.domain.inserts.iter().position(|i| i.name == *name) else {
            continue;
        };
        let size = 2.0 * (case.areas[insert] / std::f64::consts::PI).sqrt();
        let motion = Motion::new(&solved.state.mesh).map_err(|e| e.to_string())?;
        let chain = ControlChain::new(
            &solved.state.mesh,
            case.domain.inserts.iter().map(|i| &i.contour),
        );
        for (mode, outputs) in modes.as_object().unwrap_or(&empty) {
            let direction = direction(
                &case.domain.inserts[insert].contour,
                case.centroids[insert],
                mode,
            );
            for (output, reference) in outputs.as_object().unwrap_or(&empty) {
                let slope = direction
                    .as_ref()
                    .and_then(|d| solved.slope(output, insert, d, &motion, &chain));
                let natural = solved.scale(output) / if mode == "dilate" { 1.0 } else { size };
                rows.push(row(
                    format!("shape.{name}.{mode}.{output}"),
                    reference,
                    slope,
                    natural,
                ));
            }
        }
    }
    Ok((rows, triangles, unknowns))
}

/// Velocity of the control points in a mode.
fn direction(contour: &ClosedSpline, centroid: Vec2, mode: &str) -> Option<Vec<Vec2>> {
    let n = contour.len();
    let along = |f: &dyn Fn(usize, Vec2) -> Vec2| {
        Some(
            contour
                .controls()
                .iter()
                .enumerate()
                .map(|(i, &p)| f(i, p - centroid))
                .collect(),
        )
    };
    match mode {
        "x" => along(&|_, _| Vec2 { x: 1.0, y: 0.0 }),
        "y" => along(&|_, _| Vec2 { x: 0.0, y: 1.0 }),
        "dilate" => along(&|_, r| r),
        "cos2" => along(&|i, r| {
            let outward = contour.derivative(i as f64 / n as f64).right().normalized();
            outward * (2.0 * r.y.atan2(r.x)).cos()
        }),
        _ => None,
    }
}

impl Solved<'_> {
    /// Natural size of a figure.
    fn scale(&self, name: &str) -> f64 {
        let reference = |key: &str| self.case.json["reference"][key]["value"].as_f64();
        let own = reference(name).unwrap_or(0.0).abs();
        let head = name.split('.').next().unwrap_or("");
        let insert = name.split_once('.').map_or("", |p| p.1);
        let scale = match head {
            "lift" => reference(&format!("drag.{insert}"))
                .unwrap_or(own)
                .abs()
                .max(own),
            "dp_static" | "dp_total_area" | "dp_total_flow" | "p_static_inlet_mean" => {
                reference("dp_total_flow").unwrap_or(own).abs().max(own)
            }
            "T_bulk_outlet" | "T_max" | "T_mean" | "T_surf_mean" | "T_surf_max" | "T_wall_mean" => {
                (reference(name).unwrap_or(0.0) - self.inlet_k).abs()
            }
            "Q" | "Q_cond_inlet" | "Q_all_sources" => {
                reference("Q_all_sources").unwrap_or(own).abs().max(own)
            }
            "area" => self.case.areas[0],
            "perimeter" => (4.0 * std::f64::consts::PI * self.case.areas[0]).sqrt(),
            _ => own,
        };
        if scale > 0.0 { scale } else { 1.0 }
    }

    fn probe_scale(&self, key: &str) -> f64 {
        match key {
            "T" => self.quantities.temperature_range_k[1] - self.quantities.temperature_range_k[0],
            "p" => self.quantities.total_pressure_drop_pa.abs(),
            _ => self.quantities.max_speed_m_s,
        }
    }

    fn insert(&self, name: &str) -> Option<usize> {
        self.case.domain.inserts.iter().position(|i| i.name == name)
    }

    fn pieces(&self, name: &str) -> Option<Vec<BoundaryTag>> {
        let found = self.case.pieces.iter().find(|p| p.0 == name)?;
        Some(found.1.iter().map(|&i| BoundaryTag::Piece(i)).collect())
    }

    fn figure(&self, name: &str) -> Option<Value2> {
        let state = &self.state;
        let ports = Ports::new(state);
        let (head, of) = name.split_once('.').unwrap_or((name, ""));
        let q = &self.quantities;
        let measured = match head {
            "flow_rate" => ports.flow_rate(),
            "mean_velocity_inlet" => return Some(Value2::Plain(q.mean_velocity_m_s)),
            "p_static_inlet_mean" => {
                let integral = measures::static_pressure(state, *q.inlets.first()?);
                return Some(Value2::Plain(integral.value / q.inlet_width_m));
            }
            "dp_static" => figures::static_pressure_drop(state, &ports),
            "dp_total_area" => figures::total_pressure_drop_by_width(state, &ports),
            "dp_total_flow" => figures::total_pressure_drop(state, &ports),
            "drag" => measures::force(state, self.insert(of)? as u32, [1.0, 0.0]),
            "lift" => measures::force(state, self.insert(of)? as u32, [0.0, 1.0]),
            "Q" => match self.insert(of) {
                Some(i) => figures::insert_heat(state, i),
                None => self.sum(&self.pieces(of)?, measures::heat_through),
            },
            "Q_cond_inlet" => return Some(Value2::Plain(q.port_conduction_w_m)),
            "Q_all_sources" => self.sources(),
            "T_bulk_outlet" => {
                let fluid = &state.discretisation.problem.fluid;
                let capacity = fluid.density_kg_m3 * fluid.heat_capacity_j_kg_k;
                let (heat, flow) = (self.sources(), ports.flow_rate());
                let rise = (heat.value + q.port_conduction_w_m) / (capacity * flow.value);
                Measured::combine(
                    q.inlet_temperature_k + rise,
                    &[
                        (1.0 / (capacity * flow.value), &heat),
                        (-rise / flow.value, &flow),
                    ],
                )
            }
            "T_max" | "T_surf_max" => {
                let i = self.insert(of)?;
                let hottest = self.hottest(i, head == "T_max")?;
                let f = &q.inserts[i];
                let value = if head == "T_max" {
                    f.max_temperature_k
                } else {
                    f.surface_max_temperature_k
                };
                Measured {
                    value,
                    ..measures::node_temperature(state, hottest)
                }
            }
            "T_mean" => {
                let region = self.insert(of)? as u16 + 1;
                self.quotient(
                    measures::region_temperature(state, region),
                    measures::region_area(state, region),
                )
            }
            "T_surf_mean" => {
                let tag = BoundaryTag::Insert(self.insert(of)? as u32);
                self.quotient(
                    measures::surface_temperature(state, tag),
                    measures::length(state, tag),
                )
            }
            "T_wall_mean" => {
                let tags = self.pieces(of)?;
                self.quotient(
                    self.sum(&tags, measures::surface_temperature),
                    self.sum(&tags, measures::length),
                )
            }
            "u_max" => return Some(Value2::Plain(q.max_speed_m_s)),
            "step_reattachment_length" => return Some(Value2::Plain(self.reattachment()?)),
            "area" => measures::length(state, BoundaryTag::Insert(0)),
            _ => return None,
        };
        Some(Value2::Measured(measured))
    }

    fn sum(&self, tags: &[BoundaryTag], f: impl Fn(&State, BoundaryTag) -> Measured) -> Measured {
        Measured::sum(&tags.iter().map(|&t| f(&self.state, t)).collect::<Vec<_>>())
    }

    fn quotient(&self, a: Measured, b: Measured) -> Measured {
        let value = a.value / b.value;
        Measured::combine(value, &[(1.0 / b.value, &a), (-value / b.value, &b)])
    }

    /// Heat of all inserts and walls.
    fn sources(&self) -> Measured {
        let problem = &self.state.discretisation.problem;
        let walls: Vec<BoundaryTag> = (0..problem.flow.len())
            .filter(|&i| !problem.flow[i].is_port())
            .map(|i| BoundaryTag::Piece(i as u32))
            .collect();
        Measured::sum(&[
            figures::heat(&self.state),
            self.sum(&walls, measures::heat_through),
        ])
    }

    /// Hottest node of an insert's solid, or of its contour.
    fn hottest(&self, insert: usize, solid: bool) -> Option<usize> {
        let cells = &self.state.discretisation.cells;
        let region = insert as u16 + 1;
        let mut nodes: Vec<usize> = Vec::new();
        if solid && cells.mesh.regions.contains(&region) {
            for t in (0..cells.mesh.triangles.len()).filter(|&t| cells.mesh.regions[t] == region) {
                nodes.extend(cells.element(t).iter().map(|&n| n as usize));
            }
        } else {
            for (t, e) in cells.edges_on(BoundaryTag::Insert(insert as u32)) {
                nodes.extend(
                    cells
                        .edge_locals(e)
                        .iter()
                        .map(|&l| cells.element(t)[l] as usize),
                );
            }
        }
        nodes
            .into_iter()
            .max_by(|&a, &b| self.state.temperature[a].total_cmp(&self.state.temperature[b]))
    }

    fn probe(&self, locator: &Locator, place: Vec2) -> [Option<f64>; 4] {
        let Some((t, at)) = locator.find(place) else {
            return [None; 4];
        };
        let state = &self.state;
        let cells = &state.discretisation.cells;
        let (mut temperature, mut u) = (0.0, [0.0; 2]);
        for (&n, v) in cells.element(t).iter().zip(locator.values(at)) {
            temperature += v * state.temperature[n as usize];
            u[0] += v * state.velocity[n as usize][0];
            u[1] += v * state.velocity[n as usize][1];
        }
        let basis = flumeloft::mesh::reference::Reference::new(cells.order - 1);
        let p = cells
            .pressure_element(t)
            .iter()
            .zip(basis.values(at))
            .map(|(&n, v)| v * state.discretisation.flow.pressure(&state.flow, n as usize))
            .sum();
        [Some(temperature), Some(u[0]), Some(u[1]), Some(p)]
    }

    /// Last change of sign of the wall shear from back flow to forward flow on a horizontal wall.
    fn reattachment(&self) -> Option<f64> {
        let definition = &self.case.json["recirculation"]["step_reattachment_length"];
        if definition["kind"].as_str()? != "wall" {
            return None;
        }
        let (y, from, most) = (
            definition["y"].as_f64()?,
            definition["x_from"].as_f64()?,
            definition["x_max"].as_f64()?,
        );
        super::shear::sign_changes(&self.state, y, from, most)
            .last()
            .map(|x| x - from)
    }

    fn slope(
        &self,
        output: &str,
        insert: usize,
        direction: &[Vec2],
        motion: &Motion,
        chain: &ControlChain,
    ) -> Option<f64> {
        let contour = &self.case.domain.inserts[insert].contour;
        match output {
            "area" => return Some(area_slope(contour, direction)),
            "perimeter" => return Some(perimeter_slope(contour, direction)),
            _ => {}
        }
        let measured = match self.figure(output)? {
            Value2::Measured(m) => m,
            Value2::Plain(_) => return None,
        };
        let by_nodes = shape_gradient(&self.state, &measured, &Watch::idle()).ok()?;
        let by_controls = chain.restrict(&motion.restrict(&by_nodes));
        Some(
            by_controls[insert]
                .iter()
                .zip(direction)
                .map(|(g, d)| g.dot(*d))
                .sum(),
        )
    }
}

/// Derivative of the enclosed area: integral of V·n ds.
fn area_slope(contour: &ClosedSpline, direction: &[Vec2]) -> f64 {
    along(contour, direction, |d, v, _| v.dot(d.right()))
}

/// Derivative of the perimeter: integral of dV/ds·t ds.
fn perimeter_slope(contour: &ClosedSpline, direction: &[Vec2]) -> f64 {
    along(contour, direction, |d, _, slope| slope.dot(d.normalized()))
}

fn along(contour: &ClosedSpline, direction: &[Vec2], f: impl Fn(Vec2, Vec2, Vec2) -> f64) -> f64 {
    let field = ClosedSpline::new(direction.to_vec());
    let n = 16 * contour.len();
    (0..n)
        .map(|i| {
            let t = (i as f64 + 0.5) / n as f64;
            f(contour.derivative(t), field.point(t), field.derivative(t)) / n as f64
        })
        .sum()
}
