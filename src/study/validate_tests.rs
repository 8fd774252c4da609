//! Each fault of the input is told, and only then.

use super::test_design::{channel_with_tube, project};
use super::{Aim, Design, Limit};
use crate::base::vec2;
use crate::geometry::PieceShape;
use crate::physics::{FlowCondition, ThermalCondition};

/// Sentences of the faults of the test design after a change.
fn after(change: impl FnOnce(&mut Design)) -> Vec<String> {
    let mut design = channel_with_tube();
    change(&mut design);
    design.faults().iter().map(ToString::to_string).collect()
}

#[track_caller]
fn only(faults: &[String], start: &str, inside: &str) {
    assert_eq!(faults.len(), 1, "{faults:?}");
    assert!(
        faults[0].starts_with(start) && faults[0].contains(inside),
        "{}",
        faults[0]
    );
}

const VELOCITY: FlowCondition = FlowCondition::Velocity {
    velocity_m_s: [0.1, 0.0],
};

fn rate(flow_rate_m2_s: f64) -> FlowCondition {
    FlowCondition::FlowRate { flow_rate_m2_s }
}

#[test]
fn the_test_design_has_no_fault() {
    assert!(project().faults().is_empty());
    assert!(project().improve_faults().is_empty());
    assert_eq!(project().bounding_limit_missing(), None);
    assert!(channel_with_tube().input_cautions().is_empty());
}

#[test]
fn properties_are_positive() {
    only(
        &after(|d| d.fluid.viscosity_pa_s = 0.0),
        "design.fluid.viscosity_pa_s: ",
        "greater than zero",
    );
    only(
        &after(|d| d.fluid.density_kg_m3 = f64::NAN),
        "design.fluid.density_kg_m3: ",
        "NaN",
    );
}

#[test]
fn names_are_there_and_differ() {
    only(
        &after(|d| d.duct[2].name = "floor".into()),
        "design.duct[2].name: ",
        "rename",
    );
    only(
        &after(|d| d.duct[2].name = " ".into()),
        "design.duct[2].name: ",
        "needs a name",
    );
}

#[test]
fn run_settings_have_ranges() {
    let mut project = project();
    project.run.order = 6;
    project.run.steps = 0;
    project.run.most_triangles = 0;
    let keys: Vec<String> = project.faults().into_iter().map(|f| f.key).collect();
    assert_eq!(keys, ["run.order", "run.most_triangles", "run.steps"]);
}

#[test]
fn a_flow_needs_two_ports_and_a_pressure() {
    let walls = |d: &mut Design, pieces: &[usize]| {
        for &i in pieces {
            d.duct[i].flow = FlowCondition::Wall {};
        }
    };
    only(
        &after(|d| walls(d, &[1, 3])),
        "design.duct: ",
        "no piece is a port",
    );
    only(&after(|d| walls(d, &[1])), "design.duct: ", "only port");
    let rates = |inlet, outlet| {
        after(|d| {
            d.duct[3].flow = rate(inlet);
            d.duct[1].flow = rate(outlet);
        })
    };
    only(&rates(1e-3, -1e-3), "design.duct: ", "undefined: make");
    only(
        &rates(1e-3, -9e-4),
        "design.duct: ",
        "0.000100 m^2/s more comes in",
    );
    assert!(after(|d| d.duct[3].flow = rate(1e-3)).is_empty());
}

#[test]
fn velocities_do_not_jump() {
    let faults = after(|d| d.duct[3].flow = VELOCITY);
    assert_eq!(faults.len(), 2, "{faults:?}");
    assert!(
        faults
            .iter()
            .all(|f| f.starts_with("design.duct[3].flow: ") && f.contains("stand still"))
    );
    let open = |sides: FlowCondition, inlet: FlowCondition| {
        after(|d| {
            d.duct[3].flow = inlet;
            for i in [0, 2] {
                d.duct[i].flow = sides.clone();
                d.duct[i].thermal = ThermalCondition::Adiabatic {};
            }
        })
    };
    assert!(open(FlowCondition::Symmetry {}, VELOCITY).is_empty());
    assert!(open(VELOCITY, VELOCITY).is_empty());
    let up = FlowCondition::Velocity {
        velocity_m_s: [0.1, 0.01],
    };
    assert!(
        open(FlowCondition::Symmetry {}, up.clone())
            .iter()
            .all(|f| f.contains("would cross"))
    );
    assert!(
        open(VELOCITY, up.clone())
            .iter()
            .any(|f| f.contains("another velocity"))
    );
    assert!(
        open(up.clone(), up)
            .iter()
            .any(|f| f.contains("square to that port"))
    );
    assert!(
        open(VELOCITY, rate(1e-3))
            .iter()
            .any(|f| f.contains("parabola is zero"))
    );
}

#[test]
fn fluid_that_comes_in_has_a_temperature() {
    let adiabatic =
        |i: usize| move |d: &mut Design| d.duct[i].thermal = ThermalCondition::Adiabatic {};
    only(
        &after(adiabatic(3)),
        "design.duct[3].thermal: ",
        "temperature must be given",
    );
    only(
        &after(|d| d.duct[1].thermal = ThermalCondition::FixedFlux { flux_w_m2: 1.0 }),
        "design.duct[1].thermal: ",
        "open to the fluid",
    );
    let solid = ThermalCondition::Solid {
        conductivity_w_m_k: 1.0,
        source_w_m3: 0.0,
    };
    only(
        &after(|d| d.duct[0].thermal = solid),
        "design.duct[0].thermal: ",
        "inserts only",
    );
}

#[test]
fn symmetry_planes_and_flow_rate_ports_are_straight() {
    let bent = |piece: usize, flow: FlowCondition| {
        after(|d| {
            d.duct[piece].flow = flow;
            d.duct[piece].shape = PieceShape::Arc {
                through_m: vec2(0.035, -0.002),
            };
        })
    };
    only(
        &bent(0, FlowCondition::Symmetry {}),
        "design.duct[0].shape: ",
        "must be straight",
    );
    assert!(bent(0, FlowCondition::Wall {}).is_empty());
}

#[test]
fn inserts_have_points() {
    only(
        &after(|d| d.inserts[0].points_m.truncate(3)),
        "design.inserts[0].points_m: ",
        "at least 4",
    );
    only(
        &after(|d| d.inserts[0].points_m[2].x = f64::INFINITY),
        "design.inserts[0].points_m[2]: ",
        "finite",
    );
}

#[test]
fn limits_name_what_there_is_and_can_be_met() {
    let limits = |limits: Vec<Limit>| after(|d| d.limits = limits);
    let area = |low: Option<f64>, high: Option<f64>| Limit::Area {
        insert: None,
        equal_m2: None,
        at_least_m2: low,
        at_most_m2: high,
    };
    let perimeter = |high: f64| Limit::Perimeter {
        insert: Some("tube".into()),
        at_least_m: None,
        at_most_m: Some(high),
    };
    let radius = |name: &str, at_least_m: f64| Limit::CurvatureRadius {
        insert: Some(name.into()),
        at_least_m,
    };
    only(
        &limits(vec![radius("pipe", 1e-3)]),
        "design.limits[0].insert: ",
        "no insert \"pipe\"",
    );
    only(
        &limits(vec![radius("tube", -1e-3)]),
        "design.limits[0].at_least_m: ",
        "greater than zero",
    );
    only(
        &limits(vec![area(None, None)]),
        "design.limits[0]: ",
        "bounds nothing",
    );
    let crossed = limits(vec![area(Some(2e-5), Some(1e-5))]);
    assert!(crossed[0].contains("cannot both hold"), "{crossed:?}");
    only(
        &limits(vec![area(Some(2e-5), None), area(None, Some(1e-5))]),
        "design.limits: ",
        "cannot be met together",
    );
    // A circle of 1e-5 m^2 has a perimeter of sqrt(4 pi 1e-5) = 11.21 mm and a radius of 1.784 mm.
    only(
        &limits(vec![area(Some(1e-5), None), perimeter(11.20e-3)]),
        "design.limits: ",
        "a circle",
    );
    assert!(limits(vec![area(Some(1e-5), None), perimeter(11.22e-3)]).is_empty());
    only(
        &limits(vec![area(None, Some(1e-5)), radius("tube", 1.79e-3)]),
        "design.limits: ",
        "radius of curvature",
    );
    assert!(limits(vec![area(None, Some(1e-5)), radius("tube", 1.78e-3)]).is_empty());
    let inside_out = Limit::BoundingBox {
        insert: None,
        lower_left_m: vec2(1.0, 0.0),
        upper_right_m: vec2(0.0, 1.0),
    };
    only(&limits(vec![inside_out]), "design.limits[0]: ", "no inside");
}

#[test]
fn an_improvement_that_would_not_end_is_told() {
    let mut project = project();
    project.design.limits = vec![Limit::WallGap {
        insert: None,
        at_least_m: 1e-3,
    }];
    assert!(
        project
            .bounding_limit_missing()
            .is_some_and(|s| s.contains("lengthening"))
    );
    project.design.aim = Aim::LeastDrag {};
    assert!(
        project
            .bounding_limit_missing()
            .is_some_and(|s| s.contains("shrinking away"))
    );
    project
        .design
        .limits
        .push(Limit::Heat { at_least_w_m: 1.0 });
    assert_eq!(project.bounding_limit_missing(), None);
    project.design.aim = Aim::LeastPeakTemperature {};
    project.design.inserts[0].frozen = true;
    assert_eq!(project.improve_faults().len(), 2);
}

#[test]
fn what_is_probably_not_meant_is_told() {
    let mut design = channel_with_tube();
    design.duct[3].flow = FlowCondition::TotalPressure { pressure_pa: 0.0 };
    design.duct[3].thermal = ThermalCondition::FixedTemperature {
        temperature_k: 20.0,
    };
    design.inserts[0].thermal = ThermalCondition::Adiabatic {};
    let texts: Vec<String> = design
        .input_cautions()
        .into_iter()
        .map(|c| c.text)
        .collect();
    assert_eq!(texts.len(), 3, "{texts:?}");
    assert!(
        texts[0].contains("same pressure")
            && texts[1].contains("-253")
            && texts[2].contains("no heat")
    );
}
