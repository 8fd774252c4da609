//! Flow and heat between parallel plates (gap H, hydraulic diameter 2 H) against published values.
//!
//! Shah and London, Laminar Flow Forced Convection in Ducts (1978): f Re = 24, Nu = 7.541, 8.235, 4.861, 5.385;
//! entrance: the Graetz series, tabulated in tests/check_values (how computed: its check-values.md).

use flumeloft::base::{Watch, vec2};
use flumeloft::geometry::BoundaryTag;
use flumeloft::mesh::structured::mapped_channel;
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, Quantities, State, ThermalCondition, measures,
    solve,
};
use std::sync::Arc;

const LENGTH: f64 = 400.0;
const ENTRY: f64 = 4.0;
const PECLET: f64 = 1000.0; // on the hydraulic diameter: axial conduction is 1e-6 of the heat
const MEAN: f64 = 1.0;
const DIAMETER: f64 = 2.0;
const CONDUCTIVITY: f64 = MEAN * DIAMETER / PECLET; // rho cp = 1

/// Which kind of heating the bottom and the top have.
fn plates(bottom: ThermalCondition, top: ThermalCondition, viscosity: f64) -> State {
    // Eight columns of unheated entry shrink towards x = 0, seventy heated ones grow from there; rows crowd at
    // the plates.
    let columns = [8, 70];
    let cut = columns[0] as f64 / (columns[0] + columns[1]) as f64;
    let mesh = mapped_channel(columns, 6, 4, |p| {
        let s = (p.x - cut) / if p.x < cut { cut } else { 1.0 - cut };
        // Slopes are kept off zero, so that the map stays regular at the cut.
        let x = if p.x < cut {
            -ENTRY * (0.01 * s.abs() + 0.99 * s * s)
        } else {
            LENGTH * s * (0.0003 + s * (0.06 + 0.9397 * s))
        };
        vec2(x, 0.5 - 0.5 * (std::f64::consts::PI * p.y).cos())
    });
    let problem = Problem {
        fluid: Fluid {
            name: "unit".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s: viscosity,
            conductivity_w_m_k: CONDUCTIVITY,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            FlowCondition::Wall {},
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            FlowCondition::Wall {},
            FlowCondition::FlowRate {
                flow_rate_m2_s: MEAN,
            },
            FlowCondition::Wall {},
            FlowCondition::Wall {},
        ],
        piece_thermal: vec![
            bottom,
            ThermalCondition::Adiabatic {},
            top,
            ThermalCondition::FixedTemperature { temperature_k: 0.0 },
            ThermalCondition::Adiabatic {},
            ThermalCondition::Adiabatic {},
        ],
        insert_thermal: vec![],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    solve(&discretisation, mesh, None, &Watch::idle()).unwrap()
}

fn hot() -> ThermalCondition {
    ThermalCondition::FixedTemperature { temperature_k: 1.0 }
}

/// Mixed-mean temperature on the mesh's column lines: (x, T_bulk), from the flow-weighted integral along them.
fn bulk(state: &State) -> Vec<(f64, f64)> {
    let cells = &state.discretisation.cells;
    let mut lines: std::collections::BTreeMap<u64, (f64, f64)> = Default::default();
    let mut seen = std::collections::BTreeSet::new();
    for (t, edges) in cells.mesh.triangle_edges.iter().enumerate() {
        for e in 0..3 {
            let [a, b] = cells.mesh.edges[edges[e] as usize].map(|v| cells.mesh.points[v as usize]);
            if a.x != b.x || !seen.insert(edges[e]) {
                continue;
            }
            let table = &cells.edge_table.edges[e];
            let line = lines.entry(a.x.to_bits()).or_default();
            for q in 0..table.points {
                let (mut u, mut temperature) = (0.0, 0.0);
                for (&n, v) in cells.element(t).iter().zip(table.value_row(q)) {
                    u += v * state.velocity[n as usize][0];
                    temperature += v * state.temperature[n as usize];
                }
                let weight = table.weights[q] * (b.y - a.y).abs() * u;
                line.0 += weight * temperature;
                line.1 += weight;
            }
        }
    }
    lines
        .into_iter()
        .map(|(x, (heat, flow))| (f64::from_bits(x), heat / flow))
        .collect()
}

/// Cubic through the four nearest lines of ln(1 - T_bulk).
fn log_deficit(lines: &[(f64, f64)], x: f64) -> f64 {
    let i = lines.partition_point(|l| l.0 < x).clamp(2, lines.len() - 2);
    let near = &lines[i - 2..i + 2];
    (0..4)
        .map(|i| {
            let basis: f64 = (0..4)
                .filter(|&j| j != i)
                .map(|j| (x - near[j].0) / (near[i].0 - near[j].0))
                .product();
            basis * (1.0 - near[i].1).ln()
        })
        .sum()
}

/// Nu of the developed flow from the decay of the bulk temperature's deficit, exp(-4 Nu x/(Dh Pe)) with both
/// plates hot and half as fast with one (the diameter is that of both).
fn nu_from_decay(state: &State, plates: f64) -> f64 {
    let lines = bulk(state);
    let (a, b) = (0.35 * LENGTH, 0.55 * LENGTH);
    (log_deficit(&lines, a) - log_deficit(&lines, b)) / (b - a) * DIAMETER * PECLET / (2.0 * plates)
}

/// Nu of the developed flow from the wall's temperature at given flux.
fn nu_from_wall(state: &State, flux: f64, plates: f64) -> f64 {
    let x = 0.8 * LENGTH;
    let wall = state
        .discretisation
        .cells
        .edges_on(BoundaryTag::Piece(0))
        .flat_map(|(t, _)| state.discretisation.cells.element(t).to_vec())
        .map(|n| n as usize)
        .filter(|&n| state.mesh.nodes[n].y == 0.0)
        .min_by(|&a, &b| {
            (state.mesh.nodes[a].x - x)
                .abs()
                .total_cmp(&(state.mesh.nodes[b].x - x).abs())
        })
        .unwrap();
    let along = state.mesh.nodes[wall].x;
    let conducted = measures::heat_through(state, BoundaryTag::Piece(3)).value;
    let bulk = (plates * flux * along + conducted) / MEAN;
    flux * DIAMETER / (CONDUCTIVITY * (state.temperature[wall] - bulk))
}

fn close(name: &str, value: f64, published: f64, band: f64) {
    println!(
        "{name}: {value:.6} published {published:.6} off {:+.1e}",
        value / published - 1.0
    );
    assert!(
        (value / published - 1.0).abs() < band,
        "{name}: {value} against {published}"
    );
}

#[test]
fn friction_factor() {
    let viscosity = 0.02;
    let state = plates(hot(), hot(), viscosity);
    let q = Quantities::new(&state);
    // Fanning f = tau_wall/(rho U^2/2) = dp H/(2 L)/(rho U^2/2); Re on Dh.
    let fanning = q.static_pressure_drop_pa / (2.0 * (LENGTH + ENTRY)) / (0.5 * MEAN * MEAN);
    close("f Re", fanning * MEAN * DIAMETER / viscosity, 24.0, 1e-3);
}

#[test]
fn developed_nusselt_numbers() {
    let adiabatic = ThermalCondition::Adiabatic {};
    let flux = ThermalCondition::FixedFlux { flux_w_m2: 0.01 };
    close(
        "both at one temperature",
        nu_from_decay(&plates(hot(), hot(), 0.02), 2.0),
        7.540700874,
        1e-3,
    );
    close(
        "one at a temperature",
        nu_from_decay(&plates(hot(), adiabatic.clone(), 0.02), 1.0),
        4.860736779,
        1e-3,
    );
    close(
        "both at one flux",
        nu_from_wall(&plates(flux.clone(), flux.clone(), 0.02), 0.01, 2.0),
        8.235294118,
        1e-3,
    );
    close(
        "one at a flux",
        nu_from_wall(&plates(flux, adiabatic, 0.02), 0.01, 1.0),
        5.384615385,
        1e-3,
    );
}

#[test]
fn thermal_entrance_follows_the_series() {
    let state = plates(hot(), hot(), 0.02);
    let table = include_str!("check_values/graetz_fixed_temperature.csv");
    let mut rows = table.lines().filter(|l| !l.starts_with('#'));
    let head: Vec<&str> = rows.next().unwrap().split(',').collect();
    let column = |name: &str| head.iter().position(|h| h.trim() == name).unwrap();
    let (star, mean) = (column("x_star"), column("nu_mean"));
    let lines = bulk(&state);
    let mut checked = 0;
    for line in rows {
        let cells: Vec<f64> = line.split(',').map(|c| c.trim().parse().unwrap()).collect();
        let x = cells[star] * DIAMETER * PECLET;
        if !(2.0..0.3 * LENGTH).contains(&x) {
            continue; // the first cells see axial conduction, the last decades have no heat left to compare
        }
        let nu = -log_deficit(&lines, x) / (4.0 * cells[star]);
        close(
            &format!("mean Nu at x* = {}", cells[star]),
            nu,
            cells[mean],
            5e-3,
        );
        checked += 1;
    }
    assert!(checked >= 6, "only {checked} stations");
}

#[test]
#[should_panic(expected = "f Re")]
fn the_check_sees_a_friction_factor_wrong_by_a_fiftieth() {
    close("f Re", 24.5, 24.0, 1e-3);
}
