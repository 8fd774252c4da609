//! How a command ends: the exit code is the contract with scripts.

use crate::geometry::Domain;
use crate::report::ReportError;
use crate::study::{Failure, Fault, FileError};
use std::process::ExitCode;

/// Exit codes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exit {
    /// Done.
    Done = 0,
    /// A fault of the program itself.
    Internal = 1,
    /// Bad input: one sentence on standard error, nothing on standard output.
    BadInput = 2,
    /// Not converged: the best state is written, the reason stands on standard error.
    NotConverged = 3,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit as u8)
    }
}

/// Why a command ends early.
#[derive(Debug, thiserror::Error)]
pub(super) enum CommandError {
    /// The project file.
    #[error(transparent)]
    File(#[from] FileError),
    /// What is in it.
    #[error("{}", first_of(.0))]
    Faults(Vec<Fault>),
    /// The run.
    #[error(transparent)]
    Run(#[from] Failure),
    /// A report.
    #[error(transparent)]
    Report(#[from] ReportError),
    /// A file to be written.
    #[error("{}: cannot be written ({reason}); check the folder, its permissions and free space", path.display())]
    Unwritable {
        /// Which.
        path: std::path::PathBuf,
        /// What the system said.
        reason: std::io::Error,
    },
    /// A word of the command.
    #[error("{sentence}")]
    Argument {
        /// What and how to mend it.
        sentence: String,
    },
    /// The window.
    #[error("the studio cannot open: {0}; the other commands need no window")]
    Studio(Box<dyn std::error::Error>),
}

impl CommandError {
    pub(super) fn exit(&self) -> Exit {
        match self {
            Self::Run(Failure::NotConverged { .. } | Failure::Stopped) => Exit::NotConverged,
            Self::Report(ReportError::TooFine { .. }) => Exit::BadInput,
            Self::Run(Failure::Internal { .. }) | Self::Report(_) | Self::Studio(_) => {
                Exit::Internal
            }
            _ => Exit::BadInput,
        }
    }
}

fn first_of(faults: &[Fault]) -> String {
    match faults {
        [] => "the project has a fault".into(),
        [only] => only.to_string(),
        [first, rest @ ..] => format!("{first} (and {} more: see `flumeloft check`)", rest.len()),
    }
}

/// The domain or the faults as an error.
pub(super) fn sound(domain: Result<Domain, Vec<Fault>>) -> Result<Domain, CommandError> {
    domain.map_err(CommandError::Faults)
}
