//! What the worker is asked and what it tells: the words between a run and whoever started it.

use super::{Case, Failure, Improved, Solved, StepRecord};

/// Number of a run, increasing from 1 in the order of asking.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct RunId(pub u64);

/// A run asked for.
#[derive(Clone, Debug)]
pub enum Request {
    /// Compute one state.
    Solve {
        /// What to compute.
        case: Case,
    },
    /// Improve the free inserts.
    Improve {
        /// Where to start from.
        case: Case,
    },
}

impl Request {
    /// The case of the run.
    pub fn case(&self) -> &Case {
        match self {
            Self::Solve { case } | Self::Improve { case } => case,
        }
    }
}

/// What happened in a run. Per run: `Accepted`, any number of `Stage` and `Step`, then exactly one end:
/// `Solved`, `Finished` or `Failed`.
#[derive(Clone, Debug)]
pub enum Event {
    /// The run was taken up.
    Accepted,
    /// How far it is; only the newest is kept.
    Stage {
        /// Stage in plain words.
        text: String,
        /// Fraction done, 0 to 1.
        fraction: f64,
    },
    /// An iteration of an improvement; never lost. While several wait unread only the newest keeps its
    /// pictures ([`StepRecord::snapshot`]); the history in [`Improved`] keeps all.
    Step(Box<StepRecord>),
    /// End of a solve.
    Solved(Box<Solved>),
    /// End of an improvement, also of one that was stopped: the best shape that met its limits.
    Finished(Box<Improved>),
    /// End without a result; [`Failure::Stopped`] too when a newer run took its place.
    Failed(Failure),
}

impl Event {
    /// Whether nothing follows in the same run.
    pub fn is_end(&self) -> bool {
        matches!(self, Self::Solved(_) | Self::Finished(_) | Self::Failed(_))
    }
}

/// An event with its run.
#[derive(Clone, Debug)]
pub struct Message {
    /// Which run.
    pub run: RunId,
    /// What happened.
    pub event: Event,
}
