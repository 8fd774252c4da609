//! What an optimisation tells: one record an iteration, and its outcome.

/// One iteration.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    /// Number; 0 is the start.
    pub iteration: usize,
    /// States evaluated so far.
    pub evaluations: usize,
    /// Whether the step was taken.
    pub accepted: bool,
    /// Objective of the present point (after the step, if taken).
    pub objective: f64,
    /// Largest violation of a state-dependent limit.
    pub violation: f64,
    /// Largest change of a variable in the step tried.
    pub step: f64,
    /// Trust region.
    pub reach: f64,
    /// Decrease that the model predicts, relative to the objective: small when nothing is left to gain.
    pub stationarity: f64,
    /// Variables of the present point.
    pub x: Vec<f64>,
    /// Multiplier of each state-dependent limit.
    pub state_multipliers: Vec<f64>,
    /// Multipliers of shape limits: (limit, sum over its rows).
    pub shape_multipliers: Vec<(usize, f64)>,
    /// What happened.
    pub note: String,
}

/// Why it ended.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Stop {
    /// Nothing left to gain, also after a fresh start of the curvature model.
    Converged,
    /// The iteration limit.
    IterationLimit,
    /// Steps became too short to tell a gain.
    NoFurtherStep,
    /// Shape limits (by number) that contradict one another.
    Inconsistent(Vec<usize>),
    /// Stopped on request.
    Cancelled,
}

/// End of an optimisation: always with the best point that met its limits.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    /// Best point.
    pub x: Vec<f64>,
    /// Its objective.
    pub objective: f64,
    /// Its largest violation of a state-dependent limit.
    pub violation: f64,
    /// Accepted steps.
    pub steps: usize,
    /// Evaluations.
    pub evaluations: usize,
    /// Why it ended.
    pub stop: Stop,
}
