//! Creeping flow past a cylinder midway between plates, and the drawn cylinder's pressure jump.
//!
//! Values: computed for tests/check_values (section 5), which agree with the series of Faxen (1946) to ten digits
//! at D/H = 0.1 (coefficients from memory).

mod common;

use flumeloft::base::{Watch, vec2};
use flumeloft::geometry::Domain;
use flumeloft::mesh::{Fineness, MeshSettings, generate};
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, Quantities, ThermalCondition, solve,
};
use std::sync::Arc;

/// Force over mu Umean on a fixed cylinder of diameter `ratio` in plates of unit gap.
fn force(ratio: f64) -> f64 {
    let domain = Domain {
        outline: common::rectangle(6.0 + ratio, 1.0),
        inserts: vec![common::circle(
            vec2(3.0 + 0.5 * ratio, 0.5),
            0.5 * ratio,
            64,
        )],
    };
    let mesh = generate(
        &domain,
        &MeshSettings::preset(Fineness::Design, 4),
        &Watch::idle(),
    )
    .unwrap();
    let adiabatic = ThermalCondition::Adiabatic {};
    let problem = Problem {
        fluid: Fluid {
            name: "creeping".into(),
            density_kg_m3: 1e-9,
            viscosity_pa_s: 1.0,
            conductivity_w_m_k: 1.0,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            FlowCondition::Wall {},
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            FlowCondition::Wall {},
            FlowCondition::FlowRate {
                flow_rate_m2_s: 1.0,
            },
        ],
        piece_thermal: vec![
            adiabatic.clone(),
            adiabatic.clone(),
            adiabatic,
            ThermalCondition::FixedTemperature { temperature_k: 0.0 },
        ],
        insert_thermal: vec![ThermalCondition::FixedTemperature { temperature_k: 1.0 }],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    let state = solve(&discretisation, mesh, None, &Watch::idle()).unwrap();
    Quantities::new(&state).inserts[0].drag_n_m
}

fn assert_force(ratio: f64, reference: f64) {
    let error = force(ratio) / reference - 1.0;
    println!("D/H {ratio}: off {error:+.1e}");
    assert!(error.abs() < 5e-4, "D/H {ratio}: off {error}");
}

#[test]
fn cylinder_between_plates() {
    for (ratio, reference) in [
        (0.1, 13.359041),
        (0.2, 24.310845),
        (0.3, 41.842687),
        (0.4, 72.722172),
        (0.5, 132.35745),
        (0.7, 604.29299),
    ] {
        assert_force(ratio, reference);
    }
}

#[test]
#[should_panic(expected = "D/H 0.3")]
fn the_band_sees_a_gap_wrong_by_a_thousandth() {
    assert_force(0.3, 41.842687 * 1.003);
}
