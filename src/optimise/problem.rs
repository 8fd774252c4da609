//! What the optimiser asks of a problem. All numbers are dimensionless and of order one: lengths in sizes of the
//! shape, aims relative to their start.

use crate::base::{Cancelled, Watch};
use nalgebra::DMatrix;

/// Aim and state-dependent limits at a point.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Evaluation {
    /// To be minimised.
    pub objective: f64,
    /// Limits, each `<= 0` when met.
    pub limits: Vec<f64>,
}

/// Derivatives of an [`Evaluation`].
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Gradients {
    /// Of the objective, shape `(n,)`.
    pub objective: Vec<f64>,
    /// Of each limit, shape `(n,)` each.
    pub limits: Vec<Vec<f64>>,
}

/// One linearised shape limit.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Which limit it belongs to.
    pub limit: usize,
    /// The same place of the same limit has the same key at every point, so that its curvature can be learnt.
    pub key: u64,
    /// Value: `<= 0` when met, or zero for an equality.
    pub value: f64,
    /// Derivative, shape `(n,)`.
    pub gradient: Vec<f64>,
}

/// Shape limits at a point: cheap, asked for often.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Geometry {
    /// Inequalities that could become active within the reach asked for.
    pub inequalities: Vec<Row>,
    /// Equalities.
    pub equalities: Vec<Row>,
}

impl Geometry {
    /// Largest violation of inequalities and equalities.
    pub fn violation(&self) -> f64 {
        let over = self
            .inequalities
            .iter()
            .map(|r| r.value)
            .fold(0.0, f64::max);
        self.equalities
            .iter()
            .map(|r| r.value.abs())
            .fold(over, f64::max)
    }
}

/// Why a point could not be evaluated.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Refusal {
    /// The step was too long: mesh or flow could not follow.
    #[error("{0}")]
    TooFar(String),
    /// The user asked to stop.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
}

/// What happened to a point when it was accepted.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Settled {
    /// A new parametrisation of the same design: variables to go on with.
    pub variables: Option<Vec<f64>>,
    /// The discretisation changed: values must be taken anew before anything is compared with them.
    pub renewed: bool,
}

/// A problem to be minimised.
pub trait Problem {
    /// Aim and limits at `x`.
    ///
    /// # Errors
    /// [`Refusal`].
    fn evaluate(&mut self, x: &[f64], watch: &Watch) -> Result<Evaluation, Refusal>;

    /// Derivatives at the point evaluated last.
    ///
    /// # Errors
    /// [`Refusal`].
    fn gradients(&mut self, watch: &Watch) -> Result<Gradients, Refusal>;

    /// Shape limits at `x`, with all rows that could become active within `reach` of each variable.
    fn geometry(&self, x: &[f64], reach: f64) -> Geometry;

    /// Metric of the variables (symmetric positive definite, shape `(n, n)`).
    fn metric(&self, x: &[f64]) -> DMatrix<f64>;

    /// A step to `x`, evaluated last, was accepted.
    ///
    /// # Errors
    /// [`Refusal`].
    fn settle(&mut self, x: &[f64], watch: &Watch) -> Result<Settled, Refusal>;
}
