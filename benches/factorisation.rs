//! The engine's own Newton matrices: our multifrontal LU beside the general sparse LU of the library `faer`, one thread.
//!
//! `cargo bench --bench factorisation`; with `-- --write DIR` the matrices are written as plain triplet lists (size,
//! nonzeros, then row, column, value), for the script that sets a vendor's solver beside them.

#[path = "../tests/common/mod.rs"]
mod common;

use flumeloft::base::Watch;
use flumeloft::fem::newton::Nonlinear;
use flumeloft::linalg::multifrontal::{Multifrontal, MultifrontalFactor};
use flumeloft::linalg::{Direct, Factor, Sparse, Symbolic};
use flumeloft::mesh::{Fineness, MeshSettings, generate};
use flumeloft::physics::flow_assembly::FlowOn;
use flumeloft::physics::solve::solve_flow;
use flumeloft::physics::{Discretisation, FlowCondition, Fluid, Problem, ThermalCondition};
use std::io::Write;
use std::time::Instant;

/// Median of nine, s.
fn median<T>(mut work: impl FnMut() -> T) -> f64 {
    let mut times: Vec<f64> = (0..9)
        .map(|_| {
            let since = Instant::now();
            std::hint::black_box(work());
            since.elapsed().as_secs_f64()
        })
        .collect();
    times.sort_by(f64::total_cmp);
    times[4]
}

/// Newton matrix of the cylinder benchmark (Re 20) at its solution.
fn discretisation(
    order: usize,
    factor: f64,
) -> Option<(Discretisation, flumeloft::mesh::CurvedMesh)> {
    let domain = common::benchmark_channel();
    let mut settings = MeshSettings::preset(Fineness::Design, order);
    settings.most_triangles = 200_000;
    settings.cells_across /= factor;
    settings.cells_around /= factor;
    settings.turn_rad *= factor;
    let mesh = generate(&domain, &settings, &Watch::idle()).ok()?;
    let wall = FlowCondition::Wall {};
    let adiabatic = ThermalCondition::Adiabatic {};
    let problem = Problem {
        fluid: Fluid {
            name: "benchmark".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s: 1e-3,
            conductivity_w_m_k: 1e-3,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            wall.clone(),
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            wall,
            FlowCondition::FlowRate {
                flow_rate_m2_s: 0.2 * 0.41,
            },
        ],
        piece_thermal: vec![
            adiabatic.clone(),
            adiabatic.clone(),
            adiabatic.clone(),
            adiabatic,
        ],
        insert_thermal: vec![ThermalCondition::FixedTemperature { temperature_k: 1.0 }],
    };
    Some((Discretisation::new(&mesh, problem).ok()?, mesh))
}

fn residual(matrix: &Sparse, factor: &dyn Factor) -> f64 {
    let right: Vec<f64> = (0..matrix.pattern.size)
        .map(|i| (1.3 * i as f64).sin())
        .collect();
    let mut x = right.clone();
    factor.solve(&mut x);
    let ax = matrix.apply(&x);
    let largest = |v: &mut dyn Iterator<Item = f64>| v.fold(0.0, |m: f64, x| m.max(x.abs()));
    let worst = largest(&mut ax.iter().zip(&right).map(|(a, b)| a - b));
    let entry = largest(&mut matrix.values.iter().copied());
    worst / (entry * largest(&mut x.iter().copied()))
}

fn main() {
    let arguments: Vec<String> = std::env::args().collect();
    let write = arguments
        .iter()
        .position(|a| a == "--write")
        .map(|i| arguments[i + 1].clone());
    println!(
        "{:<9}{:>9}{:>10} | {:>9}{:>9}{:>9} {:>9} {:>6} {:>8} | {:>9}{:>9}{:>9} | {:>7}",
        "matrix",
        "unknowns",
        "nonzeros",
        "analyse",
        "factor",
        "solve",
        "Gflop",
        "small",
        "residual",
        "analyse",
        "factor",
        "solve",
        "ratio"
    );
    for (order, factor) in [(4, 2.2), (4, 0.83), (4, 0.36), (2, 2.9), (2, 1.6), (2, 1.0)] {
        let Some((d, mesh)) = discretisation(order, factor) else {
            println!("no mesh");
            continue;
        };
        let on = FlowOn {
            system: &d.flow,
            mesh: &mesh,
            inertia: 1.0,
        };
        let watch = Watch::idle();
        let Ok((x, _)) = solve_flow(&d, &mesh, None, &watch) else {
            continue;
        };
        let Ok((_, jacobian)) = on.linearise(&x, &watch) else {
            continue;
        };
        let Ok(matrix) = jacobian.skeleton(&watch) else {
            continue;
        };
        let layout = &d.flow.layout;
        if let Some(folder) = &write {
            let path = format!("{folder}/order{order}_{}.txt", matrix.pattern.size);
            if let Ok(mut file) = std::fs::File::create(path).map(std::io::BufWriter::new) {
                let _ = writeln!(file, "{} {}", matrix.pattern.size, matrix.values.len());
                for column in 0..matrix.pattern.size {
                    for k in matrix.pattern.column_starts[column]
                        ..matrix.pattern.column_starts[column + 1]
                    {
                        let _ = writeln!(
                            file,
                            "{} {} {:e}",
                            matrix.pattern.rows[k], column, matrix.values[k]
                        );
                    }
                }
            }
        }
        let ours = |m: &Sparse| Multifrontal::analyse(&m.pattern, layout.unknowns());
        let Ok(plan) = ours(&matrix) else { continue };
        let made: Result<MultifrontalFactor, _> = plan.factorise(&matrix);
        let Ok(made) = made else {
            println!("order {order}: singular");
            continue;
        };
        let mut right = vec![1.0; matrix.pattern.size];
        let times = [
            median(|| ours(&matrix)),
            median(|| plan.factorise(&matrix)),
            median(|| made.solve(&mut right)),
        ];
        let Ok(general) = Direct::analyse(&matrix.pattern) else {
            continue;
        };
        let Ok(other) = general.factor(&matrix) else {
            continue;
        };
        let theirs = [
            median(|| Direct::analyse(&matrix.pattern)),
            median(|| general.factor(&matrix)),
            median(|| other.solve(&mut right)),
        ];
        println!(
            "order {order}  {:>9}{:>10} | {:>9.4}{:>9.4}{:>9.4} {:>9.4} {:>6} {:>8.1e} | {:>9.4}{:>9.4}{:>9.4} | {:>7.3}",
            matrix.pattern.size,
            matrix.values.len(),
            times[0],
            times[1],
            times[2],
            plan.work() * 2e-9,
            made.replaced_pivots(),
            residual(&matrix, &made),
            theirs[0],
            theirs[1],
            theirs[2],
            times[1] / theirs[1]
        );
    }
}
