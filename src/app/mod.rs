//! The window: draws, edits shapes, asks the worker. The only layer that knows egui.

mod bar;
pub mod canvas;
mod canvas_words;
pub mod command;
pub mod edits;
mod export;
mod frame;
pub mod history;
mod link;
pub mod panels;
pub mod persist;
mod session;
mod steps;
pub mod studio;
mod templates;
pub mod theme;
mod windows;
pub mod words;

pub use studio::Studio;

use crate::study::Project;
use std::path::PathBuf;

/// Samples that the studio carries: (name, project file).
pub const SAMPLES: &[(&str, &str)] = &[
    (
        "Air-cooled tube",
        include_str!("../../sample_projects/air_tube.json"),
    ),
    (
        "Water-cooled pin",
        include_str!("../../sample_projects/water_pin.json"),
    ),
    (
        "Vane in an oil bend",
        include_str!("../../sample_projects/oil_bend_vane.json"),
    ),
    (
        "Rod bank in an air stream",
        include_str!("../../sample_projects/open_stream_rods.json"),
    ),
];

/// Why the window could not be opened.
#[derive(Debug, thiserror::Error)]
pub enum AppError {
    /// The file named could not be opened.
    #[error(transparent)]
    File(#[from] crate::study::FileError),
    /// No window.
    #[error(
        "no window could be opened ({0}); check that a display is there, or use the commands solve and improve, which need none"
    )]
    Window(String),
}

/// Open the studio with a project, or with the first sample.
///
/// # Errors
/// [`AppError`].
pub fn run(file: Option<PathBuf>) -> Result<(), AppError> {
    let project = match &file {
        Some(path) => Project::load(path)?,
        None => Project::from_json(SAMPLES[0].1)?,
    };
    let options = eframe::NativeOptions {
        viewport: egui::ViewportBuilder::default()
            .with_title("Flumeloft")
            .with_inner_size([1440.0, 900.0])
            .with_min_inner_size([900.0, 600.0]),
        ..Default::default()
    };
    eframe::run_native(
        "flumeloft",
        options,
        Box::new(move |creation| {
            let ctx = creation.egui_ctx.clone();
            let studio = Studio::new(project, file, persist::Settings::load(), move || {
                ctx.request_repaint()
            });
            Ok(Box::new(Window {
                studio,
                first: true,
            }))
        }),
    )
    .map_err(|error| AppError::Window(error.to_string()))
}

struct Window {
    studio: Studio,
    first: bool,
}

impl eframe::App for Window {
    fn logic(&mut self, ctx: &egui::Context, _frame: &mut eframe::Frame) {
        self.studio.logic(ctx);
    }

    fn ui(&mut self, ui: &mut egui::Ui, _frame: &mut eframe::Frame) {
        self.studio.ui(ui);
        if std::mem::take(&mut self.first) {
            log("first frame");
        }
    }

    fn on_exit(&mut self, _gl: Option<&eframe::glow::Context>) {
        self.studio.autosave();
    }
}

/// A line for whoever watches the studio from outside (tests of the real window), on the error stream and only
/// when asked for by the environment variable `FLUMELOFT_LOG`.
pub(crate) fn log(line: &str) {
    use std::io::Write;
    if std::env::var_os("FLUMELOFT_LOG").is_some() {
        let _ = writeln!(std::io::stderr(), "log: {line}");
    }
}
