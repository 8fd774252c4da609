//! The words that canvas, panels and plots share: what is selected, what an edit is, what is shown.

use crate::base::Vec2;
use crate::geometry::{InsertMeasures, PieceShape};
use crate::physics::{FlowCondition, Fluid, ThermalCondition};
use crate::study::{Aim, Design, FieldSnapshot, Insert, Limit, RunSettings};
use std::sync::Arc;

/// What the properties panel shows and the canvas highlights.
#[derive(Clone, Debug, Default, PartialEq)]
pub enum Selection {
    /// Nothing: the panel shows fluid and study.
    #[default]
    Nothing,
    /// A whole insert, by index.
    Insert(usize),
    /// A control point of an insert.
    Control {
        /// Insert.
        insert: usize,
        /// Control point.
        control: usize,
    },
    /// A piece of the outline, by index.
    Piece(usize),
    /// The corner at the end of a piece.
    Corner(usize),
}

/// A change of the design, asked for by a panel or the canvas and made by the dispatcher only.
#[derive(Clone, Debug, PartialEq)]
pub enum Edit {
    /// Move a control point.
    MoveControl {
        /// Insert.
        insert: usize,
        /// Control point.
        control: usize,
        /// New place, m.
        to_m: Vec2,
    },
    /// Put a new control point on the contour at parameter `t`, keeping the shape.
    AddControl {
        /// Insert.
        insert: usize,
        /// Curve parameter, 0 to 1.
        t: f64,
    },
    /// Take a control point away.
    RemoveControl {
        /// Insert.
        insert: usize,
        /// Control point.
        control: usize,
    },
    /// Move a whole insert.
    MoveInsert {
        /// Insert.
        insert: usize,
        /// Displacement, m.
        by_m: Vec2,
    },
    /// Turn and scale a whole insert about its centroid.
    TurnInsert {
        /// Insert.
        insert: usize,
        /// Angle counter-clockwise, rad.
        angle_rad: f64,
        /// Factor of size.
        factor: f64,
    },
    /// Replace or add (index one past the end) an insert.
    SetInsert {
        /// Insert.
        insert: usize,
        /// What it becomes.
        to: Insert,
    },
    /// Remove an insert.
    RemoveInsert {
        /// Insert.
        insert: usize,
    },
    /// Move the corner at the end of a piece.
    MoveCorner {
        /// Piece whose end moves.
        piece: usize,
        /// New place, m.
        to_m: Vec2,
    },
    /// Split a piece at a place on it (a new corner).
    SplitPiece {
        /// Piece.
        piece: usize,
        /// Curve parameter, 0 to 1.
        t: f64,
    },
    /// Remove the corner at the end of a piece (joins it with the next).
    RemoveCorner {
        /// Piece.
        piece: usize,
    },
    /// Change the shape of a piece between its ends.
    SetPieceShape {
        /// Piece.
        piece: usize,
        /// New shape.
        to: PieceShape,
    },
    /// Rename a piece.
    RenamePiece {
        /// Piece.
        piece: usize,
        /// New name.
        to: String,
    },
    /// Flow condition of a piece.
    SetFlow {
        /// Piece.
        piece: usize,
        /// New condition.
        to: FlowCondition,
    },
    /// Thermal condition of a piece.
    SetPieceThermal {
        /// Piece.
        piece: usize,
        /// New condition.
        to: ThermalCondition,
    },
    /// The fluid.
    SetFluid(Fluid),
    /// The aim.
    SetAim(Aim),
    /// All limits.
    SetLimits(Vec<Limit>),
    /// Run settings (not part of undo's design, but part of the case).
    SetRun(RunSettings),
    /// Replace the whole design (template, variant, step taken from the history).
    Replace {
        /// What it becomes.
        to: Box<Design>,
        /// Name in the undo list.
        name: String,
    },
}

/// An edit with its place in a gesture: one gesture is one undo entry.
#[derive(Clone, Debug, PartialEq)]
pub struct Gesture {
    /// The edit.
    pub edit: Edit,
    /// False while the mouse is still down (more edits of the same gesture follow).
    pub finished: bool,
}

/// Which field is painted over the duct.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum FieldChoice {
    /// Temperature.
    #[default]
    Temperature,
    /// Speed.
    Speed,
    /// Static pressure.
    Pressure,
    /// Total pressure.
    TotalPressure,
    /// No field: the drawing only.
    Nothing,
}

/// What the canvas shows; kept for the session, not in the project.
#[derive(Clone, Debug, PartialEq)]
pub struct ViewOptions {
    /// Painted field.
    pub field: FieldChoice,
    /// Iso-lines of the painted field.
    pub iso_lines: bool,
    /// Streamlines.
    pub streamlines: bool,
    /// Cells of the mesh.
    pub mesh: bool,
    /// Dimensions and ruler.
    pub dimensions: bool,
    /// Snap to grid and neighbours while dragging.
    pub snap: bool,
    /// Fixed range of the legend in SI, or fitted to the field.
    pub fixed_range: Option<[f64; 2]>,
}

impl Default for ViewOptions {
    fn default() -> Self {
        Self {
            field: FieldChoice::Temperature,
            iso_lines: true,
            streamlines: false,
            mesh: false,
            dimensions: true,
            snap: true,
            fixed_range: None,
        }
    }
}

/// A geometry verdict with its place.
#[derive(Clone, Debug, PartialEq)]
pub struct Mark {
    /// Where, m.
    pub place_m: Vec2,
    /// One sentence.
    pub text: String,
}

/// What the canvas is given each frame.
pub struct CanvasInput<'a> {
    /// Design to draw (the present one, or that of a step being watched).
    pub design: &'a Design,
    /// Measures of its inserts, when they could be taken.
    pub measures: &'a [InsertMeasures],
    /// Selected thing.
    pub selection: &'a Selection,
    /// Pictures of the newest state.
    pub snapshot: Option<&'a Arc<FieldSnapshot>>,
    /// Whether they belong to an older design: fields are greyed.
    pub stale: bool,
    /// Whether shapes can be changed (not while improving or looking at an earlier step).
    pub editable: bool,
    /// Contours of earlier steps, oldest first, m: drawn as ghosts.
    pub ghosts_m: &'a [Vec<Vec<Vec2>>],
    /// Geometry verdicts and cautions with places.
    pub marks: &'a [Mark],
    /// What to show.
    pub options: &'a ViewOptions,
    /// Units of text.
    pub inch_based: bool,
    /// Dark colours.
    pub dark: bool,
}

/// What the canvas returns each frame.
#[derive(Clone, Debug, Default)]
pub struct CanvasOutput {
    /// Edits asked for, in order.
    pub gestures: Vec<Gesture>,
    /// A new selection, if it changed.
    pub selection: Option<Selection>,
    /// Probe under the cursor, in the user's units, for the status line.
    pub probe: Option<String>,
}
