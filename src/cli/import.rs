//! `import`: a list of coordinates as an insert of a project.

use super::exit::{CommandError, Exit};
use super::output::print;
use crate::study::Project;
use std::path::Path;

pub(super) fn import(
    file: &Path,
    list: &Path,
    into: Option<&str>,
    output: Option<&Path>,
) -> Result<Exit, CommandError> {
    let refuse = |sentence: String| CommandError::Argument { sentence };
    let mut project = Project::load(file)?;
    let text = std::fs::read_to_string(list)
        .map_err(|e| refuse(format!("{}: cannot be read ({e})", list.display())))?;
    let (mut insert, deviation_m) = project
        .design
        .insert_from_list(&text)
        .map_err(|e| refuse(format!("{}: {e}", list.display())))?;
    let inserts = &mut project.design.inserts;
    match into {
        None => inserts.push(insert.clone()),
        Some(name) => {
            let Some(old) = inserts.iter_mut().find(|i| i.name == name) else {
                return Err(refuse(format!(
                    "there is no insert \"{name}\" to take the contour of the list"
                )));
            };
            old.points_m.clone_from(&insert.points_m);
            insert.name = name.to_owned();
        }
    }
    let faults = project.faults();
    if !faults.is_empty() {
        return Err(CommandError::Faults(faults));
    }
    project.save(output.unwrap_or(file))?;
    print(&format!(
        "{}: {} control points, largest deviation from the list {:.4} mm\n",
        insert.name,
        insert.points_m.len(),
        deviation_m * 1e3
    ));
    Ok(Exit::Done)
}
