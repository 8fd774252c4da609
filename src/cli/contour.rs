//! `contour`: the contour of an insert as a list of coordinates.

use super::LengthUnit;
use super::exit::{CommandError, Exit};
use super::output::{print, write};
use crate::report::contour_file;
use crate::study::{Insert, Project};
use std::path::Path;

pub(super) fn contour(
    file: &Path,
    name: Option<&str>,
    chord_mm: f64,
    unit: LengthUnit,
    output: Option<&Path>,
) -> Result<Exit, CommandError> {
    let project = Project::load(file)?;
    let insert = choose(&project.design.inserts, name)?;
    if !(chord_mm > 0.0 && chord_mm.is_finite()) {
        let sentence = format!("--chord-mm is {chord_mm}, but must be greater than zero");
        return Err(CommandError::Argument { sentence });
    }
    let faults = project.faults();
    if !faults.is_empty() {
        return Err(CommandError::Faults(faults));
    }
    let unit = match unit {
        LengthUnit::Mm => contour_file::LengthUnit::Millimetre,
        LengthUnit::M => contour_file::LengthUnit::Metre,
    };
    let text = contour_file::text(insert, unit, chord_mm * 1e-3)?;
    match output {
        Some(path) => write(path, text.as_bytes())?,
        None => print(&text),
    }
    Ok(Exit::Done)
}

fn choose<'a>(inserts: &'a [Insert], name: Option<&str>) -> Result<&'a Insert, CommandError> {
    let names: Vec<&str> = inserts.iter().map(|i| i.name.as_str()).collect();
    let refuse = |sentence: String| Err(CommandError::Argument { sentence });
    match (name, inserts) {
        (_, []) => refuse("the project has no insert whose contour could be written".into()),
        (None, [only]) => Ok(only),
        (None, _) => refuse(format!(
            "the project has several inserts: choose one with --insert ({})",
            names.join(", ")
        )),
        (Some(name), _) => match inserts.iter().find(|i| i.name == name) {
            Some(insert) => Ok(insert),
            None => refuse(format!(
                "there is no insert \"{name}\": choose one of {}",
                names.join(", ")
            )),
        },
    }
}
