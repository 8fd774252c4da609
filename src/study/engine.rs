//! What a run is given and gives back, and the trait behind which the engine (or a stand-in) computes.

use super::{Design, FieldSnapshot, LimitReport, RunSettings, SolveReport};
use crate::base::{Vec2, Watch};
use std::sync::Arc;

/// Frozen copy of all that one run depends on: equal cases give equal results. A result is stale when its
/// case differs from the one the present design would give.
#[derive(Clone, Debug, PartialEq)]
pub struct Case {
    /// The design.
    pub design: Arc<Design>,
    /// How to compute it.
    pub run: RunSettings,
}

/// A solved case.
#[derive(Clone, Debug)]
pub struct Solved {
    /// What was solved.
    pub case: Case,
    /// Figures.
    pub report: SolveReport,
    /// Limits at this state.
    pub limits: Vec<LimitReport>,
    /// Value of the aim (SI).
    pub aim_value: f64,
    /// Pictures.
    pub snapshot: Arc<FieldSnapshot>,
}

/// One iteration of an improvement.
#[derive(Clone, Debug)]
pub struct StepRecord {
    /// Number, 0 is the start.
    pub step: usize,
    /// States computed so far.
    pub evaluations: usize,
    /// Whether the step was taken.
    pub accepted: bool,
    /// Value of the aim (SI).
    pub aim_value: f64,
    /// Largest relative violation of the state-dependent limits, 0 when all hold.
    pub violation: f64,
    /// All limits.
    pub limits: Vec<LimitReport>,
    /// Control points of every insert, m.
    pub inserts_m: Vec<Vec<Vec2>>,
    /// Largest movement of a control point, m.
    pub step_length_m: f64,
    /// Trust region, m.
    pub trust_radius_m: f64,
    /// Stationarity, relative: small when nothing is left to gain.
    pub stationarity: f64,
    /// What happened, in a few words.
    pub note: String,
    /// Figures of this step, when it was accepted.
    pub report: Option<Arc<SolveReport>>,
    /// Pictures of this step, when it was accepted.
    pub snapshot: Option<Arc<FieldSnapshot>>,
}

/// Why an improvement ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StopReason {
    /// Nothing left to gain.
    Converged,
    /// The step limit was reached.
    StepLimit,
    /// The steps became too short for the mesh to tell a gain from its own noise.
    NoFurtherStep,
    /// The limits cannot all be met.
    LimitsInconsistent,
    /// The user stopped it.
    StoppedByUser,
}

/// Result of an improvement: the best shape that met its limits.
#[derive(Clone, Debug)]
pub struct Improved {
    /// Start.
    pub start: Solved,
    /// Best; its case holds the improved design.
    pub best: Solved,
    /// All iterations.
    pub history: Vec<StepRecord>,
    /// Accepted steps.
    pub steps: usize,
    /// States computed with gradients.
    pub evaluations: usize,
    /// Why it ended.
    pub stop: StopReason,
    /// The same in one sentence.
    pub stop_sentence: String,
    /// Gradient against central differences at the start, relative.
    pub gradient_check: f64,
}

/// Why a run gave nothing: what, where, what to try.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Failure {
    /// The input cannot be computed.
    #[error("{sentence}")]
    BadInput {
        /// What, where and how to mend it.
        sentence: String,
        /// Places to mark on the drawing, m.
        places_m: Vec<Vec2>,
    },
    /// The computation did not converge.
    #[error("{sentence}")]
    NotConverged {
        /// What, how far it came and what to try.
        sentence: String,
        /// The best state reached, if it can be shown.
        best: Option<Box<SolveReport>>,
    },
    /// The user stopped it before there was a result.
    #[error("stopped before there was a result")]
    Stopped,
    /// A fault of the program itself.
    #[error("the engine failed: {sentence}; please report it with the project file")]
    Internal {
        /// What is known.
        sentence: String,
    },
}

/// What computes. Runs on the worker's thread.
pub trait Engine: Send {
    /// Solve a case; may start from the state of the last case solved.
    ///
    /// # Errors
    /// [`Failure`] in one sentence.
    fn solve(&mut self, case: &Case, watch: &Watch) -> Result<Solved, Failure>;

    /// Improve a case's free inserts; every iteration goes to `progress`.
    ///
    /// # Errors
    /// [`Failure`] when not even the start can be computed.
    fn improve(
        &mut self,
        case: &Case,
        watch: &Watch,
        progress: &mut dyn FnMut(StepRecord),
    ) -> Result<Improved, Failure>;
}
