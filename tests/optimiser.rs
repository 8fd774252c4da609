//! The optimiser on published problems, on a shape problem with a known answer, and at its edges.
//!
//! Hock and Schittkowski, Test Examples for Nonlinear Programming Codes (Springer, 1981), problems 43 and 71; optima
//! from memory: -44 and 17.0140173. They are also checked against each other's conditions by the limits held here.

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::{ClosedSpline, h1};
use flumeloft::optimise::problem::Gradients;
use flumeloft::optimise::{
    Evaluation, Geometry, Outcome, Problem, Refusal, Row, Settings, Settled, Stop, gradient_check,
    minimise,
};
use nalgebra::DMatrix;

type Function = Box<dyn Fn(&[f64]) -> (f64, Vec<f64>)>;

/// A problem by functions with gradients.
struct Published {
    objective: Function,
    state: Vec<Function>,
    shape: Vec<Function>,
    equal: Vec<Function>,
    last: Vec<f64>,
    /// Evaluations beyond this distance from the start are refused.
    refuse_beyond: f64,
    start: Vec<f64>,
}

impl Published {
    fn new(start: &[f64], objective: Function) -> Self {
        Self {
            objective,
            state: vec![],
            shape: vec![],
            equal: vec![],
            last: start.to_vec(),
            refuse_beyond: f64::INFINITY,
            start: start.to_vec(),
        }
    }
}

impl Problem for Published {
    fn evaluate(&mut self, x: &[f64], watch: &Watch) -> Result<Evaluation, Refusal> {
        watch.check()?;
        let far = x
            .iter()
            .zip(&self.start)
            .map(|(a, b)| (a - b).abs())
            .fold(0.0, f64::max);
        if far > self.refuse_beyond {
            return Err(Refusal::TooFar("too far from the start".into()));
        }
        self.last = x.to_vec();
        Ok(Evaluation {
            objective: (self.objective)(x).0,
            limits: self.state.iter().map(|f| f(x).0).collect(),
        })
    }
    fn gradients(&mut self, _: &Watch) -> Result<Gradients, Refusal> {
        let x = &self.last;
        Ok(Gradients {
            objective: (self.objective)(x).1,
            limits: self.state.iter().map(|f| f(x).1).collect(),
        })
    }
    fn geometry(&self, x: &[f64], _: f64) -> Geometry {
        let rows = |list: &[Function]| {
            list.iter()
                .enumerate()
                .map(|(i, f)| {
                    let (value, gradient) = f(x);
                    Row {
                        limit: i,
                        key: i as u64,
                        value,
                        gradient,
                    }
                })
                .collect()
        };
        Geometry {
            inequalities: rows(&self.shape),
            equalities: rows(&self.equal),
        }
    }
    fn metric(&self, x: &[f64]) -> DMatrix<f64> {
        DMatrix::identity(x.len(), x.len())
    }
    fn settle(&mut self, _: &[f64], _: &Watch) -> Result<Settled, Refusal> {
        Ok(Settled::default())
    }
}

fn settings() -> Settings {
    Settings {
        iterations: 200,
        largest_reach: 2.0,
        first_reach: 0.5,
        first_step: 0.5,
        tolerance: 1e-10,
        smallest_reach: 1e-9,
        feasible: 1e-9,
    }
}

fn run(problem: &mut Published) -> Outcome {
    let start = problem.start.clone();
    minimise(problem, &start, &settings(), &Watch::idle(), &mut |_, _| {}).unwrap()
}

/// Rosen and Suzuki's problem, number 43: four variables, three limits; -44 at (0, 1, 2, -1).
fn rosen_suzuki() -> Published {
    let mut problem = Published::new(
        &[0.0; 4],
        Box::new(|x| {
            let f = x[0] * x[0] + x[1] * x[1] + 2.0 * x[2] * x[2] + x[3] * x[3]
                - 5.0 * x[0]
                - 5.0 * x[1]
                - 21.0 * x[2]
                + 7.0 * x[3];
            (
                f,
                vec![
                    2.0 * x[0] - 5.0,
                    2.0 * x[1] - 5.0,
                    4.0 * x[2] - 21.0,
                    2.0 * x[3] + 7.0,
                ],
            )
        }),
    );
    problem.state = vec![
        Box::new(|x| {
            let c = x[0] * x[0] + x[1] * x[1] + x[2] * x[2] + x[3] * x[3] + x[0] - x[1] + x[2]
                - x[3]
                - 8.0;
            (
                c,
                vec![
                    2.0 * x[0] + 1.0,
                    2.0 * x[1] - 1.0,
                    2.0 * x[2] + 1.0,
                    2.0 * x[3] - 1.0,
                ],
            )
        }),
        Box::new(|x| {
            let c = x[0] * x[0] + 2.0 * x[1] * x[1] + x[2] * x[2] + 2.0 * x[3] * x[3]
                - x[0]
                - x[3]
                - 10.0;
            (
                c,
                vec![2.0 * x[0] - 1.0, 4.0 * x[1], 2.0 * x[2], 4.0 * x[3] - 1.0],
            )
        }),
        Box::new(|x| {
            let c = 2.0 * x[0] * x[0] + x[1] * x[1] + x[2] * x[2] + 2.0 * x[0] - x[1] - x[3] - 5.0;
            (
                c,
                vec![4.0 * x[0] + 2.0, 2.0 * x[1] - 1.0, 2.0 * x[2], -1.0],
            )
        }),
    ];
    problem
}

#[test]
fn problem_43_with_its_limits_as_state_limits() {
    let outcome = run(&mut rosen_suzuki());
    println!("{outcome:?}");
    assert!(
        (outcome.objective + 44.0).abs() < 1e-5,
        "{}",
        outcome.objective
    );
    for (x, e) in outcome.x.iter().zip([0.0, 1.0, 2.0, -1.0]) {
        assert!((x - e).abs() < 1e-3);
    }
    assert!(outcome.evaluations < 60 && (outcome.objective + 43.9).abs() > 1e-2);
}

/// Number 71: one equality and bounds as shape limits, one state limit; 17.0140173.
#[test]
fn problem_71_with_shape_limits_restored_exactly() {
    let mut problem = Published::new(
        &[1.0, 5.0, 5.0, 1.0],
        Box::new(|x| {
            let s = x[0] + x[1] + x[2];
            (
                x[0] * x[3] * s + x[2],
                vec![x[3] * (s + x[0]), x[0] * x[3], x[0] * x[3] + 1.0, x[0] * s],
            )
        }),
    );
    problem.state = vec![Box::new(|x| {
        let p = x.iter().product::<f64>();
        (25.0 - p, x.iter().map(|v| -p / v).collect())
    })];
    problem.equal = vec![Box::new(|x| {
        (
            x.iter().map(|v| v * v).sum::<f64>() - 40.0,
            x.iter().map(|v| 2.0 * v).collect(),
        )
    })];
    for i in 0..4 {
        let unit = move |sign: f64| {
            (0..4)
                .map(|j| if i == j { sign } else { 0.0 })
                .collect::<Vec<f64>>()
        };
        problem
            .shape
            .push(Box::new(move |x| (1.0 - x[i], unit(-1.0))));
        problem
            .shape
            .push(Box::new(move |x| (x[i] - 5.0, unit(1.0))));
    }
    let start = problem.start.clone();
    let outcome = minimise(
        &mut problem,
        &start,
        &settings(),
        &Watch::idle(),
        &mut |p, record| {
            let geometry = p.geometry(&record.x, 1.0);
            assert!(
                geometry.violation() <= 1e-10,
                "shape limits must hold at every record: {}",
                geometry.violation()
            );
        },
    )
    .unwrap();
    println!("{outcome:?}");
    assert!(
        (outcome.objective - 17.0140173).abs() < 1e-5,
        "{}",
        outcome.objective
    );
}

#[test]
fn contradicting_shape_limits_are_named() {
    let mut problem = Published::new(&[0.0], Box::new(|x| (x[0], vec![1.0])));
    problem.shape = vec![
        Box::new(|x| (1.0 - x[0], vec![-1.0])),
        Box::new(|x| (x[0] + 1.0, vec![1.0])),
    ];
    let outcome = run(&mut problem);
    assert!(
        matches!(&outcome.stop, Stop::Inconsistent(l) if !l.is_empty()),
        "{outcome:?}"
    );
}

#[test]
fn a_refused_evaluation_shortens_the_step_and_two_runs_are_equal() {
    let bounded = || {
        let mut problem = rosen_suzuki();
        problem.refuse_beyond = 1.2;
        run(&mut problem)
    };
    let (a, b) = (bounded(), bounded());
    assert_eq!(a, b);
    assert!(a.steps > 2 && a.objective < -20.0, "{a:?}");
}

#[test]
fn a_stopped_run_keeps_its_best() {
    let watch = Watch::idle();
    let stopper = watch.clone();
    let mut problem = rosen_suzuki();
    let start = problem.start.clone();
    let outcome = minimise(
        &mut problem,
        &start,
        &settings(),
        &watch,
        &mut |_, record| {
            if record.iteration == 3 {
                stopper.stop();
            }
        },
    )
    .unwrap();
    assert_eq!(outcome.stop, Stop::Cancelled);
    assert!(outcome.objective < -5.0);
}

#[test]
fn a_wrong_gradient_is_seen() {
    let x = [0.3, 0.2, -0.1, 0.4];
    let direction = [1.0, -0.5, 0.3, 0.2];
    let check = |p: &mut Published| {
        gradient_check::relative_difference(p, &x, &direction, 1e-3, &Watch::idle()).unwrap()
    };
    assert!(check(&mut rosen_suzuki()) < 1e-9);
    let mut flawed = rosen_suzuki();
    flawed.objective = Box::new(|x| {
        let (f, mut g) = (rosen_suzuki().objective)(x);
        g[1] *= -1.1;
        (f, g)
    });
    assert!(check(&mut flawed) > 1e-2);
}

/// Least perimeter at given area.
struct Rope {
    last: Vec<f64>,
    area: f64,
}

fn contour(x: &[f64]) -> ClosedSpline {
    ClosedSpline::new(x.chunks(2).map(|c| vec2(c[0], c[1])).collect())
}

fn flat(points: &[Vec2]) -> Vec<f64> {
    points.iter().flat_map(|p| [p.x, p.y]).collect()
}

impl Problem for Rope {
    fn evaluate(&mut self, x: &[f64], _: &Watch) -> Result<Evaluation, Refusal> {
        self.last = x.to_vec();
        Ok(Evaluation {
            objective: contour(x).perimeter(),
            limits: vec![],
        })
    }
    fn gradients(&mut self, _: &Watch) -> Result<Gradients, Refusal> {
        Ok(Gradients {
            objective: flat(&contour(&self.last).perimeter_gradient()),
            limits: vec![],
        })
    }
    fn geometry(&self, x: &[f64], _: f64) -> Geometry {
        let c = contour(x);
        let row = Row {
            limit: 0,
            key: 0,
            value: c.area() - self.area,
            gradient: flat(&c.area_gradient()),
        };
        Geometry {
            inequalities: vec![],
            equalities: vec![row],
        }
    }
    fn metric(&self, x: &[f64]) -> DMatrix<f64> {
        let c = contour(x);
        let own = h1::metric(&c, 0.3);
        DMatrix::from_fn(x.len(), x.len(), |i, j| {
            if i % 2 == j % 2 {
                own[(i / 2, j / 2)]
            } else {
                0.0
            }
        })
    }
    fn settle(&mut self, _: &[f64], _: &Watch) -> Result<Settled, Refusal> {
        Ok(Settled::default())
    }
}

/// The circle has the least perimeter at given area (the isoperimetric inequality): P^2 = 4 pi A.
#[test]
fn the_shortest_rope_round_an_area_is_a_circle() {
    let start: Vec<f64> = (0..20)
        .flat_map(|i| {
            let a = 2.0 * std::f64::consts::PI * f64::from(i) / 20.0;
            [1.6 * a.cos(), 0.6 * a.sin()]
        })
        .collect();
    let area = contour(&start).area();
    let mut rope = Rope {
        last: start.clone(),
        area,
    };
    let outcome = minimise(
        &mut rope,
        &start,
        &Settings::default(),
        &Watch::idle(),
        &mut |_, record| {
            assert!((contour(&record.x).area() - area).abs() < 1e-9);
        },
    )
    .unwrap();
    let ratio = outcome.objective.powi(2) / (4.0 * std::f64::consts::PI * area);
    println!(
        "P^2/(4 pi A) = {ratio:.6}, {} evaluations, {:?}",
        outcome.evaluations, outcome.stop
    );
    assert!(ratio < 1.0005 && ratio > 0.9999, "{ratio}");
    let ellipse = contour(&start).perimeter().powi(2) / (4.0 * std::f64::consts::PI * area);
    assert!(
        ellipse > 1.2,
        "the start must be far from a circle: {ellipse}"
    );
}
