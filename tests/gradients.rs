//! The discrete shape gradient against states on moved meshes: Taylor remainders and central differences, for
//! each aim, port kind and thermal kind.

mod common;

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::Domain;
use flumeloft::mesh::{CurvedMesh, Fineness, MeshSettings, Motion, generate};
use flumeloft::physics::figures::{self, PeakScale, Ports};
use flumeloft::physics::measures::Measured;
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, State, ThermalCondition, solve,
};
use flumeloft::sensitivity::{ControlChain, shape_gradient};
use std::sync::Arc;

/// A duct with one off-axis insert, air-like at Re of some tens.
struct Case {
    domain: Domain,
    mesh: CurvedMesh,
    discretisation: Arc<Discretisation>,
    motion: Motion,
    chain: ControlChain,
}

const MU: f64 = 1.85e-5;
const RHO: f64 = 1.18;
const HEIGHT: f64 = 0.01;

fn static_in() -> FlowCondition {
    FlowCondition::StaticPressure { pressure_pa: 0.06 }
}
fn total_in() -> FlowCondition {
    FlowCondition::TotalPressure { pressure_pa: 0.06 }
}
fn static_out() -> FlowCondition {
    FlowCondition::StaticPressure { pressure_pa: 0.0 }
}
fn flow_in() -> FlowCondition {
    FlowCondition::FlowRate {
        flow_rate_m2_s: 0.1 * HEIGHT,
    }
}

fn case(
    inlet: FlowCondition,
    outlet: FlowCondition,
    wall: FlowCondition,
    insert: ThermalCondition,
) -> Case {
    let mut shape = common::circle(vec2(0.015, 0.0044), 0.002, 12);
    let moved: Vec<Vec2> = shape
        .contour
        .controls()
        .iter()
        .map(|p| vec2(p.x + 0.2 * (p.y - 0.004), p.y))
        .collect();
    shape.contour = flumeloft::geometry::ClosedSpline::new(moved);
    shape.solid = matches!(insert, ThermalCondition::Solid { .. });
    let domain = Domain {
        outline: common::rectangle(0.035, HEIGHT),
        inserts: vec![shape],
    };
    let mut settings = MeshSettings::preset(Fineness::Draft, 3);
    settings.cells_across = 3.0;
    let mesh = generate(&domain, &settings, &Watch::idle()).unwrap();
    let problem = Problem {
        fluid: Fluid {
            name: "air".into(),
            density_kg_m3: RHO,
            viscosity_pa_s: MU,
            conductivity_w_m_k: 0.026,
            heat_capacity_j_kg_k: 1006.0,
        },
        flow: vec![wall, outlet, FlowCondition::Wall {}, inlet],
        piece_thermal: vec![
            ThermalCondition::Convection {
                coefficient_w_m2_k: 15.0,
                ambient_k: 290.0,
            },
            ThermalCondition::Adiabatic {},
            ThermalCondition::FixedFlux { flux_w_m2: 30.0 },
            ThermalCondition::FixedTemperature {
                temperature_k: 300.0,
            },
        ],
        insert_thermal: vec![insert],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    let motion = Motion::new(&mesh).unwrap();
    let chain = ControlChain::new(&mesh, [&domain.inserts[0].contour]);
    Case {
        domain,
        mesh,
        discretisation,
        motion,
        chain,
    }
}

type Figure = fn(&State, &PeakScale) -> Measured;

impl Case {
    fn moved(&self, step: f64, start: Option<&[f64]>) -> State {
        let displacement = self
            .motion
            .extend(&self.chain.extend(&[self.direction(step)]));
        solve(
            &self.discretisation,
            self.mesh.moved(&displacement),
            start,
            &Watch::idle(),
        )
        .unwrap()
    }

    /// A fixed uneven direction, of a tenth of the insert's size at step one.
    fn direction(&self, step: f64) -> Vec<Vec2> {
        let n = self.domain.inserts[0].contour.len();
        (0..n)
            .map(|i| {
                let a = i as f64;
                vec2((1.3 * a).sin() + 0.4, (0.7 * a + 1.0).cos()) * (2e-4 * step)
            })
            .collect()
    }

    /// Taylor remainders' order and relative difference to central differences.
    fn check(&self, name: &str, figure: Figure, flaw: f64) {
        let base = self.moved(0.0, None);
        let scale = PeakScale::new(&base);
        let f = figure(&base, &scale);
        let by_nodes = shape_gradient(&base, &f, &Watch::idle()).unwrap();
        let by_controls = self.chain.restrict(&self.motion.restrict(&by_nodes));
        let slope: f64 = by_controls[0]
            .iter()
            .zip(self.direction(1.0))
            .map(|(g, d)| g.dot(d))
            .sum::<f64>()
            * flaw;
        let at = |h: f64| figure(&self.moved(h, Some(&base.flow)), &scale).value;
        let steps = [0.125, 0.0625, 0.03125, 0.015625, 0.0078125];
        let remainders: Vec<f64> = steps
            .iter()
            .map(|&h| (at(h) - f.value - h * slope).abs())
            .collect();
        let orders: Vec<f64> = remainders
            .windows(2)
            .map(|r| (r[0] / r[1]).log2())
            .collect();
        let difference = (8.0 * (at(0.01) - at(-0.01)) - (at(0.02) - at(-0.02))) / (12.0 * 0.01);
        let relative = (slope / difference - 1.0).abs();
        println!(
            "{name}: value {:.6e} slope {slope:.6e} orders {orders:.3?} difference {relative:.1e}",
            f.value
        );
        assert!(
            (orders[3] - 2.0).abs() < 0.1,
            "{name}: remainder order {orders:?}"
        );
        assert!(relative < 1e-5, "{name}: central difference {relative:.2e}");
    }
}

fn hot() -> ThermalCondition {
    ThermalCondition::FixedTemperature {
        temperature_k: 340.0,
    }
}

const AIMS: [(&str, Figure); 6] = [
    ("heat", |s, _| figures::heat(s)),
    ("total pressure drop", |s, _| {
        figures::total_pressure_drop(s, &Ports::new(s))
    }),
    ("pumping power", |s, _| {
        figures::pumping_power(s, &Ports::new(s))
    }),
    ("heat per pumping power", |s, _| {
        figures::heat_per_pumping_power(s, &Ports::new(s))
    }),
    ("drag", |s, _| figures::drag(s, [1.0, 0.0])),
    ("flow rate", |s, _| Ports::new(s).flow_rate()),
];

#[test]
fn each_aim_behind_a_total_pressure_port() {
    let case = case(total_in(), static_out(), FlowCondition::Wall {}, hot());
    for (name, figure) in AIMS {
        case.check(name, figure, 1.0);
    }
    case.check("lift", |s, _| figures::drag(s, [0.0, 1.0]), 1.0);
    case.check(
        "static pressure drop",
        |s, _| figures::static_pressure_drop(s, &Ports::new(s)),
        1.0,
    );
}

#[test]
fn each_aim_at_given_flow_rate() {
    let case = case(flow_in(), static_out(), FlowCondition::Wall {}, hot());
    for (name, figure) in &AIMS[..5] {
        case.check(name, *figure, 1.0);
    }
}

#[test]
fn heat_and_drop_at_the_other_ports() {
    for (name, inlet, outlet, wall) in [
        ("static", static_in(), static_out(), FlowCondition::Wall {}),
        (
            "total both",
            total_in(),
            FlowCondition::TotalPressure { pressure_pa: 0.0 },
            FlowCondition::Wall {},
        ),
        (
            "symmetry",
            total_in(),
            static_out(),
            FlowCondition::Symmetry {},
        ),
    ] {
        let case = case(inlet, outlet, wall, hot());
        case.check(&format!("{name}: heat"), AIMS[0].1, 1.0);
        case.check(&format!("{name}: pumping"), AIMS[2].1, 1.0);
    }
}

#[test]
fn open_stream_with_given_velocity() {
    let stream = FlowCondition::Velocity {
        velocity_m_s: [0.1, 0.0],
    };
    let mut case = case(
        stream.clone(),
        static_out(),
        FlowCondition::Symmetry {},
        hot(),
    );
    let mut problem = case.discretisation.problem.clone();
    problem.flow[2] = FlowCondition::Symmetry {};
    case.discretisation = Arc::new(Discretisation::new(&case.mesh, problem).unwrap());
    case.check("open stream: drag", AIMS[4].1, 1.0);
    case.check("open stream: heat", AIMS[0].1, 1.0);
}

#[test]
fn peak_temperature_and_heat_of_each_thermal_kind() {
    for (name, insert) in [
        ("flux", ThermalCondition::FixedFlux { flux_w_m2: 400.0 }),
        (
            "convection",
            ThermalCondition::Convection {
                coefficient_w_m2_k: 40.0,
                ambient_k: 350.0,
            },
        ),
        (
            "solid",
            ThermalCondition::Solid {
                conductivity_w_m_k: 0.5,
                source_w_m3: 4e5,
            },
        ),
    ] {
        let case = case(total_in(), static_out(), FlowCondition::Wall {}, insert);
        case.check(&format!("{name}: peak"), figures::peak_temperature, 1.0);
        case.check(&format!("{name}: heat"), AIMS[0].1, 1.0);
    }
}

#[test]
#[should_panic(expected = "remainder order")]
fn the_check_sees_a_gradient_wrong_by_a_thousandth() {
    case(total_in(), static_out(), FlowCondition::Wall {}, hot()).check("flawed", AIMS[0].1, 1.001);
}
