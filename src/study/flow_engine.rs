//! The engine: checks, mesh, flow, heat, figures, pictures; and the improvement of free inserts.

use super::picture::{Names, picture};
use super::shape_limits::ShapeLimits;
use super::shape_problem::{ShapeProblem, state_limit_lines};
use super::{
    Accuracy, Balance, Case, Design, Engine, Failure, Improved, InsertReport, LimitReport, Seconds,
    SolveReport, Solved, StepRecord, StopReason,
};
use crate::base::{Vec2, Watch};
use crate::geometry::{ClosedSpline, Domain, InsertMeasures, insert_measures};
use crate::mesh::{CurvedMesh, Fineness, MeshError, MeshSettings, generate};
use crate::optimise::{self, Problem as _, Record, Refusal, Stop};
use crate::physics::figures::PeakScale;
use crate::physics::solve::{solve_flow, solve_heat};
use crate::physics::transfer::carried;
use crate::physics::validity::{InsertExtent, cautions};
use crate::physics::{Discretisation, PhysicsError, Problem, Quantities, State, hints};
use std::sync::Arc;
use std::time::Instant;

/// A limit missed by less than this part of its bound is met: equalities are restored to about 1e-10.
const MET: f64 = 1e-8;

/// Step of the gradient check, in sizes: truncation of the five-point difference is then about 1e-9.
const CHECK_STEP: f64 = 2e-3;

/// The engine that computes.
#[derive(Default)]
pub struct FlowEngine {
    /// The state solved last: a near start for the next drawing.
    last: Option<State>,
}

impl FlowEngine {
    /// An engine that has solved nothing yet.
    pub fn new() -> Self {
        Self::default()
    }
}

/// The physics of a design.
pub(super) fn problem_of(design: &Design) -> Problem {
    Problem {
        fluid: design.fluid.clone(),
        flow: design.duct.iter().map(|p| p.flow.clone()).collect(),
        piece_thermal: design.duct.iter().map(|p| p.thermal.clone()).collect(),
        insert_thermal: design.inserts.iter().map(|i| i.thermal.clone()).collect(),
    }
}

/// The mesh of a case.
pub(super) fn mesh_of(
    case: &Case,
    domain: &Domain,
    problem: &Problem,
    watch: &Watch,
) -> Result<CurvedMesh, MeshError> {
    let fineness = match case.run.accuracy {
        Accuracy::Draft => Fineness::Draft,
        Accuracy::Design => Fineness::Design,
        Accuracy::Final => Fineness::Final,
    };
    let mut settings = MeshSettings::preset(fineness, case.run.order);
    settings.most_triangles = case.run.most_triangles;
    settings.jumps = hints::thermal_jumps(problem, &domain.outline);
    generate(domain, &settings, watch)
}

/// The checked domain of a case.
fn domain_of(case: &Case) -> Result<Domain, Failure> {
    let bad = |sentences: Vec<String>, places_m| Failure::BadInput {
        sentence: sentences.join("; "),
        places_m,
    };
    let mut faults = case.design.faults();
    faults.extend(case.run.faults());
    if !faults.is_empty() {
        let places = faults.iter().filter_map(|f| f.place_m).collect();
        return Err(bad(
            faults.iter().map(ToString::to_string).collect(),
            places,
        ));
    }
    Ok(case.design.sketch())
}

fn from_mesh(error: MeshError) -> Failure {
    match error {
        MeshError::Cancelled(_) => Failure::Stopped,
        MeshError::Budget { .. } => Failure::BadInput {
            sentence: error.to_string(),
            places_m: vec![],
        },
        MeshError::Crossing { place } | MeshError::Inverted { place } => Failure::BadInput {
            sentence: error.to_string(),
            places_m: vec![place],
        },
        MeshError::Empty => Failure::BadInput {
            sentence: error.to_string(),
            places_m: vec![],
        },
    }
}

fn from_physics(error: PhysicsError) -> Failure {
    match error {
        PhysicsError::Cancelled(_) => Failure::Stopped,
        other => Failure::NotConverged {
            sentence: other.to_string(),
            best: None,
        },
    }
}

fn from_refusal(refusal: Refusal) -> Failure {
    match refusal {
        Refusal::Cancelled(_) => Failure::Stopped,
        Refusal::TooFar(sentence) => Failure::NotConverged {
            sentence,
            best: None,
        },
    }
}

impl FlowEngine {
    /// Solve from rest (`near` none) or from a near state.
    fn solved(
        case: &Case,
        near: Option<&State>,
        watch: &Watch,
    ) -> Result<(Solved, State), Failure> {
        let begin = Instant::now();
        let mut seconds = Seconds::default();
        watch.tell("geometry", 0.0);
        let domain = domain_of(case)?;
        seconds.geometry = begin.elapsed().as_secs_f64();
        let since = Instant::now();
        watch.tell("mesh", 0.1);
        let problem = problem_of(&case.design);
        let mesh = mesh_of(case, &domain, &problem, watch).map_err(from_mesh)?;
        seconds.mesh = since.elapsed().as_secs_f64();
        let since = Instant::now();
        watch.tell("flow and heat", 0.2);
        let discretisation = Arc::new(Discretisation::new(&mesh, problem).map_err(from_physics)?);
        let start = near.and_then(|near| carried(near, &discretisation, &mesh));
        let (flow, steps) =
            solve_flow(&discretisation, &mesh, start.as_deref(), watch).map_err(from_physics)?;
        seconds.flow = since.elapsed().as_secs_f64();
        let since = Instant::now();
        let state = solve_heat(&discretisation, mesh, flow, steps, watch).map_err(from_physics)?;
        seconds.heat = since.elapsed().as_secs_f64();
        let since = Instant::now();
        watch.tell("figures", 0.9);
        let solved = describe(case, &domain, &state, seconds, begin, since);
        Ok((solved, state))
    }
}

/// Everything that is reported of a state.
fn describe(
    case: &Case,
    domain: &Domain,
    state: &State,
    mut seconds: Seconds,
    begin: Instant,
    since: Instant,
) -> Solved {
    let figures = Quantities::new(state);
    let measures: Vec<InsertMeasures> = (0..domain.inserts.len())
        .map(|i| insert_measures(domain, i))
        .collect();
    let names = Names {
        pieces: case.design.duct.iter().map(|p| p.name.clone()).collect(),
        inserts: case.design.inserts.iter().map(|i| i.name.clone()).collect(),
    };
    let snapshot = Arc::new(picture(state, &figures, &names));
    let aim_value = case.design.aim.measure(state, &PeakScale::new(state)).value;
    let limits = limit_lines(case, domain, state);
    let mut report = report(case, domain, state, &figures, &measures);
    seconds.figures = since.elapsed().as_secs_f64();
    seconds.total = begin.elapsed().as_secs_f64();
    report.seconds = seconds;
    Solved {
        case: case.clone(),
        report,
        limits,
        aim_value,
        snapshot,
    }
}

fn limit_lines(case: &Case, domain: &Domain, state: &State) -> Vec<LimitReport> {
    let contours: Vec<ClosedSpline> = domain.inserts.iter().map(|i| i.contour.clone()).collect();
    let counts: Vec<usize> = contours.iter().map(ClosedSpline::len).collect();
    let limits = ShapeLimits::new(&case.design, &domain.outline, &counts, 1.0);
    let mut lines = limits.reports(&contours);
    lines.extend(state_limit_lines(case, state));
    lines
}

fn report(
    case: &Case,
    domain: &Domain,
    state: &State,
    q: &Quantities,
    measures: &[InsertMeasures],
) -> SolveReport {
    let exact = domain.outline.area()
        - domain
            .inserts
            .iter()
            .filter(|i| !i.solid)
            .map(|i| i.contour.area())
            .sum::<f64>();
    let area_relative = q.mesh_area_m2 / exact - 1.0;
    // Across the flow: the direction of the first inlet's width.
    let across = q.inlets.first().map_or(Vec2 { x: 0.0, y: 1.0 }, |&tag| {
        (domain.point(tag, 1.0) - domain.point(tag, 0.0)).normalized()
    });
    let extents: Vec<InsertExtent> = domain
        .inserts
        .iter()
        .zip(measures)
        .map(|(insert, m)| {
            let along = insert.contour.samples(8).into_iter().map(|p| p.dot(across));
            let (low, high) = along.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), s| {
                (l.min(s), h.max(s))
            });
            InsertExtent {
                name: insert.name.clone(),
                centroid_m: m.centroid_m,
                across_m: high - low,
                perimeter_m: m.perimeter_m,
            }
        })
        .collect();
    let problem = &state.discretisation.problem;
    let mut list = cautions(problem, q, &extents, area_relative);
    list.extend(case.design.input_cautions());
    list.sort_by_key(|c| std::cmp::Reverse(c.level));
    SolveReport {
        triangles: state.mesh.mesh.triangles.len(),
        unknowns: state.discretisation.flow.layout.condensed(),
        newton_steps: state.newton_steps,
        seconds: Seconds::default(),
        flow_rate_m2_s: q.flow_rate_m2_s,
        mean_velocity_m_s: q.mean_velocity_m_s,
        reynolds: q.reynolds,
        static_pressure_drop_pa: q.static_pressure_drop_pa,
        total_pressure_drop_pa: q.total_pressure_drop_pa,
        pumping_power_w_m: q.pumping_power_w_m,
        heat_w_m: q.heat_w_m,
        wall_heat_w_m: q.piece_heat_w_m.iter().sum(),
        outlet_bulk_temperature_k: q.outlet_bulk_temperature_k,
        max_speed_m_s: q.max_speed_m_s,
        max_temperature_k: q.temperature_range_k[1],
        inserts: case
            .design
            .inserts
            .iter()
            .zip(&q.inserts)
            .zip(measures)
            .map(|((insert, f), m)| InsertReport {
                name: insert.name.clone(),
                heat_w_m: f.heat_w_m,
                drag_n_m: f.drag_n_m,
                lift_n_m: f.lift_n_m,
                max_temperature_k: f.max_temperature_k,
                mean_temperature_k: f.mean_temperature_k,
                area_m2: m.area_m2,
                perimeter_m: m.perimeter_m,
                min_gap_m: m.min_gap_m.0,
                min_radius_m: m.min_radius_m.0,
                min_thickness_m: m.min_thickness_m.0,
            })
            .collect(),
        balance: Balance {
            mass_relative: q.mass_relative,
            heat_relative: q.heat_relative,
            energy_relative: q.energy_relative,
            area_relative,
        },
        cautions: list,
    }
}

impl Engine for FlowEngine {
    fn solve(&mut self, case: &Case, watch: &Watch) -> Result<Solved, Failure> {
        let (solved, state) = Self::solved(case, self.last.as_ref(), watch)?;
        self.last = Some(state);
        Ok(solved)
    }

    fn improve(
        &mut self,
        case: &Case,
        watch: &Watch,
        progress: &mut dyn FnMut(StepRecord),
    ) -> Result<Improved, Failure> {
        let faults = case.design.improve_faults();
        if !faults.is_empty() {
            let sentence = faults
                .iter()
                .map(ToString::to_string)
                .collect::<Vec<_>>()
                .join("; ");
            return Err(Failure::BadInput {
                sentence,
                places_m: vec![],
            });
        }
        let domain = domain_of(case)?;
        let (start, _) = Self::solved(case, None, watch)?;
        let mut problem = ShapeProblem::new(case, domain, watch).map_err(from_refusal)?;
        let gradient_check = gradient_difference(&mut problem, watch).map_err(from_refusal)?;
        let mut history: Vec<StepRecord> = Vec::new();
        let settings = optimise::Settings {
            iterations: case.run.steps,
            ..Default::default()
        };
        let x = problem.variables();
        let outcome = optimise::minimise(
            &mut problem,
            &x,
            &settings,
            watch,
            &mut |problem, record| {
                let step = step_record(problem, record);
                history.push(step.clone());
                progress(step);
            },
        );
        let outcome = match outcome {
            Ok(outcome) => outcome,
            Err(refusal) => return Err(from_refusal(refusal)),
        };
        let best_case = problem.case_at(&problem.contours_at(&outcome.x));
        // A stopped run answers at once with the state it had; otherwise the best shape is confirmed on a mesh of its
        // own, from rest, as the start was.
        let known = watch
            .is_stopped()
            .then(|| recorded(&history, &best_case))
            .flatten();
        let best = match known {
            Some(best) => best,
            None => {
                let calm = if watch.is_stopped() {
                    Watch::idle()
                } else {
                    watch.clone()
                };
                let (best, state) = Self::solved(&best_case, None, &calm)?;
                self.last = Some(state);
                best
            }
        };
        let (stop, stop_sentence) = stop_words(&outcome.stop, &problem, &best.limits);
        Ok(Improved {
            start,
            best,
            history,
            steps: outcome.steps,
            evaluations: outcome.evaluations,
            stop,
            stop_sentence,
            gradient_check,
        })
    }
}

/// The recorded state of a case, if one of the iterations stood there.
fn recorded(history: &[StepRecord], case: &Case) -> Option<Solved> {
    let here = |r: &&StepRecord| {
        r.accepted
            && r.inserts_m
                .iter()
                .zip(&case.design.inserts)
                .all(|(p, i)| *p == i.points_m)
    };
    let record = history.iter().rev().find(here)?;
    Some(Solved {
        case: case.clone(),
        report: (**record.report.as_ref()?).clone(),
        limits: record.limits.clone(),
        aim_value: record.aim_value,
        snapshot: record.snapshot.clone()?,
    })
}

/// Gradient of the aim along its own direction against central differences.
fn gradient_difference(problem: &mut ShapeProblem, watch: &Watch) -> Result<f64, Refusal> {
    let x = problem.variables();
    problem.evaluate(&x, watch)?;
    let gradient = problem.gradients(watch)?.objective;
    let longest = gradient
        .iter()
        .fold(0.0, |m: f64, g| m.max(g.abs()))
        .max(f64::MIN_POSITIVE);
    let direction: Vec<f64> = gradient.iter().map(|g| g / longest).collect();
    optimise::gradient_check::relative_difference(problem, &x, &direction, CHECK_STEP, watch)
}

fn step_record(problem: &ShapeProblem, record: &Record) -> StepRecord {
    let contours = problem.contours_at(&record.x);
    let case = problem.case_at(&contours);
    let domain = case.design.sketch();
    let now = Instant::now();
    let described = record.accepted.then(|| {
        describe(
            &case,
            &domain,
            problem.state(),
            Seconds::default(),
            now,
            now,
        )
    });
    StepRecord {
        step: record.iteration,
        evaluations: record.evaluations,
        accepted: record.accepted,
        aim_value: problem.aim_of(record.objective),
        violation: record.violation,
        limits: described.as_ref().map_or(Vec::new(), |d| d.limits.clone()),
        inserts_m: contours.iter().map(|c| c.controls().to_vec()).collect(),
        step_length_m: record.step * problem.size_m(),
        trust_radius_m: record.reach * problem.size_m(),
        stationarity: record.stationarity,
        note: record.note.clone(),
        report: described.as_ref().map(|d| Arc::new(d.report.clone())),
        snapshot: described.map(|d| d.snapshot),
    }
}

fn stop_words(stop: &Stop, problem: &ShapeProblem, limits: &[LimitReport]) -> (StopReason, String) {
    let broken: Vec<&str> = limits
        .iter()
        .filter(|l| l.slack < -MET * l.bound.abs())
        .map(|l| l.name.as_str())
        .collect();
    let unmet = if broken.is_empty() {
        String::new()
    } else {
        format!(" Not met by the best shape found: {}.", broken.join(", "))
    };
    let (reason, sentence) = match stop {
        Stop::Converged => (
            StopReason::Converged,
            "Nothing left to gain near this shape within its limits.".into(),
        ),
        Stop::IterationLimit => (
            StopReason::StepLimit,
            "The step limit was reached; more steps may gain more.".into(),
        ),
        Stop::NoFurtherStep => (
            StopReason::NoFurtherStep,
            "No shorter step gained anything more: the shape is as good as this mesh can tell."
                .into(),
        ),
        Stop::Inconsistent(limits) => (
            StopReason::LimitsInconsistent,
            format!(
                "These limits cannot all be met near the start: {}; relax one of them.",
                problem.limit_names(limits)
            ),
        ),
        Stop::Cancelled => (
            StopReason::StoppedByUser,
            "Stopped by the user; the best shape so far is kept.".into(),
        ),
    };
    (reason, format!("{sentence}{unmet}"))
}
