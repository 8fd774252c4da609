//! dev
use flumeloft::base::*;
use flumeloft::fem::newton::*;
use flumeloft::mesh::*;
use flumeloft::physics::flow_assembly::FlowOn;
use flumeloft::physics::*;
use flumeloft::study::*;
use std::sync::Arc;
use std::time::Instant;
fn main() {
    let p = Project::from_json(include_str!("../sample_projects/air_tube.json")).unwrap();
    let d = p.design.sketch();
    let problem = Problem {
        fluid: p.design.fluid.clone(),
        flow: p.design.duct.iter().map(|q| q.flow.clone()).collect(),
        piece_thermal: p.design.duct.iter().map(|q| q.thermal.clone()).collect(),
        insert_thermal: p.design.inserts.iter().map(|q| q.thermal.clone()).collect(),
    };
    let t = Instant::now();
    let mesh = generate(
        &d,
        &MeshSettings::preset(Fineness::Design, 4),
        &Watch::idle(),
    )
    .unwrap();
    println!(
        "mesh {:.4} {}",
        t.elapsed().as_secs_f64(),
        mesh.mesh.triangles.len()
    );
    let t = Instant::now();
    let disc = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    println!("disc {:.4}", t.elapsed().as_secs_f64());
    let t = Instant::now();
    let (x, n) = physics_solve(&disc, &mesh);
    println!("flow {:.4} {n}", t.elapsed().as_secs_f64());
    let on = FlowOn {
        system: &disc.flow,
        mesh: &mesh,
        inertia: 1.0,
    };
    for _ in 0..3 {
        let t = Instant::now();
        let _r = on.residual(&x);
        println!("residual {:.4}", t.elapsed().as_secs_f64());
        let t = Instant::now();
        let (_r, l) = on.linearise(&x, &Watch::idle()).unwrap();
        println!("linearise {:.4}", t.elapsed().as_secs_f64());
        let m = l.matrices.clone();
        let t = Instant::now();
        let l2 = flumeloft::fem::Linearised::new(&disc.flow.layout, m, &Watch::idle()).unwrap();
        println!("  condense+factor {:.4}", t.elapsed().as_secs_f64());
        let t = Instant::now();
        let _ = l2.solve(&x);
        println!("solve {:.4}", t.elapsed().as_secs_f64());
    }
    let state = flumeloft::physics::solve(&disc, mesh.clone(), Some(&x), &Watch::idle()).unwrap();
    state.flow_jacobian(&Watch::idle()).unwrap();
    let h = flumeloft::physics::figures::heat(&state);
    let t = Instant::now();
    let g = flumeloft::sensitivity::shape_gradient(&state, &h, &Watch::idle()).unwrap();
    println!("gradient {:.4} {}", t.elapsed().as_secs_f64(), g.len());
    let t = Instant::now();
    let m = Motion::new(&mesh).unwrap();
    println!("motion {:.4}", t.elapsed().as_secs_f64());
    let _ = m;
    let t = Instant::now();
    let _ = mesh.first_invalid();
    println!("valid {:.4}", t.elapsed().as_secs_f64());
    let t = Instant::now();
    let _ = Quantities::new(&state);
    println!("quantities {:.4}", t.elapsed().as_secs_f64());
    let t = Instant::now();
    let _ = flumeloft::physics::transfer::carried(&state, &disc, &mesh);
    println!("carry {:.4}", t.elapsed().as_secs_f64());
}
fn physics_solve(d: &Discretisation, m: &CurvedMesh) -> (Vec<f64>, usize) {
    flumeloft::physics::solve::solve_flow(d, m, None, &Watch::idle()).unwrap()
}
