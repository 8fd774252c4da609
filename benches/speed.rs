//! Speed as ratios within one run; absolute figures are printed for two idle cores and asserted nowhere.
//!
//! `cargo bench`

use flumeloft::base::Watch;
use flumeloft::geometry::{check, insert_measures};
use flumeloft::study::{Accuracy, Engine, Project, flow_engine::FlowEngine};
use std::time::Instant;

/// Median of several runs, s.
fn median(runs: usize, mut work: impl FnMut()) -> f64 {
    let mut times: Vec<f64> = (0..runs)
        .map(|_| {
            let since = Instant::now();
            work();
            since.elapsed().as_secs_f64()
        })
        .collect();
    times.sort_by(f64::total_cmp);
    times[runs / 2]
}

fn main() {
    let text = include_str!("../sample_projects/air_tube.json");
    let Ok(project) = Project::from_json(text) else {
        return;
    };
    let case = project.case();
    let domain = case.design.sketch();
    let state = median(9, || {
        let _ = FlowEngine::new().solve(&case, &Watch::idle());
    });
    let mut draft = case.clone();
    draft.run.accuracy = Accuracy::Draft;
    let draft_state = median(9, || {
        let _ = FlowEngine::new().solve(&draft, &Watch::idle());
    });
    // A warm state: the same engine, the tube moved by a hundredth of a millimetre to and fro.
    let mut engine = FlowEngine::new();
    let _ = engine.solve(&case, &Watch::idle());
    let mut moved = project.clone();
    let mut sign = 1.0;
    let warm = median(9, || {
        for p in &mut moved.design.inserts[0].points_m {
            p.y += sign * 1e-5;
        }
        sign = -sign;
        let _ = engine.solve(&moved.case(), &Watch::idle());
    });
    let verdicts = median(99, || {
        std::hint::black_box(check(&domain));
    });
    let measures = median(99, || {
        std::hint::black_box(insert_measures(&domain, 0));
    });
    let mut short = case.clone();
    short.run.steps = 6;
    let since = Instant::now();
    let mut times = Vec::new();
    let _ = FlowEngine::new().improve(&short, &Watch::idle(), &mut |record| {
        if record.accepted {
            times.push(since.elapsed().as_secs_f64());
        }
    });
    let step = match (times.first(), times.last()) {
        (Some(first), Some(last)) if times.len() > 1 => (last - first) / (times.len() - 1) as f64,
        _ => f64::NAN,
    };
    println!("work                                       seconds   over a state from rest");
    for (name, time) in [
        ("state from rest, design mesh", state),
        ("state from rest, draft mesh", draft_state),
        ("state from a near one, design mesh", warm),
        ("design step (state, gradients, QP, mesh)", step),
        ("verdicts on the drawing", verdicts),
        ("measures of the insert", measures),
    ] {
        println!("{name:<42} {time:>8.5}   {:.4}", time / state);
    }
}
