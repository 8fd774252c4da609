//! The words of the command line.

use clap::{Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// Lay out cooled channels: solve flow and heat round an insert, improve its contour, export it.
///
/// Without a command the studio opens. All figures are two-dimensional, per metre of depth.
#[derive(Debug, Parser)]
#[command(name = "flumeloft", version, propagate_version = true)]
pub struct Args {
    /// What to do.
    #[command(subcommand)]
    pub command: Option<Command>,
}

/// What can be asked for.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Open the studio, with a project if one is named.
    Studio {
        /// Project file.
        file: Option<PathBuf>,
    },
    /// Tell whether a project can be computed: all faults at once, and what is probably not meant.
    Check {
        /// Project file.
        file: PathBuf,
    },
    /// Compute flow and heat once.
    Solve {
        /// Project file.
        file: PathBuf,
        /// Write the report as JSON to this file, or to standard output for `-`.
        #[arg(long, value_name = "PATH|-")]
        json: Option<PathBuf>,
    },
    /// Improve the free inserts within the limits.
    ///
    /// With --out the improved project and the history are written again after each step, so that an
    /// interrupted run leaves its best shape.
    Improve {
        /// Project file.
        file: PathBuf,
        /// Most steps; that of the project when not given.
        #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..=10_000))]
        steps: Option<u32>,
        /// Folder for the improved project, history, contour lists and picture; made if it is not there.
        #[arg(long, value_name = "DIR")]
        out: Option<PathBuf>,
        /// Write the report as JSON to this file, or to standard output for `-`.
        #[arg(long, value_name = "PATH|-")]
        json: Option<PathBuf>,
    },
    /// Read a plain list of coordinates as an insert, and tell how far its spline departs from the list.
    Import {
        /// Project file.
        file: PathBuf,
        /// List of coordinates.
        list: PathBuf,
        /// Insert that takes the contour; a new one when not given.
        #[arg(long, value_name = "NAME")]
        insert: Option<String>,
        /// Project file to write; the same when not given.
        #[arg(short, long, value_name = "PATH")]
        output: Option<PathBuf>,
    },
    /// Write the contour of an insert as a plain list of coordinates.
    Contour {
        /// Project file.
        file: PathBuf,
        /// Which insert; needed when there are several.
        #[arg(long, value_name = "NAME")]
        insert: Option<String>,
        /// Largest distance between the contour and the straight lines of the list, mm.
        #[arg(long, value_name = "X", default_value_t = 0.01)]
        chord_mm: f64,
        /// Unit of the coordinates.
        #[arg(long, value_enum, default_value_t = LengthUnit::Mm)]
        unit: LengthUnit,
        /// File to write; standard output when not given.
        #[arg(short, long, value_name = "PATH")]
        output: Option<PathBuf>,
    },
}

/// Unit of a list of coordinates.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum LengthUnit {
    /// Millimetres.
    Mm,
    /// Metres.
    M,
}
