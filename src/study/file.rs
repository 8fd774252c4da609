//! Project files: read with refusals that name the place, written so that they come back to the last bit.

use super::design::{MOST_CHARACTERS_IN_NAME, MOST_INSERTS, MOST_LIMITS, MOST_NOTES, MOST_PIECES};
use super::design::{MOST_POINTS, MOST_VARIANTS, Project, VERSION};
use super::json_layout::Layout;
use super::{Aim, DuctPiece, Insert, Limit, RunSettings, Variant};
use crate::base::Vec2;
use crate::geometry::PieceShape;
use crate::physics::{FlowCondition, Fluid, ThermalCondition};
use serde::Serialize;
use serde::de::DeserializeOwned;
use serde_json::Value;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Largest project file read, bytes: a hundred times the largest project that [`Project::from_json`] accepts
/// in one variant; larger is surely something else.
pub const LARGEST_FILE_BYTES: u64 = 64 << 20;

/// Why a project file cannot be read or written.
#[derive(Debug, thiserror::Error)]
pub enum FileError {
    /// The system refused to read it.
    #[error("{}: cannot be read ({reason}); check the path and its permissions", path.display())]
    Unreadable {
        /// Which file.
        path: PathBuf,
        /// What the system said.
        reason: std::io::Error,
    },
    /// The system refused to write it.
    #[error("{}: cannot be written ({reason}); check the folder, its permissions and free space", path.display())]
    Unwritable {
        /// Which file.
        path: PathBuf,
        /// What the system said.
        reason: std::io::Error,
    },
    /// Larger than [`LARGEST_FILE_BYTES`].
    #[error(
        "the file has {bytes} bytes, more than the {LARGEST_FILE_BYTES} a project file may have"
    )]
    TooLarge {
        /// Its size.
        bytes: u64,
    },
    /// Not UTF-8.
    #[error("byte {byte} is not UTF-8 text, so this is no project file; choose a .json file")]
    NotText {
        /// First bad byte.
        byte: usize,
    },
    /// Not JSON.
    #[error(
        "line {line}, column {column}: not valid JSON ({reason}): correct the text there; NaN and infinity are no numbers of JSON"
    )]
    Syntax {
        /// Line, from 1.
        line: usize,
        /// Column, from 1.
        column: usize,
        /// What the parser met.
        reason: String,
    },
    /// JSON, but not an object with a version.
    #[error(
        "not a project file: it must hold a JSON object with the whole number \"version\": {VERSION}"
    )]
    NotAProject,
    /// Of a format this program does not know.
    #[error(
        "version {version} of the file format is unknown here (this program reads {VERSION}); {mend}"
    )]
    Version {
        /// What the file says.
        version: u64,
        /// What to do.
        mend: &'static str,
    },
    /// A key is missing, unknown or of the wrong kind.
    #[error("{key}: {reason}; see docs/project-file.md for the keys and their units")]
    Key {
        /// Path of the key, such as `design.duct[2].flow`.
        key: String,
        /// What is wrong with it.
        reason: String,
    },
    /// More of something than a project may hold.
    #[error("{key}: has {count}, but a project may hold at most {most} here; simplify it")]
    TooMany {
        /// Path of the key.
        key: String,
        /// How many there are.
        count: usize,
        /// How many there may be.
        most: usize,
    },
}

impl FileError {
    /// A key may hold escaped line breaks; a sentence must not.
    fn on_one_line(self) -> Self {
        let flat = |text: String| text.replace(|c: char| c.is_control(), " ");
        match self {
            Self::Key { key, reason } => Self::Key {
                key: flat(key),
                reason: flat(reason),
            },
            Self::Syntax {
                line,
                column,
                reason,
            } => Self::Syntax {
                line,
                column,
                reason: flat(reason),
            },
            other => other,
        }
    }
}

impl Project {
    /// Read a project from JSON text. What is read is well-formed; whether it can be computed is told by
    /// [`Project::faults`].
    ///
    /// # Errors
    /// [`FileError`] with the key or line at fault.
    pub fn from_json(text: &str) -> Result<Self, FileError> {
        let value: Value = serde_json::from_str(text).map_err(syntax)?;
        let version = value
            .as_object()
            .and_then(|o| o.get("version"))
            .and_then(Value::as_u64)
            .ok_or(FileError::NotAProject)?;
        if version != u64::from(VERSION) {
            let mend = if version > u64::from(VERSION) {
                "open it with the newer program that wrote it"
            } else {
                "there never was such a format: check the file"
            };
            return Err(FileError::Version { version, mend });
        }
        // From the text, not from `value`: only so are keys written twice refused.
        let project: Self = serde_json::from_str(text)
            .map_err(|error| blame(&value).unwrap_or_else(|| at_line(&error)))
            .map_err(FileError::on_one_line)?;
        project.check_counts()?;
        Ok(project)
    }

    /// The project as pretty JSON text, the same text for equal projects; [`Project::from_json`] gives back an
    /// equal project, to the last bit of each number.
    ///
    /// # Errors
    /// [`FileError::Key`] where a number is not finite, [`FileError::TooMany`].
    pub fn to_json(&self) -> Result<String, FileError> {
        let mut bytes = Vec::new();
        let mut writer = serde_json::Serializer::with_formatter(&mut bytes, Layout::default());
        self.serialize(&mut writer).map_err(|e| at_line(&e))?;
        bytes.push(b'\n');
        // serde_json writes UTF-8 only, so nothing is replaced here.
        let text = String::from_utf8_lossy(&bytes).into_owned();
        // A number that is not finite became null: reading back names its key.
        Self::from_json(&text)?;
        Ok(text)
    }

    /// Read a project file.
    ///
    /// # Errors
    /// [`FileError`].
    pub fn load(path: &Path) -> Result<Self, FileError> {
        let unreadable = |reason| FileError::Unreadable {
            path: path.to_owned(),
            reason,
        };
        let bytes = std::fs::metadata(path).map_err(unreadable)?.len();
        if bytes > LARGEST_FILE_BYTES {
            return Err(FileError::TooLarge { bytes });
        }
        let content = std::fs::read(path).map_err(unreadable)?;
        let text = std::str::from_utf8(&content).map_err(|e| FileError::NotText {
            byte: e.valid_up_to() + 1,
        })?;
        Self::from_json(text)
    }

    /// Write a project file: to a neighbour first, which then takes its place, so that a crash never leaves
    /// half a file.
    ///
    /// # Errors
    /// [`FileError`].
    pub fn save(&self, path: &Path) -> Result<(), FileError> {
        write_whole(path, self.to_json()?.as_bytes())
    }

    fn check_counts(&self) -> Result<(), FileError> {
        let most = |key: &str, count: usize, most: usize| {
            if count > most {
                let key = key.to_owned();
                return Err(FileError::TooMany { key, count, most });
            }
            Ok(())
        };
        let name = |key: &str, name: &str| {
            most(
                &format!("{key} (characters)"),
                name.chars().count(),
                MOST_CHARACTERS_IN_NAME,
            )
        };
        let inserts = |key: &str, inserts: &[Insert]| {
            most(key, inserts.len(), MOST_INSERTS)?;
            for (i, insert) in inserts.iter().enumerate() {
                name(&format!("{key}[{i}].name"), &insert.name)?;
                most(
                    &format!("{key}[{i}].points_m"),
                    insert.points_m.len(),
                    MOST_POINTS,
                )?;
            }
            Ok(())
        };
        let design = &self.design;
        name("name", &self.name)?;
        most("notes (characters)", self.notes.chars().count(), MOST_NOTES)?;
        name("design.fluid.name", &design.fluid.name)?;
        most("design.duct", design.duct.len(), MOST_PIECES)?;
        for (i, piece) in design.duct.iter().enumerate() {
            name(&format!("design.duct[{i}].name"), &piece.name)?;
            if let PieceShape::Spline { through_m } = &piece.shape {
                let key = format!("design.duct[{i}].shape.through_m");
                most(&key, through_m.len(), MOST_POINTS)?;
            }
        }
        inserts("design.inserts", &design.inserts)?;
        most("design.limits", design.limits.len(), MOST_LIMITS)?;
        most("variants", self.variants.len(), MOST_VARIANTS)?;
        for (i, variant) in self.variants.iter().enumerate() {
            name(&format!("variants[{i}].name"), &variant.name)?;
            inserts(&format!("variants[{i}].inserts"), &variant.inserts)?;
        }
        Ok(())
    }
}

/// Write a file as a whole or not at all: a neighbour is written, flushed to the disk and renamed.
///
/// # Errors
/// [`FileError::Unwritable`].
pub fn write_whole(path: &Path, content: &[u8]) -> Result<(), FileError> {
    // Through a link to the file it names, so that the link stays a link.
    let target = std::fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
    let mut name = std::ffi::OsString::from(".");
    name.push(target.file_name().unwrap_or_default());
    name.push(format!(".{}.part", std::process::id()));
    let neighbour = target.with_file_name(name);
    let written = std::fs::File::create(&neighbour)
        .and_then(|mut file| {
            file.write_all(content)?;
            file.sync_all()
        })
        .and_then(|()| std::fs::rename(&neighbour, &target));
    written.map_err(|reason| {
        // Best effort: the half-written neighbour is of no use to anybody.
        let _ = std::fs::remove_file(&neighbour);
        FileError::Unwritable {
            path: path.to_owned(),
            reason,
        }
    })
}

fn syntax(error: serde_json::Error) -> FileError {
    FileError::Syntax {
        line: error.line(),
        column: error.column(),
        reason: reason_of(&error),
    }
}

/// A fault of meaning that only the parser could place (a key written twice).
fn at_line(error: &serde_json::Error) -> FileError {
    FileError::Key {
        key: format!("line {}, column {}", error.line(), error.column()),
        reason: reason_of(error),
    }
}

/// The parser's words without its place.
fn reason_of(error: &serde_json::Error) -> String {
    let text = error.to_string();
    match text.rfind(" at line ") {
        Some(end) => text[..end].to_owned(),
        None => text,
    }
}

/// The smallest part of the project that cannot be read, with its key path.
fn blame(project: &Value) -> Option<FileError> {
    let design = &project["design"];
    let inserts = |key: &str, list: &Value| {
        each(key, list, |key, item| {
            each(&format!("{key}.points_m"), &item["points_m"], part::<Vec2>)
                .or_else(|| sub::<ThermalCondition>(key, item, "thermal"))
                .or_else(|| part::<Insert>(key, item))
        })
    };
    sub::<Fluid>("design", design, "fluid")
        .or_else(|| {
            each("design.duct", &design["duct"], |key, item| {
                sub::<Vec2>(key, item, "to_m")
                    .or_else(|| sub::<PieceShape>(key, item, "shape"))
                    .or_else(|| sub::<FlowCondition>(key, item, "flow"))
                    .or_else(|| sub::<ThermalCondition>(key, item, "thermal"))
                    .or_else(|| part::<DuctPiece>(key, item))
            })
        })
        .or_else(|| inserts("design.inserts", &design["inserts"]))
        .or_else(|| sub::<Aim>("design", design, "aim"))
        .or_else(|| each("design.limits", &design["limits"], part::<Limit>))
        .or_else(|| sub::<super::Design>("", project, "design"))
        .or_else(|| sub::<RunSettings>("", project, "run"))
        .or_else(|| {
            each("variants", &project["variants"], |key, item| {
                inserts(&format!("{key}.inserts"), &item["inserts"])
                    .or_else(|| part::<Variant>(key, item))
            })
        })
        .or_else(|| part::<Project>("project", project))
}

fn each(
    key: &str,
    list: &Value,
    mut one: impl FnMut(&str, &Value) -> Option<FileError>,
) -> Option<FileError> {
    let items = list.as_array()?;
    items
        .iter()
        .enumerate()
        .find_map(|(i, item)| one(&format!("{key}[{i}]"), item))
}

/// A part that is there but cannot be read (a missing one is told by the part around it).
fn sub<T: DeserializeOwned>(key: &str, around: &Value, name: &str) -> Option<FileError> {
    let dot = if key.is_empty() { "" } else { "." };
    part::<T>(&format!("{key}{dot}{name}"), around.get(name)?)
}

fn part<T: DeserializeOwned>(key: &str, value: &Value) -> Option<FileError> {
    let error = serde_json::from_value::<T>(value.clone()).err()?;
    Some(FileError::Key {
        key: key.to_owned(),
        reason: reason_of(&error),
    })
}
