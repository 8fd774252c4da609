//! The engine's face: project file, cases, runs and the worker. The window and the command line use only this.

mod aims;
mod case;
pub mod design;
pub mod engine;
pub mod fault;
pub mod file;
#[cfg(test)]
mod file_tests;
pub mod flow_engine;
mod import;
mod json_layout;
mod mailbox;
pub mod picture;
pub mod protocol;
pub mod report;
mod shape_limits;
mod shape_problem;
pub mod snapshot;
pub mod stand_in;
#[cfg(test)]
pub(crate) mod test_design;
mod validate;
mod validate_limits;
mod validate_ports;
#[cfg(test)]
mod validate_tests;
pub mod worker;
#[cfg(test)]
mod worker_tests;

pub use design::{
    Accuracy, Aim, Design, DuctPiece, Insert, Limit, Project, RunSettings, VERSION, Variant,
};
pub use engine::{Case, Engine, Failure, Improved, Solved, StepRecord, StopReason};
pub use fault::Fault;
pub use file::FileError;
pub use protocol::{Event, Message, Request, RunId};
pub use report::{
    Balance, Caution, CautionLevel, ImproveReport, InsertReport, LimitReport, Seconds, SolveReport,
};
pub use snapshot::{FieldSnapshot, LineProfile};
pub use worker::Worker;

/// The engine that the window and the command line compute with.
pub fn new_engine() -> Box<dyn Engine> {
    Box::new(flow_engine::FlowEngine::new())
}
