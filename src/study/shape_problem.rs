//! The improvement of free inserts as a problem for the optimiser.
//!
//! Variables: coordinates of the free inserts' control points over the size. Between accepted steps the mesh
//! follows the contour by motion, so that values are comparable to the last digits; after an accepted step it is
//! made anew where it was stretched too far, and the values are taken again.

use super::flow_engine::{mesh_of, problem_of};
use super::shape_limits::{ShapeLimits, line};
use super::{Case, Limit, LimitReport};
use crate::base::{Vec2, Watch, vec2};
use crate::geometry::{ClosedSpline, Domain, check, h1};
use crate::mesh::{CurvedMesh, Motion};
use crate::optimise::problem::Gradients;
use crate::optimise::{Evaluation, Geometry, Problem, Refusal, Settled};
use crate::physics::figures::{self, PeakScale, Ports};
use crate::physics::measures::Measured;
use crate::physics::transfer::carried;
use crate::physics::{Discretisation, Quantities, State, solve};
use crate::sensitivity::{ControlChain, shape_gradient};
use nalgebra::DMatrix;
use std::sync::Arc;

/// Movement of a control point, in sizes, after which the mesh is made anew.
const STRETCH: f64 = 0.16;
/// State-dependent limits are aimed this far inside (relative): new meshes scatter by less.
const MARGIN: f64 = 2e-4;
/// A mesh that misses the area by this part, or a state whose dissipation misses the ports' power by that, is not
/// believed: sound ones are at least ten times better, inverted or starved ones far worse.
const WRONG_AREA: f64 = 1e-3;
const WRONG_ENERGY: f64 = 2e-2;
/// Smoothing length of the metric, in sizes.
const SMOOTHING: f64 = 0.25;

/// A mesh with what follows from its topology.
struct Frame {
    mesh: CurvedMesh,
    contours: Vec<ClosedSpline>,
    motion: Motion,
    chain: ControlChain,
    discretisation: Arc<Discretisation>,
}

/// Improvement of one case.
pub struct ShapeProblem {
    case: Case,
    domain: Domain,
    free: Vec<bool>,
    size_m: f64,
    limits: ShapeLimits,
    frame: Frame,
    state: State,
    /// Contours of `state`.
    contours: Vec<ClosedSpline>,
    scale: Scale,
}

/// What makes the aim dimensionless.
struct Scale {
    peak: PeakScale,
    /// Subtracted from the aim (inlet temperature for peaks), then divided by this.
    offset: f64,
    size: f64,
}

fn refuse(error: impl std::fmt::Display) -> Refusal {
    Refusal::TooFar(error.to_string())
}

impl ShapeProblem {
    /// Set up at a case's own contours (already meeting the checks of the drawing).
    ///
    /// # Errors
    /// [`Refusal`] when the start cannot be meshed or solved.
    pub fn new(case: &Case, domain: Domain, watch: &Watch) -> Result<Self, Refusal> {
        let free: Vec<bool> = case.design.inserts.iter().map(|i| !i.frozen).collect();
        let counts: Vec<usize> = domain.inserts.iter().map(|i| i.contour.len()).collect();
        let largest = |area: f64, i: &crate::geometry::DomainInsert| area.max(i.contour.area());
        let free_inserts = domain
            .inserts
            .iter()
            .zip(&free)
            .filter(|f| *f.1)
            .map(|f| f.0);
        let size_m = 2.0 * (free_inserts.fold(0.0, largest) / std::f64::consts::PI).sqrt();
        let limits = ShapeLimits::new(&case.design, &domain.outline, &counts, size_m);
        let contours: Vec<ClosedSpline> =
            domain.inserts.iter().map(|i| i.contour.clone()).collect();
        let frame = Frame::new(case, &domain, watch)?;
        let state =
            solve(&frame.discretisation, frame.mesh.clone(), None, watch).map_err(from_physics)?;
        let peak = PeakScale::new(&state);
        let value = case.design.aim.measure(&state, &peak).value;
        let offset = if matches!(case.design.aim, super::Aim::LeastPeakTemperature {}) {
            state
                .temperature
                .iter()
                .copied()
                .fold(f64::INFINITY, f64::min)
        } else {
            0.0
        };
        let scale = Scale {
            peak,
            offset,
            size: (value - offset).abs().max(f64::MIN_POSITIVE),
        };
        Ok(Self {
            case: case.clone(),
            domain,
            free,
            size_m,
            limits,
            frame,
            state,
            contours,
            scale,
        })
    }

    /// Variables of the present contours.
    pub fn variables(&self) -> Vec<f64> {
        let free = self.contours.iter().zip(&self.free).filter(|c| *c.1);
        free.flat_map(|(c, _)| {
            c.controls()
                .iter()
                .flat_map(|p| [p.x / self.size_m, p.y / self.size_m])
        })
        .collect()
    }

    /// Contours at variables.
    pub fn contours_at(&self, x: &[f64]) -> Vec<ClosedSpline> {
        let mut rest = x;
        self.domain
            .inserts
            .iter()
            .zip(&self.free)
            .map(|(insert, &free)| {
                if !free {
                    return insert.contour.clone();
                }
                let (own, others) = rest.split_at(2 * insert.contour.len());
                rest = others;
                ClosedSpline::new(
                    own.chunks(2)
                        .map(|c| vec2(c[0], c[1]) * self.size_m)
                        .collect(),
                )
            })
            .collect()
    }

    /// Length that makes variables dimensionless, m.
    pub fn size_m(&self) -> f64 {
        self.size_m
    }

    /// The state evaluated last.
    pub fn state(&self) -> &State {
        &self.state
    }

    /// Value of the aim at the state evaluated last, SI.
    pub fn aim_value(&self) -> f64 {
        self.case
            .design
            .aim
            .measure(&self.state, &self.scale.peak)
            .value
    }

    /// Value of the aim, SI, that belongs to a value of the objective.
    pub fn aim_of(&self, objective: f64) -> f64 {
        self.scale.offset + self.sign() * objective * self.scale.size
    }

    /// The case with other contours.
    pub fn case_at(&self, contours: &[ClosedSpline]) -> Case {
        let mut design = (*self.case.design).clone();
        for ((insert, contour), &free) in design.inserts.iter_mut().zip(contours).zip(&self.free) {
            if free {
                insert.points_m = contour.controls().to_vec();
            }
        }
        Case {
            design: Arc::new(design),
            run: self.case.run.clone(),
        }
    }

    /// Names of shape limits, for sentences.
    pub fn limit_names(&self, limits: &[usize]) -> String {
        let names: Vec<String> = limits.iter().map(|&l| self.limits.name(l)).collect();
        names.join(", ")
    }

    /// State-dependent limits as (measure - bound) signed and scaled, `<= 0` when met.
    fn state_limits(&self) -> Vec<(Measured, f64, f64)> {
        let state = &self.state;
        let limits = self.case.design.limits.iter();
        limits
            .filter_map(|limit| match *limit {
                Limit::Heat { at_least_w_m } => Some((figures::heat(state), at_least_w_m, -1.0)),
                Limit::TotalPressureDrop { at_most_pa } => Some((
                    figures::total_pressure_drop(state, &Ports::new(state)),
                    at_most_pa,
                    1.0,
                )),
                _ => None,
            })
            .collect()
    }

    /// Gradient by the variables, times a factor.
    fn gradient(
        &self,
        measured: &Measured,
        factor: f64,
        watch: &Watch,
    ) -> Result<Vec<f64>, Refusal> {
        let by_nodes = shape_gradient(&self.state, measured, watch).map_err(from_physics)?;
        let by_controls = self
            .frame
            .chain
            .restrict(&self.frame.motion.restrict(&by_nodes));
        let free = by_controls.iter().zip(&self.free).filter(|g| *g.1);
        Ok(free
            .flat_map(|(g, _)| g.iter().flat_map(|v| [v.x, v.y]))
            .map(|g| g * factor * self.size_m)
            .collect())
    }

    fn sign(&self) -> f64 {
        if self.case.design.aim.is_most() {
            -1.0
        } else {
            1.0
        }
    }

    fn value(&self) -> Evaluation {
        let objective = self.sign() * (self.aim_value() - self.scale.offset) / self.scale.size;
        let measured = self.state_limits();
        let limits = measured
            .iter()
            .map(|(m, bound, sign)| sign * (m.value - bound) / bound.abs() + MARGIN);
        Evaluation {
            objective,
            limits: limits.collect(),
        }
    }
}

/// Lines of the report for limits on heat and pressure drop.
pub(super) fn state_limit_lines(case: &Case, state: &State) -> Vec<LimitReport> {
    let limits = case.design.limits.iter();
    limits
        .filter_map(|limit| match *limit {
            Limit::Heat { at_least_w_m } => Some(line(
                "heat at least".into(),
                "W/m",
                figures::heat(state).value,
                at_least_w_m,
                1.0,
            )),
            Limit::TotalPressureDrop { at_most_pa } => {
                let drop = figures::total_pressure_drop(state, &Ports::new(state)).value;
                Some(line(
                    "total pressure drop at most".into(),
                    "Pa",
                    drop,
                    at_most_pa,
                    -1.0,
                ))
            }
            _ => None,
        })
        .collect()
}

/// Cheap alarms on each state, before its value is believed: mesh area against drawn area, dissipation against the
/// ports' power.
fn alarm(state: &State, domain: &Domain) -> Result<(), Refusal> {
    let q = Quantities::new(state);
    let holes: f64 = domain
        .inserts
        .iter()
        .filter(|i| !i.solid)
        .map(|i| i.contour.area())
        .sum();
    let area = q.mesh_area_m2 / (domain.outline.area() - holes) - 1.0;
    if area.abs() > WRONG_AREA {
        return Err(refuse(format!(
            "the mesh misses the drawn area by {area:.1e}"
        )));
    }
    if q.energy_relative.abs() > WRONG_ENERGY {
        return Err(refuse(format!(
            "dissipation and pressure work differ by {:.1e}",
            q.energy_relative
        )));
    }
    Ok(())
}

fn from_physics(error: crate::physics::PhysicsError) -> Refusal {
    match error {
        crate::physics::PhysicsError::Cancelled(c) => Refusal::Cancelled(c),
        other => refuse(other),
    }
}

impl Frame {
    fn new(case: &Case, domain: &Domain, watch: &Watch) -> Result<Self, Refusal> {
        let problem = problem_of(&case.design);
        let mesh = mesh_of(case, domain, &problem, watch).map_err(|error| match error {
            crate::mesh::MeshError::Cancelled(c) => Refusal::Cancelled(c),
            other => refuse(other),
        })?;
        let contours: Vec<ClosedSpline> =
            domain.inserts.iter().map(|i| i.contour.clone()).collect();
        let motion = Motion::new(&mesh).map_err(refuse)?;
        let chain = ControlChain::new(&mesh, &contours);
        let discretisation = Arc::new(Discretisation::new(&mesh, problem).map_err(from_physics)?);
        Ok(Self {
            mesh,
            contours,
            motion,
            chain,
            discretisation,
        })
    }

    /// The mesh with its contours moved.
    fn moved(&self, contours: &[ClosedSpline]) -> Result<CurvedMesh, Refusal> {
        let moves: Vec<Vec<Vec2>> = contours
            .iter()
            .zip(&self.contours)
            .map(|(to, from)| {
                to.controls()
                    .iter()
                    .zip(from.controls())
                    .map(|(&a, &b)| a - b)
                    .collect()
            })
            .collect();
        let mesh = self
            .mesh
            .moved(&self.motion.extend(&self.chain.extend(&moves)));
        match mesh.first_invalid() {
            None => Ok(mesh),
            Some(_) => Err(refuse("the mesh could not follow the step")),
        }
    }

    /// Largest movement of a control point from the mesh's own contours, m.
    fn stretch(&self, contours: &[ClosedSpline]) -> f64 {
        contours
            .iter()
            .zip(&self.contours)
            .flat_map(|(a, b)| {
                a.controls()
                    .iter()
                    .zip(b.controls())
                    .map(|(p, q)| p.distance(*q))
            })
            .fold(0.0, f64::max)
    }
}

impl Problem for ShapeProblem {
    fn evaluate(&mut self, x: &[f64], watch: &Watch) -> Result<Evaluation, Refusal> {
        let contours = self.contours_at(x);
        let mut domain = self.domain.clone();
        for (insert, contour) in domain.inserts.iter_mut().zip(&contours) {
            insert.contour = contour.clone();
        }
        if let Some(fault) = check(&domain).first() {
            return Err(refuse(fault));
        }
        let mesh = self.frame.moved(&contours)?;
        let near = &self.state;
        let to = &self.frame.discretisation;
        // On the same topology the unknowns carry over as they are; on a new mesh they are interpolated.
        let start = if Arc::ptr_eq(&near.discretisation, to) {
            Some(near.flow.clone())
        } else {
            carried(near, to, &mesh)
        };
        self.state = solve(to, mesh, start.as_deref(), watch).map_err(from_physics)?;
        alarm(&self.state, &domain)?;
        self.contours = contours;
        Ok(self.value())
    }

    fn gradients(&mut self, watch: &Watch) -> Result<Gradients, Refusal> {
        let aim = self.case.design.aim.measure(&self.state, &self.scale.peak);
        let objective = self.gradient(&aim, self.sign() / self.scale.size, watch)?;
        let limits = self
            .state_limits()
            .iter()
            .map(|(m, bound, sign)| self.gradient(m, sign / bound.abs(), watch))
            .collect::<Result<_, _>>()?;
        Ok(Gradients { objective, limits })
    }

    fn geometry(&self, x: &[f64], reach: f64) -> Geometry {
        self.limits.rows(&self.contours_at(x), reach)
    }

    fn metric(&self, x: &[f64]) -> DMatrix<f64> {
        let mut matrix = DMatrix::zeros(self.limits.variables(), self.limits.variables());
        let mut first = 0;
        for (contour, &free) in self.contours_at(x).iter().zip(&self.free) {
            if !free {
                continue;
            }
            let own = h1::metric(contour, SMOOTHING * self.size_m);
            for i in 0..contour.len() {
                for j in 0..contour.len() {
                    matrix[(first + 2 * i, first + 2 * j)] = own[(i, j)];
                    matrix[(first + 2 * i + 1, first + 2 * j + 1)] = own[(i, j)];
                }
            }
            first += 2 * contour.len();
        }
        matrix
    }

    fn settle(&mut self, x: &[f64], watch: &Watch) -> Result<Settled, Refusal> {
        let contours = self.contours_at(x);
        if self.frame.stretch(&contours) < STRETCH * self.size_m {
            return Ok(Settled::default());
        }
        let mut domain = self.domain.clone();
        for (insert, contour) in domain.inserts.iter_mut().zip(&contours) {
            insert.contour = contour.clone();
        }
        self.frame = Frame::new(&self.case, &domain, watch)?;
        self.domain = domain;
        Ok(Settled {
            variables: None,
            renewed: true,
        })
    }
}
