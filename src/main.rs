//! The program: a command line that opens the studio when it is given nothing else to do.

use flumeloft::cli::{Hooks, run};
use std::process::ExitCode;

fn main() -> ExitCode {
    let hooks = Hooks {
        open_studio: |file| flumeloft::app::run(file).map_err(Into::into),
        make_engine: flumeloft::study::new_engine,
    };
    run(std::env::args_os(), hooks).into()
}
