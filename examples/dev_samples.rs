//! dev
use flumeloft::base::*;
use flumeloft::geometry::duct::*;
use flumeloft::geometry::*;
use flumeloft::physics::*;
use flumeloft::study::*;
fn duct(t: Template, h: f64, inlet: FlowCondition, t_in: f64) -> Vec<DuctPiece> {
    t.pieces(h)
        .into_iter()
        .map(|p| {
            let (flow, thermal) = match p.role {
                Role::Wall => (FlowCondition::Wall {}, ThermalCondition::Adiabatic {}),
                Role::Symmetry => (FlowCondition::Symmetry {}, ThermalCondition::Adiabatic {}),
                Role::Inlet => (
                    inlet.clone(),
                    ThermalCondition::FixedTemperature {
                        temperature_k: t_in,
                    },
                ),
                Role::Outlet => (
                    FlowCondition::StaticPressure { pressure_pa: 0.0 },
                    ThermalCondition::Adiabatic {},
                ),
            };
            DuctPiece {
                name: p.name.into(),
                to_m: p.to,
                shape: p.shape,
                flow,
                thermal,
            }
        })
        .collect()
}
fn round(p: Vec<Vec2>) -> Vec<Vec2> {
    p.into_iter()
        .map(|p| vec2((p.x * 1e8).round() / 1e8, (p.y * 1e8).round() / 1e8))
        .collect()
}
fn insert(
    name: &str,
    s: Starter,
    c: Vec2,
    angle: f64,
    n: usize,
    thermal: ThermalCondition,
) -> Insert {
    Insert {
        name: name.into(),
        points_m: round(s.controls(c, angle, n)),
        frozen: false,
        thermal,
    }
}
fn save(name: &str, p: &Project) {
    p.save(std::path::Path::new(&format!(
        "sample_projects/{name}.json"
    )))
    .unwrap();
}
fn main() {
    let fluid = |n: &str, t: f64| {
        tables::fluids()
            .iter()
            .find(|f| f.name().to_lowercase().contains(n))
            .unwrap()
            .at(t)
            .unwrap()
    };
    let tube = insert(
        "tube",
        Starter::Circle { diameter_m: 0.004 },
        vec2(0.02, 0.005),
        0.0,
        20,
        ThermalCondition::FixedTemperature {
            temperature_k: 318.15,
        },
    );
    let area = ClosedSpline::new(tube.points_m.clone()).area();
    save("air_tube", &Project { version: 1, name: "Air-cooled tube".into(), notes: "A warm tube across a small fan-driven duct. The fan holds 50 mPa of total pressure at the inlet; the tube may change its cross-section but keeps its area, 1.5 mm to the walls, and radii and thickness that can be extruded.".into(),
        design: Design { fluid: fluid("air", 300.0), duct: duct(Template::Straight, 0.01, FlowCondition::TotalPressure { pressure_pa: 0.05 }, 298.15), inserts: vec![tube], aim: Aim::MostHeat {},
            limits: vec![Limit::Area { insert: None, equal_m2: Some(area), at_least_m2: None, at_most_m2: None }, Limit::WallGap { insert: None, at_least_m: 0.0015 }, Limit::CurvatureRadius { insert: None, at_least_m: 0.0004 }, Limit::Thickness { insert: None, at_least_m: 0.001 }, Limit::BoundingBox { insert: None, lower_left_m: vec2(0.014, 0.001), upper_right_m: vec2(0.027, 0.009) }] },
        run: RunSettings::default(), variants: vec![] });
    let pin = insert(
        "pin",
        Starter::Circle { diameter_m: 0.003 },
        vec2(0.016, 0.004),
        0.0,
        20,
        ThermalCondition::FixedFlux { flux_w_m2: 4000.0 },
    );
    let area = ClosedSpline::new(pin.points_m.clone()).area();
    save("water_pin", &Project { version: 1, name: "Water-cooled pin".into(), notes: "A pin with given heat flux in a water channel at given flow: less total pressure for the same cross-section.".into(),
        design: Design { fluid: fluid("water", 300.0), duct: duct(Template::Straight, 0.008, FlowCondition::FlowRate { flow_rate_m2_s: 4e-5 }, 298.15), inserts: vec![pin], aim: Aim::LeastTotalPressureLoss {},
            limits: vec![Limit::Area { insert: Some("pin".into()), equal_m2: Some(area), at_least_m2: None, at_most_m2: None }, Limit::WallGap { insert: None, at_least_m: 0.001 }, Limit::CurvatureRadius { insert: None, at_least_m: 0.0003 }] },
        run: RunSettings::default(), variants: vec![] });
    let place = Template::Bend.insert_place(0.01);
    let vane = insert(
        "vane",
        Starter::Vane {
            length_m: 0.009,
            height_m: 0.0016,
            camber_m: 0.0012,
        },
        place,
        45f64.to_radians(),
        24,
        ThermalCondition::FixedTemperature {
            temperature_k: 318.15,
        },
    );
    save("oil_bend_vane", &Project { version: 1, name: "Vane in an oil bend".into(), notes: "A heated vane that turns oil round a bend: least pumping power, with no less than the heat that the process needs.".into(),
        design: Design { fluid: Fluid { name: "light oil, Pr 120".into(), density_kg_m3: 865.0, viscosity_pa_s: 8.5e-3, conductivity_w_m_k: 0.137, heat_capacity_j_kg_k: 1950.0 }, duct: duct(Template::Bend, 0.01, FlowCondition::FlowRate { flow_rate_m2_s: 2e-4 }, 308.15), inserts: vec![vane], aim: Aim::LeastPumpingPower {},
            limits: vec![Limit::Heat { at_least_w_m: 80.0 }, Limit::Thickness { insert: None, at_least_m: 0.0012 }, Limit::CurvatureRadius { insert: None, at_least_m: 0.0004 }, Limit::WallGap { insert: None, at_least_m: 0.0015 }, Limit::Perimeter { insert: None, at_least_m: Some(0.017), at_most_m: Some(0.026) }] },
        run: RunSettings::default(), variants: vec![] });
    let rods: Vec<Insert> = [(0.9, 0.33), (1.5, 0.67)]
        .iter()
        .enumerate()
        .map(|(i, (x, y))| {
            insert(
                &format!("rod {}", i + 1),
                Starter::Circle { diameter_m: 0.004 },
                vec2(x * 0.03, y * 0.03),
                0.0,
                16,
                ThermalCondition::Solid {
                    conductivity_w_m_k: 15.0,
                    source_w_m3: 4e5,
                },
            )
        })
        .collect();
    save("open_stream_rods", &Project { version: 1, name: "Rods in an open air stream".into(), notes: "Two staggered rods with a heat source, meshed inside, in a uniform stream between symmetry planes.".into(),
        design: Design { fluid: fluid("air", 300.0), duct: duct(Template::OpenStream, 0.03, FlowCondition::Velocity { velocity_m_s: [0.12, 0.0] }, 298.15), inserts: rods, aim: Aim::LeastPeakTemperature {},
            limits: vec![Limit::Area { insert: None, equal_m2: Some(1.25e-5), at_least_m2: None, at_most_m2: None }, Limit::CurvatureRadius { insert: None, at_least_m: 0.0004 }, Limit::Thickness { insert: None, at_least_m: 0.001 }, Limit::InsertGap { at_least_m: 0.002 }, Limit::WallGap { insert: None, at_least_m: 0.003 }, Limit::Centroid { insert: "rod 1".into(), at_m: vec2(0.027, 0.0099) }, Limit::Centroid { insert: "rod 2".into(), at_m: vec2(0.045, 0.0201) }] },
        run: RunSettings { accuracy: Accuracy::Draft, steps: 20, ..RunSettings::default() }, variants: vec![] });
}
