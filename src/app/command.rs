//! Everything the user can ask for, in one table: menus, keys, the command finder and the tests read it.

use egui::{Key, KeyboardShortcut, Modifiers};

/// A command.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Command {
    /// Open a project file.
    Open,
    /// Save where it is.
    Save,
    /// Save under another name.
    SaveAs,
    /// Take back.
    Undo,
    /// Bring back.
    Redo,
    /// Improve the free inserts.
    Improve,
    /// Stop the run.
    Stop,
    /// Hold the run or let it go on.
    Pause,
    /// Keep the present shapes as a variant.
    KeepVariant,
    /// Write the contour as a coordinate list.
    ExportContour,
    /// Write the drawing as a picture.
    ExportPicture,
    /// Write the history as a table.
    ExportHistory,
    /// Read a coordinate list as an insert.
    ImportContour,
    /// Show the whole drawing.
    FitView,
    /// Paint temperature.
    ShowTemperature,
    /// Paint speed.
    ShowSpeed,
    /// Paint static pressure.
    ShowPressure,
    /// Paint total pressure.
    ShowTotalPressure,
    /// Paint nothing.
    ShowNothing,
    /// Lines of equal value.
    ToggleIsoLines,
    /// Streamlines.
    ToggleStreamlines,
    /// Mesh.
    ToggleMesh,
    /// Dimensions.
    ToggleDimensions,
    /// Snapping.
    ToggleSnap,
    /// Left panel.
    ToggleSketch,
    /// Right panel.
    ToggleFigures,
    /// Bottom panel.
    TogglePlots,
    /// Dark or light.
    ToggleDark,
    /// Metric or inches.
    ToggleUnits,
    /// Larger text.
    LargerText,
    /// Smaller text.
    SmallerText,
    /// Find a command.
    FindCommand,
    /// Write the window as a picture.
    SnapWindow,
    /// List of keys.
    ShowKeys,
}

/// A row of the table.
pub struct Entry {
    /// Name.
    pub name: &'static str,
    /// What it does, in a sentence.
    pub help: &'static str,
    /// Key.
    pub key: Option<KeyboardShortcut>,
}

/// What decides whether a command can run.
#[derive(Clone, Copy, Debug, Default)]
pub struct Availability {
    /// An improvement runs.
    pub improving: bool,
    /// There is something to undo.
    pub can_undo: bool,
    /// There is something to redo.
    pub can_redo: bool,
    /// A free insert exists.
    pub has_free_insert: bool,
    /// An insert exists.
    pub has_insert: bool,
    /// The drawing has faults.
    pub has_faults: bool,
    /// There is a history to write.
    pub has_history: bool,
}

const fn plain(name: &'static str, help: &'static str, key: Key) -> Entry {
    Entry {
        name,
        help,
        key: Some(KeyboardShortcut::new(Modifiers::NONE, key)),
    }
}

const fn ctrl(name: &'static str, help: &'static str, key: Key) -> Entry {
    Entry {
        name,
        help,
        key: Some(KeyboardShortcut::new(Modifiers::COMMAND, key)),
    }
}

const fn ctrl_shift(name: &'static str, help: &'static str, key: Key) -> Entry {
    Entry {
        name,
        help,
        key: Some(KeyboardShortcut::new(
            Modifiers::COMMAND.plus(Modifiers::SHIFT),
            key,
        )),
    }
}

impl Command {
    /// All commands, in the order of the finder.
    pub const ALL: [Self; 34] = [
        Self::Open,
        Self::Save,
        Self::SaveAs,
        Self::Undo,
        Self::Redo,
        Self::Improve,
        Self::Stop,
        Self::Pause,
        Self::KeepVariant,
        Self::ExportContour,
        Self::ExportPicture,
        Self::ExportHistory,
        Self::ImportContour,
        Self::FitView,
        Self::ShowTemperature,
        Self::ShowSpeed,
        Self::ShowPressure,
        Self::ShowTotalPressure,
        Self::ShowNothing,
        Self::ToggleIsoLines,
        Self::ToggleStreamlines,
        Self::ToggleMesh,
        Self::ToggleDimensions,
        Self::ToggleSnap,
        Self::ToggleSketch,
        Self::ToggleFigures,
        Self::TogglePlots,
        Self::ToggleDark,
        Self::ToggleUnits,
        Self::LargerText,
        Self::SmallerText,
        Self::FindCommand,
        Self::SnapWindow,
        Self::ShowKeys,
    ];

    /// Its row.
    pub const fn entry(self) -> Entry {
        match self {
            Self::Open => ctrl("Open…", "Open a project file or one of the samples", Key::O),
            Self::Save => ctrl("Save", "Write the project to its file", Key::S),
            Self::SaveAs => ctrl_shift("Save as…", "Write the project under another name", Key::S),
            Self::Undo => ctrl("Undo", "Take the last change back", Key::Z),
            Self::Redo => ctrl_shift("Redo", "Bring the last undone change back", Key::Z),
            Self::Improve => plain(
                "Improve",
                "Let the optimiser improve the free inserts within their limits",
                Key::F5,
            ),
            Self::Stop => plain("Stop", "Stop the run and keep its best shape", Key::F7),
            Self::Pause => plain(
                "Pause",
                "Hold the run before its next step, or let it go on",
                Key::F6,
            ),
            Self::KeepVariant => ctrl(
                "Keep as variant",
                "Keep the present shapes beside the others, to compare with",
                Key::K,
            ),
            Self::ExportContour => ctrl(
                "Export contour…",
                "Write the selected insert's contour as a coordinate list for CAD",
                Key::E,
            ),
            Self::ExportPicture => ctrl(
                "Export picture…",
                "Write the drawing with its field as a PNG picture",
                Key::P,
            ),
            Self::ExportHistory => ctrl_shift(
                "Export history…",
                "Write the run's history as a table (CSV)",
                Key::H,
            ),
            Self::ImportContour => ctrl(
                "Import contour…",
                "Read a coordinate list as a new insert",
                Key::I,
            ),
            Self::FitView => plain("Fit drawing", "Show the whole drawing", Key::F),
            Self::ShowTemperature => plain("Temperature", "Paint the temperature", Key::Num1),
            Self::ShowSpeed => plain("Speed", "Paint the speed", Key::Num2),
            Self::ShowPressure => plain("Static pressure", "Paint the static pressure", Key::Num3),
            Self::ShowTotalPressure => {
                plain("Total pressure", "Paint the total pressure", Key::Num4)
            }
            Self::ShowNothing => plain("Drawing only", "Paint no field", Key::Num0),
            Self::ToggleIsoLines => plain(
                "Iso-lines",
                "Lines of equal value of the painted field",
                Key::L,
            ),
            Self::ToggleStreamlines => plain("Streamlines", "Lines along the flow", Key::T),
            Self::ToggleMesh => plain("Mesh", "The cells that the solution lives on", Key::M),
            Self::ToggleDimensions => {
                plain("Dimensions", "Dimensions and rulers on the drawing", Key::D)
            }
            Self::ToggleSnap => plain("Snap", "Let dragged points snap to the grid", Key::G),
            Self::ToggleSketch => plain(
                "Sketch panel",
                "Show or hide the list of parts and their properties",
                Key::F2,
            ),
            Self::ToggleFigures => plain(
                "Figures panel",
                "Show or hide results, limits and cautions",
                Key::F3,
            ),
            Self::TogglePlots => plain("Plots panel", "Show or hide history and profiles", Key::F4),
            Self::ToggleDark => ctrl(
                "Dark or light",
                "Change between dark and light colours",
                Key::D,
            ),
            Self::ToggleUnits => ctrl(
                "Metric or inch",
                "Change between SI and inch-based units",
                Key::U,
            ),
            Self::LargerText => ctrl("Larger text", "Make the lettering larger", Key::Equals),
            Self::SmallerText => ctrl("Smaller text", "Make the lettering smaller", Key::Minus),
            Self::FindCommand => ctrl(
                "Find command…",
                "Type a few letters of a command and press Enter",
                Key::Space,
            ),
            Self::SnapWindow => plain(
                "Picture of the window…",
                "Write a picture of this window, for notes and manuals",
                Key::F12,
            ),
            Self::ShowKeys => plain("Keys", "The list of all keys", Key::F1),
        }
    }

    /// Why it cannot run now, if it cannot; shown on the greyed button.
    pub fn blocked(self, now: &Availability) -> Option<&'static str> {
        match self {
            Self::Improve if now.improving => Some("An improvement is running"),
            Self::Improve if now.has_faults => Some("The drawing has faults: mend them first"),
            Self::Improve if !now.has_free_insert => Some("No insert is free to improve"),
            Self::Stop | Self::Pause if !now.improving => Some("Nothing is running"),
            Self::Undo if now.improving => Some("An improvement is running"),
            Self::Redo if now.improving => Some("An improvement is running"),
            Self::Undo if !now.can_undo => Some("Nothing to undo"),
            Self::Redo if !now.can_redo => Some("Nothing to redo"),
            Self::ExportContour if !now.has_insert => Some("There is no insert"),
            Self::ExportHistory if !now.has_history => Some("No run has been made yet"),
            Self::Open | Self::ImportContour if now.improving => {
                Some("An improvement is running: stop it first")
            }
            _ => None,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_and_keys_are_unique_and_helps_are_sentences() {
        for (i, a) in Command::ALL.iter().enumerate() {
            assert!(
                a.entry().help.len() > 10 && a.entry().key.is_some(),
                "{a:?}"
            );
            for b in &Command::ALL[..i] {
                assert_ne!(a.entry().name, b.entry().name);
                assert_ne!(a.entry().key, b.entry().key, "{a:?} {b:?}");
            }
        }
    }
}
