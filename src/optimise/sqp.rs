//! Trust-region sequential quadratic programming.
//!
//! Source: Nocedal and Wright, Numerical Optimization (Springer, 2006), chapter 18 (l1 merit for state-dependent
//! limits, elastic program); shape limits are restored exactly before each evaluation, so that the aim alone
//! decides about a step where no state-dependent limit is in play.

use super::curvature::CurvatureModel;
use super::problem::{Evaluation, Geometry, Gradients, Problem, Refusal};
use super::qp::{Program, Solution};
use super::record::{Outcome, Record, Stop};
use super::restore::restore;
use crate::base::Watch;
use crate::linalg::dense::axpy;
use nalgebra::DMatrix;

/// Settings, lengths in sizes of the shape.
#[derive(Clone, Debug, PartialEq)]
pub struct Settings {
    /// Most iterations.
    pub iterations: usize,
    /// First step of the model.
    pub first_step: f64,
    /// First trust region.
    pub first_reach: f64,
    /// Largest trust region: what a mesh can follow.
    pub largest_reach: f64,
    /// Smallest trust region before giving up.
    pub smallest_reach: f64,
    /// Predicted relative decrease below which nothing is left to gain.
    pub tolerance: f64,
    /// Violation of state-dependent limits that counts as met: a problem aims a little inside its limits, so that
    /// this much still leaves them met.
    pub feasible: f64,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            iterations: 60,
            first_step: 1.0 / 12.0,
            first_reach: 1.0 / 16.0,
            largest_reach: 0.2,
            smallest_reach: 2e-4,
            tolerance: 3e-5,
            feasible: 1.5e-4,
        }
    }
}

/// The point an optimisation stands at.
struct Point {
    x: Vec<f64>,
    value: Evaluation,
    slope: Gradients,
    geometry: Geometry,
}

struct Run<'a, P: Problem> {
    problem: &'a mut P,
    settings: &'a Settings,
    watch: &'a Watch,
    evaluations: usize,
    steps: usize,
    weight: f64,
    best: Option<(Vec<f64>, Evaluation)>,
}

/// Minimise from `start` (moved onto the shape limits first); records go to `tell`.
///
/// # Errors
/// [`Refusal`] when not even the start can be evaluated.
pub fn minimise<P: Problem>(
    problem: &mut P,
    start: &[f64],
    settings: &Settings,
    watch: &Watch,
    tell: &mut dyn FnMut(&P, &Record),
) -> Result<Outcome, Refusal> {
    let metric = problem.metric(start);
    let start = match restore(problem, &metric, start, settings.largest_reach) {
        Ok(x) => x,
        Err((_, geometry)) => {
            return Ok(Outcome {
                x: start.to_vec(),
                objective: f64::NAN,
                violation: f64::INFINITY,
                steps: 0,
                evaluations: 0,
                stop: Stop::Inconsistent(violated(&geometry)),
            });
        }
    };
    let mut run = Run {
        problem,
        settings,
        watch,
        evaluations: 0,
        steps: 0,
        weight: 0.0,
        best: None,
    };
    let first = run.point(start)?;
    run.remember(&first);
    let stop = run.iterate(first, tell);
    let (evaluations, steps) = (run.evaluations, run.steps);
    let Some((x, value)) = run.best else {
        return Err(Refusal::TooFar("the start could not be evaluated".into()));
    };
    Ok(Outcome {
        violation: violation(&value),
        objective: value.objective,
        x,
        steps,
        evaluations,
        stop,
    })
}

impl<P: Problem> Run<'_, P> {
    fn iterate(&mut self, mut now: Point, tell: &mut dyn FnMut(&P, &Record)) -> Stop {
        let settings = self.settings;
        let mut metric = self.problem.metric(&now.x);
        let mut model =
            CurvatureModel::from_metric(&metric, &now.slope.objective, settings.first_step);
        let mut reach = settings.first_reach;
        let mut fresh = true;
        let mut gain_since_fresh = 0.0;
        tell(
            self.problem,
            &self.record(0, &now, None, reach, f64::NAN, true, "start"),
        );
        for iteration in 1..=settings.iterations {
            let step = match self.program(&now, &model, reach) {
                Ok(step) => step,
                Err(stop) => return stop,
            };
            let predicted = self.predicted(&now, &model, &step.step);
            let stationarity = predicted / now.value.objective.abs().max(f64::MIN_POSITIVE);
            if stationarity < settings.tolerance && violation(&now.value) < settings.feasible {
                if fresh || gain_since_fresh < settings.tolerance {
                    tell(
                        self.problem,
                        &self.record(
                            iteration,
                            &now,
                            Some(&step),
                            reach,
                            stationarity,
                            false,
                            "nothing left to gain",
                        ),
                    );
                    return Stop::Converged;
                }
                // A small predicted step with an old matrix stops early: ask again with a fresh one.
                model =
                    CurvatureModel::from_metric(&metric, &now.slope.objective, settings.first_step);
                (fresh, gain_since_fresh, reach) = (true, 0.0, settings.first_reach);
                continue;
            }
            match self.try_step(&now, &model, &metric, &step, reach) {
                Ok(Trial::Accepted {
                    x,
                    value,
                    ratio,
                    length,
                }) => {
                    let gain = (now.value.objective - value.objective)
                        / now.value.objective.abs().max(f64::MIN_POSITIVE);
                    gain_since_fresh += gain.max(0.0);
                    fresh = false;
                    self.steps += 1;
                    let (next, changed) = match self.settle(x, value) {
                        Ok(next) => next,
                        Err(Refusal::Cancelled(_)) => return Stop::Cancelled,
                        Err(Refusal::TooFar(_)) => {
                            reach *= 0.5;
                            continue;
                        }
                    };
                    if changed {
                        metric = self.problem.metric(&next.x);
                        model = CurvatureModel::from_metric(
                            &metric,
                            &next.slope.objective,
                            settings.first_step,
                        );
                    } else {
                        learn(&mut model, &now, &next, &step);
                        metric = self.problem.metric(&next.x);
                    }
                    now = next;
                    self.remember(&now);
                    if ratio > GOOD && length > 0.7 * reach {
                        reach = (2.0 * reach).min(settings.largest_reach);
                    } else if ratio < POOR {
                        reach *= 0.5;
                    }
                    tell(
                        self.problem,
                        &self.record(
                            iteration,
                            &now,
                            Some(&step),
                            reach,
                            stationarity,
                            true,
                            "taken",
                        ),
                    );
                }
                Ok(Trial::Rejected(why)) => {
                    let length = longest(&step.step);
                    reach = 0.4 * length.min(reach);
                    tell(
                        self.problem,
                        &self.record(
                            iteration,
                            &now,
                            Some(&step),
                            reach,
                            stationarity,
                            false,
                            &why,
                        ),
                    );
                    if reach < settings.smallest_reach {
                        if fresh {
                            return Stop::NoFurtherStep;
                        }
                        model = CurvatureModel::from_metric(
                            &metric,
                            &now.slope.objective,
                            settings.first_step,
                        );
                        (fresh, gain_since_fresh, reach) = (true, 0.0, settings.first_reach);
                    }
                }
                Err(Refusal::Cancelled(_)) => return Stop::Cancelled,
                Err(Refusal::TooFar(_)) => reach *= 0.5,
            }
        }
        Stop::IterationLimit
    }

    /// min 1/2 d'Bd + f'd subject to the linearised limits within the trust region.
    fn program(
        &mut self,
        now: &Point,
        model: &CurvatureModel,
        reach: f64,
    ) -> Result<Solution, Stop> {
        let slope = longest(&now.slope.objective).max(f64::MIN_POSITIVE);
        self.weight = self.weight.max(WEIGHT * slope);
        loop {
            let program = Program {
                hessian: &model.matrix,
                gradient: &now.slope.objective,
                equalities: now
                    .geometry
                    .equalities
                    .iter()
                    .map(|r| (&r.gradient[..], r.value))
                    .collect(),
                inequalities: now
                    .geometry
                    .inequalities
                    .iter()
                    .map(|r| (&r.gradient[..], r.value))
                    .collect(),
                elastic: now
                    .slope
                    .limits
                    .iter()
                    .map(|g| &g[..])
                    .zip(now.value.limits.iter().copied())
                    .collect(),
                weight: self.weight,
                reach,
            };
            let solution = program.solve().map_err(|_| Stop::NoFurtherStep)?;
            // The price must exceed every multiplier, or the limit would not hold in the end.
            let needed = solution.elastic.iter().fold(0.0, |m: f64, &z| m.max(z));
            if needed > 0.9 * self.weight && self.weight < WEIGHT_LIMIT * slope {
                self.weight *= 10.0;
                continue;
            }
            return Ok(solution);
        }
    }

    fn merit(&self, value: &Evaluation) -> f64 {
        value.objective + self.weight * value.limits.iter().map(|c| c.max(0.0)).sum::<f64>()
    }

    /// Decrease of the merit that the model predicts along a step.
    fn predicted(&self, now: &Point, model: &CurvatureModel, step: &[f64]) -> f64 {
        let linear = dot(&now.slope.objective, step);
        let limits: f64 = now
            .value
            .limits
            .iter()
            .zip(&now.slope.limits)
            .map(|(c, g)| c.max(0.0) - (c + dot(g, step)).max(0.0))
            .sum();
        self.weight * limits - linear - 0.5 * model.quadratic(step)
    }

    /// Restore the shape limits, evaluate, compare.
    fn try_step(
        &mut self,
        now: &Point,
        model: &CurvatureModel,
        metric: &DMatrix<f64>,
        step: &Solution,
        reach: f64,
    ) -> Result<Trial, Refusal> {
        let target: Vec<f64> = now.x.iter().zip(&step.step).map(|(x, d)| x + d).collect();
        let Ok(x) = restore(self.problem, metric, &target, reach) else {
            return Ok(Trial::Rejected(
                "limits could not be met along the step".into(),
            ));
        };
        let taken: Vec<f64> = x.iter().zip(&now.x).map(|(a, b)| a - b).collect();
        if longest(&taken) > FARTHEST * reach {
            return Ok(Trial::Rejected("limits led too far from the step".into()));
        }
        self.evaluations += 1;
        let value = match self.problem.evaluate(&x, self.watch) {
            Ok(value) => value,
            Err(Refusal::TooFar(why)) => return Ok(Trial::Rejected(why)),
            Err(cancelled) => return Err(cancelled),
        };
        let (x, taken, value) = if violation(&value) > self.settings.feasible {
            self.corrected(now, model, metric, reach, (x, taken, value))?
        } else {
            (x, taken, value)
        };
        let length = longest(&taken);
        let predicted = self
            .predicted(now, model, &taken)
            .max(self.predicted(now, model, &step.step) * 1e-3);
        let actual = self.merit(&now.value) - self.merit(&value);
        let ratio = actual / predicted;
        if actual > 0.0 && ratio > LEAST {
            Ok(Trial::Accepted {
                x,
                value,
                ratio,
                length,
            })
        } else {
            Ok(Trial::Rejected("no gain".into()))
        }
    }

    /// Second-order correction (Nocedal and Wright, section 18.3): the program again with the limits' values of the
    /// trial in place of their linear prediction; kept when its merit is the better one.
    fn corrected(
        &mut self,
        now: &Point,
        model: &CurvatureModel,
        metric: &DMatrix<f64>,
        reach: f64,
        trial: Tried,
    ) -> Result<Tried, Refusal> {
        let (x, taken, value) = trial;
        let slopes = now.slope.limits.iter();
        let limits = value
            .limits
            .iter()
            .zip(slopes)
            .map(|(c, g)| c - dot(g, &taken))
            .collect();
        let shifted = Point {
            x: now.x.clone(),
            value: Evaluation {
                limits,
                ..now.value.clone()
            },
            slope: now.slope.clone(),
            geometry: now.geometry.clone(),
        };
        let Ok(step) = self.program(&shifted, model, reach) else {
            return Ok((x, taken, value));
        };
        let target: Vec<f64> = now.x.iter().zip(&step.step).map(|(x, d)| x + d).collect();
        let Ok(again) = restore(self.problem, metric, &target, reach) else {
            return Ok((x, taken, value));
        };
        self.evaluations += 1;
        match self.problem.evaluate(&again, self.watch) {
            Ok(second) if self.merit(&second) < self.merit(&value) => {
                let moved = again.iter().zip(&now.x).map(|(a, b)| a - b).collect();
                Ok((again, moved, second))
            }
            Err(Refusal::Cancelled(c)) => Err(c.into()),
            _ => {
                // Derivatives are taken at the point evaluated last: back to the first trial.
                let value = self.problem.evaluate(&x, self.watch)?;
                Ok((x, taken, value))
            }
        }
    }

    /// Evaluate and differentiate a point.
    fn point(&mut self, x: Vec<f64>) -> Result<Point, Refusal> {
        self.evaluations += 1;
        let value = self.problem.evaluate(&x, self.watch)?;
        self.complete(x, value)
    }

    fn complete(&mut self, x: Vec<f64>, value: Evaluation) -> Result<Point, Refusal> {
        let slope = self.problem.gradients(self.watch)?;
        let geometry = self.problem.geometry(&x, self.settings.largest_reach);
        Ok(Point {
            x,
            value,
            slope,
            geometry,
        })
    }

    /// Let the problem renew its discretisation or its variables; whether the variables changed.
    fn settle(&mut self, x: Vec<f64>, value: Evaluation) -> Result<(Point, bool), Refusal> {
        let settled = self.problem.settle(&x, self.watch)?;
        let changed = settled.variables.is_some();
        let x = settled.variables.unwrap_or(x);
        let point = if settled.renewed || changed {
            self.point(x)?
        } else {
            self.complete(x, value)?
        };
        Ok((point, changed))
    }

    /// Keep the best: first of all within its limits, then by its aim.
    fn remember(&mut self, now: &Point) {
        let feasible = |v: &Evaluation| violation(v) <= self.settings.feasible;
        let better = match &self.best {
            None => true,
            Some((_, best)) => match (feasible(&now.value), feasible(best)) {
                (true, true) => now.value.objective < best.objective,
                (mine, theirs) if mine != theirs => mine,
                _ => violation(&now.value) < violation(best),
            },
        };
        if better {
            self.best = Some((now.x.clone(), now.value.clone()));
        }
    }

    #[expect(
        clippy::too_many_arguments,
        reason = "a record gathers what one iteration knows"
    )]
    fn record(
        &self,
        iteration: usize,
        now: &Point,
        step: Option<&Solution>,
        reach: f64,
        stationarity: f64,
        accepted: bool,
        note: &str,
    ) -> Record {
        let mut shape: Vec<(usize, f64)> = Vec::new();
        if let Some(step) = step {
            let rows = now.geometry.inequalities.iter().zip(&step.inequalities);
            for (row, z) in rows.chain(now.geometry.equalities.iter().zip(&step.equalities)) {
                match shape.iter_mut().find(|s| s.0 == row.limit) {
                    Some(s) => s.1 += z,
                    None => shape.push((row.limit, *z)),
                }
            }
        }
        Record {
            iteration,
            evaluations: self.evaluations,
            accepted,
            objective: now.value.objective,
            violation: violation(&now.value),
            step: step.map_or(0.0, |s| longest(&s.step)),
            reach,
            stationarity,
            x: now.x.clone(),
            state_multipliers: step.map_or(Vec::new(), |s| s.elastic.clone()),
            shape_multipliers: shape,
            note: note.into(),
        }
    }
}

/// A point tried: variables, step from the present point, values.
type Tried = (Vec<f64>, Vec<f64>, Evaluation);

enum Trial {
    Accepted {
        x: Vec<f64>,
        value: Evaluation,
        ratio: f64,
        length: f64,
    },
    Rejected(String),
}

/// Ratio of actual to predicted decrease above which the trust region grows, below which it shrinks, and below
/// which a step is refused (Nocedal and Wright, algorithm 4.1).
const GOOD: f64 = 0.75;
const POOR: f64 = 0.25;
const LEAST: f64 = 1e-3;
/// A restored step may be this much longer than the trust region.
const FARTHEST: f64 = 3.0;
/// First and last price of a violation, in slopes of the aim.
const WEIGHT: f64 = 1.0;
const WEIGHT_LIMIT: f64 = 1e6;

/// BFGS pair of the Lagrangian: its shape-limit part only where a row is known at both points.
fn learn(model: &mut CurvatureModel, before: &Point, after: &Point, step: &Solution) {
    let s: Vec<f64> = after.x.iter().zip(&before.x).map(|(a, b)| a - b).collect();
    let mut y: Vec<f64> = after
        .slope
        .objective
        .iter()
        .zip(&before.slope.objective)
        .map(|(a, b)| a - b)
        .collect();
    let mut add = |z: f64, a: &[f64], b: &[f64]| {
        axpy(z, a, &mut y);
        axpy(-z, b, &mut y);
    };
    for (k, &z) in step.elastic.iter().enumerate() {
        add(z, &after.slope.limits[k], &before.slope.limits[k]);
    }
    let shapes = [
        (
            &before.geometry.equalities,
            &after.geometry.equalities,
            &step.equalities,
        ),
        (
            &before.geometry.inequalities,
            &after.geometry.inequalities,
            &step.inequalities,
        ),
    ];
    for (old, new, multipliers) in shapes {
        for (row, &z) in old.iter().zip(multipliers) {
            if z.abs() > 1e-9
                && let Some(same) = new
                    .iter()
                    .find(|r| r.key == row.key && r.limit == row.limit)
            {
                add(z, &same.gradient, &row.gradient);
            }
        }
    }
    model.update(&s, &y);
}

fn violation(value: &Evaluation) -> f64 {
    value.limits.iter().fold(0.0, |m: f64, &c| m.max(c))
}

fn violated(geometry: &Geometry) -> Vec<usize> {
    let broken = geometry.inequalities.iter().filter(|r| r.value > 0.0);
    let unequal = geometry
        .equalities
        .iter()
        .filter(|r| r.value.abs() > super::restore::EQUAL);
    let mut limits: Vec<usize> = broken.chain(unequal).map(|r| r.limit).collect();
    limits.sort_unstable();
    limits.dedup();
    limits
}

fn longest(v: &[f64]) -> f64 {
    v.iter().fold(0.0, |m: f64, x| m.max(x.abs()))
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}
