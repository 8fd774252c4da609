//! The engine's face: project file, cases, runs and the worker. The window and the command line use only this.

pub mod design;
pub mod engine;
pub mod picture;
pub mod report;
pub mod snapshot;

pub use design::{Accuracy, Aim, Design, DuctPiece, Insert, Limit, Project, RunSettings, Variant};
pub use engine::{Case, Engine, Failure, Improved, Solved, StepRecord, StopReason};
pub use report::{
    Balance, Caution, CautionLevel, ImproveReport, InsertReport, LimitReport, Seconds, SolveReport,
};
pub use snapshot::{FieldSnapshot, LineProfile};
