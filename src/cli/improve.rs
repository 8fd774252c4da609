//! `improve`: better contours within the limits, and the files that tell of it.

use super::Hooks;
use super::exit::{CommandError, Exit};
use super::output::{folder, is_standard, print, write};
use super::progress::say;
use super::run::{load, out_of_turn, until_end};
use crate::report::contour_file::{self, LengthUnit};
use crate::report::table::{history_csv, improve_report, improve_summary, json};
use crate::report::{Field, Figure, contour_file_name};
use crate::study::{Design, Event, Failure, Improved, Project, Request, StepRecord, StopReason};
use std::path::Path;
use std::sync::Arc;

/// Chord tolerance of the contour lists, m: a tenth of what a good shop holds (common practice, no source).
const CHORD_M: f64 = 2e-6;

/// Relative violation up to which a step's limits count as met while the run goes on.
const MET: f64 = 1e-6;

/// Width of the picture, pixels.
const PICTURE_PX: u32 = 1600;

pub(super) fn improve(
    file: &Path,
    steps: Option<u32>,
    out: Option<&Path>,
    to_json: Option<&Path>,
    hooks: Hooks,
) -> Result<Exit, CommandError> {
    let mut project = load(file)?;
    let faults = project.improve_faults();
    if !faults.is_empty() {
        return Err(CommandError::Faults(faults));
    }
    if let Some(steps) = steps {
        project.run.steps = steps as usize;
    }
    if let Some(out) = out {
        folder(out)?;
    }
    if let Some(sentence) = project.bounding_limit_missing() {
        say(&format!("caution: {sentence}\n"));
    }
    let mut kept = Kept::new(&project);
    let request = Request::Improve {
        case: project.case(),
    };
    let ended = until_end(request, hooks, |record| match out {
        Some(out) => kept.step(record, out),
        None => Ok(()),
    });
    let improved = match ended {
        Ok(Event::Finished(improved)) => improved,
        Ok(_) => return Err(out_of_turn()),
        Err(CommandError::Run(Failure::NotConverged { sentence, best })) => {
            // Not even the start converged: what is known of it is the best state there is.
            if let (Some(path), Some(report)) = (to_json, &best) {
                write(path, json(report)?.as_bytes())?;
            }
            return Err(Failure::NotConverged { sentence, best }.into());
        }
        Err(error) => return Err(error),
    };
    if let Some(out) = out {
        write_all(&project, &improved, out)?;
    }
    if let Some(path) = to_json {
        write(path, json(&improve_report(&improved))?.as_bytes())?;
    }
    if !to_json.is_some_and(is_standard) {
        print(&improve_summary(
            &improved.start,
            &improved.best,
            &improved.stop_sentence,
        ));
    }
    match improved.stop {
        // The number of steps was asked for: reaching it is no failure.
        StopReason::Converged | StopReason::StepLimit | StopReason::NoFurtherStep => Ok(Exit::Done),
        StopReason::LimitsInconsistent | StopReason::StoppedByUser => {
            say(&format!("flumeloft: {}\n", improved.stop_sentence));
            Ok(Exit::NotConverged)
        }
    }
}

/// The best so far, written after each step: an interrupted run leaves it behind.
struct Kept {
    project: Project,
    history: Vec<StepRecord>,
    violation: f64,
}

impl Kept {
    fn new(project: &Project) -> Self {
        Self {
            project: project.clone(),
            history: Vec::new(),
            violation: f64::INFINITY,
        }
    }

    fn step(&mut self, record: StepRecord, out: &Path) -> Result<(), CommandError> {
        if record.accepted && record.violation <= self.violation.max(MET) {
            self.violation = record.violation;
            for (insert, points) in self
                .project
                .design
                .inserts
                .iter_mut()
                .zip(&record.inserts_m)
            {
                insert.points_m.clone_from(points);
            }
            write(
                &out.join("improved.json"),
                self.project.to_json()?.as_bytes(),
            )?;
        }
        let record = StepRecord {
            snapshot: None,
            ..record
        };
        self.history.push(record);
        write_history(&self.project.design, &self.history, out)
    }
}

fn write_history(design: &Design, history: &[StepRecord], out: &Path) -> Result<(), CommandError> {
    let csv = history_csv(&design.aim, history);
    write(&out.join("history.csv"), csv.as_bytes())
}

fn write_all(project: &Project, improved: &Improved, out: &Path) -> Result<(), CommandError> {
    let best = &improved.best;
    let after = Project {
        design: Arc::unwrap_or_clone(Arc::clone(&best.case.design)),
        ..project.clone()
    };
    write(&out.join("improved.json"), after.to_json()?.as_bytes())?;
    write_history(&after.design, &improved.history, out)?;
    for insert in &after.design.inserts {
        let text = contour_file::text(insert, LengthUnit::Millimetre, CHORD_M)?;
        write(&out.join(contour_file_name(&insert.name)), text.as_bytes())?;
    }
    let png = Figure {
        title: &format!("{}: before and after", project.name),
        design: &after.design,
        before: Some(&project.design),
        snapshot: Some(&best.snapshot),
        field: Field::Temperature,
        range: None,
        width_px: PICTURE_PX,
    }
    .png()?;
    write(&out.join("before_after.png"), &png)
}
