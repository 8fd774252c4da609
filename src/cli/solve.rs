//! `solve`: one state.

use super::Hooks;
use super::exit::{CommandError, Exit};
use super::output::{is_standard, print, write};
use super::run::{load, out_of_turn, until_end};
use crate::report::table::{json, solve_summary};
use crate::study::{Event, Failure, Request, SolveReport};
use std::path::Path;

pub(super) fn solve(
    file: &Path,
    to_json: Option<&Path>,
    hooks: Hooks,
) -> Result<Exit, CommandError> {
    let project = load(file)?;
    let request = Request::Solve {
        case: project.case(),
    };
    match until_end(request, hooks, |_| Ok(())) {
        Ok(Event::Solved(solved)) => {
            tell(&solved.report, to_json)?;
            Ok(Exit::Done)
        }
        Ok(_) => Err(out_of_turn()),
        Err(CommandError::Run(Failure::NotConverged { sentence, best })) => {
            if let Some(report) = &best {
                tell(report, to_json)?;
            }
            Err(Failure::NotConverged { sentence, best }.into())
        }
        Err(error) => Err(error),
    }
}

fn tell(report: &SolveReport, to_json: Option<&Path>) -> Result<(), CommandError> {
    if let Some(path) = to_json {
        write(path, json(report)?.as_bytes())?;
    }
    if !to_json.is_some_and(is_standard) {
        print(&solve_summary(report));
    }
    Ok(())
}
