//! One run on the worker, with its progress shown.

use super::Hooks;
use super::exit::{CommandError, sound};
use super::progress::Progress;
use crate::study::{Event, Failure, Project, Request, StepRecord, Worker};
use std::path::Path;
use std::time::Duration;

/// A project that can be computed.
pub(super) fn load(file: &Path) -> Result<Project, CommandError> {
    let project = Project::load(file)?;
    let faults = project.faults();
    if !faults.is_empty() {
        return Err(CommandError::Faults(faults));
    }
    sound(project.design.domain())?;
    Ok(project)
}

/// Ask for a run and wait for its end; each iteration goes to `each_step`.
pub(super) fn until_end(
    request: Request,
    hooks: Hooks,
    mut each_step: impl FnMut(StepRecord) -> Result<(), CommandError>,
) -> Result<Event, CommandError> {
    /// How long one look into the mailbox lasts; only so that it need not be endless.
    const LOOK: Duration = Duration::from_secs(1);
    let unit = request.case().design.aim.unit();
    let mut progress = Progress::new();
    let worker = Worker::new(hooks.make_engine, || {});
    let run = worker.submit(request);
    loop {
        let Some(message) = worker.wait(LOOK) else {
            if worker.is_busy() {
                continue;
            }
            // The end is posted just after the run stops being busy.
            if let Some(message) = worker.wait(LOOK) {
                if message.event.is_end() {
                    return end(message.event);
                }
                continue;
            }
            let sentence = "the worker ended without a result".to_owned();
            return Err(Failure::Internal { sentence }.into());
        };
        if message.run != run {
            continue;
        }
        match message.event {
            Event::Accepted => {}
            Event::Stage { text, fraction } => progress.stage(&text, fraction),
            Event::Step(record) => {
                progress.step(&record, unit);
                each_step(*record)?;
            }
            ended => {
                progress.clear();
                return end(ended);
            }
        }
    }
}

fn end(event: Event) -> Result<Event, CommandError> {
    match event {
        Event::Failed(failure) => Err(failure.into()),
        other => Ok(other),
    }
}

/// An event that cannot end this kind of run.
pub(super) fn out_of_turn() -> CommandError {
    let sentence = "the run ended with the result of another kind of run".to_owned();
    Failure::Internal { sentence }.into()
}
