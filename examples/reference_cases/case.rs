//! One reference case file: from its definition to a domain and a problem.

use flumeloft::base::{Vec2, vec2};
use flumeloft::geometry::{
    ClosedSpline, Domain, DomainInsert, Outline, OutlinePiece, PieceShape, Segment,
};
use flumeloft::physics::{FlowCondition, Fluid, Problem, ThermalCondition};
use serde_json::Value;

/// Control points of an insert: the spline's error falls with the fourth power, to about 1e-7 here.
const CONTROLS: usize = 96;

/// A case ready to solve.
pub struct ReferenceCase {
    /// Name.
    pub name: String,
    /// The whole file.
    pub json: Value,
    /// Domain.
    pub domain: Domain,
    /// Problem.
    pub problem: Problem,
    /// Piece indices by name.
    pub pieces: Vec<(String, Vec<u32>)>,
    /// Area centroids of the inserts, m.
    pub centroids: Vec<Vec2>,
    /// Areas of the inserts, m^2.
    pub areas: Vec<f64>,
}

/// What this program does not know of a file.
pub struct NotSupported(pub String);

impl std::fmt::Debug for NotSupported {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.0)
    }
}

type Known<T> = Result<T, NotSupported>;

fn missing(what: &str) -> NotSupported {
    NotSupported(format!("{what} is missing or of a kind that is not known"))
}

fn number(v: &Value, key: &str) -> Known<f64> {
    v[key].as_f64().ok_or_else(|| missing(key))
}

fn point(v: &Value) -> Known<Vec2> {
    match (v[0].as_f64(), v[1].as_f64()) {
        (Some(x), Some(y)) => Ok(vec2(x, y)),
        _ => Err(missing("a point")),
    }
}

fn text<'a>(v: &'a Value, key: &str) -> Known<&'a str> {
    v[key].as_str().ok_or_else(|| missing(key))
}

impl ReferenceCase {
    /// From the text of a case file.
    pub fn parse(source: &str) -> Known<Self> {
        let json: Value = serde_json::from_str(source).map_err(|e| NotSupported(e.to_string()))?;
        let geometry = &json["geometry"];
        let outer = geometry["outer"]
            .as_array()
            .ok_or_else(|| missing("geometry.outer"))?;
        let mut outline = Outline { pieces: Vec::new() };
        let (mut flow, mut piece_thermal) = (Vec::new(), Vec::new());
        let mut pieces: Vec<(String, Vec<u32>)> = Vec::new();
        for segment in outer {
            let name = text(segment, "name")?;
            let condition = flow_condition(&json["flow"][name])?;
            outline.pieces.push(OutlinePiece {
                name: name.into(),
                segment: outline_segment(segment)?,
                is_port: condition.is_port(),
            });
            flow.push(condition);
            piece_thermal.push(thermal_condition(&json["thermal"][name])?);
            let index = flow.len() as u32 - 1;
            match pieces.iter_mut().find(|p| p.0 == name) {
                Some(p) => p.1.push(index),
                None => pieces.push((name.into(), vec![index])),
            }
        }
        let mut inserts = Vec::new();
        let (mut insert_thermal, mut centroids, mut areas) = (Vec::new(), Vec::new(), Vec::new());
        for insert in geometry["inserts"]
            .as_array()
            .ok_or_else(|| missing("geometry.inserts"))?
        {
            let name = text(insert, "name")?;
            let thermal = thermal_condition(&json["thermal"][name])?;
            inserts.push(DomainInsert {
                name: name.into(),
                contour: ClosedSpline::new(contour_points(insert)?),
                solid: matches!(thermal, ThermalCondition::Solid { .. }),
                cell_size_m: None,
            });
            insert_thermal.push(thermal);
            centroids.push(point(&insert["derived"]["centroid"])?);
            areas.push(number(&insert["derived"], "area")?);
        }
        let f = &json["fluid"];
        let fluid = Fluid {
            name: f["name"].as_str().unwrap_or("fluid").into(),
            density_kg_m3: number(f, "rho")?,
            viscosity_pa_s: number(f, "mu")?,
            conductivity_w_m_k: number(f, "k")?,
            heat_capacity_j_kg_k: number(f, "cp")?,
        };
        Ok(Self {
            name: text(&json, "name")?.into(),
            domain: Domain { outline, inserts },
            problem: Problem {
                fluid,
                flow,
                piece_thermal,
                insert_thermal,
            },
            pieces,
            centroids,
            areas,
            json,
        })
    }
}

fn outline_segment(v: &Value) -> Known<Segment> {
    let (from, to) = (point(&v["from"])?, point(&v["to"])?);
    let shape = match text(v, "type")? {
        "line" => PieceShape::Line {},
        "arc" => {
            let (centre, radius) = (point(&v["center"])?, number(v, "radius")?);
            let middle = 0.5 * (number(v, "angle0_deg")? + number(v, "angle1_deg")?);
            PieceShape::Arc {
                through_m: centre + Vec2::from_angle(middle.to_radians()) * radius,
            }
        }
        "curve" => {
            let samples = v["sample_points"]
                .as_array()
                .ok_or_else(|| missing("sample_points"))?;
            let all = samples.iter().map(point).collect::<Known<Vec<Vec2>>>()?;
            let inner = all.get(1..all.len().saturating_sub(1)).unwrap_or_default();
            PieceShape::Spline {
                through_m: inner.to_vec(),
            }
        }
        other => return Err(NotSupported(format!("outline type {other}"))),
    };
    Ok(Segment::new(&shape, from, to))
}

fn contour_points(v: &Value) -> Known<Vec<Vec2>> {
    let angle = |i: usize| 2.0 * std::f64::consts::PI * i as f64 / CONTROLS as f64;
    let centre = point(&v["center"])?;
    let kind = text(v, "type")?;
    let coefficients = |key: &str| -> Vec<(f64, f64)> {
        match &v[key] {
            Value::Object(map) => map
                .iter()
                .filter_map(|(k, c)| Some((k.parse().ok()?, c.as_f64()?)))
                .collect(),
            Value::Array(list) => list
                .iter()
                .enumerate()
                .filter_map(|(k, c)| Some((k as f64, c.as_f64()?)))
                .collect(),
            _ => Vec::new(),
        }
    };
    let offset: Box<dyn Fn(f64) -> Vec2> = match kind {
        "circle" => {
            let radius = number(v, "radius")?;
            Box::new(move |t| Vec2::from_angle(t) * radius)
        }
        "ellipse" => {
            let (a, b) = (number(v, "a")?, number(v, "b")?);
            let turn = v["angle_deg"].as_f64().unwrap_or(0.0).to_radians();
            Box::new(move |t| vec2(a * t.cos(), b * t.sin()).rotated(turn))
        }
        "polar" => {
            let radius = v["R"]
                .as_f64()
                .or_else(|| v["radius"].as_f64())
                .ok_or_else(|| missing("R"))?;
            let turn = v["rot"]
                .as_f64()
                .or_else(|| v["rot_deg"].as_f64().map(f64::to_radians))
                .unwrap_or(0.0);
            let (cosines, sines) = (coefficients("cos"), coefficients("sin"));
            Box::new(move |t| {
                let c: f64 = cosines.iter().map(|(k, c)| c * (k * t).cos()).sum();
                let s: f64 = sines.iter().map(|(k, c)| c * (k * t).sin()).sum();
                Vec2::from_angle(t + turn) * (radius * (1.0 + c + s))
            })
        }
        other => return Err(NotSupported(format!("insert type {other}"))),
    };
    Ok((0..CONTROLS).map(|i| centre + offset(angle(i))).collect())
}

fn flow_condition(v: &Value) -> Known<FlowCondition> {
    Ok(match text(v, "kind")? {
        "noslip" => FlowCondition::Wall {},
        "slip" => FlowCondition::Symmetry {},
        "total_pressure" => FlowCondition::TotalPressure {
            pressure_pa: number(v, "P")?,
        },
        "static_pressure" => FlowCondition::StaticPressure {
            pressure_pa: number(v, "P")?,
        },
        "flowrate" => FlowCondition::FlowRate {
            flow_rate_m2_s: number(v, "value")?,
        },
        other => return Err(NotSupported(format!("flow kind {other}"))),
    })
}

fn thermal_condition(v: &Value) -> Known<ThermalCondition> {
    Ok(match text(v, "kind")? {
        "adiabatic" => ThermalCondition::Adiabatic {},
        "fixed" => ThermalCondition::FixedTemperature {
            temperature_k: number(v, "T")?,
        },
        "flux" => ThermalCondition::FixedFlux {
            flux_w_m2: number(v, "q")?,
        },
        "convection" => ThermalCondition::Convection {
            coefficient_w_m2_k: number(v, "h")?,
            ambient_k: number(v, "Tamb")?,
        },
        "conjugate" => ThermalCondition::Solid {
            conductivity_w_m_k: number(v, "ks")?,
            source_w_m3: number(v, "q_vol")?,
        },
        other => return Err(NotSupported(format!("thermal kind {other}"))),
    })
}
