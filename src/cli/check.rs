//! `check`: whether a project can be computed, without computing it.

use super::exit::{CommandError, Exit};
use super::output::print;
use super::progress::say;
use crate::study::Project;
use std::path::Path;

pub(super) fn check(file: &Path) -> Result<Exit, CommandError> {
    let project = Project::load(file)?;
    let mut faults = project.faults();
    if faults.is_empty()
        && let Err(more) = project.design.domain()
    {
        faults = more;
    }
    if !faults.is_empty() {
        for fault in &faults {
            say(&format!("{fault}\n"));
        }
        return Ok(Exit::BadInput);
    }
    for caution in project.design.input_cautions() {
        say(&format!("caution: {}\n", caution.text));
    }
    for fault in project.improve_faults() {
        say(&format!("cannot be improved: {fault}\n"));
    }
    if let Some(sentence) = project.bounding_limit_missing() {
        say(&format!("caution: {sentence}\n"));
    }
    let design = &project.design;
    print(&format!(
        "{}: can be computed ({} pieces, {} inserts of which {} free, {} limits)\n",
        project.name,
        design.duct.len(),
        design.inserts.len(),
        design.inserts.iter().filter(|i| !i.frozen).count(),
        design.limits.len()
    ));
    Ok(Exit::Done)
}
