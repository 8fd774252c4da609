//! The headless verbs. The only layer that prints.

mod args;
mod check;
mod contour;
mod exit;
mod import;
mod improve;
mod output;
mod progress;
mod run;
mod solve;

pub use args::{Args, Command, LengthUnit};
pub use exit::Exit;

use crate::study::Engine;
use clap::Parser;
use clap::error::ErrorKind;
use exit::CommandError;
use std::ffi::OsString;
use std::path::PathBuf;

/// Opens the window, with a project if one is named.
pub type OpenStudio = fn(Option<PathBuf>) -> Result<(), Box<dyn std::error::Error>>;

/// What the command line needs from above and below: handed in, so that it depends on neither.
#[derive(Clone, Copy)]
pub struct Hooks {
    /// Opens the window, with a project if one is named.
    pub open_studio: OpenStudio,
    /// Makes the engine that computes.
    pub make_engine: fn() -> Box<dyn Engine>,
}

/// Run a command line (the program's name first) and tell how it ended.
pub fn run(arguments: impl IntoIterator<Item = OsString>, hooks: Hooks) -> Exit {
    let args = match Args::try_parse_from(arguments) {
        Ok(args) => args,
        Err(error) => return refuse_words(&error),
    };
    let done = match args.command.unwrap_or(Command::Studio { file: None }) {
        Command::Studio { file } => (hooks.open_studio)(file)
            .map(|()| Exit::Done)
            .map_err(CommandError::Studio),
        Command::Check { file } => check::check(&file),
        Command::Solve { file, json } => solve::solve(&file, json.as_deref(), hooks),
        Command::Improve {
            file,
            steps,
            out,
            json,
        } => improve::improve(&file, steps, out.as_deref(), json.as_deref(), hooks),
        Command::Import {
            file,
            list,
            insert,
            output,
        } => import::import(&file, &list, insert.as_deref(), output.as_deref()),
        Command::Contour {
            file,
            insert,
            chord_mm,
            unit,
            output,
        } => contour::contour(&file, insert.as_deref(), chord_mm, unit, output.as_deref()),
    };
    done.unwrap_or_else(|error| {
        // One line, whatever a file name or a key may hold.
        let sentence = error.to_string().replace(['\n', '\r'], " ");
        progress::say(&format!("flumeloft: {sentence}\n"));
        error.exit()
    })
}

/// Help and version to standard output; a wrong word as one sentence.
fn refuse_words(error: &clap::Error) -> Exit {
    let text = error.render().to_string();
    match error.kind() {
        ErrorKind::DisplayHelp | ErrorKind::DisplayVersion => {
            output::print(&text);
            Exit::Done
        }
        _ => {
            let first: Vec<&str> = text
                .lines()
                .take_while(|l| !l.is_empty())
                .map(str::trim)
                .collect();
            let sentence = first.join(" ");
            let sentence = sentence.strip_prefix("error: ").unwrap_or(&sentence);
            progress::say(&format!("flumeloft: {sentence}; see `flumeloft --help`\n"));
            Exit::BadInput
        }
    }
}
