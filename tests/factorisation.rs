//! Our multifrontal LU against the general sparse LU of the library `faer` (the oracle), on the engine's own matrices.

mod common;

use flumeloft::base::{Watch, vec2};
use flumeloft::fem::Linearised;
use flumeloft::fem::newton::Nonlinear;
use flumeloft::geometry::{ClosedSpline, Domain, DomainInsert};
use flumeloft::linalg::multifrontal::Multifrontal;
use flumeloft::linalg::{Direct, Factor, LinalgError, Role, Sparse, Symbolic, Unknowns};
use flumeloft::mesh::{CurvedMesh, Fineness, MeshSettings, generate};
use flumeloft::physics::flow_assembly::FlowOn;
use flumeloft::physics::solve::solve_flow;
use flumeloft::physics::{Discretisation, FlowCondition, Fluid, Problem, ThermalCondition};
use proptest::prelude::*;

/// Flow past a pebble in a duct at a viscosity, with its mesh.
fn duct(
    order: usize,
    viscosity_pa_s: f64,
    waves: [f64; 2],
    solid: bool,
) -> (Discretisation, CurvedMesh) {
    let controls = (0..16)
        .map(|i| {
            let a = std::f64::consts::TAU * i as f64 / 16.0;
            let r = 0.15 * (1.0 + waves[0] * (2.0 * a).cos() + waves[1] * (3.0 * a).sin());
            vec2(0.8 + r * a.cos(), 0.5 + r * a.sin())
        })
        .collect();
    let domain = Domain {
        outline: common::rectangle(2.0, 1.0),
        inserts: vec![DomainInsert {
            name: "pebble".into(),
            contour: ClosedSpline::new(controls),
            solid,
            cell_size_m: None,
        }],
    };
    let settings = MeshSettings::preset(Fineness::Draft, order);
    let mesh = generate(&domain, &settings, &Watch::idle()).unwrap();
    let problem = Problem {
        fluid: Fluid {
            name: "test".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s,
            conductivity_w_m_k: viscosity_pa_s,
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
            ThermalCondition::Adiabatic {},
            ThermalCondition::Adiabatic {},
            ThermalCondition::Adiabatic {},
            ThermalCondition::FixedTemperature { temperature_k: 0.0 },
        ],
        insert_thermal: vec![if solid {
            ThermalCondition::Solid {
                conductivity_w_m_k: 1.0,
                source_w_m3: 1.0,
            }
        } else {
            ThermalCondition::FixedTemperature { temperature_k: 1.0 }
        }],
    };
    (Discretisation::new(&mesh, problem).unwrap(), mesh)
}

/// Newton matrix at the solution.
fn newton_matrix(d: &Discretisation, mesh: &CurvedMesh) -> Sparse {
    let on = FlowOn {
        system: &d.flow,
        mesh,
        inertia: 1.0,
    };
    let (x, _) = solve_flow(d, mesh, None, &Watch::idle()).unwrap();
    skeleton(&on.linearise(&x, &Watch::idle()).unwrap().1)
}

fn skeleton(jacobian: &Linearised) -> Sparse {
    jacobian.skeleton(&Watch::idle()).unwrap()
}

/// Residual of a solve over (largest entry x largest of the solution): the normwise backward error (Higham, Accuracy
/// and Stability of Numerical Algorithms, SIAM 2002, section 7.1). The worse of plain and transposed.
fn backward_error(matrix: &Sparse, factor: &dyn Factor) -> f64 {
    let right: Vec<f64> = (0..matrix.pattern.size)
        .map(|i| (1.3 * i as f64).sin())
        .collect();
    let most = |v: &[f64]| v.iter().fold(0.0, |m: f64, x| m.max(x.abs()));
    let (mut x, mut y) = (right.clone(), right.clone());
    factor.solve(&mut x);
    factor.solve_transposed(&mut y);
    [(matrix.apply(&x), x), (matrix.apply_transposed(&y), y)]
        .iter()
        .map(|(product, solution)| {
            let residual: Vec<f64> = product.iter().zip(&right).map(|(a, b)| a - b).collect();
            most(&residual) / (most(&matrix.values) * most(solution))
        })
        .fold(0.0, f64::max)
}

/// Largest difference of two solvers' solutions over the largest of the solution, plain and transposed.
fn difference(matrix: &Sparse, a: &dyn Factor, b: &dyn Factor) -> f64 {
    let right: Vec<f64> = (0..matrix.pattern.size)
        .map(|i| (0.7 * i as f64).cos())
        .collect();
    let most = |v: &[f64]| v.iter().fold(0.0, |m: f64, x| m.max(x.abs()));
    let solve = |f: &dyn Factor, transposed: bool| {
        let mut x = right.clone();
        if transposed {
            f.solve_transposed(&mut x)
        } else {
            f.solve(&mut x)
        };
        x
    };
    [false, true]
        .map(|t| {
            let (x, y) = (solve(a, t), solve(b, t));
            most(&x.iter().zip(&y).map(|(x, y)| x - y).collect::<Vec<_>>()) / most(&y)
        })
        .into_iter()
        .fold(0.0, f64::max)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 12, rng_seed: proptest::test_runner::RngSeed::Fixed(7), ..ProptestConfig::default() })]

    #[test]
    fn flow_matrices_of_random_ducts_are_solved_as_the_oracle_does(
        order in 2usize..=5,
        reynolds in prop::sample::select(vec![0.1, 1.0, 20.0, 100.0]),
        a in -0.25f64..0.25,
        b in -0.2f64..0.2,
    ) {
        let (d, mesh) = duct(order, 1.0 / reynolds, [a, b], false);
        let matrix = newton_matrix(&d, &mesh);
        let plan = Multifrontal::analyse(&matrix.pattern, d.flow.layout.unknowns()).unwrap();
        let ours = plan.factorise(&matrix).unwrap();
        prop_assert_eq!(ours.replaced_pivots(), 0);
        let error = backward_error(&matrix, &ours);
        prop_assert!(error < 1e-15, "backward error {error:.1e}");
        let oracle = Direct::analyse(&matrix.pattern).unwrap().factor(&matrix).unwrap();
        let apart = difference(&matrix, &ours, oracle.as_ref());
        prop_assert!(apart < 1e-9, "solutions differ by {apart:.1e}");
    }
}

#[test]
fn heat_with_a_solid_inside_is_solved_as_the_oracle_does() {
    let (d, mesh) = duct(4, 0.02, [0.1, 0.0], true);
    let state =
        flumeloft::physics::solve(&std::sync::Arc::new(d), mesh, None, &Watch::idle()).unwrap();
    let matrix = skeleton(&state.heat_jacobian);
    let layout = &state.discretisation.heat.layout;
    let plan = Multifrontal::analyse(&matrix.pattern, layout.unknowns()).unwrap();
    let ours = plan.factorise(&matrix).unwrap();
    assert!(backward_error(&matrix, &ours) < 1e-15);
    let oracle = Direct::analyse(&matrix.pattern)
        .unwrap()
        .factor(&matrix)
        .unwrap();
    assert!(difference(&matrix, &ours, oracle.as_ref()) < 1e-10);
}

/// The rule of the order: with each item a front of its own nothing but the order keeps pivots away from zero. Its flawed
/// twin forgets which rows are constraints.
#[test]
fn constraints_wait_for_what_fills_their_diagonal() {
    for order in [2, 3, 4] {
        let (d, mesh) = duct(order, 0.05, [0.1, 0.1], false);
        let matrix = newton_matrix(&d, &mesh);
        let unknowns = d.flow.layout.unknowns();
        let apart = Multifrontal::analyse_apart(&matrix.pattern, unknowns).unwrap();
        let sound = apart.factorise(&matrix).unwrap();
        assert_eq!(sound.replaced_pivots(), 0, "order {order}");
        assert!(backward_error(&matrix, &sound) < 1e-14);
        if order == 2 {
            let forgetful = Unknowns {
                role: vec![Role::Plain; unknowns.role.len()],
                ..unknowns.clone()
            };
            let apart = Multifrontal::analyse_apart(&matrix.pattern, &forgetful).unwrap();
            let unsound = apart
                .factorise(&matrix)
                .map_or(usize::MAX, |f| f.replaced_pivots());
            assert!(unsound > 0, "the twin must meet zero pivots");
        }
    }
}

#[test]
fn rows_and_columns_of_very_different_size_keep_their_accuracy() {
    let (d, mesh) = duct(3, 0.05, [0.2, 0.0], false);
    let matrix = newton_matrix(&d, &mesh);
    // Powers of two from 2^-10 to 2^10 on rows, others on columns: scaling without rounding.
    let power = |i: usize, by: usize| 2f64.powi((i * by % 21) as i32 - 10);
    let mut scaled = matrix.clone();
    for column in 0..matrix.pattern.size {
        for k in matrix.pattern.column_starts[column]..matrix.pattern.column_starts[column + 1] {
            scaled.values[k] *= power(matrix.pattern.rows[k], 5) * power(column, 8);
        }
    }
    let plan = Multifrontal::analyse(&matrix.pattern, d.flow.layout.unknowns()).unwrap();
    let factor = plan.factorise(&scaled).unwrap();
    let error = backward_error(&scaled, &factor);
    assert!(error < 1e-14, "backward error {error:.1e}");
}

#[test]
fn a_singular_system_is_told_and_a_nearly_singular_one_is_solved() {
    let (d, mesh) = duct(2, 0.05, [0.0, 0.0], false);
    let mut matrix = newton_matrix(&d, &mesh);
    let plan = Multifrontal::analyse(&matrix.pattern, d.flow.layout.unknowns()).unwrap();
    let row = matrix.pattern.size / 3;
    let sound = matrix.values.clone();
    for factor in [1e-8, 0.0] {
        matrix.values.copy_from_slice(&sound);
        for (k, &r) in matrix.pattern.rows.iter().enumerate() {
            if r == row {
                matrix.values[k] *= factor;
            }
        }
        match plan.factorise(&matrix) {
            Ok(made) if factor > 0.0 => assert!(backward_error(&matrix, &made) < 1e-14),
            Err(LinalgError::Singular { .. }) if factor == 0.0 => {}
            Ok(_) => panic!("a row of zeros passed as regular"),
            Err(other) => panic!("{other}"),
        }
    }
}

#[test]
fn equal_matrices_give_equal_factors_to_the_last_bit() {
    let (d, mesh) = duct(4, 0.05, [0.1, 0.1], false);
    let matrix = newton_matrix(&d, &mesh);
    let solve = || {
        let plan = Multifrontal::analyse(&matrix.pattern, d.flow.layout.unknowns()).unwrap();
        let mut x: Vec<f64> = (0..matrix.pattern.size).map(|i| i as f64).collect();
        plan.factorise(&matrix).unwrap().solve(&mut x);
        x
    };
    assert_eq!(solve(), solve());
}
